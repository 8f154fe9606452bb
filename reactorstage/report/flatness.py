"""Where the answer is flat: spans of every number in words and as a table, and what may stay as it is."""

from __future__ import annotations

from collections.abc import Sequence
from math import ceil, floor

from reactorstage.optimiser.reasons import Flatness, FlatNumber
from reactorstage.report.aim import Aim
from reactorstage.report.changes import named, spoken
from reactorstage.report.display import and_list, brief, fixed, shown, unit, with_unit
from reactorstage.report.table import Column, Table, table


def flat_text(flat: Flatness, aim: Aim) -> str:
    """Spans by quantity: `ethylene to bed 1 55-78, 2 53-77 kmol/h; inlet of bed 1 364-377 degC`."""
    groups: dict[tuple[str, str], list[FlatNumber]] = {}
    for one in flat.numbers:
        groups.setdefault((one.name.rpartition(".")[2], one.kind), []).append(one)
    texts = [_group_text(word, kind, rows) for (word, kind), rows in groups.items()]
    band = with_unit(aim.number(flat.band), aim.unit)
    return f"FLAT         within {band} of the best: {'; '.join(texts)}."


def _group_text(word: str, kind: str, rows: Sequence[FlatNumber]) -> str:
    owners = [row.name.rpartition(".")[0] for row in rows]
    first = named("inlet" if word == "inlet temperature" else word, owners[:1])
    heads = [first, *(owner.rpartition(" ")[2] for owner in owners[1:])]
    spans = ", ".join(f"{head} {spans_text(row)}" for head, row in zip(heads, rows, strict=True))
    return with_unit(spans, unit(kind))


def spans_text(row: FlatNumber) -> str:
    """`364-375 or 396-398`, rounded inwards."""
    return " or ".join("-".join(_inwards(span, row.kind)) for span in row.spans)


def _inwards(span: tuple[float, float], kind: str) -> tuple[str, ...]:
    low, high = (shown(end, kind) or 0.0 for end in span)
    digits = next((n for n in range(3) if (high - low) * 10.0**n >= 10.0), 3)
    size = 10.0**digits
    inner = ceil(low * size - 1e-6) / size, floor(high * size + 1e-6) / size
    if inner[0] >= inner[1]:
        return (brief((low + high) / 2, 4),)
    return fixed(inner[0], digits), fixed(inner[1], digits)


def left_alone_text(flat: Flatness, aim: Aim) -> str:
    """Which settings may stay as today, and what that costs; empty when none."""
    if not flat.left_alone:
        return ""
    groups: dict[str, list[str]] = {}
    for name in flat.left_alone:
        owner, _, word = name.rpartition(".")
        groups.setdefault("inlet" if word == "inlet temperature" else word, []).append(owner)
    what = and_list([named(word, owners) for word, owners in groups.items()])
    size = with_unit(aim.number(flat.left_costs), aim.unit)
    return f"Leave alone {what}: staying as today costs {size}."


def flat_table(flat: Flatness, aim: Aim) -> Table:
    """Best, today, the span within the band, and what staying as today costs."""
    rows = flat.numbers

    def values(which: str) -> tuple[str, ...]:
        return tuple(fixed(shown(getattr(row, which), row.kind), 1) for row in rows)

    return table(f"FLAT WITHIN {aim.number(flat.band)} {aim.unit}", [
        Column(("",), tuple(spoken(row.name) for row in rows), left=True),
        Column(("best",), values("best")),
        Column(("today",), values("today")),
        Column(("flat from - to",), tuple(spans_text(row) for row in rows), left=True),
        Column(("",), tuple(unit(row.kind) for row in rows), left=True),
        Column(("left as today", f"costs {aim.unit}"), tuple(_staying(row, aim) for row in rows)),
    ])  # fmt: skip


def _staying(row: FlatNumber, aim: Aim) -> str:
    return "impossible" if row.staying is None else aim.number(row.staying)
