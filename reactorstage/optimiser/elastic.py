"""The elastic programme: each limit may give way, and the least giving way in all is sought.

It brings a start inside the limits and, where nothing is inside, finds the least-violating answer and
the limits that hold each other.
"""

from __future__ import annotations

import threading
from dataclasses import dataclass, replace

import numpy as np

from reactorstage.optimiser.programme import (
    Array,
    Evaluation,
    FreeNumber,
    Programme,
)
from reactorstage.optimiser.scaling import limit_sizes, needed, ranges
from reactorstage.optimiser.solve import Ending, descend
from reactorstage.optimiser.wrappers import Wrapped


@dataclass(frozen=True)
class Elastic(Wrapped):
    """Numbers x and, behind them, the amounts v (M,) by which the limits give way.

    margin_i + sizes_i v_i >= 0 with sizes = weight * scale at some point, so that v is the violation in
    own units over the limit's scale. The cost is the sum of v.
    """

    sizes: Array

    @property
    def numbers(self) -> tuple[FreeNumber, ...]:
        gives = (FreeNumber(f"give of {limit.name}", 0.0, 0.0, np.inf, "number") for limit in self.limits)
        return (*self.programme.numbers, *gives)

    def changed(self, evaluation: Evaluation, x: Array) -> Evaluation:
        """An evaluation of the programme underneath as one of this, at x with v behind it."""
        give = x[self.count :]
        weight_dx = needed(evaluation.weight_dx)
        residual_dx = needed(evaluation.residual_dx)
        return replace(
            evaluation,
            cost=float(give.sum()),
            cost_dx=np.concatenate([np.zeros(self.count), np.ones(give.size)]),
            margin=needed(evaluation.margin) + self.sizes * give,
            margin_dx=np.hstack([needed(evaluation.margin_dx), np.diag(self.sizes)]),
            weight_dx=np.hstack([weight_dx, np.zeros((give.size, give.size))]),
            residual_dx=np.hstack([residual_dx, np.zeros((residual_dx.shape[0], give.size))]),
        )


def elastic_at(programme: Programme, evaluation: Evaluation, x: Array) -> tuple[Elastic, Array]:
    """The elastic programme scaled at x and its start there: each limit gives way as it is broken."""
    sizes = limit_sizes(programme, evaluation, ranges(programme.numbers)[1])
    give = np.maximum(0.0, -needed(evaluation.margin) / sizes)
    return Elastic(programme, sizes), np.concatenate([x, give])


def give_way(
    programme: Programme, ending: Ending, stop: threading.Event | None = None
) -> tuple[Ending, float]:
    """From where a solve ended broken: the nearest least violation, and the sum of what gives way there.

    The ending returned is one of the given programme, with the counts of the elastic solve.
    """
    assert ending.x is not None and ending.evaluation is not None, "only an evaluated ending can give way"
    elastic, start = elastic_at(programme, ending.evaluation, ending.x)
    found = descend(elastic, start, 1.0, stop=stop)
    if found.x is None:
        return replace(ending, stopped=found.stopped), float("inf")
    x, give = np.split(found.x, [elastic.count])
    violation = float(np.max(give, initial=0.0))
    total = float(give.sum())
    broken = replace(found, ended="limits broken", x=x, evaluation=None, violation=violation, optimal=False)
    return replace(broken, give=total), total
