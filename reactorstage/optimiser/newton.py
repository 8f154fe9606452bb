"""Second derivatives along the limits at work, from exact gradients, and the Newton step with them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.correct import correction, least_norm
from reactorstage.optimiser.multipliers import Multipliers
from reactorstage.optimiser.oracle import Oracle
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.scaling import Point, scaled
from reactorstage.optimiser.state import FEASIBLE, State, state_at

PROBE = 1e-4
FLAT = 1e-6
FARTHEST = 0.2


@dataclass(frozen=True)
class Curvature:
    """Second derivatives (scaled cost) on the tangent space of what is at work.

    tangent (D, N) is its basis, hessian (N, N).
    """

    tangent: Array
    hessian: Array

    @property
    def smallest(self) -> float | None:
        """Smallest second derivative; None at a vertex, where nothing can move."""
        return float(np.linalg.eigvalsh(self.hessian)[0]) if self.hessian.size else None

    @property
    def downhill(self) -> Array:
        """(D,) direction of the smallest second derivative."""
        return np.asarray(self.tangent @ np.linalg.eigh(self.hessian)[1][:, 0])


def curvature(oracle: Oracle, state: State) -> Curvature | None:
    """Projected second derivatives of the Lagrangian on the current mesh; None where a probe fails."""
    tangent = tangent_of(state.point, state.found)
    columns = [probe(oracle, state, z) for z in tangent.T]
    if any(column is None for column in columns):
        return None
    product = tangent.T @ np.array(columns).T if columns else np.zeros((0, 0))
    return Curvature(tangent, 0.5 * (product + product.T))


def tangent_of(point: Point, found: Multipliers) -> Array:
    """(D, N) basis of the moves that keep all that has a multiplier at zero margin."""
    unit = np.eye(point.u.size)
    limits = point.margin_du[found.limit > 0.0]
    rows = np.vstack([limits, unit[found.low > 0.0], unit[found.high > 0.0], point.residual_du])
    return least_norm(rows, np.zeros(rows.shape[0]))[1]


def probe(oracle: Oracle, state: State, z: Array) -> Array | None:
    """(D,) derivative of the Lagrangian's gradient along z, to the side that leaves the ranges least."""
    u, upper = state.point.u, state.scale.upper
    ahead, back = (float(np.sum(np.maximum(-v, 0.0) + np.maximum(v - upper, 0.0))) for v in (u + z, u - z))
    step = PROBE if ahead <= back else -PROBE
    x = state.scale.low + state.scale.span * (u + step * z)
    evaluation = oracle.at(x)
    if not evaluation.ok:
        return None
    there = state.found.lagrangian_du(scaled(evaluation, x, state.scale))
    return np.asarray((there - state.found.lagrangian_du(state.point)) / step)


def newton(oracle: Oracle, state: State, curved: Curvature) -> State | None:
    """The state after one Newton step along the limits and steps back onto them.

    None when the second derivatives are not positive or the residual does not fall.
    """
    smallest = curved.smallest
    if smallest is None or smallest <= FLAT:
        return None
    slope = curved.tangent.T @ state.found.lagrangian_du(state.point)
    move = curved.tangent @ np.linalg.solve(curved.hessian, slope)
    if np.max(np.abs(move)) > FARTHEST:
        return None
    u = state.point.u - move
    for _ in range(3):
        moved = state_at(oracle, state, u)
        if moved is None:
            return None
        if moved.violation <= FEASIBLE:
            return moved if moved.residual < 0.5 * state.residual else None
        step = correction(moved.point, state.found, state.scale.upper)
        if step is None:
            return None
        u = moved.point.u + step
    return None
