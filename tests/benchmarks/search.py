"""How long the search takes: one local optimum, many starts, and the same by SciPy alone."""

from __future__ import annotations

from dataclasses import dataclass
from functools import partial

import numpy as np

from reactorstage.optimiser import optimise
from reactorstage.optimiser.local import local_solve
from reactorstage.optimiser.search import cost_size
from reactorstage.optimiser.solve import Ending
from reactorstage.optimiser.starts import starts
from reactorstage.optimiser.wrappers import Counted
from reactorstage.train.programme import TrainProgramme
from tests.benchmarks.lead import Array
from tests.benchmarks.scipy_route import ScipyRoute, optimum
from tests.benchmarks.timing import ONE_CORE, WALL, Timing, interleaved, seconds

STEP = 1e-6
"""Forward step of the finite differences as a share of each range: near the best at equal accuracy."""


@dataclass(frozen=True)
class LocalOptima:
    """Seconds of each local solve (the median of several rounds), and how they ended."""

    timing: Timing
    endings: tuple[Ending, ...]

    @property
    def ended(self) -> int:
        return sum(ending.optimal and ending.feasible for ending in self.endings)


def local_optima(programme: TrainProgramme, count: int = 20, rounds: int = 3) -> LocalOptima:
    """One local optimum from each of `count` starts, on one core."""
    counted = Counted(programme)
    points = starts(counted, count, 1)
    size, home = cost_size(counted, points), programme.complete(points[0].x)
    begins = [programme.complete(point.x) for point in points]
    endings = tuple(local_solve(counted, x, size, home=home) for x in begins)
    tasks = {str(k): partial(local_solve, counted, x, size, home=home) for k, x in enumerate(begins)}
    timings = interleaved(tasks, rounds, slot=0.0)
    return LocalOptima(Timing(tuple(timing.median for timing in timings.values())), endings)


def many_starts(programme: TrainProgramme, count: int = 40, rounds: int = 3) -> dict[str, Timing]:
    """The whole search on all processors, and the same with its explanation."""
    return interleaved(
        {
            "search": lambda: optimise(programme, starts=count, explain=False),
            "with explanation": lambda: optimise(programme, starts=count),
        },
        rounds,
        slot=0.0,
        clock=WALL,
    )


@dataclass(frozen=True)
class ScipyOptimum:
    """One local optimum by SciPy alone: seconds of one core, points rated, cost per second, violation."""

    seconds: float
    points: int
    cost: float
    violation: float


def scipy_optimum(programme: TrainProgramme, route: ScipyRoute, x: Array) -> ScipyOptimum:
    """SLSQP with finite differences from x, once."""
    low = np.array([number.low for number in programme.numbers])
    high = np.array([number.high for number in programme.numbers])
    found, _ = programme.start_mesh(x)
    assert found.weight is not None
    scale = np.array([limit.scale for limit in programme.limits]) * found.weight
    ended: list[tuple[Array, int]] = []

    def solve() -> None:
        done, points = optimum(route, x, low, high, scale, STEP)
        ended.append((low + (high - low) * done.x, points))

    taken = seconds(solve, clock=ONE_CORE)
    at, points = ended[0]
    value = route.value(at)
    return ScipyOptimum(taken, points, float(value[0]), float(max(0.0, (-value[1:] / scale).max())))
