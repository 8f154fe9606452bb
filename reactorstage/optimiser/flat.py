"""How far each number can be moved at next to no cost, with all others re-optimised."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from reactorstage.optimiser.programme import Array, Programme
from reactorstage.optimiser.pushed import Held, Pushed
from reactorstage.optimiser.reasons import FlatNumber
from reactorstage.optimiser.resolve import Base, resolve
from reactorstage.optimiser.scaling import needed
from reactorstage.optimiser.wrappers import Pinned

BISECTIONS = 8
AT_REST = 1e-3
MET = 1e-6


@dataclass(frozen=True)
class Handle:
    """What is moved: value = offset + direction @ x, width that of its range; index -1 for a split's rest."""

    name: str
    kind: str
    index: int
    direction: Array
    offset: float
    width: float

    def value(self, x: Array) -> float:
        return self.offset + float(self.direction @ x)


def handles(programme: Programme) -> list[Handle]:
    """Every user number, and behind the free entries of a split the bed that takes its rest."""
    numbers, unit = programme.numbers, np.eye(len(programme.numbers))
    found: list[Handle] = []
    for k, one in enumerate(numbers):
        if not one.internal and one.high > one.low:
            found.append(Handle(one.name, one.kind, k, unit[k], 0.0, one.high - one.low))
        for group in programme.splits:
            if group.rest_bed and group.indices and k == group.indices[-1]:
                name = rest_name(numbers[k].name, group.rest_bed)
                direction = -np.asarray(unit[list(group.indices)].sum(axis=0))
                room = group.total - group.fixed
                found.append(Handle(name, one.kind, -1, direction, room, group.total))
    return found


def rest_name(entry: str, bed: int) -> str:
    """ "bed 4.injected ethylene" for the entry "bed 3.injected ethylene"."""
    return f"bed {bed}.{entry.partition('.')[2]}"


def flat_number(base: Base, handle: Handle, band: float, today: Array) -> FlatNumber:
    """The spans of one number within the band above the best cost, and what leaving it alone costs.

    Each end is found by pushing the number as far as the limits and the cost allow, from every answer that
    costs no more than the band; a span is tried in the middle of either side, for it may have a gap.
    """
    budget = base.cost + band
    spans = [span(base, handle, x, budget, band) for x in within(base, budget)]
    best, old = handle.value(base.known[0]), handle.value(today)
    held = (*joined(spans, handle.width),)
    found = FlatNumber(handle.name, handle.kind, handle.index, best, old, held)
    return replace(found, staying=staying_cost(base, handle, old))


def within(base: Base, budget: float) -> list[Array]:
    """The best answer, and other answers that cost no more than the budget."""
    costs = (base.programme.final(x) for x in base.known[1:])
    others = [x for x, there in zip(base.known[1:], costs, strict=True) if there.ok and there.cost <= budget]
    return [base.known[0], *others]


def span(base: Base, handle: Handle, x: Array, budget: float, band: float) -> tuple[float, float]:
    """Lowest and highest value that can be reached from x without a gap in between."""
    ends = [reached(base, handle, x, sign, budget, band) for sign in (-1.0, 1.0)]
    return min(ends), max(ends)


def reached(base: Base, handle: Handle, x: Array, sign: float, budget: float, band: float) -> float:
    """How far the number goes from x to one side; back to the last value that held where there is a gap."""
    start = handle.value(x)
    pushed = Pushed(base.programme, sign * handle.direction / handle.width, budget, band)
    found = resolve(pushed, [x], replace(base, cost=0.0, size=1.0))
    if found.x is None or sign * (handle.value(found.x) - start) <= 0.0:
        return start
    if holds_between(base, handle, x, found.x, 0.5, budget):
        return handle.value(found.x)
    good, bad = 0.0, 0.5
    for _ in range(BISECTIONS):
        middle = 0.5 * (good + bad)
        good, bad = (
            (middle, bad) if holds_between(base, handle, x, found.x, middle, budget) else (good, middle)
        )
    return start + good * (handle.value(found.x) - start)


def holds_between(base: Base, handle: Handle, x: Array, end: Array, part: float, budget: float) -> bool:
    """Whether a setting within the budget has the value that lies a part of the way from x to the end."""
    between = x + part * (end - x)
    there = base.programme.start_mesh(between)[0]
    if there.ok and there.cost <= budget:
        scales = np.array([limit.scale for limit in base.programme.limits])
        if np.all(needed(there.margin) >= -MET * scales * np.abs(needed(there.weight))):
            return True
    held = Held(base.programme, handle.direction, handle.value(between) - handle.offset)
    found = resolve(held, [between, x], base)
    return found.x is not None and found.cost <= budget + base.noise


def joined(spans: Sequence[tuple[float, float]], width: float) -> list[tuple[float, float]]:
    """Spans that touch drawn together, the one of the first span first."""
    first, merged = spans[0], [spans[0]]
    for low, high in spans[1:]:
        touching = [
            one for one in merged if low <= one[1] + AT_REST * width and high >= one[0] - AT_REST * width
        ]
        merged = [one for one in merged if one not in touching]
        lows, highs = zip((low, high), *touching, strict=True)
        merged.append((min(lows), max(highs)))
    return sorted(merged, key=lambda one: (not one[0] <= first[0] <= one[1], one))


def staying_cost(base: Base, handle: Handle, value: float) -> float | None:
    """What it costs to hold a value, all else re-optimised; None where nothing inside is found."""
    held = Held(base.programme, handle.direction, value - handle.offset)
    found = resolve(held, base.known, base, restore=False)
    if found.x is None and not beyond_reach(base, handle, value):
        found = resolve(held, base.known, base)
    return None if found.x is None else max(found.cost - base.cost, 0.0)


def beyond_reach(base: Base, handle: Handle, value: float) -> bool:
    """Whether the limits stop the number short of a value, pushed towards it from every answer."""
    for x in base.known:
        sign = 1.0 if value >= handle.value(x) else -1.0
        pushed = Pushed(base.programme, sign * handle.direction / handle.width)
        found = resolve(pushed, [x], replace(base, cost=0.0, size=1.0), restore=False)
        if found.x is None or sign * (value - handle.value(found.x)) <= AT_REST * handle.width:
            return False
    return True


def left_alone(
    base: Base, found: Sequence[FlatNumber], band: float, today: Array
) -> tuple[tuple[str, ...], float]:
    """Numbers that may stay as today all at once within the band, cheapest first, and what that costs.

    A number that moves by next to nothing anyway is not named.
    """
    numbers = base.programme.numbers
    moved = [
        one
        for one in found
        if one.index >= 0
        and abs(one.today - one.best) > AT_REST * (numbers[one.index].high - numbers[one.index].low)
    ]
    able = [one for one in moved if one.staying is not None and one.staying <= band]
    chosen: list[FlatNumber] = []
    cost, points = 0.0, base.known
    for one in sorted(able, key=lambda one: (one.staying, one.index)):
        pinned = Pinned(base.programme, {each.index: float(today[each.index]) for each in [*chosen, one]})
        held = resolve(pinned, [pinned.free(x) for x in points], base)
        if held.x is not None and held.cost - base.cost <= band:
            chosen.append(one)
            cost, points = max(held.cost - base.cost, 0.0), (pinned.full(held.x), *base.known[:1])
    return tuple(one.name for one in chosen), cost
