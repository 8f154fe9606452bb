"""How far each number can be moved, as charts: search range, flat spans, today's value and the best."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from reactorstage.optimiser.reasons import Flatness, FlatNumber
from reactorstage.report import look
from reactorstage.report.changes import spoken
from reactorstage.report.display import fixed, shown, unit
from reactorstage.report.flatness import spans_text
from reactorstage.report.page.chart import TOP, Bar, Chart, Curve, Mark
from reactorstage.report.page.names import name_labels, room_for

ROW = 30.0
AROUND, ROOM = 0.4, 0.03
HALF = 0.2
COLOURS = {
    "temperature": look.TEMPERATURE,
    "molar flow": look.SPLIT_REACTANT,
    "mass flow": look.SPLIT_REACTANT,
    "fraction": look.SPLIT_REACTANT,
    "pressure": look.PRESSURE,
    "power": look.HEAT,
}
NAMES = {"fraction": "shares", "mass": "masses", "power": "heats"}
Ranges = Mapping[str, tuple[float, float]]


def span_charts(flat: Flatness, ranges: Ranges) -> tuple[Chart, ...]:
    """One chart for each kind of number, since numbers of one kind share an axis; ranges are in SI."""
    kinds = dict.fromkeys(row.kind for row in flat.numbers)
    return tuple(
        _chart(f"flat-{k}", kind, [row for row in flat.numbers if row.kind == kind], ranges)
        for k, kind in enumerate(kinds, 1)
    )


def _chart(key: str, kind: str, rows: Sequence[FlatNumber], ranges: Ranges) -> Chart:
    colour = COLOURS.get(kind, look.LIMIT)
    names = [spoken(row.name) for row in rows]
    low, high = _axis(kind, rows, ranges)
    room = room_for(names)
    return Chart(
        key=key,
        title=f"How far {NAMES.get(kind, f'{kind}s')} can be moved",
        alt=" ".join(_words(name, row, kind) for name, row in zip(names, rows, strict=True)),
        x_name=unit(kind) or "its number",
        y_name="",
        x_range=(low, high),
        y_range=(-len(rows) + 0.5, 0.5),
        curves=tuple(_range_line(k, row, ranges) for k, row in enumerate(rows) if row.name in ranges),
        labels=tuple(one for k, name in enumerate(names) for one in name_labels(low, -k, name, room)),
        bars=tuple(_bar(k, span, kind, colour) for k, row in enumerate(rows) for span in row.spans),
        marks=tuple(mark for k, row in enumerate(rows) for mark in _marks(k, row)),
        legend=_legend(colour, rows, ranges),
        bare_y=True,
        left=room,
        bottom=TOP + ROW * len(rows),
    )  # fmt: skip


def _axis(kind: str, rows: Sequence[FlatNumber], ranges: Ranges) -> tuple[float, float]:
    """What holds every span, today's value and the best, with room beside them up to the search ranges."""
    ends = [end for row in rows for span in row.spans for end in span]
    ends += [end for row in rows for end in (row.best, row.today)]
    beyond = [*ends, *(end for row in rows for end in ranges.get(row.name, ()))]
    low, high, lowest, highest = (
        shown(end, kind) or 0.0 for end in (min(ends), max(ends), min(beyond), max(beyond))
    )
    room = AROUND * (high - low) or 1.0
    low, high = max(low - room, lowest), min(high + room, highest)
    edge = ROOM * (high - low) or 1.0
    return low - edge, high + edge


def _range_line(k: int, row: FlatNumber, ranges: Ranges) -> Curve:
    ends = np.array([shown(end, row.kind) or 0.0 for end in ranges[row.name]])
    return Curve(ends, np.array([-float(k)] * 2), look.LIMIT, "plain")


def _bar(k: int, span: tuple[float, float], kind: str, colour: str) -> Bar:
    low, high = (shown(end, kind) or 0.0 for end in span)
    return Bar((low, high), (-k - HALF, -k + HALF), colour, "reach")


def _marks(k: int, row: FlatNumber) -> tuple[Mark, Mark]:
    today, best = (shown(value, row.kind) or 0.0 for value in (row.today, row.best))
    return Mark(today, -k, "was"), Mark(best, -k, "best")


def _legend(colour: str, rows: Sequence[FlatNumber], ranges: Ranges) -> tuple[tuple[str, str, str], ...]:
    whole = [("plain", look.LIMIT, "search range")] if any(row.name in ranges for row in rows) else []
    return (("reach", colour, "flat"), *whole, ("best", "", "best"), ("was", "", "today"))


def _words(name: str, row: FlatNumber, kind: str) -> str:
    best, today = (fixed(shown(value, kind), 1) for value in (row.best, row.today))
    return f"{name}: flat {spans_text(row)} {unit(kind)}, best {best}, today {today}.".replace(" ,", ",")
