"""What differs from a reference case: inputs, settings, money, limits."""

from __future__ import annotations

from reactorstage.report import bounds
from reactorstage.report.accounts import accounts
from reactorstage.report.beds import bed_table
from reactorstage.report.display import and_list
from reactorstage.report.inputs import Given, given
from reactorstage.report.page.parts import Block, Grid, Section, Words
from reactorstage.report.page.sections.train import money_table
from reactorstage.report.page.subject import Reference, Subject
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Rating


def reference(subject: Subject) -> Section | None:
    """Differences are this setting minus the reference; nothing without a reference case."""
    other = subject.reference
    if other is None:
        return None
    blocks: list[Block] = [
        Words(f"Reference: {other.name}. Differences are this setting minus the reference.")
    ]
    blocks.append(_inputs(subject.now, other))
    if other.rating.failure:
        blocks.append(Words(f"The reference has no answer: {other.rating.failure}."))
        return Section("reference", "Against the reference case", tuple(blocks))
    blocks.append(Words(limits_sentence(subject.now, other.rating)))
    if subject.currency == other.rating.case.currency:
        rows = accounts(subject.now, other.rating)
        named = money_table(rows, subject.currency, "reference")
        blocks.append(Grid(named, "Money against the reference"))
    else:
        blocks.append(Words(f"Money is not compared: the reference counts in {other.rating.case.currency}."))
    if [p.owner for p in subject.now.profiles] == [p.owner for p in other.rating.profiles]:
        blocks.append(
            Grid(bed_table(subject.now, other.rating), "Beds against the reference (was: the reference)")
        )
    else:
        blocks.append(Words("The trains have different beds; their bed tables are not set side by side."))
    return Section("reference", "Against the reference case", tuple(blocks))


def _inputs(now: Rating, other: Reference) -> Block:
    made = changed_inputs(given(now.case), given(other.rating.case))
    return Grid(made, "Inputs that differ") if made.rows else Words("All inputs are the same.")


def changed_inputs(new: list[Given], old: list[Given]) -> Table:
    """Inputs whose text differs, is new or is gone; the name of the case is no input."""
    now, was = ({key(rows, k): row.text for k, row in enumerate(rows)} for rows in (new, old))
    names = [name for name in dict.fromkeys([*now, *was]) if now.get(name) != was.get(name)]
    names = [name for name in names if name[:2] != ("the case", "case")]
    return table("INPUTS", [
        Column(("",), tuple(f"{group}: {name}" for group, name, _ in names), left=True),
        Column(("here",), tuple(_only(now.get(name), was.get(name)) for name in names), left=True),
        Column(("reference",), tuple(_only(was.get(name), now.get(name)) for name in names), left=True),
    ])  # fmt: skip


def _only(text: str | None, other: str | None) -> str:
    """What a text says that the other does not."""
    if text is None:
        return "not there"
    known = (other or "").split("; ")
    return "; ".join(part for part in text.split("; ") if part not in known) or "-"


def key(rows: list[Given], k: int) -> tuple[str, str, int]:
    """What an input is called: group, name and which of several steps of one place."""
    row = rows[k]
    return row.group, row.name, sum((one.group, one.name) == (row.group, row.name) for one in rows[:k])


def limits_sentence(now: Rating, was: Rating) -> str:
    """Which limits hold or are broken here and there."""
    parts = []
    for words, find in (("At work", bounds.at_work), ("Broken", bounds.broken)):
        here, there = (and_list(bounds.together(find(rating))) or "none" for rating in (now, was))
        parts.append(f"{words} here: {here}; in the reference: {there}.")
    return " ".join(parts)
