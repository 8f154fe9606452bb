"""Numbers, limits and one evaluation with exact derivatives: what a compiled train gives to the optimiser.

Everything is in SI units and money per second. M limits, D numbers (user numbers first, then internal
ones: unknowns of closures, heat sent to a level, slacks of soft limits), E equations.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class FreeNumber:
    """One number of x with its search range.

    role is "split", "inlet temperature", "closure", "internal" or "other"; feed, bed and total are set for
    splits (bed counts from 1; total is the flow that the whole split sums to), bed for inlet temperatures.
    """

    name: str
    now: float
    low: float
    high: float
    kind: str
    role: str = "other"
    feed: str = ""
    bed: int = 0
    total: float = 0.0

    @property
    def internal(self) -> bool:
        """Whether it is no number of the user's: an unknown of a closure, or one that keeps books."""
        return self.role in ("internal", "closure")

    @property
    def book(self) -> bool:
        """Whether only money and limits depend on it, not the train."""
        return self.role == "internal"


@dataclass(frozen=True)
class SplitGroup:
    """A feed whose division over the beds is free.

    indices are the positions in x of its free entries (in bed order), rest_bed the bed that takes the
    rest (0: none), fixed the sum of the entries that are not free. carries is set for the stream that the
    train begins with, of which parts go round the first beds as cold shots: equal parts of it say nothing.
    """

    feed: str
    indices: tuple[int, ...]
    total: float
    fixed: float
    rest_bed: int
    carries: bool = False


@dataclass(frozen=True)
class LimitRow:
    """One bound on one quantity, as expanded: `hot exit` on `bed 4.exit temperature` at most 697 K.

    bound is in the quantity's own unit with keep_away already taken off; scale is a typical size of its
    margin; step the amount by which a worth is asked (own unit: 1 K, 0.1 mol/mol, 0.1 MW).
    soft_price is money per second and own unit, None for a hard limit. implied marks limits that the
    tool adds by itself (a cooler may not heat, no negative injection).
    """

    label: str
    owner: str
    quantity: str
    direction: str
    bound: float
    keep_away: float
    kind: str
    scale: float
    step: float
    why: str = ""
    soft_price: float | None = None
    implied: bool = False

    @property
    def name(self) -> str:
        """Label and owner, as tables print them."""
        return f"{self.label}, {self.owner}"


@dataclass(frozen=True)
class Evaluation:
    """Values and exact derivatives at one x on one mesh.

    failure is empty when the train could be integrated, else a sentence with the place; the arrays are
    then empty. margin (M,) is >= 0 inside the limit, in the form that is solved: own unit for a plain
    limit, numerator - bound * denominator for a ratio. weight (M,) converts: margin = weight * (margin in
    the own unit); relaxing limit i by delta (own unit, towards more freedom) adds weight[i] * delta.
    """

    failure: str
    cost: float = float("nan")
    cost_dx: Array | None = None
    margin: Array | None = None
    margin_dx: Array | None = None
    weight: Array | None = None
    weight_dx: Array | None = None
    residual: Array | None = None
    residual_dx: Array | None = None
    work: int = 0

    @property
    def ok(self) -> bool:
        return not self.failure
