"""Temperature along the train: beds as bands, gaps as upright steps with their heat."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.cautions import SHORT
from reactorstage.report.display import allowed, fixed, owners_text, places, shown, unit, with_unit
from reactorstage.report.profiles import BedProfile, displayed, train_profiles
from reactorstage.train.result import LimitState, Rating, StepState

HEIGHT = 4.5
WORDS = ("inlet temperature", "exit temperature", "peak temperature")
REACH = 0.5
PEAK_SHOWN_K = 0.5
CLOSE = 0.08
LABEL_PART = 0.13
NO_HEAT = 500.0
Side = Literal["left", "center", "right"]
HEAT_SIDES: dict[str, tuple[Side, float]] = {"entry": ("left", 0.0), "effluent": ("right", LABEL_PART)}


def temperature_figure(rating: Rating, today: Rating | None, title: str, status: str) -> Figure:
    """Temperature over cumulative catalyst, today's thin behind it, limits dashed."""
    beds = train_profiles(rating)
    figure = look.new_figure(HEIGHT, title, status)
    axes = look.panel(figure, 0.82, HEIGHT - 0.95)
    look.bed_bands(axes, beds, names=True)
    if today is not None:
        _curve(axes, today, train_profiles(today), look.TODAY_WEIGHT)
    _curve(axes, rating, beds, look.THIS_WEIGHT)
    heats = heat_labels(rating, beds)
    _set_range(axes, rating, beds, today, 1 + max((heat.row for heat in heats), default=-1))
    _values(axes, rating, beds)
    _limits(axes, rating, beds)
    _equilibria(axes, rating, beds)
    _heats(axes, heats)
    look.catalyst_axis(axes, shown=True)
    look.value_axis(axes, f"temperature, {unit('temperature')}")
    low, high = axes.get_ylim()
    levels = any(low < T < high for T in equilibria(rating, beds).values())
    _key(figure, rating, today is not None, levels)
    figure.text(look.LEFT, 0.1 / HEIGHT, SHORT, ha="left", va="bottom", fontsize=look.SMALL - 0.4)
    return figure


def _curve(axes: Axes, rating: Rating, beds: Sequence[BedProfile], weight: float) -> None:
    for bed in beds:
        axes.plot(bed.catalyst, bed.T, color=look.TEMPERATURE, linewidth=weight, zorder=3 + weight)
    for place, x in places_of_gaps(beds):
        for step in rating.steps:
            if step.owner == place and place.startswith("gap"):
                _upright(axes, step, x, weight)


def _upright(axes: Axes, step: StepState, x: float, weight: float) -> None:
    """A step of a gap: injections dotted, exchangers solid."""
    if step.T_before is None:
        return
    ends = displayed(np.array([step.T_before, step.T_after]), "temperature")
    style = look.SOLID if step.kind in ("heat", "cool") else look.DOTTED
    axes.plot(
        [x, x], ends, color=look.TEMPERATURE, linewidth=weight * 0.7, linestyle=style, zorder=3 + weight
    )


def places_of_gaps(beds: Sequence[BedProfile]) -> list[tuple[str, float]]:
    """Entry, gaps and effluent with the catalyst that lies before them."""
    gaps = [(f"gap {bed.owner.removeprefix('bed ')}", float(bed.catalyst[-1])) for bed in beds[:-1]]
    return [("entry", 0.0), *gaps, ("effluent", float(beds[-1].catalyst[-1]))]


def _set_range(
    axes: Axes, rating: Rating, beds: Sequence[BedProfile], today: Rating | None, rows: int
) -> None:
    shown_beds = [*beds, *(train_profiles(today) if today is not None else [])]
    low = min(float(bed.T.min()) for bed in shown_beds)
    high = max(max(float(bed.T.max()), bed.T_peak) for bed in shown_beds)
    span = max(high - low, 2.0)
    bounds = [_bound(state) for state in temperature_limits(rating)]
    bounds += [T for T in equilibria(rating, beds).values() if low < T]
    near = [bound for bound in bounds if low - REACH * span < bound < high + REACH * span]
    low, high = min([low, *near]), max([high, *near])
    axes.set_ylim(low - (0.11 + 0.08 * rows) * (high - low), high + 0.07 * (high - low))


def equilibria(rating: Rating, beds: Sequence[BedProfile]) -> dict[str, float]:
    """The adiabatic equilibrium temperature of what enters each bed, display units, where there is one."""
    values = {bed.owner: rating.quantities.get(f"{bed.owner}.equilibrium temperature") for bed in beds}
    known = {owner: shown(value.value, value.kind) for owner, value in values.items() if value is not None}
    return {owner: T for owner, T in known.items() if T is not None}


def _equilibria(axes: Axes, rating: Rating, beds: Sequence[BedProfile]) -> None:
    """A level over each bed: as hot as it could become."""
    low, high = axes.get_ylim()
    known = equilibria(rating, beds)
    for bed in beds:
        T = known.get(bed.owner, low)
        if low < T < high and bed.catalyst[-1] > bed.catalyst[0]:
            ends = (float(bed.catalyst[0]), float(bed.catalyst[-1]))
            axes.plot(ends, (T, T), color=look.INK, linewidth=1.0, linestyle=look.CHAIN, zorder=2.5)


def temperature_limits(rating: Rating) -> list[LimitState]:
    return [
        state
        for state in rating.limits
        if state.kind == "temperature"
        and state.owner.startswith("bed ")
        and not state.implied
        and state.quantity.partition(".")[2] in WORDS
    ]


def _bound(state: LimitState) -> float:
    return shown(state.bound, state.kind) or 0.0


def _limits(axes: Axes, rating: Rating, beds: Sequence[BedProfile]) -> None:
    """Dashed grey over the beds that a limit speaks of; one label per limit and bound at the right."""
    spans = {bed.owner: (float(bed.catalyst[0]), float(bed.catalyst[-1])) for bed in beds}
    groups: dict[tuple[str, str], list[LimitState]] = {}
    for state in temperature_limits(rating):
        if state.owner in spans:
            groups.setdefault((state.label, allowed(state.bound, state.kind)), []).append(state)
    low, high = axes.get_ylim()
    labels = []
    for (label, bound), states in groups.items():
        y = _bound(states[0])
        for state in states if low < y < high else []:
            axes.plot(
                spans[state.owner],
                (y, y),
                color=look.LIMIT,
                linewidth=look.LIMIT_WEIGHT,
                linestyle=look.DASHED,
                zorder=2,
            )
        labels.append(
            (min(max(y, low), high), _limit_label(label, bound, states, len(beds), y, low, high), look.LIMIT)
        )
    look.end_labels(axes, labels)


def _limit_label(
    label: str, bound: str, states: Sequence[LimitState], beds: int, y: float, low: float, high: float
) -> str:
    where = "" if len(states) == beds else f"\n{owners_text([state.owner for state in states])}"
    off = " (above)" if y > high else " (below)" if y < low else ""
    return f"{label}{where}\n{bound}{off}"


def _values(axes: Axes, rating: Rating, beds: Sequence[BedProfile]) -> None:
    """Inlet, exit and, where it is hotter than the exit, peak in numbers."""
    levels = equilibria(rating, beds)
    total = float(beds[-1].catalyst[-1])
    for bed in beds:
        if (bed.catalyst[-1] - bed.catalyst[0]) / total < 0.07:
            continue
        _value(axes, bed.catalyst[0], bed.T[0], (4, -9), "left")
        rising = bed.T[-1] >= bed.T[0]
        lift = lifted(float(bed.T[-1]), levels.get(bed.owner), axes.get_ylim()) if rising else 0.0
        text = _degrees(float(bed.T[-1]))
        _value(axes, bed.catalyst[-1], bed.T[-1] + lift, (-4, 5 if rising else -9), "right", text)
        if bed.T_peak > max(bed.T[-1], bed.T[0]) + PEAK_SHOWN_K:
            axes.plot(
                [bed.peak_catalyst], [bed.T_peak], marker="^", markersize=5, color=look.TEMPERATURE, zorder=6
            )
            _value(axes, bed.peak_catalyst, bed.T_peak, (0, 6), "center")


def lifted(exit_: float, level: float | None, span: tuple[float, float]) -> float:
    """How much higher the number of an exit must stand to clear an equilibrium that lies close above it."""
    close = level is not None and 0.0 <= level - exit_ < CLOSE * (span[1] - span[0])
    return level - exit_ if close and level is not None else 0.0


def _degrees(T: float) -> str:
    return fixed(T, 0 if abs(T) >= 1000 else 1)


def _value(axes: Axes, x: float, y: float, offset: tuple[float, float], side: str, text: str = "") -> None:
    axes.annotate(
        text or _degrees(float(y)),
        (float(x), float(y)),
        offset,
        textcoords="offset points",
        ha=side,
        va="baseline",
        fontsize=look.SMALL,
        zorder=7,
        bbox=look.CLEARED,
    )


@dataclass(frozen=True)
class HeatLabel:
    """Heat of one place: its catalyst coordinate, text, alignment and row counted from below."""

    x: float
    text: str
    side: Side
    row: int


def heat_labels(rating: Rating, beds: Sequence[BedProfile]) -> list[HeatLabel]:
    """Heat of entry, gaps and effluent, sign in words; labels that would touch go into rows above."""
    total = float(beds[-1].catalyst[-1])
    exchanging = {step.owner for step in rating.steps if step.kind in ("heat", "cool")}
    ends: list[float] = []
    found = []
    for place, x in places_of_gaps(beds):
        heat = rating.quantities.get(f"{place}.heat removed")
        if place not in exchanging or heat is None or heat.value is None:
            continue
        side, before = HEAT_SIDES.get(place, ("center", LABEL_PART / 2))
        start = x / total - before
        row = next((i for i, end in enumerate(ends) if start > end), len(ends))
        ends[row : row + 1] = [start + LABEL_PART]
        found.append(HeatLabel(x, heat_text(heat.value), side, row))
    return found


def _heats(axes: Axes, labels: Sequence[HeatLabel]) -> None:
    for label in labels:
        aside = {"left": 3, "center": 0, "right": -3}[label.side]
        axes.annotate(
            label.text,
            (label.x, 0.0),
            (aside, 4 + 10 * label.row),
            xycoords=("data", "axes fraction"),
            textcoords="offset points",
            ha=label.side,
            va="bottom",
            fontsize=look.SMALL,
        )


def heat_text(watt: float) -> str:
    """`1.80 MW out`, `5.17 MW in`: the sign of heat in words."""
    heat = shown(watt, "power") or 0.0
    if abs(watt) < NO_HEAT:
        return with_unit("0", unit("power"))
    decimals = places("power", 2 if abs(heat) < 10 else 1)
    size = with_unit(fixed(abs(heat), decimals), unit("power"))
    return f"{size} out" if heat > 0 else f"{size} in"


def _key(figure: Figure, rating: Rating, with_today: bool, levels: bool) -> None:
    """What the line kinds mean, as far as they are there."""
    weight = look.THIS_WEIGHT
    rows = [
        look.KeyRow("this setting", weight),
        look.KeyRow("today", look.TODAY_WEIGHT) if with_today else None,
        look.KeyRow("injection", weight * 0.7, look.DOTTED) if _injects(rating) else None,
        look.KeyRow("limit", look.LIMIT_WEIGHT, look.DASHED, look.LIMIT)
        if temperature_limits(rating)
        else None,
        look.KeyRow("equilibrium", 1.0, look.CHAIN, look.INK) if levels else None,
    ]
    look.key(figure, [row for row in rows if row is not None], look.TEMPERATURE)


def _injects(rating: Rating) -> bool:
    return any(step.kind == "inject" and step.owner.startswith("gap ") for step in rating.steps)
