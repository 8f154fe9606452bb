"""Multipliers by sign-constrained least squares, and the Karush-Kuhn-Tucker residual.

At an optimum the gradient of the cost is a sum of the gradients of the limits and range ends at work,
each with a multiplier >= 0, and of the equations with multipliers of either sign (Karush 1939; Kuhn and
Tucker 1951; from memory). Least squares with that sign rule (Lawson and Hanson 1974, chapter 23) gives
multipliers also where more limits are at work than there are numbers.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.optimiser.programme import Array, Evaluation
from reactorstage.optimiser.scaling import Point, Scale, needed

AT_WORK = 1e-6
NEAR = 1e-4


@dataclass(frozen=True)
class Multipliers:
    """In scaled units: limit (M,), low and high (D,) of the range ends, equation (E,) and the residual."""

    limit: Array
    low: Array
    high: Array
    equation: Array
    residual: float

    def lagrangian_du(self, point: Point) -> Array:
        """(D,) gradient of cost minus limits and equations times multipliers; range ends left in."""
        return point.cost_du - self.limit @ point.margin_du - self.equation @ point.residual_du


def multipliers(point: Point, upper: Array, near: float = AT_WORK) -> Multipliers:
    """Multipliers of the limits and range ends that lie within `near` (scaled) of zero.

    upper (D,) is the upper end of u. The residual is the largest component of the gradient that the
    multipliers leave over, in units of the scaled cost.
    """
    limits = np.flatnonzero(point.margin <= near)
    lows = np.flatnonzero(point.u <= near)
    highs = np.flatnonzero(point.u >= upper - near)
    unit = np.eye(point.u.size)
    rows = np.vstack(
        [point.margin_du[limits], unit[lows], -unit[highs], point.residual_du, -point.residual_du]
    )
    values = non_negative(rows.T, point.cost_du)
    left = point.cost_du - rows.T @ values
    split = np.cumsum([limits.size, lows.size, highs.size, point.residual.size])
    at_limits, at_lows, at_highs, plus, minus = np.split(values, split)
    return Multipliers(
        limit=spread(at_limits, limits, point.margin.size),
        low=spread(at_lows, lows, point.u.size),
        high=spread(at_highs, highs, point.u.size),
        equation=plus - minus,
        residual=float(np.max(np.abs(left), initial=0.0)),
    )


def non_negative(matrix: Array, right: Array) -> Array:
    """Values >= 0 with the least sum of squares of matrix @ values - right."""
    if matrix.size == 0:
        return np.zeros(matrix.shape[1])
    from scipy.optimize import lsq_linear, nnls

    try:
        return np.asarray(nnls(matrix, right, maxiter=20 * max(matrix.shape))[0])
    except RuntimeError:
        return np.asarray(lsq_linear(matrix, right, bounds=(0.0, np.inf), method="bvls").x)


def spread(values: Array, positions: NDArray[np.intp], size: int) -> Array:
    """values put at their positions in a row of zeros."""
    row = np.zeros(size)
    row[positions] = values
    return row


def own_units(found: Multipliers, evaluation: Evaluation, scale: Scale) -> Array:
    """(M,) money per second saved by relaxing each limit by one of its own unit.

    Relaxing by delta adds weight * delta to the margin, so the worth is multiplier times weight.
    """
    return found.limit * scale.cost / scale.limit * needed(evaluation.weight)
