"""What an equal split costs, with everything else re-optimised and under the same limits."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from reactorstage.optimiser.conflict import broken_amounts
from reactorstage.optimiser.programme import Array, Programme, SplitGroup
from reactorstage.optimiser.resolve import Base, Resolved, resolve
from reactorstage.optimiser.result import EqualSplit
from reactorstage.optimiser.starts import equal_shares, pieces
from reactorstage.optimiser.wrappers import Pinned, Shifted

LEAST_STEPS = 0.05


def equal_split(base: Base, group: SplitGroup, points: Iterable[Array]) -> EqualSplit:
    """Penalty of equal shares of one feed.

    points are x of the whole programme to start from, best answer first. Where equal shares cannot
    meet the limits, those that the least-violating setting breaks are relaxed by whole steps until they
    are met, for both sides of the comparison.
    """
    share = (group.total - group.fixed) * equal_shares(pieces(group))[0]
    pinned = Pinned(base.programme, dict.fromkeys(group.indices, float(share)))
    starts = [pinned.free(x) for x in points]
    held = resolve(pinned, starts, base)
    if held.x is not None:
        return answered(group, held, pinned, max(held.cost - base.cost, 0.0))
    if held.nearest is None:
        return EqualSplit(group.feed, None, None, None, note="the re-solve with equal shares did not end")
    return relaxed_split(base, group, pinned, held.nearest)


def answered(
    group: SplitGroup, held: Resolved, pinned: Pinned, penalty: float, relaxed: Array | None = None
) -> EqualSplit:
    """The result for an equal split that could be met."""
    assert held.x is not None
    amounts = np.zeros(0) if relaxed is None else relaxed
    listed = tuple((int(k), float(amounts[k])) for k in np.flatnonzero(amounts))
    return EqualSplit(group.feed, penalty, held.cost, pinned.full(held.x), listed)


def relaxed_split(base: Base, group: SplitGroup, pinned: Pinned, nearest: Array) -> EqualSplit:
    """Penalty under limits relaxed so far that equal shares can meet them."""
    amounts = needed_relief(pinned, nearest)
    if amounts is None:
        return EqualSplit(group.feed, None, None, None, note="equal shares could not be evaluated")
    listed = tuple((int(k), float(amounts[k])) for k in np.flatnonzero(amounts))
    held = resolve(Shifted(pinned, amounts), [nearest, *(pinned.free(x) for x in base.known)], base)
    free = resolve(Shifted(base.programme, amounts), base.known, base)
    if held.x is None or free.x is None:
        note = "the re-solve under relaxed limits did not end"
        return EqualSplit(group.feed, None, None, None, listed, note)
    best = min(free.cost, held.cost)
    return answered(group, held, pinned, held.cost - best, amounts)


def needed_relief(programme: Programme, x: Array) -> Array | None:
    """(M,) own-unit amounts, whole steps, by which the limits broken at x must be relaxed."""
    evaluation = programme.final(x)
    if not evaluation.ok:
        return None
    broken = broken_amounts(evaluation)
    steps = np.array([limit.step for limit in programme.limits])
    scales = np.array([limit.scale for limit in programme.limits])
    counts = np.ceil(broken / steps + LEAST_STEPS)
    return np.where(broken > 1e-7 * scales, counts * steps, 0.0)
