"""How far irreversible reactions can run: until each of them lacks a reactant.

A small linear programme. Its answer is where a very long bed comes to rest, whatever the rates are, as far as
stoichiometry alone decides that.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.forms import Floats

Flags = NDArray[np.bool_]

LEAST_WEIGHT = 1e3
"""Weight, J/mol, of an irreversible reaction that releases less heat than this (or takes it up)."""

SMALL = 1e-11
"""Entries of a tableau below this are rounding errors of zero."""


def reachable(nu: Floats, reversible: Flags, present: Flags) -> tuple[Flags, Flags]:
    """Species that can be there and reactions that can run, when only the species `present` are fed.

    nu (R, S), reversible (R,), present (S,). A reaction can run when all its reactants can be there or,
    for a reversible one, all its products; so a pair of reactions that only feed each other never starts.
    """
    species, running = present.copy(), np.zeros(len(nu), dtype=bool)
    while True:
        lacking = ~species
        forward = ~((nu < 0.0) & lacking).any(axis=1)
        backward = reversible & ~((nu > 0.0) & lacking).any(axis=1)
        fresh = (forward | backward) & ~running
        if not fresh.any():
            return species, running
        running |= fresh
        species |= (nu[fresh] != 0.0).any(axis=0)


def exhausted(nu: Floats, reversible: Flags, F: Floats, heats: Floats) -> tuple[Floats, Floats]:
    """Flows (S,) and extents (R,) at which no irreversible reaction has all its reactants any more.

    nu (R, S), reversible (R,), F (S,) flows fed, heats (R,) of reaction, J/mol. Irreversible reactions run
    forward, reversible ones either way where that brings reactants. Where irreversible reactions compete for
    a reactant, it goes where it releases the most heat: the sum of weights * extents is made greatest, with
    weight = max(-heat, 1 kJ/mol).

    Raises ValueError when irreversible reactions run round in a circle.
    """
    if reversible.all():
        return F.copy(), np.zeros(len(nu))
    free = np.flatnonzero(reversible)
    columns = np.vstack([nu, -nu[free]])
    wanted = np.where(reversible, 0.0, np.maximum(-heats, LEAST_WEIGHT))
    weights = np.concatenate([wanted, np.zeros(len(free))])
    unit = float(F.sum()) or 1.0
    found, left = _simplex(-columns.T, F / unit, weights)
    xi = found[: len(nu)].copy()
    xi[free] -= found[len(nu) :]
    return left * unit, xi * unit


def _simplex(A: Floats, b: Floats, weights: Floats) -> tuple[Floats, Floats]:
    """x >= 0 that makes weights @ x greatest with A x <= b, and what is left of b >= 0, exactly 0 at a bound.

    Dantzig's tableau with Bland's rule (1977), which never cycles; x = 0 is allowed, so no first phase.
    """
    S, n = A.shape
    rows = np.hstack([A, np.eye(S), b[:, None]])
    gain = np.concatenate([weights, np.zeros(S + 1)])
    basis = np.arange(n, n + S)
    while (better := np.flatnonzero(gain[:-1] > SMALL * weights.max())).size:
        entering = better[0]
        column = rows[:, entering]
        usable = np.flatnonzero(column > SMALL)
        if not usable.size:
            raise ValueError("irreversible reactions run round in a circle and never come to rest")
        ratios = rows[usable, -1] / column[usable]
        least = usable[ratios <= ratios.min() * (1.0 + SMALL)]
        leaving = least[np.argmin(basis[least])]
        _pivot(rows, gain, leaving, entering)
        basis[leaving] = entering
    values = np.zeros(n + S)
    values[basis] = np.maximum(rows[:, -1], 0.0)
    return values[:n], values[n:]


def _pivot(rows: Floats, gain: Floats, row: np.intp, column: np.intp) -> None:
    """Make a column of the tableau a unit vector, in place."""
    rows[row] /= rows[row, column]
    others = rows[:, column].copy()
    others[row] = 0.0
    rows -= np.outer(others, rows[row])
    gain -= gain[column] * rows[row]
    rows[np.abs(rows) < SMALL] = 0.0
