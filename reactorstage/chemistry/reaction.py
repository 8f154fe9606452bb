"""Reactions: equations, balances, heats and equilibrium constants of ideal gases."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from fractions import Fraction
from math import isfinite, log

import numpy as np

from reactorstage.chemistry import thermo
from reactorstage.chemistry.constants import P_STANDARD, R_GAS
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.law import Constant
from reactorstage.chemistry.species import SpeciesTable
from reactorstage.chemistry.thermo import Array, Scalar

_ARROW = re.compile(r"<=>|=>")
_TERM = re.compile(r"(?P<count>\d+/\d+|\d+\.?\d*|\.\d+)(?P<gap>\s*)(?P<name>\S.*)")


@dataclass(frozen=True)
class Equation:
    """One reaction as written.

    stoichiometry: species -> nu, negative when consumed, only what changes; reactants and products:
    species -> coefficient as written, so a species on both sides stands in both of these.
    """

    stoichiometry: Mapping[str, float]
    reactants: Mapping[str, float]
    products: Mapping[str, float]
    reversible: bool


def parse_equation(text: str, names: Sequence[str]) -> Equation:
    """Reads "benzene + 2 ethylene <=> product"; `names` are the species that may occur.

    Names may hold spaces, digits, commas and hyphens; coefficients are whole, decimal (0.5) or
    fractions (1/2). `<=>` is reversible, `=>` is not. A plus sign stands between spaces.

    Raises ValueError that says what is wrong and names the nearest species.
    """
    arrows = _ARROW.findall(text)
    if len(arrows) != 1:
        found = "no arrow" if not arrows else f"{len(arrows)} arrows"
        raise ValueError(
            f"equation {text!r} has {found}; write one '<=>' (reversible) or '=>' between two sides"
        )
    left, right = (_side(side, names, text) for side in _ARROW.split(text))
    net = {name: right.get(name, Fraction(0)) - left.get(name, Fraction(0)) for name in {**left, **right}}
    stoichiometry = {name: float(nu) for name, nu in net.items() if nu}
    if not stoichiometry:
        raise ValueError(f"equation {text!r} changes nothing: both sides are the same")
    return Equation(stoichiometry, _floats(left), _floats(right), arrows[0] == "<=>")


def _floats(side: Mapping[str, Fraction]) -> dict[str, float]:
    return {name: float(count) for name, count in side.items()}


def _side(text: str, names: Sequence[str], equation: str) -> dict[str, Fraction]:
    if not text.strip():
        raise ValueError(f"equation {equation!r} has an empty side; write species on both sides of the arrow")
    side: dict[str, Fraction] = {}
    for term in re.split(r"\s\+(?=\s)", f" {text} "):
        name, count = _term(term.strip(), names, equation)
        side[name] = side.get(name, Fraction(0)) + count
    return side


def _term(term: str, names: Sequence[str], equation: str) -> tuple[str, Fraction]:
    if term in names:
        return term, Fraction(1)
    split = _TERM.fullmatch(term)
    if split is None or (split["name"] not in names and not split["gap"]):
        raise ValueError(_unknown(term, names, equation))
    if split["name"] not in names:
        raise ValueError(_unknown(split["name"], names, equation))
    return split["name"], _coefficient(split["count"], term, equation)


def _coefficient(text: str, term: str, equation: str) -> Fraction:
    above, _, below = text.partition("/")
    if not float(above) or (below and not float(below)):
        raise ValueError(f"equation {equation!r}: the coefficient of {term!r} must be above zero")
    return Fraction(text)


def _unknown(name: str, names: Sequence[str], equation: str) -> str:
    if not name:
        return f"equation {equation!r}: a species is missing beside '+'"
    if "+" in name:
        return f"equation {equation!r}: no species {name!r}; put spaces round '+'"
    near = get_close_matches(name, names, n=1, cutoff=0.5)
    hint = f"did you mean {near[0]!r}?" if near else f"species are {', '.join(names)}"
    return f"equation {equation!r}: no species {name!r}; {hint}"


def stoichiometric_matrix(equations: Sequence[Equation], names: Sequence[str]) -> Floats:
    """nu (R, S) of the equations in the order of `names`."""
    rows = [[equation.stoichiometry.get(name, 0.0) for name in names] for equation in equations]
    return np.array(rows, dtype=np.float64).reshape(len(equations), len(names))


def imbalance(equation: Equation, table: SpeciesTable) -> dict[str, float]:
    """Atoms made (+) or lost (-) per extent, for every element of the reaction; zeros when balanced."""
    nu = stoichiometric_matrix([equation], table.names)[0]
    taking_part = np.any(table.atoms[nu != 0.0] != 0.0, axis=0)
    excess = nu @ table.atoms
    return {table.elements[e]: float(excess[e]) for e in np.flatnonzero(taking_part)}


def balance_message(equation: Equation, table: SpeciesTable, tolerance: float = 1e-9) -> str:
    """What does not balance, such as "C: 8 left, 10 right; H: 10 left, 14 right"; empty when all does."""
    left = _atoms(equation.reactants, table)
    right = _atoms(equation.products, table)
    wrong = [element for element, excess in imbalance(equation, table).items() if abs(excess) > tolerance]
    return "; ".join(f"{element}: {left[element]:g} left, {right[element]:g} right" for element in wrong)


def _atoms(side: Mapping[str, float], table: SpeciesTable) -> dict[str, float]:
    amounts = np.array([side.get(name, 0.0) for name in table.names])
    return dict(zip(table.elements, (amounts @ table.atoms).tolist(), strict=True))


def independent_count(nu: Floats) -> int:
    """Number of linearly independent reactions of nu (R, S)."""
    return int(np.linalg.matrix_rank(nu)) if nu.size else 0


def heat_of_reaction(table: SpeciesTable, nu: Floats, T: Scalar) -> Array:
    """Enthalpy change per extent (R,), J/mol, negative when exothermic; nu (R, S), T in K."""
    return nu @ thermo.h(table, T)


def ln_K(table: SpeciesTable, nu: Floats, T: Scalar) -> Array:
    """ln K = -sum_i nu_i g_i/(R T) at standard pressure 1e5 Pa, (R,); nu (R, S), T in K."""
    return -(nu @ thermo.gibbs(table, T)) / (R_GAS * T)


def ln_Q(nu: Floats, F: Floats, p: float) -> Floats:
    """ln of the reaction quotient of an ideal gas, sum_i nu_i ln(y_i p/1e5), (R,); see `ln_quotient`."""
    return ln_quotient(nu, F, log(p / P_STANDARD))


def ln_quotient(nu: Floats, F: Floats, ln_coefficients: Floats | float) -> Floats:
    """ln of the reaction quotient, sum_i nu_i (ln y_i + ln_coefficient_i), (R,); nu (R, S).

    F (S,) any measure of amount; coefficients (S,) turn mole fractions into activities, ln(p/1e5) of an ideal
    gas. -inf where a product is absent, +inf where a reactant is,
    nan where both are.
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        ln_a = np.log(np.maximum(F, 0.0) / np.sum(F)) + ln_coefficients
        terms = np.where(nu != 0.0, nu * ln_a, 0.0)
        return np.asarray(terms.sum(axis=1), dtype=np.float64)


def equilibrium_temperature(
    table: SpeciesTable, nu_row: Floats, ln_Q: float, T_guess: float, K: Constant | None = None
) -> float | None:
    """Temperature at which ln K(T) = ln_Q, K, within the range of the data of the species taking part.

    nu_row (S,); of several answers the one reached first from T_guess. K is a constant of the law's own, None
    for that of the Gibbs energies. None when the range holds no answer or ln_Q is not finite.
    """
    if not isfinite(ln_Q):
        return None
    low, high = data_range(table, nu_row)
    if low >= high:
        return None

    def gap(T: float) -> float:
        return float(ln_K(table, nu_row[None, :], T)[0] if K is None else K.ln(T)) - ln_Q

    def heat(T: float) -> float:
        return float(heat_of_reaction(table, nu_row[None, :], T)[0] if K is None else K.heat(T))

    start = float(np.clip(T_guess, low, high))
    near = _newton(heat, gap, start, low, high)
    if near is not None:
        return near
    bracket = _bracket(gap, start, low, high)
    if bracket is None:
        return None
    from scipy.optimize import brentq

    return float(brentq(gap, *bracket, xtol=1e-9, rtol=1e-13))


def _newton(
    heat: Callable[[float], float], gap: Callable[[float], float], start: float, low: float, high: float
) -> float | None:
    """The answer by Newton in 1/T from `start`; None where it leaves the range or the heat changes sign."""
    T, first = start, heat(start)
    for _ in range(12):
        slope = heat(T)
        if slope * first <= 0.0:
            return None
        inverse = 1.0 / T + gap(T) * R_GAS / slope
        if not 1.0 / high < inverse < 1.0 / low:
            return None
        T, before = 1.0 / inverse, T
        if abs(T - before) <= 1e-12 * T:
            return T
    return None


def data_range(table: SpeciesTable, nu_row: Floats) -> tuple[float, float]:
    """Temperatures, K, at which the data of every species with nu != 0 hold; low > high when none."""
    edges = table.edges[nu_row != 0.0]
    return float(edges[:, 0].max()), float(edges[:, 3].min())


def _bracket(
    gap: Callable[[float], float], start: float, low: float, high: float
) -> tuple[float, float] | None:
    """Nearest pair of temperatures between which `gap` changes sign, widening from `start`."""
    T_down = T_up = start
    gap_down = gap_up = gap(start)
    step = 5.0
    while T_down > low or T_up < high:
        T_next = min(T_up + step, high)
        gap_next = gap(T_next)
        if gap_next * gap_up <= 0.0:
            return T_up, T_next
        T_up, gap_up = T_next, gap_next
        T_next = max(T_down - step, low)
        gap_next = gap(T_next)
        if gap_next * gap_down <= 0.0:
            return T_next, T_down
        T_down, gap_down = T_next, gap_next
        step *= 1.4
    return None
