"""From a reaction as the case states it to its rate law in SI."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from math import inf, isinf, log
from typing import TYPE_CHECKING, TypeVar

from reactorstage.case import law_units
from reactorstage.case.model import Effectiveness, Factor, OwnEquilibrium, TemperatureForm
from reactorstage.case.unit_text import UnitProblem
from reactorstage.chemistry.constants import P_STANDARD, R_GAS
from reactorstage.chemistry.law import Constant, Denominator, Polynomial, RateLaw, Term, Thiele
from reactorstage.chemistry.rate_law import rate_laws
from reactorstage.chemistry.reaction import Equation

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Reaction
    from reactorstage.errors import Problem

T = TypeVar("T")
Path = tuple[str | int, ...]


def attempt(case: Case, problems: list[Problem], path: Path, make: Callable[[], T]) -> T | None:
    """What `make` gives, or None with its complaint added to the problems."""
    try:
        return make()
    except UnitProblem as error:
        problems.append(case.problem(path, error.message, error.hint))
    except (ValueError, LookupError, FileNotFoundError) as error:
        problems.append(case.problem(path, str(error.args[0]) if error.args else str(error)))
    return None


def law_of(case: Case, name: str, equation: Equation, problems: list[Problem]) -> RateLaw | None:
    """The law of one reaction; None with its problems added when something is wrong with it."""
    given, path = case.reactions[name], ("reactions", name)
    k = attempt(case, problems, (*path, "constant"), lambda: _rate_constant(given, equation))
    if k is None:
        return None
    return attempt(case, problems, path, lambda: _checked(_law(name, given, equation, k), list(case.species)))


def _checked(law: RateLaw, names: list[str]) -> RateLaw:
    rate_laws([law], names)
    return law


def _law(name: str, given: Reaction, equation: Equation, k: Constant) -> RateLaw:
    own = given.backward if isinstance(given.backward, OwnEquilibrium) else None
    return RateLaw(
        name,
        equation.stoichiometry,
        _orders(given, equation),
        k,
        given.driven_by,
        equation.reversible,
        given.rate_per,
        m=given.power_of_K,
        denominators=tuple(_denominator(factor, given.driven_by) for factor in given.slowed_by or ()),
        K=_own_K(own, sum(equation.stoichiometry.values())) if own else None,
        floors=dict(given.floor),
        effectiveness=_effectiveness(given.effectiveness) if given.effectiveness else None,
    )


def _orders(given: Reaction, equation: Equation) -> dict[str, float]:
    return dict(equation.reactants) if given.orders is None else dict(given.orders)


def _rate_constant(given: Reaction, equation: Equation) -> Constant:
    total = sum(_orders(given, equation).values())
    value = law_units.rate_constant(given.constant, given.rate_per, given.driven_by, total)
    return constant_of(given.constant, value)


def constant_of(given: TemperatureForm, value: float) -> Constant:
    """The constant whose `is` has the SI value, or whose `exp of` is multiplied with it."""
    form = given.exp_of
    if form is not None:
        return Constant(form.a + log(value), inf, -form.b, form.c, form.d)
    return Constant(log(value), inf if given.at is None else given.at, (given.energy or 0.0) / R_GAS)


def _denominator(factor: Factor, driver: str) -> Denominator:
    terms = (
        Term(
            constant_of(
                term.constant, law_units.term_constant(term.constant, driver, sum(term.orders.values()))
            ),
            dict(term.orders),
        )
        for term in factor.terms
    )
    return Denominator(tuple(terms), factor.power)


def _own_K(own: OwnEquilibrium, change: float) -> Constant:
    """K for the standard pressure: K_p p0^-change, or K_c (R T/p0)^change; change is the sum of nu."""
    given = own.equilibrium_constant
    value, driver = law_units.equilibrium_constant(given, change)
    K = constant_of(given, value)
    if driver != "concentration":
        return replace(K, ln_ref=K.ln_ref - change * log(P_STANDARD)) if driver else K
    T = 1.0 if isinf(K.T_ref) else K.T_ref
    return replace(K, ln_ref=K.ln_ref + change * log(R_GAS * T / P_STANDARD), c=K.c + change)


def _effectiveness(given: Effectiveness) -> Polynomial | Thiele:
    if given.Thiele is not None:
        one = given.Thiele
        return Thiele(one.size, one.diffusivity, one.key_species, one.shape, one.particle_density)
    if given.factor is not None:
        return Polynomial((given.factor,))
    of, into = (given.conversion.of, given.conversion.into) if given.conversion else ("", "")
    return Polynomial(given.powers_of_T or (), given.powers_of_conversion or (), of, into)
