"""A point of a local solve and how good it is."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.correct import correction
from reactorstage.optimiser.multipliers import NEAR, Multipliers, multipliers
from reactorstage.optimiser.oracle import Oracle
from reactorstage.optimiser.programme import Array, Evaluation
from reactorstage.optimiser.scaling import Point, Scale, scale_at, scaled

FEASIBLE = 1e-7
STATIONARY = 1e-5
CORRECTIONS = 4
LARGEST_CORRECTION = 0.1


@dataclass(frozen=True)
class State:
    """x with its evaluation, scaled at x; found are the multipliers of what lies near zero margin.

    residual counts only what lies at zero margin.
    """

    x: Array
    evaluation: Evaluation
    scale: Scale
    point: Point
    found: Multipliers
    residual: float
    size: float

    @property
    def cost(self) -> float:
        return self.evaluation.cost

    @property
    def violation(self) -> float:
        return self.point.violation

    @property
    def feasible(self) -> bool:
        return self.violation <= FEASIBLE

    @property
    def done(self) -> bool:
        return self.feasible and self.residual <= STATIONARY


def judged(oracle: Oracle, x: Array, evaluation: Evaluation, size: float) -> State:
    """The state of a good evaluation at x; size is a typical change of cost over the ranges."""
    scale = scale_at(oracle.programme, evaluation, size)
    point = scaled(evaluation, x, scale)
    near = multipliers(point, scale.upper, NEAR)
    exact = multipliers(point, scale.upper)
    return State(x, evaluation, scale, point, near, exact.residual, size)


def state_at(oracle: Oracle, state: State, u: Array) -> State | None:
    """The state at scaled numbers u on the same mesh; None when the evaluation fails."""
    x = state.scale.to_x(u)
    evaluation = oracle.at(x)
    return judged(oracle, x, evaluation, state.size) if evaluation.ok else None


def corrected(oracle: Oracle, state: State, held: Multipliers | None = None) -> State:
    """The state after a few Newton steps onto the limits at work, as far as these help.

    held are the multipliers of the mesh before: what was at work there is drawn to zero margin here, also
    where the new mesh leaves it a little slack.
    """
    for _ in range(CORRECTIONS):
        slack = held is not None and np.any((held.limit > 0.0) & (state.found.limit == 0.0))
        found = held if held is not None and slack else state.found
        step = step_onto_limits(state, found)
        moved = None if step is None else state_at(oracle, state, state.point.u + step)
        if moved is None or moved.violation > max(0.5 * off_limits(state, found), FEASIBLE):
            return state
        state, held = moved, None
    return state


def off_limits(state: State, found: Multipliers) -> float:
    """Largest scaled distance of what is held from zero margin, or violation."""
    held = state.point.margin[found.limit > 0.0]
    return max(float(np.max(np.abs(held), initial=0.0)), state.violation)


def step_onto_limits(state: State, found: Multipliers) -> Array | None:
    """The correction of a state; None when it needs none or is too far from its limits."""
    if off_limits(state, found) <= 0.1 * FEASIBLE:
        return None
    step = correction(state.point, found, state.scale.upper)
    if step is None or np.max(np.abs(step), initial=0.0) > LARGEST_CORRECTION:
        return None
    return step


def better(one: State, other: State) -> State:
    """The state that breaks less or, when both are inside the limits, costs less."""
    if one.feasible and other.feasible:
        return min(one, other, key=lambda state: state.cost)
    return min(one, other, key=lambda state: state.violation)
