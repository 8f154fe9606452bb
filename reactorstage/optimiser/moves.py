"""The way from today's setting to the answer in moves that an operator can make one after another.

Each move sets one number, or a few at once where one alone would break a limit. What today breaks may not be
broken further, and once a setting is inside all limits every later one is.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field, replace
from itertools import combinations

import numpy as np

from reactorstage.optimiser.asked import Asked
from reactorstage.optimiser.conflict import broken_amounts
from reactorstage.optimiser.oracle import checked
from reactorstage.optimiser.programme import Array, Programme
from reactorstage.optimiser.reasons import Move, Moves
from reactorstage.optimiser.resolve import Base
from reactorstage.optimiser.rounding import rounded

AT_ONCE = 3
MOST_STATES = 600
MET = 1e-6
NO_SETTING = "no setting of values that can be entered was found inside all limits"
OTHER_STATE = (
    "the answer is another state than today's: from there its settings alone do not lead to it, it has to be "
    "started up"
)

Moved = frozenset[int]


@dataclass(frozen=True)
class Stand:
    """A setting on the way: which numbers have moved, x, cost and by how much (M,) limits are broken."""

    moved: Moved
    x: Array
    cost: float
    broken: Array

    @property
    def inside(self) -> bool:
        return not np.any(self.broken > 0.0)


@dataclass
class Way:
    """The numbers that go from today's values to the target's, and the settings looked at so far."""

    programme: Programme
    today: Array
    target: Array
    stands: dict[Moved, Stand | None] = field(default_factory=dict)
    dead: set[Moved] = field(default_factory=set)

    def at(self, moved: Moved) -> Stand | None:
        """The setting with these numbers moved, rated at the final tolerance; None where it has no answer."""
        if moved not in self.stands:
            self.stands[moved] = self._rated(moved)
        return self.stands[moved]

    def _rated(self, moved: Moved) -> Stand | None:
        x = self.today.copy()
        x[list(moved)] = self.target[list(moved)]
        x = self.programme.complete(x)
        there = checked(self.programme.final(x))
        if not there.ok:
            return None
        own = broken_amounts(there)
        scales = np.array([limit.scale for limit in self.programme.limits])
        return Stand(moved, x, there.cost, np.where(own > MET * scales, own, 0.0))


def moves_to(base: Base, asked: Asked, noise: float, today: Array) -> Moves:
    """Rounded settings near the best answer and an order of moves from today's setting to them.

    A number that may stay as today for less than noise stays.
    """
    found = rounded(base, asked, today)
    way = Way(base.programme, today, today)
    start = way.at(frozenset())
    if start is None:
        return Moves(np.nan, (), None, np.nan, note="today's setting has no answer to start from")
    broken = tuple(int(k) for k in np.flatnonzero(start.broken))
    if found is None:
        return Moves(start.cost, (), None, start.cost, broken=broken, note=NO_SETTING)
    way = Way(base.programme, today, found[0], {frozenset(): start})
    wanted = changed(base.programme, today, found[0])
    end = way.at(wanted)
    if end is None or not end.inside:
        return Moves(start.cost, (), None, start.cost, broken=broken, note=OTHER_STATE)
    kept = worth_moving(way, wanted, noise)
    steps = ordered(way, start, kept) or [kept]
    made = told(way, start, steps, tuple(sorted(wanted - kept)))
    return replace(made, held=not_entered(base, asked, today))


def not_entered(base: Base, asked: Asked, today: Array) -> tuple[int, ...]:
    """Numbers that would move but cannot be entered."""
    assert asked.steps is not None
    moved = changed(base.programme, today, base.known[0])
    return tuple(k for k in sorted(moved) if asked.steps[k] <= 0.0)


def changed(programme: Programme, today: Array, target: Array) -> Moved:
    """User numbers whose values differ."""
    return frozenset(
        k
        for k, number in enumerate(programme.numbers)
        if not number.internal and abs(target[k] - today[k]) > 1e-9 * max(number.high - number.low, 1e-300)
    )


def worth_moving(way: Way, wanted: Moved, noise: float) -> Moved:
    """The numbers without those that may stay as today: the end stays inside, each loses less than noise."""
    kept = wanted
    while kept:
        here = way.at(kept)
        if here is None:
            return kept
        less = [(stand, k) for k in sorted(kept) if (stand := way.at(kept - {k})) and stand.inside]
        loss, k = min(((stand.cost - here.cost, k) for stand, k in less), default=(np.inf, -1))
        if loss >= noise:
            return kept
        kept = kept - {k}
    return kept


def allowed(before: Stand, after: Stand | None, today: Stand) -> bool:
    """Whether a move keeps what it must: inside stays inside, else nothing is broken further than today."""
    if after is None or (before.inside and not after.inside):
        return False
    return bool(np.all(after.broken <= today.broken * (1.0 + 1e-9)))


def ordered(way: Way, start: Stand, kept: Moved) -> list[Moved] | None:
    """Groups of numbers in an order of allowed moves, the cheapest setting next; None when none is found."""
    return _onwards(way, start, start, kept)


def _onwards(way: Way, here: Stand, today: Stand, kept: Moved) -> list[Moved] | None:
    if here.moved == kept:
        return []
    if here.moved in way.dead:
        return None
    for group in _next(way, here, today, kept - here.moved):
        after = way.at(here.moved | group)
        assert after is not None
        rest = _onwards(way, after, today, kept)
        if rest is not None:
            return [group, *rest]
    way.dead.add(here.moved)
    return None


def _next(way: Way, here: Stand, today: Stand, left: Moved) -> Iterable[Moved]:
    """Groups that may move next: what brings a broken setting inside, what gains, then what makes room."""
    if not here.inside:
        yield from _allowed(way, here, today, left, lambda after: after.inside)
    yield from _allowed(way, here, today, left, lambda after: after.cost <= here.cost)
    yield from _allowed(way, here, today, left, lambda after: True)
    yield left


def _allowed(
    way: Way, here: Stand, today: Stand, left: Moved, wanted: Callable[[Stand], bool]
) -> Iterable[Moved]:
    """Allowed groups that end as wanted, single numbers first, by the cost behind them."""
    for size in range(1, AT_ONCE + 1):
        found = []
        for group in combinations(sorted(left), size):
            if len(way.stands) >= MOST_STATES:
                break
            after = way.at(here.moved | frozenset(group))
            if after is not None and allowed(here, after, today) and wanted(after):
                found.append((after.cost, group))
        yield from (frozenset(group) for _, group in sorted(found))


def told(way: Way, start: Stand, steps: Sequence[Moved], dropped: tuple[int, ...]) -> Moves:
    """The moves with their gains, from the settings on the way."""
    here, listed = start, []
    for group in steps:
        if not group:
            continue
        after = way.at(here.moved | group)
        assert after is not None, "a move ends at a setting that was rated"
        places = tuple(sorted(group))
        mends = tuple(int(k) for k in np.flatnonzero((here.broken > 0.0) & (after.broken == 0.0)))
        values = tuple(float(after.x[k]) for k in places)
        listed.append(Move(places, values, after.x, after.cost, here.cost - after.cost, mends))
        here = after
    broken = tuple(int(k) for k in np.flatnonzero(start.broken))
    return Moves(start.cost, tuple(listed), here.x, here.cost, dropped, broken=broken)
