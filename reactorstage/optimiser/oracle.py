"""One evaluation per point, on a frozen mesh, with failure as a value and a cap on work."""

from __future__ import annotations

import threading
from dataclasses import dataclass
from typing import Any

import numpy as np

from reactorstage.optimiser.programme import Array, Evaluation, Programme

MESHES_IN_SEARCH = 4


class OutOfWorkError(Exception):
    """The cap on evaluations is reached, or the user stopped the search."""


@dataclass
class Work:
    """Evaluations spent by one local solve, its cap, and the event that stops it."""

    cap: int
    stop: threading.Event | None = None
    spent: int = 0
    iterations: int = 0

    @property
    def stopped(self) -> bool:
        return self.stop is not None and self.stop.is_set()

    def spend(self) -> None:
        """Count one evaluation; OutOfWorkError when there is none left."""
        if self.stopped or self.spent >= self.cap:
            raise OutOfWorkError
        self.spent += 1


class Oracle:
    """Evaluates a programme on its current mesh and remembers the last point.

    A trial point that the frozen mesh cannot do gets a mesh of its own, a few times per solve. Meshes are
    made at search tolerance, with `fine` at the final one.
    """

    def __init__(self, programme: Programme, work: Work, fine: bool = False):
        self.programme = programme
        self.fine = fine
        self.work = work
        self.mesh: Any = None
        self.new_meshes = 0
        self._x: Array | None = None
        self._evaluation = Evaluation("not evaluated")

    def start(self, x: Array) -> Evaluation:
        """Make the mesh anew at x; the old mesh stays when that fails."""
        self.work.spend()
        evaluation, mesh = self.programme.start_mesh(x, self.fine)
        evaluation = checked(evaluation)
        if evaluation.ok:
            self.mesh = mesh
        return self._remember(x, evaluation)

    def at(self, x: Array) -> Evaluation:
        """Evaluation at x on the current mesh, once per point."""
        if self._x is not None and np.array_equal(x, self._x):
            return self._evaluation
        self.work.spend()
        evaluation = checked(self.programme.evaluate(x, self.mesh))
        if not evaluation.ok and self.new_meshes < MESHES_IN_SEARCH:
            self.new_meshes += 1
            return self.start(x)
        return self._remember(x, evaluation)

    def _remember(self, x: Array, evaluation: Evaluation) -> Evaluation:
        self._x = x.copy()
        self._evaluation = evaluation
        return evaluation


def checked(evaluation: Evaluation) -> Evaluation:
    """The evaluation, or a failure when a value or derivative is not finite."""
    if not evaluation.ok:
        return evaluation
    arrays = (
        evaluation.cost_dx,
        evaluation.margin,
        evaluation.margin_dx,
        evaluation.residual,
        evaluation.residual_dx,
    )
    finite = np.isfinite(evaluation.cost) and all(a is not None and np.isfinite(a).all() for a in arrays)
    return evaluation if finite else Evaluation("a result is not finite")
