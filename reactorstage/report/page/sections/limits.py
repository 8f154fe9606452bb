"""Limits at work and their worth, every limit with its margin."""

from __future__ import annotations

from reactorstage.optimiser.result import Conflict, Optimum
from reactorstage.report import bounds, sentences
from reactorstage.report.aim import Aim, aim_of
from reactorstage.report.display import (
    allowed,
    and_list,
    brief,
    difference,
    difference_kind,
    told,
    unit,
    with_unit,
)
from reactorstage.report.page.diagrams import worth_chart
from reactorstage.report.page.parts import Block, Charts, Folded, Grid, Listing, Section, Words
from reactorstage.report.page.said import said
from reactorstage.report.page.subject import Search, Subject
from reactorstage.report.reach import conflict_text, pairs_text, reach_table
from reactorstage.report.table import Column, Table, table
from reactorstage.report.worths import worth_bars
from reactorstage.train.result import LimitState, Rating

EVERY = 10_000
REACH = (
    "Relaxing pays as long as each further part saves at least half as much, per unit, as the first step. "
    "Then come the limits that have taken over, the relaxation from which the limit no longer matters, and "
    "what that saves in all."
)


def limits(subject: Subject) -> Section | None:
    """What holds the setting and what each limit is worth; nothing for a case without limits."""
    rating = subject.now
    if not rating.limits:
        return None
    blocks: list[Block] = []
    if subject.search is not None:
        blocks += worths(subject, subject.search)
    nearest = bounds.rating_table(rating, EVERY)
    if nearest.rows:
        blocks.append(Grid(nearest, "Limits: broken ones, then the nearest of each label"))
    blocks.append(Folded("Every limit with its margin", (Grid(every_limit(rating), "Every limit"),)))
    return Section("limits", "Limits at work", tuple(blocks))


def worths(subject: Subject, search: Search) -> list[Block]:
    """Bars and table of worths, or the limits that cannot all be met."""
    rating, optimum = subject.now, search.optimum
    if optimum.conflict is not None:
        return conflict(subject, optimum, optimum.conflict)
    made = bounds.worth_table(optimum, rating)
    bars = worth_bars(optimum, rating)
    if not made.rows:
        return [Words("No limit at work could be given a worth.")]
    aim = aim_of(rating)
    free = sum(not number.internal for number in search.programme.numbers)
    counts = bounds.count_text(bounds.at_work(rating), free).replace(": up", "; up")
    note = (
        f"{counts} Every worth was found by solving again with the limit moved by the step, everything else "
        "free."
    )
    return [
        Charts((worth_chart(bars, rating, aim.heading),)),
        Grid(made, f"Limits at work, {aim.heading}", note),
        *reaching(optimum, rating, aim),
        *([Words(said(text))] if (text := sentences.margin_text(optimum, rating)) else []),
    ]


def reaching(optimum: Optimum, rating: Rating, aim: Aim) -> list[Block]:
    """How far relaxing pays and what takes over, and the limits that pay only together."""
    made = reach_table(optimum, rating, aim)
    pairs = pairs_text(optimum.pairs, rating, aim, len(optimum.pairs))
    blocks: list[Block] = [Grid(made, f"How far relaxing pays, {aim.heading}", REACH)] if made.rows else []
    return [*blocks, Words(f"By one step each, {aim.heading}: {lower(said(pairs))}")] if pairs else blocks


def lower(text: str) -> str:
    return text[:1].lower() + text[1:]


def conflict(subject: Subject, optimum: Optimum, found: Conflict) -> list[Block]:
    """The limits that no setting meets, what holds them, a smallest set in conflict, what would be enough."""
    rating = subject.now
    held = bounds.together(rating.limits[index] for index in found.against)
    items = [f"{bounds.sentence(rating.limits[index], subject.currency)}." for index, _ in found.broken]
    blocks: list[Block] = [
        Words("These limits cannot all be met. This setting breaks least, and misses:"),
        Listing(tuple(items)),
    ]
    texts = [*([f"Held there by {and_list(held)}."] if held else [])]
    texts += [said(text) for text in conflict_text(optimum, rating)] or [sentences.give_way(found, rating)]
    return [*blocks, *(Words(text) for text in texts if text)]


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
