"""Solves the closures of a train for given user numbers: damped Newton with the exact Jacobian of a pass.

Newton first takes a new mesh at every step; the last steps are on one mesh, to rounding.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.data import Chemistry, Stages
from reactorstage.train.closures import residuals
from reactorstage.train.passing import FINAL, SEARCH

if TYPE_CHECKING:
    from reactorstage.train.programme import Model

Array = NDArray[np.float64]

ITERATIONS, SHARPENING = 40, 6
HALVINGS = 8
NEAR = 1e-6
"""Newton step, as a share of the search ranges, from which on the mesh stays."""

CLOSED = 1e-12
FARTHEST = 0.2
"""Largest step of one unknown, as a share of its search range."""


@dataclass(frozen=True)
class Solved:
    """An answer of the closures: v (V,), residual and Jacobian by the unknowns, the mesh.

    failure is empty, or says why there is none; step is the last Newton step as a share of the ranges.
    """

    v: Array
    residual: Array
    jacobian: Array
    step: float
    mesh: Stages | None
    evaluations: int
    failure: str = ""

    @property
    def slope_sign(self) -> int:
        """Sign of the determinant of the Jacobian: below zero a small disturbance grows (slope condition)."""
        return int(np.sign(np.linalg.det(self.jacobian / np.abs(self.jacobian).max(axis=1, keepdims=True))))


@dataclass(frozen=True)
class Trial:
    """Residuals (E,), their Jacobian (E, E) and the steps of one pass, or the sentence of its failure."""

    residual: Array
    jacobian: Array
    mesh: Stages | None
    base: Array | None
    failure: str = ""


class Closing:
    """The closures of one model with all other numbers standing still.

    without leaves one unknown, counted from 0, and its residual out: it then stands still too.
    """

    def __init__(
        self,
        model: Model,
        tolerance: float = SEARCH,
        chemistry: Chemistry | None = None,
        without: int | None = None,
    ):
        inputs = model.inputs
        self.model, self.tolerance, self.chemistry = model, tolerance, chemistry
        kept = [k for k in range(inputs.unknowns) if k != without]
        self.kept = np.array(kept, dtype=np.intp)
        self.unknown = inputs.free[len(inputs.free) - inputs.unknowns :][self.kept]
        self.low = np.array([inputs.numbers[i].low for i in self.unknown])
        self.span = np.array([inputs.numbers[i].high for i in self.unknown]) - self.low
        self.evaluations = 0

    def at(self, v: Array, mesh: Stages | None = None, slopes: bool = True) -> Trial:
        """One pass at v (V,), on new steps or on those of a mesh."""
        model = self.model
        u, du = model.inputs.of_numbers(v)
        du = np.ascontiguousarray(du[:, self.unknown]) if slopes else np.zeros((len(u), 0))
        if mesh is None:
            outcome = model.passing.adaptive(u, du, self.tolerance, places=False, chemistry=self.chemistry)
        else:
            outcome = model.passing.frozen(u, du, mesh, places=False, chemistry=self.chemistry)
        self.evaluations += 1
        if outcome.failure:
            return Trial(np.zeros(0), np.zeros((0, 0)), None, None, outcome.failure)
        base = model.partial_base(outcome.out, u, du)
        rows = residuals(model.layout.closures, base)[self.kept]
        return Trial(rows[:, 0], rows[:, 1:], outcome.stages, base)

    def solve(self, v: Array) -> Solved:
        """The answer that Newton reaches from v."""
        v = v.copy()
        trial, mesh, step = self.at(v), None, np.inf
        for _ in range(ITERATIONS):
            if trial.failure:
                return Solved(v, trial.residual, trial.jacobian, step, None, self.evaluations, trial.failure)
            move = self._move(trial)
            step = float(np.abs(move / self.span).max())
            if step < NEAR:
                break
            found = self._damped(v, trial, move)
            if found is None:
                why = "Newton's steps find no answer"
                return Solved(v, trial.residual, trial.jacobian, step, None, self.evaluations, why)
            v, trial = found
        else:
            why = f"no answer after {ITERATIONS} steps"
            return Solved(v, trial.residual, trial.jacobian, step, None, self.evaluations, why)
        mesh = trial.mesh
        return self.sharpened(v, trial, mesh)

    def sharpened(self, v: Array, trial: Trial, mesh: Stages | None) -> Solved:
        """Steps on the last mesh until nothing moves."""
        step = np.inf
        for _ in range(SHARPENING):
            move = self._move(trial)
            now = float(np.abs(move / self.span).max())
            if now >= 0.5 * step and step < 1e3 * CLOSED:
                break
            step = now
            v = v.copy()
            v[self.unknown] += move
            trial = self.at(v, mesh)
            if trial.failure:
                return Solved(v, trial.residual, trial.jacobian, step, None, self.evaluations, trial.failure)
            if step < CLOSED:
                break
        return Solved(v, trial.residual, trial.jacobian, step, mesh, self.evaluations)

    def _move(self, trial: Trial) -> Array:
        """The Newton step, shortened where an unknown would go too far."""
        try:
            move = -np.linalg.solve(trial.jacobian * self.span, trial.residual) * self.span
        except np.linalg.LinAlgError:
            move = -np.linalg.lstsq(trial.jacobian * self.span, trial.residual, rcond=None)[0] * self.span
        far = float(np.abs(move / self.span).max())
        return np.asarray(move * min(1.0, FARTHEST / far) if far > 0.0 else move)

    def _damped(self, v: Array, trial: Trial, move: Array) -> tuple[Array, Trial] | None:
        """The first point along the step where the residual, scaled as at its start, falls."""
        size = np.linalg.norm(trial.jacobian * self.span, axis=1)
        size = np.where(size > 0.0, size, 1.0)
        before = float(np.linalg.norm(trial.residual / size))
        share = 1.0
        for _ in range(HALVINGS):
            there = v.copy()
            moved = there[self.unknown] + share * move
            there[self.unknown] = np.clip(moved, self.low, self.low + self.span)
            found = self.at(there)
            if not found.failure:
                after = float(np.linalg.norm(found.residual / size))
                if after < before or after < 1e-9:
                    return there, found
            share *= 0.5
        return None


def put(model: Model, x: Array, v: Array) -> Array:
    """x with its unknowns taken from v."""
    x = x.copy()
    users = len(model.inputs.free) - model.inputs.unknowns
    x[users : len(model.inputs.free)] = v[model.inputs.free[users:]]
    return x


def closed_from(model: Model, x: Array) -> Array:
    """x with its closures closed: by Newton from where it stands, else at the hottest state there is.

    Where the unknowns stand as compiled the hottest state is looked for at once. x comes back unchanged where
    there is none.
    """
    from reactorstage.train.states import states

    v = model.inputs.all_numbers(x)
    unknown = model.inputs.free[len(model.inputs.free) - model.inputs.unknowns :]
    if not np.array_equal(v[unknown], [model.inputs.numbers[i].now for i in unknown]):
        found = Closing(model).solve(v)
        if not found.failure:
            return put(model, x, found.v)
    known = states(model, v).states
    return put(model, x, known[0].v) if known else x


def begun_from(model: Model, x: Array) -> Array:
    """x at its hottest state or, where none lies above the nearest fold, at the fold, its closures open."""
    from reactorstage.train.states import states

    known = states(model, model.inputs.all_numbers(x))
    fold = min((one for one in known.folds if one.least), key=lambda one: one.needed, default=None)
    if fold is not None and all(state.heat < fold.heat for state in known.states):
        return put(model, x, fold.v)
    return put(model, x, known.states[0].v) if known.states else x


def closed(model: Model, v: Array, tolerance: float = FINAL, chemistry: Chemistry | None = None) -> Solved:
    """The answer nearest to v at a tolerance."""
    return Closing(model, tolerance, chemistry).solve(v)
