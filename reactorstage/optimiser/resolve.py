"""Re-solving a changed programme from answers that are known: the base of every explanation."""

from __future__ import annotations

import threading
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.local import local_solve
from reactorstage.optimiser.multipliers import NEAR, multipliers
from reactorstage.optimiser.polish import answer_at
from reactorstage.optimiser.programme import Array, Programme
from reactorstage.optimiser.scaling import scale_at, scaled
from reactorstage.optimiser.solve import Ending, descend

INSIDE_ENOUGH = 1e-6
NOISE = 1e-6


@dataclass(frozen=True)
class Base:
    """What is explained: the programme, the answers' x with the best first, its cost, a cost size."""

    programme: Programme
    known: tuple[Array, ...]
    cost: float
    size: float
    stop: threading.Event | None = None

    @property
    def noise(self) -> float:
        """Differences of cost below this say nothing."""
        return NOISE * max(abs(self.cost), self.size)


@dataclass(frozen=True)
class Resolved:
    """The best end of a re-solve at the final tolerance; x is None when none is inside the limits.

    nearest is then the least-violating x, where the limits were shown to hold each other.
    """

    x: Array | None = None
    cost: float = float("nan")
    nearest: Array | None = None


def resolve(programme: Programme, points: Iterable[Array], base: Base, restore: bool = True) -> Resolved:
    """Cheapest local optimum of a changed programme from the given points.

    Where limits stay broken they are let give way first, unless restore is off; that costs far more than
    the rest.
    """
    solve = local_solve if restore else descend
    endings = [solve(programme, x, base.size, stop=base.stop) for x in points]
    ended = [ending for ending in endings if ending.feasible and not ending.stopped]
    found = [finished(programme, ending, base) for ending in ended]
    inside = [result for result in found if result.x is not None]
    if inside:
        return min(inside, key=lambda result: result.cost)
    give, k = min(((ending.give, k) for k, ending in enumerate(endings)), default=(np.inf, 0))
    return Resolved(nearest=endings[k].x if np.isfinite(give) else None)


def finished(programme: Programme, ending: Ending, base: Base) -> Resolved:
    """An ending at the final tolerance; without x when a limit is broken there."""
    assert ending.x is not None
    held = None
    if ending.evaluation is not None:
        scale = scale_at(programme, ending.evaluation, base.size)
        held = multipliers(scaled(ending.evaluation, ending.x, scale), scale.upper, NEAR)
    answer = answer_at(programme, ending.x, base.size, held)
    if answer is None or answer.violation > INSIDE_ENOUGH:
        return Resolved()
    return Resolved(answer.x, answer.cost)
