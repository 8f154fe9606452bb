"""How far worths hold and which limits pay only together, in words and as a table."""

from __future__ import annotations

from collections.abc import Sequence
from math import ceil, floor, log10

from reactorstage.optimiser.reasons import Pair, Reach
from reactorstage.optimiser.result import Optimum, Worth
from reactorstage.report import bounds
from reactorstage.report.aim import Aim
from reactorstage.report.changes import named
from reactorstage.report.display import (
    allowed,
    and_list,
    brief,
    difference,
    difference_kind,
    owners_text,
    unit,
    with_unit,
)
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Rating

FARTHER = 1.02


def reach_text(optimum: Optimum, rating: Rating, aim: Aim) -> str:
    """One sentence per label: how far relaxing pays and what holds then."""
    rows = [row.together for row in bounds.worth_rows(told(optimum.worths, rating))]
    texts = [text for row in rows if row.reach and (text := _label_text(row, row.reach, rating, aim))]
    return f"RELAXING     pays {'; '.join(texts)}." if texts else ""


def told(worths: Sequence[Worth], rating: Rating) -> list[Worth]:
    """Worths of limits on quantities that have a name."""
    known = {index for index, state in enumerate(rating.limits) if state.quantity in rating.quantities}
    return [one for one in worths if known.intersection(one.limits)]


def _label_text(worth: Worth, found: Reach, rating: Rating, aim: Aim) -> str:
    if found.holds <= 0.0:
        return f"nothing on {worth.label}"
    names = [
        *bounds.together(rating.limits[k] for k in found.takes_over),
        *(["the search range"] if found.takes_over_range else []),
    ]
    then = f", then {and_list(names)} hold{'s' if len(names) == 1 else ''}" if names else ""
    return (
        f"on {worth.label} for {size_text(found.holds, worth.kind)} ({aim.number(found.saved)} in all){then}"
    )


def takes_over_text(found: Reach, rating: Rating) -> str:
    """`coking (bed 2) holds`, `the search range of inlet of bed 1 holds`."""
    limits = bounds.together(rating.limits[k] for k in found.takes_over)
    groups: dict[str, list[str]] = {}
    for name in found.takes_over_range:
        owner, _, word = name.rpartition(".")
        groups.setdefault("inlet" if word == "inlet temperature" else word, []).append(owner)
    ranges = [f"the search range ({named(word, owners)})" for word, owners in groups.items()]
    names = [*limits, *ranges]
    if not names:
        return ""
    return f"{and_list(names)} hold{'s' if len(names) == 1 else ''}"


def size_text(amount: float, kind: str) -> str:
    """An amount of relaxation with its unit."""
    return with_unit(brief(difference(amount, kind), 2), unit(difference_kind(kind)))


def pairs_text(pairs: Sequence[Pair], rating: Rating, aim: Aim, count: int = 2) -> str:
    """The pairs that gain most by being relaxed together."""
    ranked = sorted(pairs, key=lambda pair: sum(pair.alone) - pair.together)
    texts = [_pair_text(pair, rating, aim) for pair in ranked[:count]]
    return f"TOGETHER     {'; '.join(texts)}." if texts else ""


def _pair_text(pair: Pair, rating: Rating, aim: Aim) -> str:
    names = and_list(bounds.together(rating.limits[k] for k in pair.limits))
    alone = " and ".join(aim.number(cost) for cost in pair.alone)
    return f"{names} save {aim.number(pair.together)} together, {alone} alone"


def reach_table(optimum: Optimum, rating: Rating, aim: Aim) -> Table:
    """Every worth with how far it holds, what takes over, and where the limit lets go."""
    rows = [one for one in told(optimum.worths, rating) if one.reach is not None]
    reaches = [one.reach for one in rows if one.reach is not None]
    goes = tuple(_goes(one, row) for one, row in zip(reaches, rows, strict=True))
    return table(f"HOW FAR RELAXING PAYS, {aim.heading}", [
        Column(("",), tuple(f"{one.label}, {owners_text(one.owners)}" for one in rows), left=True),
        Column(("by",), tuple(bounds.step_text(one) for one in rows), rank=3, left=True),
        Column(("first", "step"), tuple(aim.number(one.saves) for one in rows)),
        Column(("pays", "for"), tuple(_for(one.holds, row) for one, row in zip(reaches, rows, strict=True))),
        Column(("saving", "so far"), tuple(aim.number(one.saved) for one in reaches)),
        Column(("then", ""), tuple(takes_over_text(one, rating) or "lets go" for one in reaches), left=True),
        Column(("lets go", "after"), goes, rank=2),
        Column(("saving", "in all"), tuple(aim.number(one.saved_in_all) for one in reaches), rank=1),
    ])  # fmt: skip


def _for(amount: float, worth: Worth) -> str:
    return size_text(amount, worth.kind)


def _goes(found: Reach, worth: Worth) -> str:
    return "-" if found.lets_go is None else size_text(found.lets_go, worth.kind)


def conflict_text(optimum: Optimum, rating: Rating) -> list[str]:
    """The smallest set that cannot be met, and what would make it possible."""
    held = optimum.conflict_set
    if held is None:
        return []
    names = and_list(bounds.together(rating.limits[k] for k in held.limits))
    first = (
        f"CONFLICT     {names} cannot be met together within the search ranges; with any one left out the "
        f"others can (by {held.starts} local searches, no proof)."
        if len(held.limits) > 1
        else f"CONFLICT     {names} cannot be met even alone within the search ranges (by {held.starts} "
        "local searches, no proof)."
    )
    enough = [
        f"{_rows_text(one.limits, rating)} by {_amount_text(one.amount, one.limits, rating)}"
        for one in held.suffices
        if one.amount is not None
    ]
    if enough:
        return [first, f"POSSIBLE IF  one gives way alone: {'; '.join(enough)}."]
    return [first, "POSSIBLE IF  more than one of them gives way: no single one is enough, however far."]


def _rows_text(rows: Sequence[int], rating: Rating) -> str:
    return and_list(bounds.together(rating.limits[k] for k in rows))


def _amount_text(amount: float, rows: Sequence[int], rating: Rating) -> str:
    """`0.8 kmol/h (to 2.15 kmol/h)`; the amount rounded up so that it suffices."""
    state = rating.limits[rows[0]]
    wide = difference(amount, state.kind) or 0.0
    part = 10.0 ** (floor(log10(wide)) - 1)
    up = ceil(wide / part - 1e-6) * part
    text = with_unit(brief(up, 3), unit(difference_kind(state.kind)))
    if len({rating.limits[k].bound for k in rows}) > 1:
        return text
    sign = 1.0 if state.direction == "at most" else -1.0
    return f"{text} (to {allowed(state.bound + sign * up * amount / wide, state.kind)})"
