"""Plain sentences that tell one answer from another."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np

from reactorstage.optimiser.merge import SAME_NUMBER
from reactorstage.optimiser.programme import Array, FreeNumber, Programme, SplitGroup
from reactorstage.optimiser.starts import falling_shares

Display = Callable[[float, str], float]
Unit = Callable[[str], str]
MOST = 4
LOADED = 0.25


def told_apart(
    programme: Programme,
    best: Array,
    other: Array,
    to_display: Display | None = None,
    unit_of: Unit | None = None,
) -> tuple[str, ...]:
    """How `other` differs from `best`, largest difference (in ranges) first, at most four phrases.

    to_display(value, kind) and unit_of(kind) turn SI values into what is shown; by default those of
    `reactorstage.case.units`.
    """
    show = shower(to_display, unit_of)
    phrases = [*splits_apart(programme, best, other, show), *numbers_apart(programme, best, other, show)]
    return tuple(text for _, text in sorted(phrases, key=lambda phrase: -phrase[0])[:MOST])


Show = Callable[[Sequence[float], str], tuple[list[str], str]]


def shower(to_display: Display | None, unit_of: Unit | None) -> Show:
    """A function that gives the texts of some values of one kind, alike in digits, and the unit."""
    if to_display is None or unit_of is None:
        from reactorstage.case import units

        to_display = to_display or units.to_display
        unit_of = unit_of or units.display_unit

    def show(values: Sequence[float], kind: str) -> tuple[list[str], str]:
        assert to_display is not None and unit_of is not None
        shown = [to_display(value, kind) for value in values]
        digits = digits_for(max((abs(value) for value in shown), default=0.0))
        unit = unit_of(kind)
        return [f"{value:.{digits}f}" for value in shown], f" {unit}" if unit else ""

    return show


def digits_for(largest: float) -> int:
    """Decimals that leave about three figures."""
    if largest >= 100.0:
        return 0
    return 1 if largest >= 10.0 else 2 if largest >= 1.0 else 3


def numbers_apart(programme: Programme, best: Array, other: Array, show: Show) -> list[tuple[float, str]]:
    """Difference in ranges and phrase of each user number that is not a split and differs."""
    found = []
    for k, number in enumerate(programme.numbers):
        apart = abs(float(other[k] - best[k])) / max(number.high - number.low, 1e-300)
        if apart > SAME_NUMBER and number.role != "split" and not number.internal:
            (there, here), unit = show([float(other[k]), float(best[k])], number.kind)
            found.append((apart, f"{called(number)} at {there} instead of {here}{unit}"))
    return found


def called(number: FreeNumber) -> str:
    """A number in words: "inlet of bed 4", "heat removed of gap 2"."""
    if number.role == "inlet temperature" and number.bed:
        return f"inlet of bed {number.bed}"
    owner, _, quantity = number.name.partition(".")
    return f"{quantity} of {owner}" if quantity else owner


def splits_apart(programme: Programme, best: Array, other: Array, show: Show) -> list[tuple[float, str]]:
    """Difference in ranges and phrase of each split that differs."""
    found = []
    for group in programme.splits:
        entries = [programme.numbers[k] for k in group.indices]
        there, here = (shares(entries, group, x) for x in (other, best))
        apart = float(np.max(np.abs(there - here), initial=0.0)) / max(group.total, 1e-300)
        if apart > SAME_NUMBER and entries:
            found.append((apart, split_phrase(group, entries[0].kind, there, here, show)))
    return found


def split_phrase(group: SplitGroup, kind: str, there: Array, here: Array, show: Show) -> str:
    """ "ethylene front-loaded, 80.0/75.0/70.0/43.0 instead of 67.0/67.0/67.0/67.0 kmol/h"."""
    texts, unit = show([*there, *here], kind)
    parts = "/".join(texts[: there.size]), "/".join(texts[there.size :])
    word = loading(there)
    return f"{group.feed} {word + ', ' if word else ''}{parts[0]} instead of {parts[1]}{unit}"


def shares(entries: Sequence[FreeNumber], group: SplitGroup, x: Array) -> Array:
    """The free entries and the rest of a split, in bed order."""
    values = [(entry.bed, float(x[k])) for entry, k in zip(entries, group.indices, strict=True)]
    if group.rest_bed:
        rest = group.total - group.fixed - sum(value for _, value in values)
        values.append((group.rest_bed, rest))
    return np.array([value for _, value in sorted(values, key=lambda pair: pair[0])])


def loading(values: Array) -> str:
    """ "front-loaded", "back-loaded" or "evenly split" by the mean bed; empty where it is none of them.

    Loaded: a quarter or more of the way from equal shares to shares that fall evenly to the last bed.
    """
    total = float(values.sum())
    if values.size < 2 or total <= 0.0:
        return ""
    beds = np.arange(values.size)
    middle = 0.5 * (values.size - 1)
    lean = (middle - float(beds @ values) / total) / (middle - float(beds @ falling_shares(values.size)))
    if abs(lean) >= LOADED:
        return "front-loaded" if lean > 0.0 else "back-loaded"
    return "evenly split" if np.max(np.abs(values * values.size / total - 1.0)) < 0.02 else ""
