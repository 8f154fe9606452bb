"""Least Gibbs energy (or greatest entropy at given enthalpy) of a mixture over extents of reactions.

With mu_i/(R T) = g_i/(R T) + ln(y_i p/p0), extents zeta (r,) of independent reactions N (r, S), dn = N 1 and
dh = N h, slope and curvature of G/(R T), or of -S/R at constant enthalpy, are

    N mu/(R T),      N diag(1/F) N^T - dn dn^T/sum(F)  [+ dh dh^T/(R T^2 sum F cp)  at constant enthalpy]

In an ideal gas the curvature is positive definite, so there is one answer. Newton's method in the logarithms
of scarce species: the reactions are combined anew so that each makes one scarce species out of more abundant
ones (optimised stoichiometry: W. R. Smith and R. W. Missen, Chemical Reaction Equilibrium Analysis, 1982;
from memory), which keeps the system well scaled for constants of any size; steps are halved until the
function falls. In a cubic equation of state ln phi_i joins mu, its slopes the curvature, and enthalpies are
partial molar ones; in a liquid ln y_i stands without the pressure.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry import thermo
from reactorstage.chemistry.constants import R_GAS
from reactorstage.chemistry.fluid import CubicStream
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.mixture import Mixture
from reactorstage.chemistry.species import SpeciesTable

NEAR = 1e-7
"""Greatest |ln Q - ln K| from which one more Newton step reaches rounding."""

MOST_STEPS = 200
MOST_AT_EDGE = 12
"""Steps that may be cut at the end of the data before the way there is given up."""

MOST_HALVINGS = 60
MOST_GROWTH = 40.0
"""Greatest growth of a scarce species in one step, as a logarithm."""

ROUNDING = 1e-13
"""Relative rise of the function that may be rounding."""

NOTHING = 1e-11
"""Entries of combined reactions below this are rounding errors of zero."""


class BeyondData(ValueError):
    """The temperature leaves the range in which the species data hold."""

    def __init__(self) -> None:
        super().__init__("the temperature of the equilibrium lies beyond the range of the species data")


@dataclass(frozen=True)
class Problem:
    """S species, R reactions nu (R, S) that may depend on each other, p in Pa.

    H is the enthalpy to keep, in J per unit of the amounts F, or None at constant temperature.
    """

    mixture: Mixture
    nu: Floats
    p: float
    H: float | None

    @property
    def table(self) -> SpeciesTable:
        return self.mixture.table


@dataclass(frozen=True)
class _Point:
    """Amounts, T, mu/(R T) (S,), the function; h (S,) and capacity sum F cp only at constant enthalpy."""

    F: Floats
    T: float
    mu: Floats
    h: Floats
    capacity: float
    value: float


def settled(problem: Problem, F: Floats, T: float) -> tuple[Floats, float, int]:
    """Amounts (S,), temperature and number of steps at the least of the function.

    F (S,) above zero, of order one, with the enthalpy of the problem near T. Raises BeyondData when the
    temperature leaves the range of the data on the way, ValueError when no answer is found.
    """
    point = _point(problem, F, T)
    if point is None:
        raise BeyondData
    order, N, scarce = np.zeros(0, dtype=np.intp), problem.nu, np.zeros(0, dtype=np.intp)
    at_edge = 0
    for step in range(MOST_STEPS):
        now = np.argsort(point.F, kind="stable")
        if not np.array_equal(now, order):
            order = now
            N, scarce = combined(problem.nu, order)
        slope = N @ point.mu
        if not len(slope):
            return point.F, point.T, step
        change = _newton(problem, point, N, scarce, slope)
        if np.abs(slope).max() < NEAR:
            last = _point(problem, _moved(point, N, scarce, change), point.T)
            return (point.F, point.T, step) if last is None else (last.F, last.T, step + 1)
        point, cut = _searched(problem, point, N, scarce, change)
        at_edge += cut
        if at_edge > MOST_AT_EDGE:
            raise BeyondData
    raise ValueError(f"no equilibrium was found in {MOST_STEPS} steps")


def combined(nu: Floats, order: NDArray[np.intp]) -> tuple[Floats, NDArray[np.intp]]:
    """Independent combinations (r, S) of reactions nu (R, S), each with 1 at a species of its own (r,).

    Those species are taken as early in `order` as can be, so that rising amounts give one scarce species
    to each combination.
    """
    rows, own, r = nu.copy(), [], 0
    for column in order:
        if r == len(rows):
            break
        pivot = r + int(np.abs(rows[r:, column]).argmax())
        if abs(rows[pivot, column]) < NOTHING:
            continue
        rows[[r, pivot]] = rows[[pivot, r]]
        rows[r] /= rows[r, column]
        others = rows[:, column].copy()
        others[r] = 0.0
        rows -= np.outer(others, rows[r])
        own.append(column)
        r += 1
    rows[np.abs(rows) < NOTHING] = 0.0
    return rows[:r], np.array(own, dtype=np.intp)


def _newton(problem: Problem, point: _Point, N: Floats, scarce: NDArray[np.intp], slope: Floats) -> Floats:
    """Newton's change of ln F of the scarce species (r,)."""
    dn = N.sum(axis=1)
    curvature = (N / point.F) @ N.T - np.outer(dn, dn) / point.F.sum()
    if isinstance(problem.mixture.fluid, CubicStream):
        curvature += N @ problem.mixture.coefficient_slopes(point.F, point.T, problem.p)[0] @ N.T
    if problem.H is not None:
        dh = N @ point.h
        curvature += np.outer(dh, dh) / (R_GAS * point.T**2 * point.capacity)
    size = 1.0 / np.sqrt(np.diag(curvature))
    change = size * np.linalg.solve(curvature * np.outer(size, size), -slope * size)
    return np.asarray(change / point.F[scarce])


def _moved(point: _Point, N: Floats, scarce: NDArray[np.intp], change: Floats) -> Floats:
    """Amounts after the scarce species have grown by exp(change), the others as the reactions say."""
    growth = np.minimum(change, MOST_GROWTH)
    F = point.F + (point.F[scarce] * np.expm1(growth)) @ N
    F[scarce] = point.F[scarce] * np.exp(growth)
    return np.asarray(F)


def _searched(
    problem: Problem, point: _Point, N: Floats, scarce: NDArray[np.intp], change: Floats
) -> tuple[_Point, bool]:
    """The point at the longest halved step that lowers the function; whether the data cut it short."""
    highest = point.value + ROUNDING * float(np.abs(point.F * point.mu).sum())
    beyond = False
    for halving in range(MOST_HALVINGS):
        F = _moved(point, N, scarce, change * 0.5**halving)
        if not (F > 0.0).all():
            continue
        found = _point(problem, F, point.T)
        beyond |= found is None
        if found is not None and found.value <= highest:
            return found, beyond
    raise BeyondData if beyond else ValueError("no equilibrium was found: no step leads further")


def _point(problem: Problem, F: Floats, T: float) -> _Point | None:
    """Everything at amounts F; at constant enthalpy T is where the search for the temperature begins."""
    h, capacity = np.zeros(len(F)), 0.0
    if problem.H is not None:
        found = _temperature(problem, F, T)
        if found is None:
            return None
        T, h, capacity = found
    g = thermo.gibbs(problem.table, T)
    mu = g / (R_GAS * T) + np.log(F / F.sum()) + problem.mixture.ln_coefficients(F, T, problem.p)
    value = float(F @ mu) - (0.0 if problem.H is None else problem.H / (R_GAS * T))
    return _Point(F, T, mu, h, capacity, value)


def _temperature(problem: Problem, F: Floats, T: float) -> tuple[float, Floats, float] | None:
    """T at which F has the enthalpy of the problem, molar enthalpies and sum F cp; None beyond the data."""
    assert problem.H is not None
    edges = problem.table.edges
    low, high = float(edges[:, 0].max()), float(edges[:, 3].min())
    for _ in range(MOST_HALVINGS):
        h, capacity = problem.mixture.heats(F, T, problem.p)
        step = (problem.H - float(problem.mixture.enthalpy(F, T, problem.p))) / capacity
        if abs(step) <= 1e-12 * T:
            return T + step, h, capacity
        T += step
        if not low <= T <= high:
            return None
    return None
