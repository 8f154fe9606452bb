"""The chemistry of a case: species table and rate laws, with every problem placed in the file."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from reactorstage.chemistry.agreement import Agreement
from reactorstage.chemistry.fluid import Fluid
from reactorstage.chemistry.isomers import isomer_group
from reactorstage.chemistry.law import Constant
from reactorstage.chemistry.mixture import Mixture
from reactorstage.chemistry.rate_law import RateLaws, rate_laws
from reactorstage.chemistry.reaction import Equation, balance_message, parse_equation
from reactorstage.chemistry.species import (
    Species,
    SpeciesTable,
    inline_species,
    species_from_cantera,
    table_of,
)
from reactorstage.errors import CaseProblems, Problem
from reactorstage.train.composition import mole_fractions
from reactorstage.train.fluid import feeds_in_phase, read_fluid
from reactorstage.train.law_checks import (
    agreements,
    inconsistent_loops,
    missing_floors,
    vanishing_effectiveness,
)
from reactorstage.train.laws import Path, attempt, law_of
from reactorstage.train.temperatures import beyond_data

if TYPE_CHECKING:
    from reactorstage.case.model import Case, SpeciesData


@dataclass(frozen=True)
class CaseChemistry:
    """Species and reactions of a case, in the order of the file.

    agreements: by reaction, for equilibrium constants of a law's own. fluid: None for an ideal gas.
    """

    table: SpeciesTable
    laws: RateLaws
    equations: tuple[Equation, ...]
    species: tuple[str, ...]
    reactions: tuple[str, ...]
    sources: tuple[str, ...]
    agreements: Mapping[str, Agreement] = field(default_factory=dict)
    fluid: Fluid | None = None

    @property
    def mixture(self) -> Mixture:
        """Species and fluid."""
        return Mixture(self.table, self.fluid)

    def own_K(self, reaction: int) -> Constant | None:
        """The equilibrium constant of a law's own (standard pressure 1e5 Pa); None for the Gibbs energies."""
        return Constant(*self.laws.K_form[reaction].tolist()) if self.laws.own_K[reaction] else None


def read_chemistry(case: Case) -> CaseChemistry:
    """Species, balanced equations and rate laws; raises CaseProblems with all that is wrong."""
    problems: list[Problem] = []
    found = {name: _species(case, name, problems) for name in case.species}
    if problems:
        raise CaseProblems(problems)
    table = table_of([one for one in found.values() if one is not None])
    equations = {name: _equation(case, name, table, problems) for name in case.reactions}
    read = {name: equation for name, equation in equations.items() if equation}
    beyond = list(beyond_data(case, table, read.values()))
    problems += beyond
    laws = [law for name, equation in read.items() if (law := law_of(case, name, equation, problems))]
    problems += missing_floors(case, laws, read, table)
    problems += vanishing_effectiveness(case, laws, table)
    agreed = {} if beyond else agreements(case, laws, table, problems)
    fluid = read_fluid(case, problems)
    if not problems:
        problems += inconsistent_loops(case, laws, table)
        shares = {name: mole_fractions(case, table, feed) for name, feed in case.feeds.items()}
        problems += feeds_in_phase(case, fluid, shares)
    if problems:
        raise CaseProblems(problems)
    return CaseChemistry(
        table,
        rate_laws(laws, table.names),
        tuple(read.values()),
        tuple(case.species),
        tuple(case.reactions),
        tuple(one.source for one in found.values() if one),
        agreed,
        fluid,
    )


def _species(case: Case, name: str, problems: list[Problem]) -> Species | None:
    given, path = case.species[name], ("species", name)
    if given.isomers is None:
        return _data(case, name, given, path, problems)
    members = [
        _data(case, f"{name} {i + 1}", one, (*path, "isomers", i), problems)
        for i, one in enumerate(given.isomers)
    ]
    known = [one for one in members if one is not None]
    if len(known) < len(members):
        return None
    return attempt(case, problems, (*path, "isomers"), lambda: isomer_group(name, known))


def _data(case: Case, name: str, given: SpeciesData, path: Path, problems: list[Problem]) -> Species | None:
    """One molecule, from data files or from the numbers of the case."""
    if given.gas_data is not None:
        spec = given.gas_data
        return attempt(case, problems, (*path, "gas data"), lambda: species_from_cantera(spec, name))
    capacity = given.heat_capacity
    assert given.formula is not None and capacity is not None and given.standard_pressure is not None
    assert given.enthalpy_of_formation is not None and given.entropy is not None
    window = given.valid.temperature if given.valid else None
    formula, enthalpy, entropy = given.formula, given.enthalpy_of_formation, given.entropy
    pressure, powers, source = given.standard_pressure, capacity.powers_of_T, given.source
    return attempt(
        case,
        problems,
        path,
        lambda: inline_species(
            name, formula, enthalpy, entropy, pressure, powers, window, source or "given in the case"
        ),
    )


def _equation(case: Case, name: str, table: SpeciesTable, problems: list[Problem]) -> Equation | None:
    path = ("reactions", name, "equation")
    equation = attempt(
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
