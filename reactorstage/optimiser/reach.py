"""How far the worth of a limit holds, what takes over then, and which two limits pay only together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from itertools import combinations

import numpy as np

from reactorstage.optimiser.conflict import broken_amounts
from reactorstage.optimiser.multipliers import AT_WORK
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.reasons import Pair, Reach
from reactorstage.optimiser.resolve import Base, resolve
from reactorstage.optimiser.result import Worth
from reactorstage.optimiser.scaling import needed, ranges
from reactorstage.optimiser.wrappers import Shifted

FAR = 1e3
HALF = 0.5
BISECTIONS = 3
DOUBLINGS = 10
MORE_THAN_ALONE = 1.25
MOST_PAIRS = 28
KNOWN_ANSWERS = 3


@dataclass(frozen=True)
class Relaxed:
    """The best with limits relaxed by a number of steps: what it saves and where it stands."""

    steps: float
    saves: float
    x: Array | None


def reach(base: Base, moved: Worth) -> Reach | None:
    """How far relaxing one limit (or all owners of one) pays; None where no re-solve ended.

    First without the limit, which tells where it lets go; then at 1, 2, 4, ... steps until a part saves
    less than half as much, per unit, as the first step, and between these by bisection.
    """
    free = relaxed(base, moved, FAR, ())
    if free.x is None:
        return None
    lets_go = crossed(base, moved, free.x)
    free = Relaxed(lets_go, free.saves, free.x)
    last, broke = kept(base, moved, free)
    rows, names = newcomers(base, last if broke is None else broke, moved)
    return Reach(
        holds=last.steps * moved.step,
        saved=last.saves,
        takes_over=rows,
        takes_over_range=names,
        lets_go=lets_go * moved.step,
        saved_in_all=free.saves,
    )


def kept(base: Base, moved: Worth, free: Relaxed) -> tuple[Relaxed, Relaxed | None]:
    """The last relaxation at which the worth holds and, unless the limit lets go there, the next one."""
    first = Relaxed(1.0, moved.saves or 0.0, None) if free.steps > 1.0 else free
    if first.saves <= base.noise:
        return Relaxed(0.0, 0.0, base.known[0]), relaxed(base, moved, min(1.0, free.steps), (free.x,))
    least = HALF * first.saves / first.steps
    last = first
    for _ in range(DOUBLINGS):
        if last.steps >= free.steps:
            return free, None
        ahead = relaxed(base, moved, 2.0 * last.steps, (last.x,)) if 2.0 * last.steps < free.steps else free
        if ahead.x is None or ahead.saves - last.saves < least * (ahead.steps - last.steps):
            return between(base, moved, last, ahead, least)
        last = ahead
    return last, None


def between(
    base: Base, moved: Worth, good: Relaxed, bad: Relaxed, least: float
) -> tuple[Relaxed, Relaxed | None]:
    """The break between two relaxations, by bisection."""
    for _ in range(BISECTIONS):
        middle = relaxed(base, moved, 0.5 * (good.steps + bad.steps), (good.x, bad.x))
        held = middle.x is not None and middle.saves - good.saves >= least * (middle.steps - good.steps)
        good, bad = (middle, bad) if held else (good, middle)
    return good, bad


def relaxed(base: Base, moved: Worth, steps: float, points: Sequence[Array | None]) -> Relaxed:
    """Re-solve with the limits of a worth relaxed by steps, from the known answers and some points."""
    limits = base.programme.limits
    amounts = np.zeros(len(limits))
    amounts[list(moved.limits)] = [steps * limits[k].step for k in moved.limits]
    starts = [*base.known[:KNOWN_ANSWERS], *(x for x in points if x is not None)]
    found = resolve(Shifted(base.programme, amounts), starts, base)
    return Relaxed(steps, base.cost - found.cost, found.x)


def crossed(base: Base, moved: Worth, x: Array) -> float:
    """By how many of their steps the limits of a worth are crossed at x, the most of them."""
    evaluation = base.programme.final(x)
    if not evaluation.ok:
        return 0.0
    own = broken_amounts(evaluation)
    return max(float(own[k]) / base.programme.limits[k].step for k in moved.limits)


def newcomers(base: Base, at: Relaxed, moved: Worth) -> tuple[tuple[int, ...], tuple[str, ...]]:
    """Limits, and numbers at an end of their range, at work after a relaxation that are not at the best.

    Limits that only keep the books of internal numbers are left out.
    """
    if at.x is None:
        return (), ()
    before, after = (standing(base, x) for x in (base.known[0], at.x))
    internal = np.array([number.internal for number in base.programme.numbers])
    there = base.programme.final(at.x)
    books = np.any(needed(there.margin_dx)[:, internal] != 0.0, axis=1) if there.ok else np.zeros(0)
    rows = [
        k
        for k in sorted(after[0] - before[0] - set(moved.limits))
        if not (base.programme.limits[k].implied and books[k])
    ]
    return tuple(rows), tuple(name for name in after[1] if name not in before[1])


def standing(base: Base, x: Array) -> tuple[set[int], list[str]]:
    """Limits at zero margin at x and user numbers at an end of their range."""
    there = base.programme.final(x)
    if not there.ok:
        return set(), []
    scales = np.array([limit.scale for limit in base.programme.limits])
    sizes = np.maximum(np.abs(needed(there.weight)) * scales, 1e-300)
    held = np.flatnonzero(np.abs(needed(there.margin)) / sizes <= 10.0 * AT_WORK)
    low, span, upper = ranges(base.programme.numbers)
    u = (x - low) / span
    ends = (u <= AT_WORK) | (u >= upper - AT_WORK)
    names = [n.name for n, end in zip(base.programme.numbers, ends, strict=True) if end and not n.internal]
    return {int(k) for k in held}, names


def pair_tasks(base: Base, worths: Sequence[Worth]) -> list[partial[Pair | None]]:
    """One task for each two single limits at work; those that cost most to tighten where there are many."""
    single = {one.limits[0]: one for one in worths if len(one.limits) == 1 and one.saves is not None}
    ranked = sorted(single.values(), key=lambda one: (-(one.costs or 0.0), one.limits))
    pairs = list(combinations(ranked, 2))[:MOST_PAIRS]
    return [partial(pair, base, one, other) for one, other in pairs]


def pair(base: Base, one: Worth, other: Worth) -> Pair | None:
    """Two limits relaxed by their steps; None unless together they save clearly more than one by one."""
    limits = base.programme.limits
    amounts = np.zeros(len(limits))
    rows = (one.limits[0], other.limits[0])
    amounts[list(rows)] = [limits[k].step for k in rows]
    found = resolve(Shifted(base.programme, amounts), base.known[:KNOWN_ANSWERS], base)
    alone = (one.saves or 0.0, other.saves or 0.0)
    together = base.cost - found.cost
    if found.x is None or together <= MORE_THAN_ALONE * sum(alone) + 10.0 * base.noise:
        return None
    return Pair(rows, together, alone)
