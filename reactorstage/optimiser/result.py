"""What an optimisation found. Money per second, own units of the limits in SI."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from reactorstage.optimiser.reasons import ConflictSet, Flatness, Moves, Pair, Reach

Array = NDArray[np.float64]

INSIDE = "inside all limits"
BROKEN = "limits broken"
CANNOT = "cannot meet all limits"
NO_ANSWER = "no answer"
PARTLY = "partly done"
STOPPED = "stopped by you"


@dataclass(frozen=True)
class Answer:
    """One end point of the search.

    violation is the largest scaled violation of a hard limit (own unit / scale), residual the scaled
    Karush-Kuhn-Tucker residual with sign-constrained least-squares multipliers; at_work the indices of
    limits with zero margin, multipliers (M,) money per second and own unit (zero where not at work);
    at_range names user numbers that sit at an end of their search range. curvature is the smallest
    second derivative of the Lagrangian along the limits at work, money per second for one search range
    squared: positive at a proper optimum, near zero where the answer is flat, None at a vertex. All
    values come from an evaluation at the final tolerance. A least-violating answer (status "cannot meet
    all limits") has no multipliers (zeros), and its residual is that of the least violation.
    """

    x: Array
    cost: float
    violation: float
    residual: float
    at_work: tuple[int, ...]
    multipliers: Array
    at_range: tuple[str, ...]
    margin: Array
    starts: int = 1
    curvature: float | None = None


@dataclass(frozen=True)
class StartRecord:
    """How one start ended: its name ("today", "equal split", "random 7"), a sentence, cost and counts.

    answer is the index of the distinct answer that it reached, -1 for none.
    """

    name: str
    ended: str
    cost: float | None
    answer: int
    iterations: int
    evaluations: int


@dataclass(frozen=True)
class Worth:
    """What relaxing and tightening one limit (all its owners together, or one alone) does, re-solved.

    saves and costs are >= 0 for one `step` (own unit) either way, None where the re-solve did not end or
    tightening leaves nothing feasible. limits holds the indices of the rows moved together. reach says how
    far relaxing pays, None where it was not asked for or did not end.
    """

    label: str
    owners: tuple[str, ...]
    limits: tuple[int, ...]
    step: float
    kind: str
    saves: float | None
    costs: float | None
    note: str = ""
    reach: Reach | None = None


@dataclass(frozen=True)
class EqualSplit:
    """Cost of equal shares with everything else re-optimised.

    penalty is money per second against the best answer under the same limits; relaxed holds
    (index of the limit, own-unit amount by which it had to be relaxed) when equal shares cannot meet
    the limits as they stand; note says it in words when it could not be found.
    """

    feed: str
    penalty: float | None
    cost: float | None
    x: Array | None
    relaxed: tuple[tuple[int, float], ...] = ()
    note: str = ""


@dataclass(frozen=True)
class Conflict:
    """Nothing is feasible: the least-violating answer and the limits that hold each other."""

    broken: tuple[tuple[int, float], ...]
    against: tuple[int, ...]


@dataclass(frozen=True)
class Optimum:
    """The result of `optimise`: best answer first, other distinct answers by cost.

    keep_away_cost is money per second that the keep-away amounts of all limits together cost, step_away_cost
    what it would cost to keep all limits by their step further away (None where that leaves nothing);
    discretisation_error the change of the best answer's cost from the search's tolerance to the final
    one, money per second; evaluations counts all evaluations of the programme. With the status "cannot
    meet all limits" the one answer is the least-violating one; answers is empty with "no answer".
    """

    status: str
    answers: tuple[Answer, ...]
    starts: tuple[StartRecord, ...]
    worths: tuple[Worth, ...] = ()
    equal_splits: tuple[EqualSplit, ...] = ()
    keep_away_cost: float | None = None
    conflict: Conflict | None = None
    discretisation_error: float | None = None
    evaluations: int = 0
    notes: tuple[str, ...] = field(default=())
    step_away_cost: float | None = None
    pairs: tuple[Pair, ...] = ()
    flatness: Flatness | None = None
    moves: Moves | None = None
    conflict_set: ConflictSet | None = None

    @property
    def best(self) -> Answer:
        return self.answers[0]
