"""How the cost of a pass grows with beds, species, reactions and stiffness, on generated trains."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path

import numpy as np

from tests.benchmarks.generated import EVERY_NUMBER, Size, train
from tests.benchmarks.kernel_route import KernelRoute
from tests.benchmarks.timing import Timing, interleaved

VALUE, GRADIENT, ADAPTIVE = "value", "value and gradient", "value and gradient, adaptive"

SERIES: dict[str, tuple[str, tuple[float, ...], Size]] = {
    "beds": ("beds", (1, 2, 3, 4, 6, 8, 12), Size()),
    "beds, two numbers free in each": ("beds", (1, 2, 3, 4, 6, 8, 12), Size(free=EVERY_NUMBER)),
    "species": ("species", (4, 8, 12, 20, 28, 40), Size(reactions=2)),
    "reactions": ("reactions", (1, 2, 3, 5, 8, 12, 16, 20), Size(species=24)),
    "stiffness": ("stiffness", (1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6), Size()),
}
"""What grows, through which values, starting from which train."""


@dataclass(frozen=True)
class Point:
    """Cost of one size: seconds by what is asked for, integration steps, free numbers."""

    value: float
    timings: dict[str, Timing]
    steps: int
    free: int


@dataclass(frozen=True)
class Growth:
    """One series; exponents are those of cost ~ value^exponent over its last three points, least times."""

    name: str
    points: tuple[Point, ...]

    def exponent(self, what: str) -> float:
        last = self.points[-3:]
        sizes, costs = [p.value for p in last], [p.timings[what].least for p in last]
        return float(np.polyfit(np.log(sizes), np.log(costs), 1)[0])


def growths(rounds: int = 15) -> list[Growth]:
    """All series, each measured with its sizes in turn."""
    return [growth(name, *series, rounds) for name, series in SERIES.items()]


def growth(name: str, field: str, values: Sequence[float], start: Size, rounds: int) -> Growth:
    kind = type(getattr(start, field))
    trains = [train(replace(start, **{field: kind(value)})) for value in values]
    jobs = [tasks(KernelRoute(one)) for one in trains]
    timings = interleaved({f"{k} {w}": task for k, job in enumerate(jobs) for w, task in job.items()}, rounds)
    points = [
        Point(
            value,
            {what: timings[f"{k} {what}"] for what in (VALUE, GRADIENT, ADAPTIVE)},
            int(KernelRoute(one).mesh(one.now).counts.sum()),
            len(one.numbers),
        )
        for k, (value, one) in enumerate(zip(values, trains, strict=True))
    ]
    return Growth(name, tuple(points))


def tasks(route: KernelRoute) -> dict[str, Callable[[], object]]:
    """What is timed of one train, at a setting a little away from the one of the mesh."""
    programme = route.programme
    low = np.array([number.low for number in programme.numbers])
    high = np.array([number.high for number in programme.numbers])
    mesh = route.mesh(programme.now)
    x = programme.now + 0.02 * (high - low) * np.cos(np.arange(len(low)))
    return {
        VALUE: partial(route.frozen_value, x, mesh),
        GRADIENT: partial(route.value_and_gradient, x, mesh),
        ADAPTIVE: partial(programme.start_mesh, x),
    }


def lines(found: Sequence[Growth]) -> list[str]:
    """Tables of all series, least times in ms: those are least disturbed by what else runs."""
    out: list[str] = []
    for one in found:
        out += ["", f"{one.name:<32}{'steps':>8}{'free':>6}{VALUE:>10}{GRADIENT:>22}{'adaptive':>12}   ms"]
        for p in one.points:
            ms = [1e3 * p.timings[what].least for what in (VALUE, GRADIENT, ADAPTIVE)]
            out.append(f"{p.value:>32g}{p.steps:>8}{p.free:>6}{ms[0]:>10.3f}{ms[1]:>22.3f}{ms[2]:>12.3f}")
        a, b, c = (one.exponent(what) for what in (VALUE, GRADIENT, ADAPTIVE))
        out.append(f"{'exponent at the upper end':>32}{'':>14}{a:>10.2f}{b:>22.2f}{c:>12.2f}")
    return out


def draw(found: Sequence[Growth], folder: Path) -> Path:
    """Picture of all series, written to a folder."""
    import matplotlib

    matplotlib.use("agg")
    import matplotlib.pyplot as plt

    figure, axes = plt.subplots(1, len(found), figsize=(4 * len(found), 4), sharey=True, layout="constrained")
    for one, ax in zip(found, axes, strict=True):
        for what in (VALUE, GRADIENT, ADAPTIVE):
            costs = [1e3 * p.timings[what].least for p in one.points]
            ax.loglog([p.value for p in one.points], costs, "o-", label=f"{what}: {one.exponent(what):.1f}")
        values = [p.value for p in one.points]
        ax.set_xticks(values, [f"{value:g}" if value < 1e3 else f"{value:.0e}" for value in values])
        ax.minorticks_off()
        ax.set(xlabel=one.name)
        ax.legend(fontsize=8, title="exponent at the upper end", title_fontsize=8)
    axes[0].set(ylabel="ms per pass")
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / "scaling.png"
    figure.savefig(path, dpi=120)
    plt.close(figure)
    return path
