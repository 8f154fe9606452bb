"""What differs from a reference case: inputs as they stand in the files, then what `compare` tells."""

from __future__ import annotations

from reactorstage.errors import CallError
from reactorstage.report.compared import comparison_tables, limits_sentences, verdict
from reactorstage.report.comparison import Comparison, compared
from reactorstage.report.comparison_units import in_shown_units
from reactorstage.report.inputs import Given, given
from reactorstage.report.page.parts import Block, Grid, Section, Words
from reactorstage.report.page.subject import Reference, Subject
from reactorstage.report.result_json import plain_content, rating_json
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Rating

HERE, THERE = "this setting", "the reference"


def reference(subject: Subject) -> Section | None:
    """Differences are this setting minus the reference; nothing without a reference case."""
    other = subject.reference
    if other is None:
        return None
    told = Words(f"Reference: {other.name}. Differences are this setting minus the reference.")
    blocks = [told, _inputs(subject.now, other), *side_by_side(subject, other)]
    return Section("reference", "Against the reference case", tuple(blocks))


def side_by_side(subject: Subject, other: Reference) -> list[Block]:
    """What `compare` tells of two settings, or why they cannot be compared."""
    if other.rating.failure:
        return [Words(f"The reference has no answer: {other.rating.failure}.")]
    if subject.now.failure:
        return []
    try:
        found = in_shown_units(comparison(subject, other.rating))
    except CallError as error:
        return [Words(f"{str(error)[:1].upper()}{str(error)[1:]}.")]
    tables = comparison_tables(found, subject.now.by_products, ("reference", "here"))
    return [
        Words(" ".join([verdict(found), *limits_sentences(found), *found.notes])),
        *(Grid(made, CAPTIONS.get(made.title, made.title.capitalize())) for made in tables),
    ]


CAPTIONS = {
    "SETTINGS": "Settings and other inputs that differ",
    "LIMITS": "Limits at work or broken in either",
    "BEDS": "Beds that differ",
    "HEAT REMOVED": "Heat removed where it differs",
}


def comparison(subject: Subject, other: Rating) -> Comparison:
    """This setting against the reference, which comes first; raises CallError for unlike trains."""
    content = plain_content(rating_json(subject.now))
    if subject.search is not None:
        free = [number.name for number in subject.search.programme.numbers if not number.internal]
        content["decisions"] = dict.fromkeys(free)
    return compared(plain_content(rating_json(other)), content, (THERE, HERE))


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
