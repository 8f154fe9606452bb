"""Programmes about a linear form of the numbers: as far as it goes within a budget, or held at a value."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from reactorstage.optimiser.programme import (
    Array,
    Evaluation,
    LimitRow,
)
from reactorstage.optimiser.scaling import needed
from reactorstage.optimiser.wrappers import Wrapped


@dataclass(frozen=True)
class Pushed(Wrapped):
    """The largest direction @ x inside all limits and at a cost of at most budget; size scales that row.

    Without a budget the cost may be what it will.
    """

    direction: Array
    budget: float | None = None
    size: float = 1.0

    @property
    def limits(self) -> tuple[LimitRow, ...]:
        if self.budget is None:
            return self.programme.limits
        row = LimitRow(
            "budget", "", "cost", "at most", self.budget, 0.0, "number", self.size, self.size, implied=True
        )
        return (*self.programme.limits, row)

    def changed(self, evaluation: Evaluation, x: Array) -> Evaluation:
        """The cost becomes a limit, the form the cost."""
        turned = replace(evaluation, cost=-float(self.direction @ x), cost_dx=-self.direction)
        if self.budget is None:
            return turned
        return replace(
            turned,
            margin=np.append(needed(evaluation.margin), self.budget - evaluation.cost),
            margin_dx=np.vstack([needed(evaluation.margin_dx), -needed(evaluation.cost_dx)]),
            weight=np.append(needed(evaluation.weight), 1.0),
            weight_dx=np.vstack([needed(evaluation.weight_dx), np.zeros(x.size)]),
        )


@dataclass(frozen=True)
class Held(Wrapped):
    """A programme with one more equation: direction @ x = value."""

    direction: Array
    value: float

    def changed(self, evaluation: Evaluation, x: Array) -> Evaluation:
        return replace(
            evaluation,
            residual=np.append(needed(evaluation.residual), float(self.direction @ x) - self.value),
            residual_dx=np.vstack([needed(evaluation.residual_dx), self.direction]),
        )
