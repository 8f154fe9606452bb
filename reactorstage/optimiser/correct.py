"""Smallest step that brings the limits at work to zero margin and leaves no limit broken.

Least-distance programming (Lawson and Hanson 1974, chapter 23): least |d| with G d >= h, by non-negative
least squares on its dual; what is held is taken out first as equalities.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from reactorstage.optimiser.multipliers import Multipliers, non_negative
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.scaling import Point

FAR = 1e3
MET = 1e-9
PIVOTS = 10


@dataclass(frozen=True)
class _Held:
    """Limits and range ends as rows (K, D) with the gaps (K,) to close, K multipliers, and equations.

    A row with a multiplier is held: its gap is closed exactly; the others' gaps are closed or left
    negative.
    """

    rows: Array
    gap: Array
    multiplier: Array
    equations: Array
    equation_gap: Array

    @property
    def held(self) -> NDArray[np.bool_]:
        return self.multiplier > 0.0


def correction(point: Point, found: Multipliers, upper: Array, target: float = 0.0) -> Array | None:
    """Step d (D,) in scaled numbers: limits with a multiplier to margin `target`, others at least there.

    Numbers whose range end has a multiplier go to that end. Where what is held would break another
    limit, this one takes the place of the one whose multiplier it drives to zero first (the ratio rule
    of the dual simplex method, Lemke 1954, from memory). If that leads nowhere nothing is held; None
    when even then the linearised limits cannot be met.
    """
    problem = _problem(point, found, upper, target)
    trial: _Held | None = problem
    for _ in range(PIVOTS):
        if trial is None:
            break
        step, base = _step(trial)
        if step is not None:
            return step
        trial = _pivoted(trial, base)
    return _step(replace(problem, multiplier=np.zeros_like(problem.multiplier)))[0]


def _problem(point: Point, found: Multipliers, upper: Array, target: float) -> _Held:
    unit = np.eye(point.u.size)
    ends = np.isfinite(upper)
    return _Held(
        rows=np.vstack([point.margin_du, unit, -unit[ends]]),
        gap=np.concatenate([target - point.margin, -point.u, (point.u - upper)[ends]]),
        multiplier=np.concatenate([found.limit, found.low, found.high[ends]]),
        equations=point.residual_du,
        equation_gap=-point.residual,
    )


def _step(problem: _Held) -> tuple[Array | None, Array]:
    """The step, None when it breaks a limit; and the smallest one that closes the held gaps only."""
    held = problem.held
    equal = np.vstack([problem.rows[held], problem.equations])
    base, free = least_norm(equal, np.concatenate([problem.gap[held], problem.equation_gap]))
    others = problem.rows[~held]
    rest = least_distance(others @ free, problem.gap[~held] - others @ base)
    return (None if rest is None else base + free @ rest), base


def _pivoted(problem: _Held, base: Array) -> _Held | None:
    """The limit most broken after `base` taken up in place of a held one; None when none gives way."""
    held = np.flatnonzero(problem.held)
    open_gap = np.where(problem.held, -np.inf, problem.gap - problem.rows @ base)
    entering = int(np.argmax(open_gap))
    basis = np.vstack([problem.rows[held], problem.equations])
    parts = np.linalg.lstsq(basis.T, problem.rows[entering], rcond=None)[0][: held.size]
    ratios = np.full(held.size, np.inf)
    np.divide(problem.multiplier[held], parts, out=ratios, where=parts > MET)
    if not np.isfinite(ratios).any():
        return None
    leaving = int(np.argmin(ratios))
    changed = problem.multiplier.copy()
    changed[held] = np.maximum(changed[held] - ratios[leaving] * parts, 0.0)
    changed[held[leaving]] = 0.0
    changed[entering] = max(float(ratios[leaving]), 1e-300)
    return replace(problem, multiplier=changed)


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
        return np.zeros(rows.shape[1]) if largest <= MET else None
    shrunk = np.maximum(bound / largest, -FAR)
    dual = np.vstack([rows.T, shrunk])
    aim = np.zeros(dual.shape[0])
    aim[-1] = 1.0
    left = dual @ non_negative(dual, aim) - aim
    if abs(left[-1]) < 1e-12:
        return None
    return np.asarray(-left[:-1] / left[-1] * largest)
