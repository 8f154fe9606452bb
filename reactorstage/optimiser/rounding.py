"""The best setting made of values that can be entered: rounded one by one, the others re-optimised each time.

Branch and bound, depth first (Land and Doig 1960, from memory) with the nearer value of each number first and
a cap on the settings tried. Values are local optima, so the answer is good, not proven best.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from reactorstage.optimiser.asked import Asked
from reactorstage.optimiser.oracle import checked
from reactorstage.optimiser.programme import Array, Programme
from reactorstage.optimiser.resolve import Base, finished, resolve
from reactorstage.optimiser.scaling import needed
from reactorstage.optimiser.solve import descend
from reactorstage.optimiser.wrappers import Pinned

MOST_NODES, MOST_WIDE_NODES = 60, 110
MET = 1e-6


@dataclass
class _Search:
    """The best rounded setting so far and the number of settings tried; wide: two values on either side."""

    base: Base
    asked: Asked
    most: int
    wide: bool
    cost: float = float("inf")
    x: Array | None = None
    nodes: int = 0
    places: list[int] = field(default_factory=list)


def rounded(base: Base, asked: Asked, today: Array) -> tuple[Array, float] | None:
    """x (D,) with every user number at a value that can be entered, inside all limits, and its cost.

    Numbers that cannot be entered stay as today. Where the values right below and above lead nowhere, those
    next to them are tried too. None where none is found.
    """
    assert asked.steps is not None
    users = [k for k, number in enumerate(base.programme.numbers) if not number.internal]
    fixed = {k: float(today[k]) for k in users if asked.steps[k] <= 0.0}
    begun = _begun(base, fixed, today)
    if begun is None:
        return None
    x, cost = begun
    places = [k for k in users if k not in fixed]
    for most, wide in ((MOST_NODES, False), (MOST_WIDE_NODES, True)):
        search = _Search(base, asked, most, wide, places=places)
        _dive(search, fixed, x, cost)
        if search.x is not None:
            return search.x, search.cost
    return None


def _begun(base: Base, fixed: dict[int, float], today: Array) -> tuple[Array, float] | None:
    """The best with what cannot be entered as it is today."""
    if all(abs(base.known[0][k] - value) <= 1e-12 * max(abs(value), 1.0) for k, value in fixed.items()):
        return base.known[0], base.cost
    programme = Pinned(base.programme, fixed)
    found = resolve(programme, [programme.free(x) for x in (*base.known, today)], base)
    return None if found.x is None else (programme.full(found.x), found.cost)


def _dive(search: _Search, pinned: dict[int, float], x: Array, cost: float) -> None:
    """Pin the number that lies nearest to a value, below and above, and go on with the cheaper first."""
    if search.nodes >= search.most or cost >= search.cost - search.base.noise:
        return
    open_places = [k for k in search.places if k not in pinned]
    if not open_places:
        _settle(search, x)
        return
    k = min(open_places, key=lambda k: (_away(search, k, float(x[k])), k))
    children = []
    for value in _values(search, k, float(x[k])):
        search.nodes += 1
        found = _solved(search.base, {**pinned, k: value}, x)
        if found is not None:
            children.append((found[1], value, found[0]))
    for child_cost, value, child in sorted(children, key=lambda one: one[:2]):
        _dive(search, {**pinned, k: value}, child, child_cost)


def _away(search: _Search, k: int, value: float) -> float:
    below, above = search.asked.grid(k, value)
    return min(value - below, above - value) / (above - below) if above > below else 0.0


def _values(search: _Search, k: int, value: float) -> list[float]:
    """The values that can be entered around one, the nearer first, inside the range."""
    number = search.base.programme.numbers[k]
    below, above = search.asked.grid(k, value)
    assert search.asked.steps is not None
    step = float(search.asked.steps[k])
    around = {below, above} | ({below - step, above + step} if search.wide else set())
    found = sorted(around, key=lambda one: abs(one - value))
    slack = 1e-9 * max(abs(number.high), 1.0)
    return [one for one in found if number.low - slack <= one <= number.high + slack]


def _solved(base: Base, pinned: dict[int, float], x: Array) -> tuple[Array, float] | None:
    """The best with numbers pinned, from x; None when nothing inside is found."""
    programme = Pinned(base.programme, pinned)
    if not programme.numbers:
        whole = programme.full(np.zeros(0))
        cost = cost_inside(base.programme, whole)
        return None if cost is None else (whole, cost)
    ending = descend(programme, programme.free(x), base.size, stop=base.stop)
    if not ending.feasible:
        return None
    found = finished(programme, ending, base)
    return None if found.x is None else (programme.full(found.x), found.cost)


def _settle(search: _Search, x: Array) -> None:
    """Keep a setting whose numbers are all pinned when it is inside at the final tolerance and cheaper."""
    whole = search.base.programme.complete(x)
    cost = cost_inside(search.base.programme, whole)
    if cost is not None and cost < search.cost:
        search.cost, search.x = cost, whole


def cost_inside(programme: Programme, x: Array) -> float | None:
    """The cost at x at the final tolerance; None where it breaks a limit or has no value."""
    there = checked(programme.final(x))
    if not there.ok:
        return None
    scales = np.array([limit.scale for limit in programme.limits])
    inside = np.all(needed(there.margin) >= -MET * scales * np.abs(needed(there.weight)))
    return there.cost if inside else None
