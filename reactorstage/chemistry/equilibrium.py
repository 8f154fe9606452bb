"""Where a stream comes to rest: equilibrium restricted to given reactions; loops of constants.

Irreversible reactions first run until each lacks a reactant (`exhaustion`); then, among the states that the
reversible reactions can still make, the one sought is that of least Gibbs energy at given temperature and
pressure, or that of greatest entropy at given enthalpy and pressure (`least_gibbs`).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from reactorstage.chemistry.exhaustion import Flags, exhausted, reachable
from reactorstage.chemistry.fluid import Fluid
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.least_gibbs import BeyondData, Problem, settled
from reactorstage.chemistry.mixture import Mixture
from reactorstage.chemistry.reaction import heat_of_reaction, ln_K, ln_quotient
from reactorstage.chemistry.species import SpeciesTable

TRACE = 1e-4
"""Share of what a reaction can consume that is turned over to bring absent species in."""

NOTHING = 1e-9
"""Entries below this are rounding errors of zero when loops are looked for; coefficients are of order one."""


@dataclass(frozen=True, eq=False)
class EquilibriumState:
    """A stream at rest: F (S,) in the unit of the feed, T K, p Pa, extents xi (R,) in the unit of F.

    Extents of reversible reactions that depend on each other are the smallest ones (least squares) that lead
    to F. running (R,) marks the reversible reactions that are at equilibrium, the others lack a species for
    either direction; off is the greatest |ln Q - ln K| of the running ones. iterations counts Newton steps.
    """

    F: Floats
    T: float
    p: float
    xi: Floats
    running: Flags
    off: float
    iterations: int


def equilibrium(
    table: SpeciesTable,
    nu: Floats,
    reversible: Sequence[bool] | Flags,
    F: Floats,
    T: float,
    p: float,
    fluid: Fluid | None = None,
) -> EquilibriumState:
    """Equilibrium of the reactions at constant temperature and pressure.

    nu (R, S), reversible (R,), F (S,) any measure of amount, T in K, p in Pa, fluid None for an ideal
    gas. Elements are kept by construction. Raises ValueError when there is nothing in the stream, when
    irreversible reactions run round in a circle, and when no answer is found.
    """
    return _rest(Mixture(table, fluid), nu, np.asarray(reversible, dtype=bool), F, T, p, adiabatic=False)


def adiabatic_equilibrium(
    table: SpeciesTable,
    nu: Floats,
    reversible: Sequence[bool] | Flags,
    F: Floats,
    T: float,
    p: float,
    fluid: Fluid | None = None,
) -> EquilibriumState:
    """Equilibrium of the reactions at the enthalpy of the stream F at T, and constant pressure.

    As `equilibrium`, T being that of the stream as it comes. Raises ValueError also when the answer lies
    beyond the temperatures at which the species data hold.
    """
    return _rest(Mixture(table, fluid), nu, np.asarray(reversible, dtype=bool), F, T, p, adiabatic=True)


def _rest(
    mixture: Mixture, nu: Floats, reversible: Flags, F: Floats, T: float, p: float, adiabatic: bool
) -> EquilibriumState:
    table = mixture.table
    fed = np.maximum(np.asarray(F, dtype=np.float64), 0.0)
    unit = float(fed.sum())
    if not unit > 0.0:
        raise ValueError("there is nothing in the stream")
    H = float(mixture.enthalpy(fed, T, p)) / unit if adiabatic else None
    _, can_run = reachable(nu, reversible, fed > 0.0)
    xi = np.zeros(len(nu))
    left, xi[can_run] = exhausted(
        nu[can_run], reversible[can_run], fed / unit, heat_of_reaction(table, nu[can_run], T)
    )
    both_ways = np.flatnonzero(can_run & reversible)
    there, at_rest = reachable(nu[both_ways], reversible[both_ways], left > 0.0)
    running = both_ways[at_rest]
    problem = Problem(mixture.part(there), nu[np.ix_(running, np.flatnonzero(there))], p, H)
    F_there, T, iterations = _solved(problem, _started(problem.nu, left[there]), T)
    F_end = np.zeros(len(fed))
    F_end[there] = F_there
    xi[running] += _smallest(nu[running], F_end - left)
    off = ln_quotient(nu[running], F_end, mixture.ln_coefficients(F_end, T, p)) - ln_K(table, nu[running], T)
    mask = np.zeros(len(nu), dtype=bool)
    mask[running] = True
    return EquilibriumState(
        F_end * unit, T, p, xi * unit, mask, float(np.abs(off).max(initial=0.0)), iterations
    )


def _solved(problem: Problem, F: Floats, T: float) -> tuple[Floats, float, int]:
    """As `settled`; where the way there leaves the range of the data, T is bracketed within it."""
    try:
        return settled(problem, F, T)
    except BeyondData:
        if problem.H is None:
            raise
        return _bracketed(problem, problem.H, F)


def _bracketed(problem: Problem, H: float, F: Floats) -> tuple[Floats, float, int]:
    """Equilibria at constant temperature, until one has the enthalpy H; that rises with temperature."""
    from scipy.optimize import brentq

    edges = problem.table.edges
    low, high = float(edges[:, 0].max()), float(edges[:, 3].min())
    fixed, steps = replace(problem, H=None), 0

    def excess(T: float) -> float:
        nonlocal F, steps
        F, _, more = settled(fixed, F, T)
        steps += more
        return float(problem.mixture.enthalpy(F, T, problem.p)) - H

    if not low < high or excess(low) > 0.0 or excess(high) < 0.0:
        raise BeyondData
    T = float(brentq(excess, low, high, xtol=1e-10, rtol=1e-14))
    F, _, _ = settled(fixed, F, T)
    return F, T, steps


def _started(nu: Floats, F: Floats) -> Floats:
    """Amounts (S,) above zero: traces are turned over until every species that can be there is."""
    F = F.copy()
    both_ways = np.vstack([nu, -nu])
    while (F <= 0.0).any():
        made = [row for row in both_ways if (row[F <= 0.0] >= 0.0).all() and (row[F <= 0.0] > 0.0).any()]
        assert made, "every species was found reachable"
        taken = made[0] < 0.0
        F += TRACE * float((F[taken] / -made[0][taken]).min()) * made[0]
    return F


def _smallest(nu: Floats, change: Floats) -> Floats:
    """Smallest extents (R,) with nu^T xi = change (S,)."""
    return np.asarray(np.linalg.lstsq(nu.T, change, rcond=None)[0], dtype=np.float64)


def loops(nu: Floats) -> Floats:
    """Combinations (L, R) of the reactions nu (R, S) that change nothing, L = R - rank.

    Each has 1 at a reaction of its own, so that it reads "reaction = minus the other combination".
    """
    R = len(nu)
    rows = np.hstack([nu, np.eye(R)])
    rank = 0
    for column in range(nu.shape[1]):
        if rank == R:
            break
        pivot = rank + int(np.argmax(np.abs(rows[rank:, column])))
        if abs(rows[pivot, column]) < NOTHING:
            continue
        rows[[rank, pivot]] = rows[[pivot, rank]]
        rows[rank + 1 :] -= np.outer(rows[rank + 1 :, column] / rows[rank, column], rows[rank])
        rank += 1
    found = rows[rank:, nu.shape[1] :]
    found[np.abs(found) < NOTHING] = 0.0
    return np.asarray(found, dtype=np.float64)


def loop_inconsistency(
    ln_Ks: Sequence[Callable[[float], float]], nu: Floats, T: Sequence[float]
) -> tuple[Floats, Floats]:
    """How far equilibrium constants fail to agree round every loop of dependent reactions.

    ln_Ks (R) callables of T in K, nu (R, S), T temperatures to look at. Gives the loops (L, R) and for each
    the sum of its ln K with the greatest magnitude over T (L,), which is 0 for constants that agree: the
    product of K round a loop is 1.
    """
    found = loops(nu)
    sums = np.array([[one(t) for one in ln_Ks] for t in T]) @ found.T
    worst = np.abs(sums).argmax(axis=0)
    return found, sums[worst, np.arange(len(found))]
