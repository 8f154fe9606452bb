"""Numbers, limits, equations and cost brought to comparable size."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.programme import Array, Evaluation, FreeNumber, Programme

STEEPEST_ROW = 1e3


@dataclass(frozen=True)
class Scale:
    """x = low + span * u, limits, equations and cost divided by their sizes.

    low, span (D,) in the numbers' units, limit (M,) in units of the margin, equation (E,), cost money
    per second; upper (D,) is the upper end of u (1, or infinity for a number without an end).
    """

    low: Array
    span: Array
    upper: Array
    limit: Array
    equation: Array
    cost: float

    def to_u(self, x: Array) -> Array:
        """Scaled numbers, clipped to the range."""
        return np.clip((x - self.low) / self.span, 0.0, self.upper)

    def to_x(self, u: Array) -> Array:
        """Numbers in their own units, clipped to the range."""
        return self.low + self.span * np.clip(u, 0.0, self.upper)


@dataclass(frozen=True)
class Point:
    """An evaluation in scaled numbers: values and derivatives by u."""

    u: Array
    cost: float
    cost_du: Array
    margin: Array
    margin_du: Array
    residual: Array
    residual_du: Array

    @property
    def violation(self) -> float:
        """Largest scaled violation of a limit or an equation; 0 inside."""
        broken = float(np.max(-self.margin, initial=0.0))
        return max(broken, float(np.max(np.abs(self.residual), initial=0.0)))


def ranges(numbers: tuple[FreeNumber, ...]) -> tuple[Array, Array, Array]:
    """low, span and upper end of u; a range without an end or without width gets the span 1."""
    low = np.array([number.low for number in numbers], dtype=float)
    width = np.array([number.high for number in numbers], dtype=float) - low
    span = np.where(np.isfinite(width) & (width > 0.0), width, 1.0)
    return low, span, np.where(np.isfinite(width), np.minimum(width / span, 1.0), np.inf)


def scale_at(programme: Programme, evaluation: Evaluation, size: float) -> Scale:
    """Scale from one good evaluation.

    size is a typical change of cost over the ranges, from `typical_change`; the cost is divided by
    its change at this point, but by no less than a hundredth of size.
    """
    low, span, upper = ranges(programme.numbers)
    return Scale(
        low=low,
        span=span,
        upper=upper,
        limit=limit_sizes(programme, evaluation, span),
        equation=row_sizes(needed(evaluation.residual_dx) * span),
        cost=max(typical_change(programme, evaluation), 0.01 * size),
    )


def limit_sizes(programme: Programme, evaluation: Evaluation, span: Array) -> Array:
    """(M,) weight times scale of each limit, kept off zero where a ratio has no denominator."""
    scales = np.array([limit.scale for limit in programme.limits], dtype=float)
    slopes = np.linalg.norm(needed(evaluation.margin_dx) * span, axis=1)
    sizes = np.maximum(np.abs(needed(evaluation.weight)) * scales, slopes / STEEPEST_ROW)
    return np.where(sizes > 0.0, sizes, 1.0)


def row_sizes(rows: Array) -> Array:
    """Length of each row, 1 for a row of zeros."""
    lengths = np.linalg.norm(rows, axis=1)
    return np.where(lengths > 0.0, lengths, 1.0)


def typical_change(programme: Programme, evaluation: Evaluation) -> float:
    """Change of cost over the ranges to first order, money per second; never zero."""
    _, span, _ = ranges(programme.numbers)
    change = float(np.linalg.norm(needed(evaluation.cost_dx) * span))
    return max(change, 1e-6 * abs(evaluation.cost), 1e-12)


def scaled(evaluation: Evaluation, x: Array, scale: Scale) -> Point:
    """A good evaluation at x in scaled numbers."""
    return Point(
        u=scale.to_u(x),
        cost=evaluation.cost / scale.cost,
        cost_du=needed(evaluation.cost_dx) * scale.span / scale.cost,
        margin=needed(evaluation.margin) / scale.limit,
        margin_du=needed(evaluation.margin_dx) * scale.span / scale.limit[:, None],
        residual=needed(evaluation.residual) / scale.equation,
        residual_du=needed(evaluation.residual_dx) * scale.span / scale.equation[:, None],
    )


def needed(array: Array | None) -> Array:
    """An array that a good evaluation always carries."""
    assert array is not None, "a good evaluation carries every array"
    return array
