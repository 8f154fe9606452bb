"""Charts that are not along the train: conversion against temperature, heat, worth of limits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from reactorstage.report import look
from reactorstage.report.cascade import Cascade
from reactorstage.report.conversion import Background, Leg, Rates, background, round_rates, way
from reactorstage.report.diagram import MOST_LEVELS, RATE_GREY, explained, temperature_range
from reactorstage.report.display import allowed, brief, fixed, shown, unit
from reactorstage.report.heat import bound_of, heading, steps
from reactorstage.report.heat import temperature_range as heat_range
from reactorstage.report.page.along import Along, kept
from reactorstage.report.page.chart import LINE, TOP, Bar, Chart, Curve, Label, Reading, spread_labels
from reactorstage.report.page.names import BESIDE, name_labels, room_for
from reactorstage.report.page.profiles import GREY_TEXT, bed_behind
from reactorstage.report.profiles import displayed
from reactorstage.report.temperature import temperature_limits
from reactorstage.report.unit_sets import RATE
from reactorstage.report.worths import WorthBar, number_text
from reactorstage.train.result import Array, Rating

MOST_PERCENT = 103.0
BAR_ROW = 46.0
KINDS = {"bed": "this", "injection": "gap", "exchanger": "exchanger"}


def conversion_chart(what: Along) -> Chart:
    """The way through the train, today's thin behind it, over equilibrium and rates."""
    rating, legs = what.rating, way(what.rating)
    same = what.today is not None and what.today.main_reactant == rating.main_reactant
    before = way(what.today) if same and what.today is not None else []
    low, high = temperature_range(rating, [*legs, *before])
    behind = background(rating, low, high)
    curves = [*_behind(behind), *_limits(rating, low, high)]
    curves += [_leg(leg, True) for leg in before]
    curves += [_leg(leg, False) for leg in legs]
    first, last = displayed(np.array([low, high]), "temperature")
    made = Chart(
        key="conversion",
        title=f"Conversion of {rating.main_reactant} against temperature",
        alt=_conversion_words(legs, rating),
        x_name=f"temperature, {unit('temperature')}",
        y_name=f"{rating.main_reactant} converted, % of what was fed so far",
        x_range=(float(first), float(last)),
        y_range=(0.0, MOST_PERCENT),
        curves=tuple(curves),
        labels=tuple(_rate_labels(behind)),
        legend=tuple(_conversion_legend(behind, legs, bool(before), rating)),
        readings=tuple(_conversion_reading(what, legs)),
        upright=False,
        note=" ".join(explained(rating, behind)),
    )
    return replace(made, labels=(*made.labels, *spread_labels(_bed_names(legs), made.y)))


def _leg(leg: Leg, today: bool) -> Curve:
    kind = KINDS[leg.kind]
    if today:
        kind = "today" if kind == "this" else f"{kind} thin"
    bed = leg.owner if leg.kind == "bed" else bed_behind(leg.owner)
    return Curve(displayed(leg.T, "temperature"), 100.0 * leg.X, look.SPLIT_REACTANT, kind, bed, today)


def _behind(behind: Background | None) -> list[Curve]:
    if behind is None:
        return []
    T = displayed(behind.T, "temperature")
    curves = [Curve(T, 100.0 * behind.equilibrium, look.INK, "plain")]
    if behind.rates is not None:
        best = displayed(behind.rates.best, "temperature")
        curves.append(Curve(best, 100.0 * behind.rates.X, look.INK, "chain"))
        curves += [line for _, line in rate_lines(behind.T, behind.rates)]
    return curves


def rate_lines(T: Array, found: Rates) -> list[tuple[float, Curve]]:
    """Lines of equal rate with their values, each up the rising side and down the falling one."""
    rate = displayed(found.rate, RATE)
    lines = []
    for value in round_rates(rate, MOST_LEVELS):
        rising, falling = zip(*(_crossings(T, row, value) for row in rate), strict=True)
        ends = np.concatenate([np.array(rising), np.array(falling)[::-1]])
        X = 100.0 * np.concatenate([found.X, found.X[::-1]])
        lines.append((value, Curve(displayed(ends, "temperature"), X, RATE_GREY, "hair")))
    return lines


def _crossings(T: Array, row: Array, value: float) -> tuple[float, float]:
    """Where a row of rates first passes a value and where it falls below it again; nan where it does not."""
    above = np.flatnonzero(np.nan_to_num(row, nan=-np.inf) >= value)
    if not above.size:
        return np.nan, np.nan
    first, last = int(above[0]), int(above[-1])
    return _between(T, row, value, first - 1), _between(T, row, value, last)


def _between(T: Array, row: Array, value: float, k: int) -> float:
    """Where the line from point k to the next meets the value; nan outside and where no rate is known."""
    if k < 0 or k + 1 >= len(T) or not np.isfinite(row[k]) or not np.isfinite(row[k + 1]):
        return float("nan")
    return float(T[k] + (value - row[k]) / (row[k + 1] - row[k]) * (T[k + 1] - T[k]))


def _rate_labels(behind: Background | None) -> list[Label]:
    """The value of each line of equal rate at its lowest point."""
    found = []
    for value, line in rate_lines(behind.T, behind.rates) if behind is not None and behind.rates else []:
        there = np.flatnonzero(np.isfinite(line.x))
        if there.size:
            k = int(there[0])
            found.append(
                Label(float(line.x[k]), float(line.y[k]) + 4.0, brief(value), "middle", colour=GREY_TEXT)
            )
    return found


def _limits(rating: Rating, low: float, high: float) -> list[Curve]:
    """Limits on the temperature of beds as dashed uprights."""
    bounds = dict.fromkeys(s.bound for s in temperature_limits(rating) if low < s.bound < high)
    ends = np.array([0.0, MOST_PERCENT])
    return [
        Curve(displayed(np.array([bound, bound]), "temperature"), ends, look.LIMIT, "limit")
        for bound in bounds
    ]


def _bed_names(legs: Sequence[Leg]) -> list[Label]:
    """Names left of where each bed begins."""
    found = []
    for leg in legs:
        if leg.kind == "bed" and leg.T[-1] != leg.T[0]:
            T = float(displayed(leg.T[:1], "temperature")[0])
            found.append(
                Label(
                    T, 100.0 * float(leg.X[0]), leg.owner, "end", (-4.0, 0.0), look.SPLIT_REACTANT, leg.owner
                )
            )
    return found


def _conversion_legend(
    behind: Background | None, legs: Sequence[Leg], today: bool, rating: Rating
) -> list[tuple[str, str, str]]:
    rows = [("this", look.SPLIT_REACTANT, "this setting")]
    rows += [("today", look.SPLIT_REACTANT, "today")] if today else []
    rows += (
        [("gap", look.SPLIT_REACTANT, "injection")] if any(leg.kind == "injection" for leg in legs) else []
    )
    rows += [("plain", look.INK, "equilibrium")] if behind is not None else []
    rows += [("chain", look.INK, "best rate")] if behind is not None and behind.rates is not None else []
    if behind is not None and behind.rates is not None:
        rows.append(("hair", RATE_GREY, f"equal rate, {unit(RATE)}"))
    bounds = {f"{s.label} {allowed(s.bound, s.kind)}": s for s in temperature_limits(rating)}
    return rows + ([("limit", look.LIMIT, ", ".join(bounds))] if bounds else [])


def _conversion_words(legs: Sequence[Leg], rating: Rating) -> str:
    parts = [f"{leg.owner} from {_end(leg, 0)} to {_end(leg, -1)}" for leg in legs if leg.kind == "bed"]
    return f"Key conversion of {rating.main_reactant}: {'; '.join(parts)}."


def _end(leg: Leg, k: int) -> str:
    return (
        f"{100.0 * leg.X[k]:.1f} % at {fixed(shown(float(leg.T[k]), 'temperature'), 1)} {unit('temperature')}"
    )


def _conversion_reading(what: Along, legs: Sequence[Leg]) -> list[Reading]:
    """Conversion at the points of the beds that the way holds; beds before it have none."""
    known = {leg.owner: leg for leg in legs if leg.kind == "bed"}
    texts, xs, ys = [], [], []
    for bed in what.beds:
        leg, points = known.get(bed.owner), kept(bed)
        X = np.full(len(points), np.nan) if leg is None else 100.0 * leg.X[points]
        texts.append(tuple("-" if not np.isfinite(value) else f"{value:.1f}" for value in X))
        xs.append(bed.T[points])
        ys.append(X)
    return [Reading("converted", "%", tuple(texts), (), tuple(xs), tuple(ys))]


def heat_chart(sides: Sequence[Cascade], side: Cascade) -> Chart:
    """One side of the heat over temperature: streams and levels; both sides share one temperature axis."""
    low, high = (shown(T, "temperature") or 0.0 for T in heat_range(sides))
    curves = [
        Curve(displayed(side.heat, "power"), displayed(side.T, "temperature"), look.TEMPERATURE, "this")
    ]
    labels = []
    for start, end, rung in steps(side):
        ends = displayed(np.array([start, end]), "power")
        level, bound = (shown(T, "temperature") or 0.0 for T in (rung.T, bound_of(side, rung)))
        curves.append(Curve(ends, np.array([level, level]), look.HEAT, "this"))
        curves.append(Curve(ends, np.array([bound, bound]), look.LIMIT, "limit"))
        labels.append(
            _rung_label(
                side, ends, level, f"{rung.name}, {brief(shown(rung.heat, 'power'), 3)} {unit('power')}"
            )
        )
    legend = [("this", look.TEMPERATURE, "streams")]
    if side.rungs:
        legend += [("this", look.HEAT, "level"), ("limit", look.LIMIT, "minimum approach")]
    words = ", ".join(f"{brief(shown(r.heat, 'power'), 3)} {unit('power')} with {r.name}" for r in side.rungs)
    name = "added" if side.heating else "removed"
    return Chart(
        key=f"heat-{name}",
        title=f"Heat {name}",
        alt=f"{brief(shown(side.total, 'power'), 4)} {unit('power')} {name}: {words or 'no level'}.",
        x_name=heading(side),
        y_name=f"temperature, {unit('temperature')}",
        x_range=(0.0, shown(side.total, "power") or 1.0),
        y_range=(low, high),
        curves=tuple(curves),
        labels=tuple(labels),
        legend=tuple(legend),
    )


def _rung_label(side: Cascade, ends: Array, level: float, text: str) -> Label:
    """The name of a level: below it where it cools, above where it heats; kept inside the panel."""
    whole = shown(side.total, "power") or 1.0
    middle = float(ends.mean())
    anchor, x = (
        ("start", 0.0)
        if middle < 0.2 * whole
        else ("end", whole)
        if middle > 0.8 * whole
        else ("middle", middle)
    )
    return Label(
        x, level, text, anchor, (3.0 if anchor == "start" else 0.0, -5.0 if side.heating else 13.0), look.HEAT
    )


def worth_chart(bars: Sequence[WorthBar], rating: Rating, name: str) -> Chart:
    """Two bars for each limit at work: dark for what relaxing saves, light for what tightening costs."""
    top = max([*(bar.saves or 0.0 for bar in bars), *(bar.costs or 0.0 for bar in bars), 1e-12])
    room = room_for([bar.name for bar in bars])
    boxes, labels = [], []
    for k, bar in enumerate(bars):
        named = name_labels(0.0, -k, bar.name, room, -2.0)
        below = named[-1].shift[1] + LINE + 1.0
        labels += [*named, Label(0.0, -k, f"by {bar.step}", "end", (-BESIDE / 2, below), GREY_TEXT)]
        for value, shift, colour in ((bar.saves, 0.18, look.MONEY), (bar.costs, -0.18, look.MONEY_LIGHT)):
            boxes.append(Bar((0.0, value or 0.0), (-k + shift - 0.15, -k + shift + 0.15), colour))
            labels.append(Label(value or 0.0, -k + shift, number_text(rating, value), shift=(4.0, 4.0)))
    words = [
        f"{bar.name} by {bar.step}: "
        f"saves {number_text(rating, bar.saves)}, costs {number_text(rating, bar.costs)}"
        for bar in bars
    ]
    return Chart(
        key="worths",
        title="What limits are worth",
        alt=f"{name}. {'; '.join(words)}.",
        x_name=name,
        y_name="",
        x_range=(0.0, 1.16 * top),
        y_range=(-len(bars) + 0.5, 0.5),
        labels=tuple(labels),
        bars=tuple(boxes),
        legend=(("box", look.MONEY, "relaxing saves"), ("box", look.MONEY_LIGHT, "tightening costs")),
        bare_y=True,
        left=room,
        bottom=TOP + BAR_ROW * len(bars),
    )
