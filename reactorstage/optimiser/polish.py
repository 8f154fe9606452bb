"""Sharpening of an optimum: Newton, leaving of saddles, and values at the final tolerance."""

from __future__ import annotations

import threading

import numpy as np

from reactorstage.optimiser.correct import correction
from reactorstage.optimiser.multipliers import AT_WORK, NEAR, Multipliers, multipliers, own_units
from reactorstage.optimiser.newton import Curvature, curvature, newton
from reactorstage.optimiser.oracle import Oracle, OutOfWorkError, Work, checked
from reactorstage.optimiser.programme import Array, Evaluation, Programme
from reactorstage.optimiser.result import Answer
from reactorstage.optimiser.scaling import Point, Scale, needed, scale_at, scaled
from reactorstage.optimiser.solve import descend
from reactorstage.optimiser.state import State, corrected, judged

SETTLED = 1e-9
CORRECTIONS = 5
LARGEST_STEP = 1e-2
FINE_STEPS = 2
SADDLE = 1e-3
SADDLE_STEP = 0.02


def polished(
    programme: Programme, x: Array, size: float, stop: threading.Event | None = None
) -> Answer | None:
    """The answer at a local optimum x, sharpened and evaluated at the final tolerance.

    A stationary point from which the cost falls along the limits is left first; the last Newton steps are
    taken on a mesh of the final tolerance. None when x cannot be evaluated.
    """
    for _ in range(2):
        looked = looked_at(programme, x, size, stop)
        if looked is None:
            return answer_at(programme, x, size)
        x, state, curved = looked
        smallest = curved.smallest
        lower = None
        if smallest is not None and smallest < -SADDLE:
            lower = left_saddle(programme, state, curved, stop)
        if lower is None:
            break
        x = lower
    for _ in range(FINE_STEPS if smallest is not None else 0):
        finer = looked_at(programme, x, size, stop, fine=True)
        x = finer[0] if finer is not None else x
    money = None if smallest is None else smallest * state.scale.cost
    return answer_at(programme, x, size, state.found, money)


def looked_at(
    programme: Programme, x: Array, size: float, stop: threading.Event | None, fine: bool = False
) -> tuple[Array, State, Curvature] | None:
    """x after steps onto its limits and a Newton step along them, with the state and curvature before it.

    None where it cannot be evaluated.
    """
    oracle = Oracle(programme, Work(4 * (x.size + 10), stop), fine)
    try:
        evaluation = oracle.start(x)
        if not evaluation.ok:
            return None
        state = corrected(oracle, judged(oracle, x, evaluation, size))
        curved = curvature(oracle, state)
        if curved is None:
            return None
        moved = newton(oracle, state, curved)
        return (moved or state).x, state, curved
    except OutOfWorkError:
        return None


def left_saddle(
    programme: Programme, state: State, curved: Curvature, stop: threading.Event | None
) -> Array | None:
    """The better of the optima reached from both sides of a saddle; None when neither costs less."""
    step = SADDLE_STEP * state.scale.span * curved.downhill
    ends = [descend(programme, state.x + side * step, state.size, stop=stop) for side in (1.0, -1.0)]
    reached = [(end.cost, k) for k, end in enumerate(ends) if end.feasible and end.cost is not None]
    cost, k = min(reached, default=(np.inf, 0))
    return ends[k].x if cost < state.cost else None


def answer_at(
    programme: Programme,
    x: Array,
    size: float,
    found: Multipliers | None = None,
    curved: float | None = None,
) -> Answer | None:
    """The answer at x after correction onto its limits at the final tolerance; None when that fails.

    found are the multipliers at the search's tolerance, which say what stays at work; by default what is
    near zero margin at the final one.
    """
    evaluation = checked(programme.final(x))
    if not evaluation.ok:
        return None
    x, evaluation = settled(programme, x, evaluation, size, found)
    return described(programme, x, evaluation, size, curved)


def described(
    programme: Programme, x: Array, evaluation: Evaluation, size: float, curved: float | None = None
) -> Answer:
    """The answer at x as it stands, from a good evaluation at the final tolerance."""
    scale = scale_at(programme, evaluation, size)
    point = scaled(evaluation, x, scale)
    found = multipliers(point, scale.upper)
    return Answer(
        x=x,
        cost=evaluation.cost,
        violation=max(point.violation, 0.0),
        residual=found.residual,
        at_work=tuple(int(k) for k in np.flatnonzero(point.margin <= AT_WORK)),
        multipliers=own_units(found, evaluation, scale),
        at_range=names_at_range(programme, point.u, scale.upper),
        margin=needed(evaluation.margin),
        curvature=curved,
    )


def settled(
    programme: Programme, x: Array, evaluation: Evaluation, size: float, found: Multipliers | None
) -> tuple[Array, Evaluation]:
    """x moved so that the limits at work have zero margin and none is broken, at the final tolerance.

    Each step aims a little further inside than the last one missed by.
    """
    best, least, target = (x, evaluation), (True, float("inf")), 0.0
    for _ in range(CORRECTIONS):
        scale = scale_at(programme, evaluation, size)
        point = scaled(evaluation, x, scale)
        held = found or multipliers(point, scale.upper, NEAR)
        slack = float(np.max(np.abs(point.margin[held.limit > 0.0]), initial=0.0))
        rank = (point.violation > SETTLED, max(point.violation, slack))
        if rank < least:
            best, least = (x, evaluation), rank
        if point.violation <= SETTLED and slack <= max(SETTLED, 2.0 * target):
            break
        target = SETTLED / 2 if target == 0.0 else min(target + 2.0 * point.violation, 0.3 * AT_WORK)
        moved = stepped(programme, point, held, scale, target)
        if moved is None:
            break
        x, evaluation = moved
    return best


def stepped(
    programme: Programme, point: Point, found: Multipliers, scale: Scale, target: float
) -> tuple[Array, Evaluation] | None:
    """x and evaluation after one correction at the final tolerance; None when it is large or fails."""
    step = correction(point, found, scale.upper, target)
    if step is None or np.max(np.abs(step), initial=0.0) > LARGEST_STEP:
        return None
    x = scale.to_x(point.u + step)
    evaluation = checked(programme.final(x))
    return (x, evaluation) if evaluation.ok else None


def names_at_range(programme: Programme, u: Array, upper: Array) -> tuple[str, ...]:
    """User numbers at an end of their search range."""
    at_end = (u <= AT_WORK) | (u >= upper - AT_WORK)
    ended = (number for number, end in zip(programme.numbers, at_end, strict=True) if end)
    return tuple(number.name for number in ended if not number.internal)
