"""How flat the answer is: spans of every number, what may stay as it is, equal division, reaction orders."""

from __future__ import annotations

from reactorstage.optimiser.reasons import Flatness
from reactorstage.optimiser.result import CANNOT
from reactorstage.report import sentences
from reactorstage.report.aim import Aim, aim_of
from reactorstage.report.display import with_unit
from reactorstage.report.flatness import flat_table, left_alone_text
from reactorstage.report.page.parts import Block, Charts, Grid, Listing, Section, Words
from reactorstage.report.page.said import said
from reactorstage.report.page.spans import span_charts
from reactorstage.report.page.subject import Search, Subject
from reactorstage.report.understood import order_sentence, order_table

NOTE = (
    "Each span is that of one number with all others re-optimised inside all limits; a second span lies "
    "around another answer. The last column is what leaving that number as today costs."
)


def flatness(subject: Subject) -> Section | None:
    """Nothing for a rating and where no setting meets every limit."""
    search = subject.search
    if search is None or not search.optimum.answers or search.optimum.status == CANNOT:
        return None
    optimum, aim = search.optimum, aim_of(subject.now)
    blocks: list[Block] = []
    if optimum.flatness is not None and optimum.flatness.numbers:
        blocks += _spans(optimum.flatness, search, aim)
    texts = [said(sentences.equal_split_text(split, subject.now)) for split in optimum.equal_splits]
    blocks += [Listing(tuple(texts))] if texts else []
    orders = order_table(subject.seen)
    if orders.rows:
        title = f"Order of every reaction in {subject.seen.split_reactant}"
        blocks.append(Grid(orders, title, order_sentence(subject.seen)))
    return Section("flatness", "How flat the answer is", tuple(blocks)) if blocks else None


def _spans(flat: Flatness, search: Search, aim: Aim) -> list[Block]:
    ranges = {number.name: (number.low, number.high) for number in search.programme.numbers}
    within = with_unit(aim.number(flat.band), aim.unit)
    left = left_alone_text(flat, aim)
    return [
        Words(f"Within {within} of the best a setting counts as flat. {left}".strip()),
        Charts(span_charts(flat, ranges)),
        Grid(flat_table(flat, aim), f"Flat within {within}", NOTE),
    ]
