"""Where one reaction alone comes to rest by the equilibrium constant of its own law."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq

from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.quotients import quotient

Array = NDArray[np.float64]

EDGE = 1e-12
"""Share of the whole stretch of extents that is left out at either end, where a species is gone."""


def at_rest(chemistry: CaseChemistry, reaction: int, F: Array, T: float, p: float) -> Array:
    """Flows (S,) at which ln Q = ln K of one reaction with an equilibrium constant of its own.

    F (S,) mol/s before it, T K, p Pa; the whole stretch of extents that leaves no flow below zero is
    searched, so that it does not matter how far the reaction has come. Where either side runs out first the
    end of the stretch is given. Raises ValueError for a reaction that follows the Gibbs energies.
    """
    own = chemistry.own_K(reaction)
    if own is None:
        raise ValueError(f"{chemistry.reactions[reaction]} has no equilibrium constant of its own")
    row, ln_K = chemistry.laws.nu[reaction], float(own.ln(T))
    low, high = stretch(row, F)
    edge = EDGE * (high - low)

    def excess(xi: float) -> float:
        return quotient(chemistry, reaction, F + row * xi, T, p).ln - ln_K

    first, last = low + edge, high - edge
    if not first < last or excess(first) >= 0.0:
        xi = low
    elif excess(last) <= 0.0:
        xi = high
    else:
        xi = float(brentq(excess, first, last, xtol=edge, rtol=1e-14))
    return np.asarray(np.maximum(F + row * xi, 0.0))


def stretch(row: Array, F: Array) -> tuple[float, float]:
    """Extents (mol/s) between which a reaction row (S,) leaves no flow of F (S,) below zero."""
    used, made = row < 0.0, row > 0.0
    low = -float(np.min(F[made] / row[made], initial=np.inf))
    return low, float(np.min(F[used] / -row[used], initial=np.inf))
