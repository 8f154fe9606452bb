"""The chemistry of a case: species table and rate laws, with every problem placed in the file."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from math import inf, log
from typing import TYPE_CHECKING, TypeVar

from reactorstage.case import units
from reactorstage.chemistry.constants import R_GAS
from reactorstage.chemistry.rate_law import Constant, RateLaw, RateLaws, rate_laws
from reactorstage.chemistry.reaction import Equation, balance_message, parse_equation
from reactorstage.chemistry.species import (
    Species,
    SpeciesTable,
    inline_species,
    species_from_cantera,
    table_of,
)
from reactorstage.errors import CaseProblems, Problem

if TYPE_CHECKING:
    from reactorstage.case.model import Case

T = TypeVar("T")


@dataclass(frozen=True)
class CaseChemistry:
    """Species and reactions of a case, in the order of the file."""

    table: SpeciesTable
    laws: RateLaws
    equations: tuple[Equation, ...]
    species: tuple[str, ...]
    reactions: tuple[str, ...]
    sources: tuple[str, ...]


def read_chemistry(case: Case) -> CaseChemistry:
    """Species, balanced equations and rate laws; raises CaseProblems with all that is wrong."""
    problems: list[Problem] = []
    found = {name: _species(case, name, problems) for name in case.species}
    if problems:
        raise CaseProblems(problems)
    table = table_of([one for one in found.values() if one is not None])
    equations = {name: _equation(case, name, table, problems) for name in case.reactions}
    laws = [_law(case, name, equation, problems) for name, equation in equations.items() if equation]
    checked = _attempt(
        case, problems, ("reactions",), lambda: rate_laws([law for law in laws if law], table.names)
    )
    if problems or checked is None:
        raise CaseProblems(problems)
    return CaseChemistry(
        table,
        checked,
        tuple(one for one in equations.values() if one),
        tuple(case.species),
        tuple(case.reactions),
        tuple(one.source for one in found.values() if one),
    )


def _attempt(
    case: Case, problems: list[Problem], path: tuple[str | int, ...], make: Callable[[], T]
) -> T | None:
    """What `make` gives, or None with its complaint added to the problems."""
    try:
        return make()
    except units.UnitProblem as error:
        problems.append(case.problem(path, str(error)))
    except (ValueError, LookupError, FileNotFoundError) as error:
        problems.append(case.problem(path, str(error.args[0]) if error.args else str(error)))
    return None


def _species(case: Case, name: str, problems: list[Problem]) -> Species | None:
    given = case.species[name]
    if given.gas_data is not None:
        spec = given.gas_data
        return _attempt(
            case, problems, ("species", name, "gas data"), lambda: species_from_cantera(spec, name)
        )
    capacity = given.heat_capacity
    assert given.formula is not None and capacity is not None and given.standard_pressure is not None
    assert given.enthalpy_of_formation is not None and given.entropy is not None
    window = given.valid.temperature if given.valid else None
    formula, enthalpy, entropy = given.formula, given.enthalpy_of_formation, given.entropy
    pressure, powers, source = given.standard_pressure, capacity.powers_of_T, given.source
    return _attempt(
        case,
        problems,
        ("species", name),
        lambda: inline_species(
            name, formula, enthalpy, entropy, pressure, powers, window, source or "given in the case"
        ),
    )


def _equation(case: Case, name: str, table: SpeciesTable, problems: list[Problem]) -> Equation | None:
    path = ("reactions", name, "equation")
    equation = _attempt(
        case, problems, path, lambda: parse_equation(case.reactions[name].equation, table.names)
    )
    if equation is None:
        return None
    message = balance_message(equation, table)
    if message:
        problems.append(
            case.problem(path, message, "correct the coefficients or the formulas of the species")
        )
        return None
    return equation


def _law(case: Case, name: str, equation: Equation, problems: list[Problem]) -> RateLaw | None:
    given = case.reactions[name]
    orders = dict(equation.reactants) if given.orders is None else dict(given.orders)
    path = ("reactions", name, "constant")
    k = _attempt(
        case,
        problems,
        path,
        lambda: units.rate_constant_to_si(
            given.constant.is_.text, given.rate_per, given.driven_by, sum(orders.values())
        ),
    )
    if k is None:
        return None
    if not k > 0.0:
        problems.append(case.problem(path, f"the rate constant {given.constant.is_.text} must be above zero"))
        return None
    constant = Constant(
        ln_ref=log(k),
        T_ref=given.constant.at if given.constant.at is not None else inf,
        E_over_R=(given.constant.activation_energy or 0.0) / R_GAS,
    )
    law = RateLaw(
        name, equation.stoichiometry, orders, constant, given.driven_by, equation.reversible, given.rate_per
    )
    ok = _attempt(case, problems, ("reactions", name), lambda: rate_laws([law], list(case.species)))
    return law if ok is not None else None
