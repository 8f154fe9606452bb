"""What moves the answer: change of the best cost with a small step of each parameter, in words and table."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from reactorstage.report.accounts import signed
from reactorstage.report.aim import MONEY, Aim
from reactorstage.report.changes import named
from reactorstage.report.display import (
    brief,
    difference,
    difference_kind,
    owners_text,
    readable,
    unit,
    with_unit,
)
from reactorstage.report.table import Column, Table, table
from reactorstage.train.influence import Influence


@dataclass(frozen=True)
class Driver:
    """A parameter, or the same one in several places, its step in words, and the change of cost."""

    what: str
    step: str
    change: float

    @property
    def words(self) -> str:
        """`flow of ethylene (+1 %)`; a limit is relaxed by its step."""
        return f"{self.what} ({'' if ' relaxed, ' in self.what else '+'}{self.step})"


def drivers(found: Sequence[Influence]) -> list[Driver]:
    """Parameters of the same meaning in several beds or gaps drawn together, largest change first."""
    groups: dict[tuple[str, str], list[Influence]] = {}
    for one in found:
        word = one.group[0]
        groups.setdefault((word, step_text(one)) if word else (one.name, ""), []).append(one)
    made = [
        Driver(_what(rows), step_text(rows[0]), sum(row.change for row in rows)) for rows in groups.values()
    ]
    return sorted(made, key=lambda one: (-abs(one.change), one.what))


def _what(rows: Sequence[Influence]) -> str:
    word, _ = rows[0].group
    if word:
        owners = sorted(row.group[1] for row in rows)
        return (
            f"{word.partition(' ')[2]}, {owners_text(owners)}"
            if word.startswith("limit ")
            else named(word, owners)
        )
    if rows[0].name.startswith("price "):
        return rows[0].name
    owner, _, quantity = rows[0].name.rpartition(".")
    subject = owner.partition(" ")[2] or owner
    return f"{quantity.removeprefix('ln ')} of {subject}" if owner else rows[0].name


def step_text(one: Influence) -> str:
    """`1 %` of the value, or the step with its unit."""
    if one.relative:
        return "1 %"
    kind = difference_kind(one.kind)
    return with_unit(brief(difference(one.step, one.kind), 3), unit(kind))


def aim_change(change: float, aim: Aim) -> float:
    """A change of cost as a change of what is aimed at, in display units."""
    return (aim.size(change) or 0.0) * aim.sign


def change_text(change: float, aim: Aim) -> str:
    """What a change of cost does to what is aimed at, with its sign, in display units."""
    size = aim_change(change, aim)
    return (
        signed(size, 1)
        if aim.kind == MONEY
        else f"{'+' if size > 0 else '-' if size < 0 else ''}{readable(abs(size))}"
    )


def drivers_text(found: Sequence[Influence], aim: Aim, count: int = 4) -> str:
    """The largest ones in one line."""
    texts = [f"{one.words} {change_text(one.change, aim)}" for one in drivers(found)[:count]]
    what = f"{'cost' if aim.kind == MONEY else aim.quantity}, {aim.unit}".removesuffix(", ")
    return f"DRIVERS      of the best {what}: {'; '.join(texts)}." if texts else ""


def drivers_table(found: Sequence[Influence], aim: Aim, count: int = 16) -> Table:
    """The largest ones, ranked."""
    rows = drivers(found)[:count]
    return table(f"WHAT MOVES THE ANSWER, {aim.heading}", [
        Column(("",), tuple(one.what for one in rows), left=True),
        Column(("more by",), tuple(one.step for one in rows), left=True),
        Column(("the best changes by",), tuple(change_text(one.change, aim) for one in rows)),
    ])  # fmt: skip
