"""SciPy's SLSQP (Kraft 1988) on one frozen mesh, with failed evaluations as values."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np

from reactorstage.optimiser.oracle import Oracle
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.scaling import Point, scaled
from reactorstage.optimiser.state import State

WALL = 1e3
ITERATIONS = 100
PATIENCE = 20


class _FailedPointError(Exception):
    """SLSQP asked for a gradient where the evaluation failed."""


class _NoProgressError(Exception):
    """Many evaluations brought neither less violation nor less cost."""


class _Face:
    """What SLSQP sees: scaled values and gradients, from one evaluation per point.

    At a point that fails it sees the last good values with a cost so high that its line search turns
    back.
    """

    def __init__(self, oracle: Oracle, state: State):
        self.oracle = oracle
        self.scale = state.scale
        self.good = state.point
        self.least_violation = state.violation
        self.least_cost = state.point.cost
        self.waited = 0

    def point(self, u: Array) -> Point | None:
        x = self.scale.to_x(u)
        evaluation = self.oracle.at(x)
        if not evaluation.ok:
            return None
        if not np.array_equal(self.good.u, np.clip(u, 0.0, self.scale.upper)):
            self.good = scaled(evaluation, x, self.scale)
        return self.good

    def watch(self, point: Point | None) -> None:
        """Give up after too many evaluations without progress."""
        self.waited += 1
        if point and point.violation < 0.9 * self.least_violation:
            self.least_violation, self.waited = point.violation, 0
        if point and point.cost < self.least_cost - 1e-6:
            self.least_cost, self.waited = point.cost, 0
        if self.waited > PATIENCE:
            raise _NoProgressError

    def count(self, u: Array) -> None:
        """Count an iteration of SLSQP."""
        self.oracle.work.iterations += 1

    def cost(self, u: Array) -> float:
        point = self.point(u)
        self.watch(point)
        return point.cost if point else self.good.cost + WALL

    def values(self, name: str) -> Callable[[Array], Array]:
        return lambda u: np.asarray(getattr(self.point(u) or self.good, name))

    def gradients(self, name: str) -> Callable[[Array], Array]:
        def gradient(u: Array) -> Array:
            point = self.point(u)
            if point is None:
                raise _FailedPointError
            return np.asarray(getattr(point, name))

        return gradient

    def constraints(self) -> list[dict[str, Any]]:
        both: list[dict[str, Any]] = []
        if self.good.margin.size:
            both.append({"type": "ineq", "fun": self.values("margin"), "jac": self.gradients("margin_du")})
        if self.good.residual.size:
            both.append({"type": "eq", "fun": self.values("residual"), "jac": self.gradients("residual_du")})
        return both


def slsqp(oracle: Oracle, state: State, precision: float) -> Array:
    """Where SLSQP ends from a state, on the oracle's mesh: scaled numbers u (D,).

    precision is SLSQP's own tolerance on the scaled cost. Where it stands at a point that fails, or turns
    without progress, the last good point. Its iterations are added to the oracle's work.
    """
    from scipy.optimize import minimize

    face = _Face(oracle, state)
    start = face.good.u
    if start.size == 0:
        return start
    try:
        result = minimize(
            face.cost,
            start,
            jac=face.gradients("cost_du"),
            bounds=list(zip(np.zeros(start.size), state.scale.upper, strict=True)),
            constraints=face.constraints(),
            method="SLSQP",
            options={"ftol": precision, "maxiter": ITERATIONS},
            callback=face.count,
        )
    except (_FailedPointError, _NoProgressError):
        return face.good.u
    return np.asarray(result.x)
