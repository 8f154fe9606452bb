"""What differs between two settings of the free numbers, in words, the biggest change first."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from reactorstage.optimiser.programme import Array, FreeNumber
from reactorstage.report.display import and_list, brief, owners_text, shown, unit, with_unit

WORTH_SAYING = 0.01


@dataclass(frozen=True)
class Change:
    """Numbers of like name that go from the same value to the same value; size in parts of their range."""

    word: str
    owners: tuple[str, ...]
    old: str
    new: str
    size: float

    @property
    def what(self) -> str:
        """`inlet temperature of beds 1-3`, `ethylene to bed 4`."""
        return named(self.word, self.owners)


def named(word: str, owners: Sequence[str]) -> str:
    """A quantity of some owners in words: `inlet temperature of beds 1-3`, `ethylene to bed 4`."""
    feed = word.removeprefix("injected ")
    where = owners_text(owners)
    return f"{feed} to {where}" if feed != word else f"{word} of {where}"


def spoken(name: str) -> str:
    """A quantity by its full name in words: `ethylene to bed 1`, `inlet of bed 2`."""
    owner, _, word = name.rpartition(".")
    return named("inlet" if word == "inlet temperature" else word, [owner]) if owner else word


def changes(numbers: Sequence[FreeNumber], old: Array, new: Array) -> list[Change]:
    """User numbers that move by more than 1 % of their range, alike ones together, biggest first."""
    found: dict[tuple[str, str, str], Change] = {}
    for number, before, after in zip(numbers, old, new, strict=False):
        span = number.high - number.low
        size = abs(after - before) / span if span > 0.0 else 0.0
        if number.internal or size <= WORTH_SAYING:
            continue
        owner, _, word = number.name.rpartition(".")
        key = (word, _short(before, number.kind), _short(after, number.kind))
        like = found.get(key, Change(word, (), key[1], key[2], 0.0))
        found[key] = replace(like, owners=(*like.owners, owner), size=max(size, like.size))
    return sorted(found.values(), key=lambda change: -change.size)


def _short(value: float, kind: str) -> str:
    """`364 degC`, `78.1 kmol/h`: as many digits as a setting is made with."""
    number = shown(float(value), kind) or 0.0
    text = brief(round(number, 1), 5) if abs(number) >= 10.0 else brief(number, 3)
    return with_unit(text, unit(kind))


def moves_text(found: Sequence[Change], count: int = 3) -> str:
    """`inlet temperature of beds 1-3 from 384 to 364 degC and ...`."""
    texts = [
        f"{change.what} from {_bare(change.old, change.new)} to {change.new}" for change in found[:count]
    ]
    return and_list(texts)


def _bare(old: str, new: str) -> str:
    """The old value without its unit when the new one repeats it."""
    number, _, unit = old.partition(" ")
    return number if unit == new.partition(" ")[2] else old
