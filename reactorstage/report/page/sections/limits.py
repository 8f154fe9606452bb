"""Limits at work and their worth, every limit with its margin."""

from __future__ import annotations

from reactorstage.report import bounds, sentences
from reactorstage.report.aim import aim_of
from reactorstage.report.display import allowed, brief, difference, difference_kind, told, unit, with_unit
from reactorstage.report.page.diagrams import worth_chart
from reactorstage.report.page.parts import Block, Charts, Folded, Grid, Listing, Section, Words
from reactorstage.report.page.sections.summary import keep_away as margin_sentence
from reactorstage.report.page.subject import Search, Subject
from reactorstage.report.table import Column, Table, table
from reactorstage.report.worths import worth_bars
from reactorstage.train.result import LimitState, Rating

EVERY = 10_000


def limits(subject: Subject) -> Section | None:
    """What holds the setting and what each limit is worth; nothing for a case without limits."""
    rating = subject.now
    if not rating.limits:
        return None
    blocks: list[Block] = []
    if subject.search is not None:
        blocks += worths(subject, subject.search)
    nearest = bounds.rating_table(rating, EVERY)
    blocks.append(Grid(nearest, "Limits: broken ones, then the nearest of each label"))
    blocks.append(Folded("Every limit with its margin", (Grid(every_limit(rating), "Every limit"),)))
    return Section("limits", "Limits at work", tuple(blocks))


def worths(subject: Subject, search: Search) -> list[Block]:
    """Bars and table of worths, or the limits that cannot all be met."""
    rating, optimum = subject.now, search.optimum
    if optimum.conflict is not None:
        held = bounds.together(rating.limits[index] for index in optimum.conflict.against)
        items = [
            bounds.sentence(rating.limits[index], subject.currency) for index, _ in optimum.conflict.broken
        ]
        texts = [*items, *([f"Held by: {', '.join(held)}."] if held else [])]
        return [Words("These limits cannot all be met:"), Listing(tuple(texts))]
    made = bounds.worth_table(optimum, rating)
    bars = worth_bars(optimum, rating)
    if not made.rows:
        return [Words("No limit at work could be given a worth.")]
    aim = aim_of(rating)
    free = sum(not number.internal for number in search.programme.numbers)
    said = bounds.count_text(bounds.at_work(rating), free).replace(
        ": up and down differ", "; up and down differ"
    )
    note = (
        f"{said} Every worth was found by solving again with the limit moved by the step, everything else "
        "free. It holds for this step; larger ones can meet the next limit."
    )
    return [
        Charts((worth_chart(bars, rating, aim.heading),)),
        Grid(made, f"Limits at work, {aim.heading}", note),
        *([Words(text)] if (text := keep_away(subject, search)) else []),
    ]


def keep_away(subject: Subject, search: Search) -> str:
    """What the margins of the case cost."""
    return margin_sentence(sentences.margin_text(search.optimum, subject.now))


def every_limit(rating: Rating) -> Table:
    """One row per limit and owner in the order of the case."""
    states, currency = rating.limits, rating.case.currency
    bound = tuple(f"{s.direction} {allowed(s.bound, s.kind, currency)}" for s in states)
    kept = tuple(_amount(state, state.keep_away or None, currency) for state in states)
    return table("EVERY LIMIT", [
        Column(("",), tuple(bounds.name(state) for state in states), left=True),
        Column(("of",), tuple(state.quantity for state in states), left=True),
        Column(("value",), tuple(told(state.value, state.kind, currency) for state in states)),
        Column(("allowed",), bound, left=True),
        Column(("margin",), tuple(_amount(state, state.margin, currency) for state in states)),
        Column(("kept away",), kept),
        Column(("state",), tuple(bounds.state_word(state) for state in states), left=True),
        Column(("why",), tuple(state.why for state in states), left=True),
    ])  # fmt: skip


def _amount(state: LimitState, value: float | None, currency: str) -> str:
    """A margin or keep-away in the unit of differences; a limit at work has none left."""
    if value is None:
        return "-"
    size = 0.0 if state.at_work and value == state.margin else difference(value, state.kind)
    return with_unit(brief(size, 3), unit(difference_kind(state.kind), currency))
