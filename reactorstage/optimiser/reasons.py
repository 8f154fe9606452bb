"""What explains an answer beyond the worths: reach, pairs, flatness, moves, conflict sets.

Money per second or the cost of the aim, own units of limits and numbers in SI, as in `result`.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Reach:
    """How far the worth of relaxing a limit holds.

    holds (own unit) is the relaxation up to which each further part saves at least half as much, per unit, as
    the first step, and saved what it saves in all up to there. takes_over are the limits that come to work
    at its end, takes_over_range numbers that come to an end of their range. lets_go is the relaxation from
    which the limit no longer matters, saved_in_all what that brings; None where no re-solve ended.
    """

    holds: float
    saved: float
    takes_over: tuple[int, ...]
    takes_over_range: tuple[str, ...]
    lets_go: float | None
    saved_in_all: float | None


@dataclass(frozen=True)
class Pair:
    """Two limits (indices), each relaxed by its step: what both save together and each alone."""

    limits: tuple[int, int]
    together: float
    alone: tuple[float, float]


@dataclass(frozen=True)
class FlatNumber:
    """A number and the spans of it within which the cost stays in the band, all else re-optimised.

    name may be that of the rest of a split, which is no number of its own (index -1). The first span holds
    the best answer, others lie around other answers. staying is what it costs to leave it as it is today,
    None where that leaves nothing inside all limits or is unknown.
    """

    name: str
    kind: str
    index: int
    best: float
    today: float
    spans: tuple[tuple[float, float], ...]
    staying: float | None = None

    @property
    def holds_today(self) -> bool:
        """Whether today's value lies in one of the spans."""
        width = 1e-9 + 1e-6 * abs(self.today)
        return any(low - width <= self.today <= high + width for low, high in self.spans)


@dataclass(frozen=True)
class Flatness:
    """band of cost; the numbers; and those that may stay as today, all at once, for left_costs."""

    band: float
    numbers: tuple[FlatNumber, ...]
    left_alone: tuple[str, ...] = ()
    left_costs: float = 0.0


@dataclass(frozen=True)
class Move:
    """One move on the way to the answer: numbers (indices) set to values at once, x after it.

    gain is cost before less cost after; mends are limits that were broken before and hold after it.
    """

    numbers: tuple[int, ...]
    values: tuple[float, ...]
    x: Array
    cost: float
    gain: float
    mends: tuple[int, ...] = ()


@dataclass(frozen=True)
class Moves:
    """Settings that can be entered, in an order in which each is allowed by itself.

    start is the cost today, moves lead to x at cost; dropped are numbers that stay as today because moving
    them is not worth the noise, held those that the best answer moves but nobody can enter. broken are the
    limits that today breaks. note says why there are none.
    """

    start: float
    moves: tuple[Move, ...]
    x: Array | None
    cost: float
    dropped: tuple[int, ...] = ()
    held: tuple[int, ...] = ()
    broken: tuple[int, ...] = ()
    note: str = ""

    @property
    def gain(self) -> float:
        """Cost today less cost at the end."""
        return self.start - self.cost


@dataclass(frozen=True)
class Suffices:
    """Relaxing these limits (indices) alone by amount (own unit) makes a setting possible, at x.

    amount is None where none was found, however far they give.
    """

    limits: tuple[int, ...]
    amount: float | None
    x: Array | None = None


@dataclass(frozen=True)
class ConflictSet:
    """Limits that no setting meets together although any one less can be met.

    without holds, for each, an x that meets all the others of the set; starts is the number of local searches
    that found no setting; suffices what one limit alone, or one label in all its places, would have to give.
    """

    limits: tuple[int, ...]
    without: tuple[Array, ...]
    starts: int
    suffices: tuple[Suffices, ...] = ()
