"""Nothing is inside all limits: the least-violating answer and the limits that hold each other."""

from __future__ import annotations

import threading
from dataclasses import replace

import numpy as np

from reactorstage.optimiser.elastic import elastic_at
from reactorstage.optimiser.multipliers import NEAR, multipliers
from reactorstage.optimiser.oracle import checked
from reactorstage.optimiser.polish import described
from reactorstage.optimiser.programme import Array, Evaluation, Programme
from reactorstage.optimiser.result import Answer, Conflict
from reactorstage.optimiser.scaling import needed, scale_at, scaled
from reactorstage.optimiser.solve import descend
from reactorstage.optimiser.wrappers import Shifted

GIVES_WAY = 1e-5
TIGHT = 1e-7
HOLDS = 1e-5
WORTH_IT = 1e-5


def least_violating(
    programme: Programme, x: Array, size: float, stop: threading.Event | None = None
) -> tuple[Answer, Conflict] | None:
    """The answer at a least-violating x, made cheaper as far as no limit is broken further, and its conflict.

    None when x cannot be evaluated.
    """
    x = settled_violation(programme, x, stop)
    evaluation = checked(programme.final(x))
    if not evaluation.ok:
        return None
    cheaper = cheapest(programme, x, evaluation, size, stop)
    if cheaper is not None:
        x, evaluation = cheaper
    answer = described(programme, x, evaluation, size)
    held, residual = conflict(programme, x, evaluation)
    return replace(answer, multipliers=np.zeros(len(programme.limits)), residual=residual), held


def settled_violation(programme: Programme, x: Array, stop: threading.Event | None) -> Array:
    """x after the violations, weighed as they are at x (a ratio's weight moves), are made least again."""
    evaluation, _ = programme.start_mesh(x)
    if not evaluation.ok:
        return x
    elastic, start = elastic_at(programme, evaluation, x)
    ending = descend(elastic, start, 1.0, stop=stop)
    return ending.x[: elastic.count] if ending.x is not None and ending.feasible else x


def cheapest(
    programme: Programme, x: Array, evaluation: Evaluation, size: float, stop: threading.Event | None
) -> tuple[Array, Evaluation] | None:
    """The cheapest x that breaks the limits by no more than x does; None when none is found."""
    scales = np.array([limit.scale for limit in programme.limits])
    amounts = broken_amounts(evaluation)
    relief = np.where(amounts > TIGHT * scales, amounts + TIGHT * scales, 0.0)
    ending = descend(Shifted(programme, relief), x, size, stop=stop)
    if ending.x is None or not ending.feasible:
        return None
    there = checked(programme.final(ending.x))
    return (ending.x, there) if there.ok and there.cost < evaluation.cost - WORTH_IT * size else None


def conflict(programme: Programme, x: Array, evaluation: Evaluation) -> tuple[Conflict, float]:
    """The limits broken at a least-violating x (own unit), those that keep them so, and the residual.

    A limit that holds has zero margin and a multiplier in the elastic programme: relaxing it would lower
    the sum of violations.
    """
    elastic, start = elastic_at(programme, evaluation, x)
    stretched = elastic.changed(evaluation, start)
    scale = scale_at(elastic, stretched, 1.0)
    found = multipliers(scaled(stretched, start, scale), scale.upper, NEAR)
    give = start[elastic.count :]
    own = broken_amounts(evaluation)
    broken = np.flatnonzero(give > GIVES_WAY)
    against = np.flatnonzero((found.limit * scale.cost > HOLDS) & (give <= GIVES_WAY))
    held = Conflict(tuple((int(k), float(own[k])) for k in broken), tuple(int(k) for k in against))
    return held, found.residual


def broken_amounts(evaluation: Evaluation) -> Array:
    """(M,) own-unit amounts by which limits are broken, zero where they are met."""
    weight = np.maximum(np.abs(needed(evaluation.weight)), 1e-300)
    return np.asarray(np.maximum(0.0, -needed(evaluation.margin) / weight))
