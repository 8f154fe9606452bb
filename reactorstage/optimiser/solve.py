"""One local solve: frozen meshes, made anew at each answer until it stands still.

On a mesh SLSQP does the way, a Newton step along the limits at work the last bit. SLSQP's status code is
not trusted: scaled violation and Karush-Kuhn-Tucker residual on a fresh mesh decide.
"""

from __future__ import annotations

import threading
from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.newton import curvature, newton
from reactorstage.optimiser.oracle import Oracle, OutOfWorkError, Work
from reactorstage.optimiser.programme import Array, Evaluation, Programme
from reactorstage.optimiser.scaling import ranges, typical_change
from reactorstage.optimiser.slsqp import slsqp
from reactorstage.optimiser.state import FEASIBLE, STATIONARY, State, better, corrected, judged, state_at

NEARLY_STATIONARY = 1e-3
SAME_COST = 1e-6
ROUNDS = 6
CAP = 400
HALVINGS = 5
FIRST_PRECISION = 1e-6
PRECISION = 1e-10
NEWTON_BELOW = 0.03


@dataclass(frozen=True)
class Ending:
    """How a local solve ended.

    ended is a sentence; violation and residual are scaled; x is None when nothing could be evaluated,
    evaluation belongs to x on the mesh made there. optimal says that x is a local optimum. Where limits
    stay broken and were let give way, give is the least sum of scaled violations and x the place of it
    (evaluation is then None).
    """

    ended: str
    x: Array | None = None
    evaluation: Evaluation | None = None
    violation: float = float("inf")
    residual: float = float("inf")
    iterations: int = 0
    evaluations: int = 0
    stopped: bool = False
    optimal: bool = False
    give: float = float("inf")

    @property
    def feasible(self) -> bool:
        return self.x is not None and self.violation <= FEASIBLE

    @property
    def cost(self) -> float | None:
        return self.evaluation.cost if self.evaluation and self.evaluation.ok else None


def descend(
    programme: Programme,
    x: Array,
    size: float | None = None,
    *,
    cap: int = CAP,
    stop: threading.Event | None = None,
) -> Ending:
    """Local optimum from x (D,).

    size is a typical change of cost over the ranges (taken at x when None); cap bounds the evaluations;
    a set `stop` ends the solve at the best point so far. Never raises for a failed evaluation.
    """
    oracle = Oracle(programme, Work(cap, stop))
    try:
        state = begun(oracle, x, size)
    except OutOfWorkError:
        return Ending("stopped", stopped=oracle.work.stopped)
    if isinstance(state, str):
        return Ending(state, evaluations=oracle.work.spent)
    return rounds(oracle, state)


def begun(oracle: Oracle, x: Array, size: float | None) -> State | str:
    """The first state, or the sentence of the failure there."""
    low, span, upper = ranges(oracle.programme.numbers)
    x = low + span * np.clip((x - low) / span, 0.0, upper)
    evaluation = oracle.start(x)
    if not evaluation.ok:
        return evaluation.failure
    return judged(oracle, x, evaluation, size or typical_change(oracle.programme, evaluation))


def rounds(oracle: Oracle, state: State) -> Ending:
    """Improve on the mesh, make it anew, until the answer stands still or nothing is gained."""
    best = state
    try:
        for number in range(ROUNDS):
            on_mesh = improved(oracle, state, FIRST_PRECISION if number == 0 else PRECISION)
            fresh = remeshed(oracle, on_mesh, state)
            best = better(best, fresh)
            if stands_still(on_mesh, fresh):
                return ending(fresh, oracle.work, "local optimum", optimal=True)
            if number > 0 and not gained(state, fresh):
                break
            state = fresh
    except OutOfWorkError:
        return ending(best, oracle.work, "stopped" if oracle.work.stopped else "too many evaluations")
    return ending(best, oracle.work, "no further progress")


def improved(oracle: Oracle, state: State, precision: float) -> State:
    """A better state on the same mesh: by Newton near an optimum, else by SLSQP."""
    if state.feasible and state.residual <= NEWTON_BELOW:
        curved = curvature(oracle, state)
        moved = newton(oracle, state, curved) if curved else None
        if moved is not None and moved.residual <= STATIONARY:
            return moved
    return state_at(oracle, state, slsqp(oracle, state, precision)) or state


def remeshed(oracle: Oracle, state: State, last: State) -> State:
    """The state on a mesh made at its x and corrected there.

    Where no mesh can be made the point is drawn back towards the last state, which had one.
    """
    x = state.x
    for _ in range(HALVINGS):
        evaluation = oracle.start(x)
        if evaluation.ok:
            return corrected(oracle, judged(oracle, x, evaluation, state.size), state.found)
        x = 0.5 * (x + last.x)
    return last


def stands_still(on_mesh: State, fresh: State) -> bool:
    """True when the state on the fresh mesh is optimal, or on the last mesh at the same cost."""
    if fresh.done:
        return True
    same = abs(fresh.cost - on_mesh.cost) <= SAME_COST * max(abs(fresh.cost), fresh.size)
    return on_mesh.done and same and fresh.feasible and fresh.residual <= NEARLY_STATIONARY


def gained(before: State, after: State) -> bool:
    """True when a round brought less violation, less cost or less residual."""
    if not (before.feasible and after.feasible):
        return after.violation < 0.5 * before.violation
    cheaper = before.cost - after.cost > SAME_COST * max(abs(after.cost), after.size)
    return cheaper or after.residual < 0.5 * before.residual


def ending(state: State, work: Work, ended: str, optimal: bool = False) -> Ending:
    """The ending at a state."""
    if not work.stopped and not state.feasible:
        ended = "limits broken"
    return Ending(
        ended,
        state.x,
        state.evaluation,
        state.violation,
        state.residual,
        work.iterations,
        work.spent,
        work.stopped,
        optimal,
    )
