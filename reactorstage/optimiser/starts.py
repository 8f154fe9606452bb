"""Where the search starts: settings an engineer would try, then seeded random ones."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.programme import Array, FreeNumber, LimitRow, Programme, SplitGroup


@dataclass(frozen=True)
class Start:
    """A name and numbers x (D,), not yet completed by internal numbers."""

    name: str
    x: Array


def starts(programme: Programme, count: int, seed: int) -> tuple[Start, ...]:
    """`count` starts (one at least), the same for equal seed.

    First those of `engineering` that differ from each other, then "random 1", "random 2", ...
    """
    named = without_repeats(engineering(programme), programme)[: max(count, 1)]
    rng = np.random.default_rng(seed)
    randoms = random_points(programme, rng, count - len(named))
    return (*named, *(Start(f"random {k + 1}", x) for k, x in enumerate(randoms)))


def engineering(programme: Programme) -> list[Start]:
    """Today's setting; equal, front- and back-loaded splits; all inlets cool and all hot."""
    today = np.array([number.now for number in programme.numbers])
    found = [Start("today", today)]
    if programme.splits:
        found.append(Start("equal split", with_splits(programme, today, equal_shares)))
        found.append(Start("front-loaded", with_splits(programme, today, falling_shares)))
        found.append(Start("back-loaded", with_splits(programme, today, rising_shares)))
    if any(number.role == "inlet temperature" for number in programme.numbers):
        equal = with_splits(programme, today, equal_shares)
        found.append(Start("all cool", with_inlets(programme, equal, 0)))
        found.append(Start("all hot", with_inlets(programme, equal, 1)))
    return found


def without_repeats(candidates: list[Start], programme: Programme) -> list[Start]:
    """The candidates without those that repeat an earlier one."""
    span = np.array([max(n.high - n.low, 1e-300) for n in programme.numbers])
    kept: list[Start] = []
    for start in candidates:
        if all(np.max(np.abs(start.x - other.x) / span, initial=0.0) > 1e-3 for other in kept):
            kept.append(start)
    return kept


def equal_shares(count: int) -> Array:
    """(count,) equal shares that sum to 1."""
    return np.full(count, 1.0 / count)


def falling_shares(count: int) -> Array:
    """Shares that fall evenly from the first bed to the last."""
    weights = np.arange(count, 0, -1, dtype=float)
    return np.asarray(weights / weights.sum())


def rising_shares(count: int) -> Array:
    """Shares that rise evenly from the first bed to the last."""
    return np.flip(falling_shares(count))


def with_splits(programme: Programme, x: Array, shares: Callable[[int], Array]) -> Array:
    """x with every free split divided by `shares(count)`."""
    changed = x.copy()
    for group in programme.splits:
        changed[list(group.indices)] = divided(programme, group, shares(pieces(group)))
    return changed


def pieces(group: SplitGroup) -> int:
    """Beds among which the free part of a split is divided, the rest's bed included."""
    return len(group.indices) + (1 if group.rest_bed else 0)


def divided(programme: Programme, group: SplitGroup, shares: Array) -> Array:
    """Free entries of a split for shares (in bed order, the rest's among them), inside their ranges."""
    entries = [programme.numbers[k] for k in group.indices]
    beds = [entry.bed for entry in entries] + ([group.rest_bed] if group.rest_bed else [])
    order = np.argsort(np.argsort(beds, kind="stable"), kind="stable")
    room = group.total - group.fixed
    low = np.array([entry.low for entry in entries] + [0.0] * (len(beds) - len(entries)))
    high = np.array([entry.high for entry in entries] + [group.total] * (len(beds) - len(entries)))
    return summing_to(shares[order] * room, low, high, room)[: len(entries)]


def summing_to(values: Array, low: Array, high: Array, total: float) -> Array:
    """values moved by one common amount and clipped to [low, high] so that they sum to total.

    Where the ranges do not allow the total, the end of the ranges nearest to it.
    """
    down, up = float(np.min(low - values)), float(np.max(high - values))
    for _ in range(200):
        middle = 0.5 * (down + up)
        if np.clip(values + middle, low, high).sum() < total:
            down = middle
        else:
            up = middle
    return np.clip(values + up, low, high)


def with_inlets(programme: Programme, x: Array, end: int) -> Array:
    """x with every inlet temperature at the lower (0) or upper (1) end of its allowed range."""
    changed = x.copy()
    for k, number in enumerate(programme.numbers):
        if number.role == "inlet temperature":
            changed[k] = allowed_range(number, programme.limits)[end]
    return changed


def allowed_range(number: FreeNumber, limits: tuple[LimitRow, ...]) -> tuple[float, float]:
    """The range of a number narrowed by the hard plain limits on it; the range itself if none is left."""
    low, high = number.low, number.high
    for limit in limits:
        if limit.quantity == number.name and limit.soft_price is None:
            if "least" in limit.direction:
                low = max(low, limit.bound)
            else:
                high = min(high, limit.bound)
    return (low, high) if low <= high else (number.low, number.high)


def random_points(programme: Programme, rng: np.random.Generator, count: int) -> list[Array]:
    """`count` points spread over the allowed ranges (Latin hypercube, McKay and others 1979).

    Splits are drawn evenly from all divisions of their total.
    """
    if count <= 0:
        return []
    layers = np.array([(rng.permutation(count) + rng.random(count)) / count for _ in programme.numbers])
    spans = [allowed_range(number, programme.limits) for number in programme.numbers]
    points = [
        np.array([low + (high - low) * part for (low, high), part in zip(spans, parts, strict=True)])
        for parts in layers.T
    ]
    return [with_splits(programme, x, lambda size: rng.dirichlet(np.ones(size))) for x in points]
