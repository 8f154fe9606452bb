"""Integrals along adiabatic beds and a search over a grid, from the law of `liquid`: no package code."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tests.published.liquid import FLOW, rate

Array = NDArray[np.float64]
NODES, WEIGHTS = np.polynomial.legendre.leggauss(200)


@dataclass(frozen=True)
class Path:
    """One adiabatic bed: T = T_in + slope (X - X_in) from X_in to X_out."""

    X_in: float
    X_out: float
    T_in: float
    slope: float

    @property
    def T_out(self) -> float:
        return self.T_in + self.slope * (self.X_out - self.X_in)

    def integral(self, of: Callable[[Array, Array], Array]) -> float:
        """Integral of a function of X and T over X: Gauss, 200 points."""
        X = self.X_in + 0.5 * (NODES + 1.0) * (self.X_out - self.X_in)
        weights = 0.5 * WEIGHTS * (self.X_out - self.X_in)
        return float(weights @ of(X, self.T_in + self.slope * (X - self.X_in)))

    @property
    def time(self) -> float:
        """Integral of dX/r, L min/mol."""
        return self.integral(lambda X, T: 1.0 / rate(X, T))


def volume_table(X: Array, T_in: Array, slope: float) -> Array:
    """(N, N) L of one bed from X[i] to X[j] at the best of the inlet temperatures; inf where impossible."""
    best = np.full((X.size, X.size), np.inf)
    width = np.diff(X)
    inner = (X[:-1, None] + width[:, None] * np.array([0.5 - 0.5 / 3.0**0.5, 0.5 + 0.5 / 3.0**0.5])).ravel()
    for i in range(X.size - 1):
        at = inner[2 * i :]
        r = rate(at, T_in[:, None] + slope * (at - X[i]))
        cells = (np.where(r > 0.0, 1.0 / r, np.inf).reshape(T_in.size, -1, 2)).mean(axis=2) * width[i:]
        best[i, i + 1 :] = FLOW * np.cumsum(cells, axis=1).min(axis=0)
        best[i, i] = 0.0
    return best


def least_volume(table: Array, beds: int, end: int) -> float:
    """Bellman's recursion over the conversions between beds, from X[0] to X[end]."""
    cost = table[:, end]
    for _ in range(beds - 1):
        cost = (table[:, : end + 1] + cost[: end + 1]).min(axis=1)
    return float(cost[0])
