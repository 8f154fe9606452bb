"""Programmes about a linear form of the numbers: as far as it goes within a budget, or held at a value."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from reactorstage.optimiser.programme import (
    Array,
    Evaluation,
    FreeNumber,
    LimitRow,
    Programme,
    SplitGroup,
)
from reactorstage.optimiser.scaling import needed


@dataclass(frozen=True)
class Pushed:
    """The largest direction @ x inside all limits and at a cost of at most budget; size scales that row.

    Without a budget the cost may be what it will.
    """

    programme: Programme
    direction: Array
    budget: float | None = None
    size: float = 1.0

    @property
    def numbers(self) -> tuple[FreeNumber, ...]:
        return self.programme.numbers

    @property
    def limits(self) -> tuple[LimitRow, ...]:
        if self.budget is None:
            return self.programme.limits
        row = LimitRow(
            "budget", "", "cost", "at most", self.budget, 0.0, "number", self.size, self.size, implied=True
        )
        return (*self.programme.limits, row)

    @property
    def splits(self) -> tuple[SplitGroup, ...]:
        return self.programme.splits

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        evaluation, mesh = self.programme.start_mesh(x, fine)
        return self._turned(evaluation, x), mesh

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        return self._turned(self.programme.evaluate(x, mesh), x)

    def final(self, x: Array) -> Evaluation:
        return self._turned(self.programme.final(x), x)

    def complete(self, x: Array) -> Array:
        return self.programme.complete(x)

    def begin(self, x: Array) -> Array:
        return self.programme.begin(x)

    def _turned(self, evaluation: Evaluation, x: Array) -> Evaluation:
        """The cost becomes a limit, the form the cost."""
        if not evaluation.ok:
            return evaluation
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
class Held:
    """A programme with one more equation: direction @ x = value."""

    programme: Programme
    direction: Array
    value: float

    @property
    def numbers(self) -> tuple[FreeNumber, ...]:
        return self.programme.numbers

    @property
    def limits(self) -> tuple[LimitRow, ...]:
        return self.programme.limits

    @property
    def splits(self) -> tuple[SplitGroup, ...]:
        return self.programme.splits

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        evaluation, mesh = self.programme.start_mesh(x, fine)
        return self._held(evaluation, x), mesh

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        return self._held(self.programme.evaluate(x, mesh), x)

    def final(self, x: Array) -> Evaluation:
        return self._held(self.programme.final(x), x)

    def complete(self, x: Array) -> Array:
        return self.programme.complete(x)

    def begin(self, x: Array) -> Array:
        return self.programme.begin(x)

    def _held(self, evaluation: Evaluation, x: Array) -> Evaluation:
        if not evaluation.ok:
            return evaluation
        return replace(
            evaluation,
            residual=np.append(needed(evaluation.residual), float(self.direction @ x) - self.value),
            residual_dx=np.vstack([needed(evaluation.residual_dx), self.direction]),
        )
