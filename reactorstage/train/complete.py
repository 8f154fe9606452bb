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
    start[internal] = 0.0
    evaluation, _ = programme.start_mesh(start)
    if not evaluation.ok:
        return x
    assert (
        evaluation.cost_dx is not None and evaluation.margin is not None and evaluation.margin_dx is not None
    )
    slopes = evaluation.margin_dx[:, internal]
    held = np.flatnonzero(np.abs(slopes).max(axis=1) > 0.0)
    scale = np.abs(slopes[held]).max(axis=1, keepdims=True)
    found = linprog(
        evaluation.cost_dx[internal],
        A_ub=-slopes[held] / scale,
        b_ub=evaluation.margin[held] / scale[:, 0],
        bounds=[(programme.numbers[i].low, programme.numbers[i].high) for i in internal],
        method="highs",
    )
    if not found.success:
        return x
    start[internal] = found.x
    return start
