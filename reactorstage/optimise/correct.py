"""Smallest step that brings the limits at work to zero margin and leaves no limit broken.

Least-distance programming (Lawson and Hanson 1974, chapter 23): least |d| with G d >= h, by
non-negative least squares on its dual; equalities are taken out first.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from reactorstage.optimise.multipliers import Multipliers, non_negative
from reactorstage.optimise.programme import Array
from reactorstage.optimise.scaling import Point

FAR = 1e3


def correction(point: Point, found: Multipliers, upper: Array, target: float = 0.0) -> Array | None:
    """Step d (D,) in scaled numbers: limits with a multiplier to margin `target`, others at least there.

    Numbers whose range end has a multiplier go to that end. Where all that is contradictory nothing is
    held; None when even then the linearised limits cannot be met.
    """
    step = step_holding(point, found, upper, target)
    if step is None:
        return step_holding(point, holding_nothing(found), upper, target)
    return step


def holding_nothing(found: Multipliers) -> Multipliers:
    """The same without any limit or range end."""
    none = np.zeros_like
    return replace(found, limit=none(found.limit), low=none(found.low), high=none(found.high))


def step_holding(point: Point, found: Multipliers, upper: Array, target: float) -> Array | None:
    """Smallest step that puts what has a multiplier to its place, equations to zero, and breaks nothing."""
    held, low, high = found.limit > 0.0, found.low > 0.0, found.high > 0.0
    unit = np.eye(point.u.size)
    equal = np.vstack([point.margin_du[held], unit[low], unit[high], point.residual_du])
    gap = np.concatenate(
        [target - point.margin[held], -point.u[low], (upper - point.u)[high], -point.residual]
    )
    base, free = least_norm(equal, gap)
    ends = np.isfinite(upper) & ~high
    rows = np.vstack([point.margin_du[~held], unit[~low], -unit[ends]])
    room = np.concatenate([target - point.margin[~held], -point.u[~low], (point.u - upper)[ends]])
    step = least_distance(rows @ free, room - rows @ base)
    return None if step is None else base + free @ step


def least_norm(rows: Array, right: Array) -> tuple[Array, Array]:
    """Least-norm solution of rows @ d = right and a basis (D, D - rank) of the null space."""
    if rows.shape[0] == 0:
        return np.zeros(rows.shape[1]), np.eye(rows.shape[1])
    left, singular, turned = np.linalg.svd(rows)
    rank = int(np.sum(singular > 1e-10 * max(float(singular[0]), 1e-300)))
    solution = turned[:rank].T @ ((left[:, :rank].T @ right) / singular[:rank])
    return solution, turned[rank:].T


def least_distance(rows: Array, bound: Array) -> Array | None:
    """Smallest d with rows @ d >= bound; None when there is none."""
    largest = float(np.max(bound, initial=0.0))
    if largest <= 0.0 or rows.shape[1] == 0:
        met = largest <= 1e-9
        return np.zeros(rows.shape[1]) if met else None
    shrunk = np.maximum(bound / largest, -FAR)
    dual = np.vstack([rows.T, shrunk])
    aim = np.zeros(dual.shape[0])
    aim[-1] = 1.0
    left = dual @ non_negative(dual, aim) - aim
    if abs(left[-1]) < 1e-12:
        return None
    return np.asarray(-left[:-1] / left[-1] * largest)
