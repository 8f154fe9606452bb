"""Limits in words and tables: which are broken, which are at work, which come next."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from reactorstage.optimiser.result import Optimum, Worth
from reactorstage.report.aim import Aim, aim_of
from reactorstage.report.display import (
    allowed,
    brief,
    counted,
    difference,
    difference_kind,
    in_ppm,
    is_trace,
    owners_text,
    readable,
    shown,
    told,
    unit,
    with_unit,
)
from reactorstage.report.table import AT_WORK, BROKEN, Column, Table, table
from reactorstage.train.result import LimitState, Rating

ROWS_SHOWN = 9


def broken(rating: Rating) -> list[LimitState]:
    """Limits that this setting breaks, in the order of the case; soft ones have a price instead."""
    return [state for state in rating.limits if not state.met and not state.soft]


def at_work(rating: Rating) -> list[LimitState]:
    """Limits with zero margin, in the order of the case."""
    return [s for s in named(rating) if s.at_work and s.met]


def named(rating: Rating) -> list[LimitState]:
    """Limits on quantities with a name; rows that only share heat out among levels are not told."""
    return [state for state in rating.limits if state.quantity in rating.quantities]


def name(state: LimitState) -> str:
    """`hot exit, bed 4`."""
    return f"{state.label}, {state.owner}"


def together(states: Iterable[LimitState]) -> list[str]:
    """`coking (beds 3 and 4)`, one text per label, for sentences."""
    owners: dict[str, list[str]] = {}
    for state in states:
        owners.setdefault(state.label, []).append(state.owner)
    return [f"{label} ({owners_text(list(dict.fromkeys(found)))})" for label, found in owners.items()]


def nearness(state: LimitState) -> float:
    """Margin as a part of the bound, so that unlike limits can be put in order; inf when there is none.

    Temperatures are compared on a span of 100 K, since their zero means nothing.
    """
    if state.margin is None:
        return float("inf")
    span = 100.0 if state.kind == "temperature" else abs(state.bound) or abs(state.value or 0.0) or 1.0
    return state.margin / span


def sentence(state: LimitState, currency: str = "") -> str:
    """`hot exit, bed 1: 424.3 degC, at most 424 degC`."""
    bound = allowed(state.bound, state.kind, currency)
    return f"{name(state)}: {told(state.value, state.kind, currency)}, {state.direction} {bound}"


def next_ones(rating: Rating, count: int = 2) -> list[LimitState]:
    """The nearest of the labels and directions of which no limit is at work or broken."""
    held = {(state.label, state.direction) for state in rating.limits if state.at_work or not state.met}
    free = [
        s
        for s in rating.limits
        if not s.implied and s.margin is not None and (s.label, s.direction) not in held
    ]
    return nearest_per_label(free)[:count]


def nearest_per_label(states: Iterable[LimitState]) -> list[LimitState]:
    """Of each label and direction the state with the smallest margin; nearest first."""
    found: dict[tuple[str, str], LimitState] = {}
    for state in states:
        key = (state.label, state.direction)
        if key not in found or nearness(state) < nearness(found[key]):
            found[key] = state
    return sorted(found.values(), key=nearness)


def rating_table(rating: Rating, rows: int = ROWS_SHOWN) -> Table:
    """Every broken limit, then of the others the nearest owner of each label."""
    first = broken(rating)
    labels = {(state.label, state.direction) for state in first}
    others = nearest_per_label(
        state
        for state in named(rating)
        if (state.met or state.soft)
        and not (state.implied and not state.at_work)
        and (state.label, state.direction) not in labels
    )
    states = first + others[: max(rows - len(first), 2)]
    currency = rating.case.currency
    return table(
        "LIMITS",
        [
            Column(("",), tuple(name(state) for state in states), left=True),
            Column(("value",), tuple(told(state.value, state.kind, currency) for state in states)),
            Column(
                ("allowed",),
                tuple(f"{state.direction} {allowed(state.bound, state.kind, currency)}" for state in states),
                left=True,
            ),
            Column(("margin",), tuple(_margin_text(state, currency) for state in states), rank=1),
            Column(("",), tuple(state_word(state) for state in states), left=True),
            Column(("why",), tuple(state.why for state in states), rank=2, left=True),
        ],
    )


def state_word(state: LimitState) -> str:
    """In words, so that colour need not say it."""
    if not state.met:
        return "beyond, at its price" if state.soft else f"BROKEN {BROKEN}"
    if state.value is None:
        return state.reason or "not there"
    return f"at work {AT_WORK}" if state.at_work else "inside"


def _margin_text(state: LimitState, currency: str) -> str:
    margin = 0.0 if state.at_work else difference(state.margin, state.kind)
    if (
        state.kind == "fraction"
        and state.margin is not None
        and not state.at_work
        and is_trace(state.margin, state.kind)
    ):
        return in_ppm(state.margin)
    if margin is None:
        return "-"
    return with_unit(readable(margin), unit(difference_kind(state.kind), currency))


@dataclass(frozen=True)
class WorthRow:
    """A worth of all owners of a label together, and what each of several owners saves alone."""

    together: Worth
    alone: tuple[Worth, ...] = ()


def worth_rows(worths: Sequence[Worth]) -> list[WorthRow]:
    """Worths of single owners drawn to the row of their label, where there is one."""
    rows: list[WorthRow] = []
    for worth in worths:
        last = rows[-1] if rows else None
        if (
            last
            and len(worth.limits) == 1 < len(last.together.limits)
            and worth.limits[0] in last.together.limits
        ):
            rows[-1] = replace(last, alone=(*last.alone, worth))
        else:
            rows.append(WorthRow(worth))
    return rows


def worth_table(optimum: Optimum, rating: Rating) -> Table:
    """Limits at work with what relaxing saves and tightening costs per step, re-solved."""
    told = {index for index, state in enumerate(rating.limits) if state.quantity in rating.quantities}
    rows = worth_rows([worth for worth in optimum.worths if told.intersection(worth.limits)])
    aim = aim_of(rating)
    alone = tuple(_alone_text(row, aim) for row in rows)
    all_together = [row.together for row in rows]
    return table(f"LIMITS AT WORK (*), {aim.heading}", [
        Column(("",), tuple(f"{row.label}, {owners_text(row.owners)}" for row in all_together), left=True),
        Column(("allowed",), tuple(_allowed_text(row, rating) for row in all_together), left=True),
        Column(("by",), tuple(step_text(row) for row in all_together), left=True),
        Column(("relax", "saves"), tuple(aim.number(row.saves) for row in all_together)),
        Column(("tighten", "costs"), tuple(aim.number(row.costs) for row in all_together)),
        Column(("relaxed one", "by one save"), alone, rank=1, left=True),
        Column(("re-solved",), tuple(row.note for row in all_together), rank=2, left=True),
    ])  # fmt: skip


def _alone_text(row: WorthRow, aim: Aim) -> str:
    return ", ".join(aim.number(worth.saves) for worth in row.alone)


def step_text(worth: Worth) -> str:
    """`1 K`, `0.1 mol/mol`, `0.1 MW`."""
    return with_unit(brief(difference(worth.step, worth.kind)), unit(difference_kind(worth.kind)))


def _allowed_text(worth: Worth, rating: Rating) -> str:
    states = [rating.limits[index] for index in worth.limits if index < len(rating.limits)]
    if not states:
        return "-"
    bounds = {allowed(state.bound, state.kind, rating.case.currency): state.direction for state in states}
    return " / ".join(f"{direction} {bound}" for bound, direction in bounds.items())


def next_text(rating: Rating) -> str:
    """`Next: slip, effluent: 1.10 of 1.35 kmol/h; coking, bed 2: 11.9, at least 11.6 mol/mol.` or nothing."""
    states = next_ones(rating)
    if not states:
        return ""
    return "Next: " + "; ".join(_of_text(state, rating.case.currency) for state in states) + "."


def _of_text(state: LimitState, currency: str) -> str:
    value = shown(state.value, state.kind)
    assert value is not None
    bound = allowed(state.bound, state.kind, currency)
    between = " of" if state.direction == "at most" else f", {state.direction}"
    return f"{name(state)}: {brief(value, 3)}{between} {bound}"


def count_text(states: Sequence[LimitState], numbers: int) -> str:
    """How many limits hold how many free numbers, and what follows when they hold all."""
    held = "limit holds" if len(states) == 1 else "limits hold"
    text = f"{len(states)} {held} {counted(numbers, 'free number')}"
    return f"{text}: up and down differ." if len(states) >= numbers else f"{text}."
