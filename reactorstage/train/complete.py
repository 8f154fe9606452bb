"""Best values of the internal numbers for given user numbers: a small linear programme, solved exactly."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from reactorstage.train.programme import TrainProgramme

Array = NDArray[np.float64]


def complete(programme: TrainProgramme, x: Array, internal: list[int]) -> Array:
    """x with its internal numbers set so that cost is least and the limits that hold them are met.

    Cost and margins are linear in internal numbers while the user numbers stand still, so their values and
    slopes at one point make the programme. x comes back unchanged where the train has no answer.
    """
    from scipy.optimize import linprog

    start = x.copy()
    start[internal] = [programme.numbers[i].low for i in internal]
    evaluation, _ = programme.start_mesh(start)
    if not evaluation.ok:
        return x
    assert (
        evaluation.cost_dx is not None and evaluation.margin is not None and evaluation.margin_dx is not None
    )
    low = np.array([programme.numbers[i].low for i in internal])
    size = np.array([programme.numbers[i].high for i in internal]) - low
    slopes = evaluation.margin_dx[:, internal] * size
    held = np.flatnonzero(np.abs(slopes).max(axis=1) > 0.0)
    scale = np.abs(slopes[held]).max(axis=1, keepdims=True)
    cost = evaluation.cost_dx[internal] * size
    found = linprog(
        cost / max(float(np.abs(cost).max()), 1e-300),
        A_ub=-slopes[held] / scale,
        b_ub=evaluation.margin[held] / scale[:, 0],
        bounds=(0.0, 1.0),
        method="highs",
    )
    if not found.success:
        return x
    start[internal] = low + size * found.x
    return start
