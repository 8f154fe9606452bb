"""What rate laws ask of the rest of a case: floors where species may be absent, constants that agree."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from math import exp, log
from typing import TYPE_CHECKING

import numpy as np

from reactorstage.case import units
from reactorstage.case.model import OwnEquilibrium
from reactorstage.chemistry.agreement import SAMPLES, Agreement, compare, loop_products
from reactorstage.chemistry.law import Polynomial, RateLaw
from reactorstage.chemistry.orders import empty_sums, singular
from reactorstage.chemistry.reaction import Equation, data_range, stoichiometric_matrix
from reactorstage.chemistry.species import SpeciesTable
from reactorstage.train.composition import feed_moles
from reactorstage.train.temperatures import at_inlets

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Number, Reaction
    from reactorstage.errors import Problem

MARGIN = 25.0
"""Kelvin below the lowest inlet temperature at which constants are compared where no validity is stated."""

RISE = 150.0
"""Kelvin above the highest inlet temperature at which they are."""


def missing_floors(
    case: Case, laws: Sequence[RateLaw], equations: Mapping[str, Equation], table: SpeciesTable
) -> Iterator[Problem]:
    """One problem for each species that may be absent, without a floor in a law that is singular then."""
    absent = may_be_absent(case, equations, table)
    for law in laws:
        for name, why in {**singular(law), **empty_sums(law, absent)}.items():
            if name in absent and name not in law.floors:
                message = f"a floor for {name} is missing: {name} may be absent ({absent[name]}), and {why}"
                yield case.problem(
                    ("reactions", law.label), message, f"add `floor: {{{name}: 0.01 %}}` to {law.label}", True
                )


def may_be_absent(case: Case, equations: Mapping[str, Equation], table: SpeciesTable) -> dict[str, str]:
    """Species of which a bed may see nothing: why, in words.

    Those that no feed of the entry holds, those that a removal takes whole, and those that an irreversible
    reaction can use up: of its reactants the one of which all feeds together hold least for it.
    """
    entry = [step.feed for section in case.train if section.kind == "entry" for step in section.steps]
    moles = {name: feed_moles(case, table, feed) for name, feed in case.feeds.items()}
    first = sum((moles[name] for name in entry if name in moles), np.zeros(len(table.names)))
    fed = sum(moles.values(), np.zeros(len(table.names)))
    found = {
        name: "the feeds of the entry do not hold it"
        for name, amount in zip(table.names, first, strict=True)
        if not amount > 0.0
    }
    steps = [step for section in case.train for step in section.steps]
    for name in (name for step in steps for name, number in step.removed.items() if takes_all(number)):
        found.setdefault(name, "a removal takes all of it")
    for label, equation in equations.items():
        if equation.reversible:
            continue
        enough = {
            name: fed[table.names.index(name)] / -nu
            for name, nu in equation.stoichiometry.items()
            if nu < 0.0
        }
        for name, amount in enough.items():
            if amount <= min(enough.values()) * (1.0 + 1e-9):
                found.setdefault(name, f"{label} can use it up")
    return found


def takes_all(number: Number) -> bool:
    """Whether a removal may leave nothing, or (by flow) cannot be seen to leave something."""
    most = number.high if number.high is not None else number.now
    return number.kind != "fraction" or most >= 1.0


def vanishing_effectiveness(case: Case, laws: Sequence[RateLaw], table: SpeciesTable) -> Iterator[Problem]:
    """One problem for each polynomial in temperature that is not above zero where its law is used."""
    for law in laws:
        eta = law.effectiveness
        if not isinstance(eta, Polynomial) or eta.by_Z:
            continue
        row = np.array([law.stoichiometry.get(name, 0.0) for name in table.names])
        T = np.linspace(*window_of(case, case.reactions[law.label], table, row), SAMPLES)
        values = np.polynomial.polynomial.polyval(T, eta.by_T)
        if values.min() <= 0.0:
            worst = int(values.argmin())
            message = f"the effectiveness is {values[worst]:.3g} at {_degrees(float(T[worst]))}"
            hint = "correct the coefficients (T is in K), or state where the law holds with `valid`"
            yield case.problem(("reactions", law.label, "effectiveness"), message, hint)


def window_of(
    case: Case, given: Reaction | None, table: SpeciesTable, nu_row: np.ndarray
) -> tuple[float, float]:
    """Temperatures at which a constant is looked at: the law's validity, or round the beds' inlets."""
    if given is not None and given.valid and given.valid.temperature:
        low, high = given.valid.temperature
    else:
        T = list(_inlet_temperatures(case, table))
        low, high = min(T) - MARGIN, max(T) + RISE
    bottom, top = data_range(table, nu_row)
    low, high = min(max(low, bottom), top), max(min(high, top), bottom)
    return (low, high) if low < high else (bottom, top)


def _inlet_temperatures(case: Case, table: SpeciesTable) -> Iterator[float]:
    for number in at_inlets(case, table):
        yield from (number.now if end is None else end for end in (number.low, number.high))


def agreements(
    case: Case, laws: Sequence[RateLaw], table: SpeciesTable, problems: list[Problem]
) -> dict[str, Agreement]:
    """Each own equilibrium constant against the Gibbs energies; a problem where they differ too much."""
    found = {}
    for law in laws:
        given = case.reactions[law.label]
        if law.K is None or not isinstance(given.backward, OwnEquilibrium):
            continue
        row = np.array([law.stoichiometry.get(name, 0.0) for name in table.names])
        one = compare(law.K, table, row, window_of(case, given, table, row))
        found[law.label] = one
        own = given.backward
        if abs(one.off) > own.may_differ_from_Gibbs_by or abs(one.heat_off) > own.heat_may_differ_by:
            path = ("reactions", law.label, "backward", "equilibrium constant")
            hint = "check its unit, the sign of each number and the equation it belongs to, or state what is "
            hint += "allowed: `may differ from Gibbs by: ... %`, `heat may differ by: ... kJ/mol`"
            problems.append(case.problem(path, _off(one, own), hint))
    return found


def _off(one: Agreement, own: OwnEquilibrium) -> str:
    allowed = f"{100.0 * own.may_differ_from_Gibbs_by:g} %"
    side = "above" if one.off > 0.0 else "below"
    lies = f"lies {100.0 * abs(one.off):.3g} % {side}" if one.off < 10.0 else f"is {1.0 + one.off:.3g} times"
    heats = [units.to_display(value, "molar energy") for value in (one.heat.own, one.heat.gibbs)]
    slope = f"{units.to_display(own.heat_may_differ_by, 'molar energy'):g} kJ/mol"
    return (
        f"this K {lies} that of the Gibbs energies at {_degrees(one.ln_K.T)} "
        f"({exp(one.ln_K.own):.4g} against {exp(one.ln_K.gibbs):.4g} at 1 bar), and its slope is that of a "
        f"heat of reaction of {heats[0]:.1f} kJ/mol where the species data say {heats[1]:.1f} kJ/mol at "
        f"{_degrees(one.heat.T)}; allowed are {allowed} and {slope}"
    )


def _degrees(T: float) -> str:
    return f"{units.to_display(T, 'temperature'):.0f} degC"


def inconsistent_loops(case: Case, laws: Sequence[RateLaw], table: SpeciesTable) -> Iterator[Problem]:
    """One problem for each loop of reversible reactions whose constants do not multiply to 1."""
    reversible = [law for law in laws if law.reversible]
    if not any(law.K for law in reversible):
        return
    nu = stoichiometric_matrix([_as_equation(law) for law in reversible], table.names)
    window = window_of(case, None, table, np.abs(nu).sum(axis=0))
    loops, products = loop_products([law.K for law in reversible], table, nu, window)
    for loop, product in zip(loops, products, strict=True):
        own = {
            law.label: backward.may_differ_from_Gibbs_by
            for law, count in zip(reversible, loop, strict=True)
            if count and isinstance(backward := case.reactions[law.label].backward, OwnEquilibrium)
        }
        allowed = max(own.values(), default=0.0)
        if own and abs(log(product)) > log(1.0 + allowed) + 1e-9:
            path = ("reactions", next(reversed(own)), "backward", "equilibrium constant")
            hint = "take them from one source, or all from the Gibbs energies"
            yield case.problem(path, _round(reversible, loop, float(product), allowed), hint)


def _as_equation(law: RateLaw) -> Equation:
    return Equation(law.stoichiometry, {}, {}, law.reversible)


def _round(laws: Sequence[RateLaw], loop: np.ndarray, product: float, allowed: float) -> str:
    parts = [
        law.label if count == 1.0 else f"{count:g} times {law.label}"
        for law, count in zip(laws, loop, strict=True)
        if count
    ]
    return (
        f"the equations {', '.join(parts)} together change nothing, but their equilibrium constants multiply "
        f"to {product:.4g}, not 1 (allowed {100.0 * allowed:g} %): no stream would ever be at rest"
    )
