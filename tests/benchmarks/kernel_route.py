"""The compiled kernel of this project behind the same face as the reference routes."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.data import Stages
from reactorstage.train.forms import Rows
from reactorstage.train.passing import SEARCH, Outcome
from reactorstage.train.programme import TrainProgramme
from tests.benchmarks.lead import Array


class KernelRoute:
    """Cost and margins (M + 1,) of a compiled case, with or without derivatives."""

    def __init__(self, programme: TrainProgramme):
        self.programme = programme
        model = programme.model
        self.rows = Rows.of([model.aim.top, *(bound.margin() for bound in model.bounds)])

    def value(self, x: Array, tolerance: float = SEARCH) -> Array:
        """A rating with steps chosen by error control, without derivatives."""
        u, _ = self.programme.model.inputs.values(x)
        outcome = self.programme.model.passing.adaptive(u, np.zeros((len(u), 0)), tolerance)
        return self._found(outcome, u, x)

    def frozen_value(self, x: Array, mesh: Stages) -> Array:
        """The same on a frozen step sequence."""
        u, _ = self.programme.model.inputs.values(x)
        return self._found(self.programme.model.passing.frozen(u, np.zeros((len(u), 0)), mesh), u, x)

    def value_and_gradient(self, x: Array, mesh: Stages) -> tuple[Array, Array]:
        """What the search asks for at every point: value and gradient on a frozen step sequence."""
        found = self.programme.evaluate(x, mesh)
        assert found.ok and found.cost_dx is not None and found.margin is not None
        assert found.margin_dx is not None
        return np.append(found.cost, found.margin), np.vstack([found.cost_dx, found.margin_dx])

    def mesh(self, x: Array) -> Stages:
        """The step sequence of the search at x."""
        found, mesh = self.programme.start_mesh(x)
        assert found.ok, found.failure
        assert isinstance(mesh, Stages)
        return mesh

    def sizes(self, x: Array) -> Array:
        """Typical sizes of cost and margins (M + 1,), by which errors are scaled."""
        found, _ = self.programme.start_mesh(x)
        assert found.ok and found.weight is not None
        scales = np.array([limit.scale for limit in self.programme.limits])
        return np.append(abs(found.cost), scales * found.weight)

    def _found(self, outcome: Outcome, u: Array, x: Array) -> Array:
        model = self.programme.model
        assert not outcome.failure, outcome.failure
        base = model.base(outcome.out, u, np.zeros((len(u), 0)), x, model.wanted)
        return np.asarray(self.rows.of_base(base)[:, 0])
