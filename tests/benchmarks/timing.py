"""Times that can be compared on a noisy machine: everything in turn, many rounds, medians.

What runs on one core is measured by the processor's time: waiting for other programs is not in it.
"""

from __future__ import annotations

import os
import platform
import resource
import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from importlib.metadata import version
from statistics import median


@dataclass(frozen=True)
class Timing:
    """Seconds per call, one sample per round."""

    samples: tuple[float, ...]

    @property
    def median(self) -> float:
        return median(self.samples)

    @property
    def least(self) -> float:
        return min(self.samples)


Clock = Callable[[], float]

ONE_CORE: Clock = time.process_time
WALL: Clock = time.perf_counter


def children() -> float:
    """Processor seconds of all processes that were started and ended."""
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    return used.ru_utime + used.ru_stime


def seconds(task: Callable[[], object], calls: int = 1, clock: Clock = WALL) -> float:
    """Time of one call."""
    begun = clock()
    for _ in range(calls):
        task()
    return (clock() - begun) / calls


def interleaved(
    tasks: Mapping[str, Callable[[], object]], rounds: int = 15, slot: float = 0.02, clock: Clock = ONE_CORE
) -> dict[str, Timing]:
    """Every task once per round, repeated within the round until about `slot` seconds are spent.

    All are called once or twice beforehand, which makes them warm.
    """
    calls = {name: repeats(task, slot) for name, task in tasks.items()}
    samples: dict[str, list[float]] = {name: [] for name in tasks}
    for _ in range(rounds):
        for name, task in tasks.items():
            samples[name].append(seconds(task, calls[name], clock))
    return {name: Timing(tuple(values)) for name, values in samples.items()}


def repeats(task: Callable[[], object], slot: float) -> int:
    """How often a task goes into a slot, at least once."""
    first = seconds(task)
    return 1 if first >= slot else max(1, round(slot / seconds(task)))


def machine() -> str:
    """What the numbers were measured on, without a name."""
    libraries = ", ".join(f"{name} {version(name)}" for name in ("numpy", "scipy", "numba", "cantera"))
    return (
        f"{os.cpu_count()} processors ({platform.machine()}), Python {platform.python_version()}, {libraries}"
    )


def load() -> str:
    """How busy the machine is, for the record."""
    busy = os.getloadavg()[0] if hasattr(os, "getloadavg") else float("nan")
    return f"load {busy:.1f} on {os.cpu_count()} processors"
