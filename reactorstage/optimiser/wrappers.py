"""Programmes made from a programme: evaluations counted, limits shifted, numbers pinned."""

from __future__ import annotations

import threading
from abc import ABC, abstractmethod
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from reactorstage.optimiser.programme import Array, Evaluation, FreeNumber, LimitRow, Programme, SplitGroup
from reactorstage.optimiser.scaling import needed


class Counted:
    """A programme that counts its evaluations, from any thread."""

    def __init__(self, programme: Programme):
        self.programme = programme
        self.numbers = programme.numbers
        self.limits = programme.limits
        self.splits = programme.splits
        self.evaluations = 0
        self._lock = threading.Lock()

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        self._count()
        return self.programme.start_mesh(x, fine)

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        self._count()
        return self.programme.evaluate(x, mesh)

    def final(self, x: Array) -> Evaluation:
        self._count()
        return self.programme.final(x)

    def complete(self, x: Array) -> Array:
        return self.programme.complete(x)

    def begin(self, x: Array) -> Array:
        return self.programme.begin(x)

    def _count(self) -> None:
        with self._lock:
            self.evaluations += 1


@dataclass(frozen=True)
class Wrapped(ABC):
    """A programme made from another by changing its evaluations; further numbers may stand behind its x."""

    programme: Programme

    @property
    def numbers(self) -> tuple[FreeNumber, ...]:
        return self.programme.numbers

    @property
    def limits(self) -> tuple[LimitRow, ...]:
        return self.programme.limits

    @property
    def splits(self) -> tuple[SplitGroup, ...]:
        return self.programme.splits

    @property
    def count(self) -> int:
        """Numbers of the programme underneath."""
        return len(self.programme.numbers)

    @abstractmethod
    def changed(self, evaluation: Evaluation, x: Array) -> Evaluation:
        """An evaluation without failure of the programme underneath as one of this, at this one's x."""

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        evaluation, mesh = self.programme.start_mesh(x[: self.count], fine)
        return self._of(evaluation, x), mesh

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        return self._of(self.programme.evaluate(x[: self.count], mesh), x)

    def final(self, x: Array) -> Evaluation:
        return self._of(self.programme.final(x[: self.count]), x)

    def complete(self, x: Array) -> Array:
        return np.append(self.programme.complete(x[: self.count]), x[self.count :])

    def begin(self, x: Array) -> Array:
        return np.append(self.programme.begin(x[: self.count]), x[self.count :])

    def _of(self, evaluation: Evaluation, x: Array) -> Evaluation:
        return self.changed(evaluation, x) if evaluation.ok else evaluation


@dataclass(frozen=True)
class Shifted(Wrapped):
    """A programme with its limits relaxed by shifts (M,), own units, negative to tighten."""

    shifts: Array

    def changed(self, evaluation: Evaluation, x: Array) -> Evaluation:
        return replace(
            evaluation,
            margin=needed(evaluation.margin) + needed(evaluation.weight) * self.shifts,
            margin_dx=needed(evaluation.margin_dx) + needed(evaluation.weight_dx) * self.shifts[:, None],
        )


class Pinned:
    """A programme with some numbers held at given values; the others are its numbers.

    pinned maps positions in x to values; `full` and `free` translate between the two lengths of x.
    """

    def __init__(self, programme: Programme, pinned: Mapping[int, float]):
        self.programme = programme
        size = len(programme.numbers)
        self._base = np.zeros(size)
        self._base[list(pinned)] = list(pinned.values())
        self.kept = np.array([k for k in range(size) if k not in pinned], dtype=int)
        self.numbers = tuple(programme.numbers[k] for k in self.kept)
        self.limits = programme.limits
        self.splits = tuple(self._group(g) for g in programme.splits if not set(g.indices) & set(pinned))

    def full(self, x: Array) -> Array:
        """x of the programme underneath."""
        whole = self._base.copy()
        whole[self.kept] = x
        return whole

    def free(self, x: Array) -> Array:
        """The numbers that are left of an x of the programme underneath."""
        return np.take(x, self.kept)

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        evaluation, mesh = self.programme.start_mesh(self.full(x), fine)
        return self._cut(evaluation), mesh

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        return self._cut(self.programme.evaluate(self.full(x), mesh))

    def final(self, x: Array) -> Evaluation:
        return self._cut(self.programme.final(self.full(x)))

    def complete(self, x: Array) -> Array:
        return self.free(self.programme.complete(self.full(x)))

    def begin(self, x: Array) -> Array:
        return self.free(self.programme.begin(self.full(x)))

    def _group(self, group: SplitGroup) -> SplitGroup:
        places = {int(old): new for new, old in enumerate(self.kept)}
        return replace(group, indices=tuple(places[k] for k in group.indices))

    def _cut(self, evaluation: Evaluation) -> Evaluation:
        if not evaluation.ok:
            return evaluation
        return replace(
            evaluation,
            cost_dx=needed(evaluation.cost_dx)[self.kept],
            margin_dx=needed(evaluation.margin_dx)[:, self.kept],
            weight_dx=needed(evaluation.weight_dx)[:, self.kept],
            residual_dx=needed(evaluation.residual_dx)[:, self.kept],
        )
