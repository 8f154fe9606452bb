"""Key conversion against temperature: beds, gaps and limits over equilibrium, best rate and equal rates."""

from __future__ import annotations

from collections.abc import Sequence
from textwrap import fill

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.cautions import SHORT
from reactorstage.report.conversion import (
    Background,
    Leg,
    background,
    has_conversion,
    round_rates,
    way,
    whole_feed,
)
from reactorstage.report.display import allowed, brief, owners_text, shown, told, unit
from reactorstage.report.profiles import displayed
from reactorstage.report.temperature import WORDS
from reactorstage.report.unit_sets import RATE
from reactorstage.train.result import Array, LimitState, Rating

HEIGHT = 5.2
BOTTOM, TOP = 0.98, 0.95
NOTE_WIDTH = 121
"""Letters of a note that fit into a line."""

RIGHT_ROOM, LEFT_ROOM = 0.14, 0.2
REACH = 0.3
TOP_PERCENT = 103.0
MOST_LEVELS = 7
RATE_GREY = "#8a9199"
RATE_WEIGHT, LINE_WEIGHT, GAP_PART = 0.7, 1.4, 0.5
LABEL_ROWS, LABEL_APART = (0.03, 0.13, 0.23, 0.33), 0.07
HEAD_APART = 62.0
NAME_ROOM, NAME_WIDTH = 7.0, 0.08


def conversion_figure(rating: Rating, today: Rating | None, title: str, status: str) -> Figure:
    """The way through the train, today's thin behind it, limits dashed; what the lines are for, below."""
    legs, before = way(rating), _way_of_today(rating, today)
    figure = look.new_figure(HEIGHT, title, status)
    axes = look.panel(figure, BOTTOM, HEIGHT - TOP)
    low, high = temperature_range(rating, [*legs, *before])
    axes.set_xlim(*displayed(np.array([low, high]), "temperature"))
    axes.set_ylim(0.0, TOP_PERCENT)
    behind = background(rating, low, high)
    _way(axes, before, look.TODAY_WEIGHT)
    _way(axes, legs, look.THIS_WEIGHT)
    look.end_labels(axes, [*_lines(axes, behind), *_conversion_limits(axes, rating)])
    _rates(axes, behind, legs)
    _temperature_limits(axes, rating)
    _bed_names(axes, legs)
    axes.set_xlabel(f"temperature, {unit('temperature')}")
    look.value_axis(axes, f"{rating.main_reactant} converted,\n% of what was fed so far")
    axes.tick_params(labelsize=look.TEXT - 0.5)
    look.key(figure, _key_rows(rating, behind, legs, bool(before)), look.SPLIT_REACTANT)
    _notes(figure, rating, behind)
    return figure


def _way_of_today(rating: Rating, today: Rating | None) -> list[Leg]:
    """Today's way, where it counts the same conversion."""
    if today is None or not has_conversion(today) or today.main_reactant != rating.main_reactant:
        return []
    return way(today)


def temperature_range(rating: Rating, legs: Sequence[Leg]) -> tuple[float, float]:
    """Temperatures to show, K: the way with room beside it, limits that lie near."""
    T = np.concatenate([leg.T for leg in legs])
    low, high = float(T.min()), float(T.max())
    span = max(high - low, 10.0)
    near = [one.bound for one in _limits(rating) if low - REACH * span < one.bound < high + REACH * span]
    low, high = min([low, *near]), max([high, *near])
    return low - LEFT_ROOM * span, high + RIGHT_ROOM * span


def _way(axes: Axes, legs: Sequence[Leg], weight: float) -> None:
    """Beds thick, gaps thin: exchangers solid and level, injections dotted."""
    for leg in legs:
        gap = leg.kind != "bed"
        axes.plot(
            displayed(leg.T, "temperature"),
            100.0 * leg.X,
            color=look.SPLIT_REACTANT,
            linewidth=weight * (GAP_PART if gap else 1.0),
            linestyle=look.DOTTED if leg.kind == "injection" else look.SOLID,
            zorder=3 + weight,
        )


def _lines(axes: Axes, behind: Background | None) -> list[tuple[float, str, str]]:
    """Equilibrium and best rate; where they leave the panel, with their names."""
    if behind is None:
        return []
    T = displayed(behind.T, "temperature")
    axes.plot(T, 100.0 * behind.equilibrium, color=look.INK, linewidth=LINE_WEIGHT, zorder=2.5)
    labels = [(100.0 * float(behind.equilibrium[-1]), "equilibrium", look.INK)]
    if behind.rates is not None:
        best = displayed(behind.rates.best, "temperature")
        axes.plot(
            best, 100.0 * behind.rates.X, color=look.INK, linewidth=1.0, linestyle=look.CHAIN, zorder=2.4
        )
    return labels


def _rates(axes: Axes, behind: Background | None, legs: Sequence[Leg]) -> None:
    """Lines of equal rate, each with its value where it rises through the foot of the picture."""
    if behind is None or behind.rates is None:
        return
    T, X = displayed(behind.T, "temperature"), 100.0 * behind.rates.X
    rate = displayed(behind.rates.rate, RATE)
    values = round_rates(rate, MOST_LEVELS)
    if not values:
        return
    axes.contour(T, X, rate, levels=values, colors=RATE_GREY, linewidths=RATE_WEIGHT, zorder=1.5)
    for value, x, y in _placed(axes, behind, rate, values, legs):
        axes.annotate(
            brief(value),
            (x, y),
            ha="center",
            va="center",
            fontsize=look.SMALL - 0.6,
            color=look.LIMIT,
            zorder=1.6,
            bbox=look.CLEARED | {"alpha": 1.0},
        )


def _placed(
    axes: Axes, behind: Background, rate: Array, values: Sequence[float], legs: Sequence[Leg]
) -> list[tuple[float, float, float]]:
    """Each value with a place (T, %) where the rate rises through it, low down and clear of all else."""
    assert behind.rates is not None
    T = displayed(behind.T, "temperature")
    left, right = axes.get_xlim()
    found: list[tuple[float, float, float]] = []
    for value in values:
        for height in LABEL_ROWS:
            m = int(np.searchsorted(behind.rates.X, height))
            top = int(np.argmax(np.nan_to_num(rate[m])))
            if not rate[m, 0] < value < rate[m, top]:
                continue
            x, y = float(np.interp(value, rate[m, : top + 1], T[: top + 1])), 100.0 * float(behind.rates.X[m])
            taken = [left, right, *_crossings(legs, y), *(other for _, other, row in found if row == y)]
            if all(abs(x - other) > LABEL_APART * (right - left) for other in taken):
                found.append((value, x, y))
                break
    return found


def _crossings(legs: Sequence[Leg], y: float) -> list[float]:
    """Temperatures at which beds pass a level, names beside their beginnings included."""
    found = []
    for leg in legs:
        T, X = displayed(leg.T, "temperature"), 100.0 * leg.X
        if leg.kind == "bed" and X[0] - NAME_ROOM < y < X[-1]:
            found.append(float(np.interp(y, X, T)))
            found += [float(T[0]) - NAME_WIDTH * float(np.ptp(T))] if y < X[0] + NAME_ROOM else []
    return found


def _limits(rating: Rating) -> list[LimitState]:
    """Limits on the temperatures of beds."""
    return [
        state
        for state in rating.limits
        if state.kind == "temperature" and not state.implied and state.quantity.partition(".")[2] in WORDS
    ]


def _temperature_limits(axes: Axes, rating: Rating) -> None:
    """Dashed uprights, one per label and bound, named above the panel."""
    groups: dict[tuple[str, str], list[LimitState]] = {}
    for state in _limits(rating):
        groups.setdefault((state.label, allowed(state.bound, state.kind)), []).append(state)
    left, right = axes.get_xlim()
    heads = []
    for (label, bound), states in groups.items():
        x = shown(states[0].bound, "temperature") or 0.0
        if left < x < right:
            axes.axvline(x, color=look.LIMIT, linewidth=look.LIMIT_WEIGHT, linestyle=look.DASHED, zorder=2)
            owners = owners_text([state.owner for state in states])
            whole = len(states) == len(rating.profiles)
            heads.append((x, f"{label}\n{bound}" if whole else f"{label}, {owners}\n{bound}"))
    _heads(axes, sorted(heads))


def _heads(axes: Axes, heads: Sequence[tuple[float, str]]) -> None:
    """Texts above the panel, pushed apart."""
    box = axes.get_window_extent()
    point = axes.figure.dpi / 72.0
    wanted = [float(axes.transData.transform((x, 0.0))[0]) for x, _ in heads]
    for place, (_, text) in zip(look.spaced(wanted, HEAD_APART * point), heads, strict=True):
        axes.annotate(
            text,
            ((place - box.x0) / box.width, 1.0),
            (0, 3),
            xycoords="axes fraction",
            textcoords="offset points",
            ha="center",
            va="bottom",
            fontsize=look.SMALL,
            color=look.LIMIT,
            linespacing=1.15,
        )


def _conversion_limits(axes: Axes, rating: Rating) -> list[tuple[float, str, str]]:
    """Dashed levels of limits on what is converted or left of the main reactant, with their names."""
    labels = []
    for state in rating.limits:
        X = _as_conversion(rating, state)
        if X is None or not 0.0 < X < 1.0:
            continue
        axes.axhline(
            100.0 * X, color=look.LIMIT, linewidth=look.LIMIT_WEIGHT, linestyle=look.DASHED, zorder=2
        )
        labels.append((100.0 * X, f"{state.label}\n{allowed(state.bound, state.kind)}", look.LIMIT))
    return labels


def _as_conversion(rating: Rating, state: LimitState) -> float | None:
    name = rating.main_reactant
    if state.quantity == f"train.conversion of {name}":
        return state.bound
    if state.quantity == f"effluent.flow of {name}" and not state.implied:
        return 1.0 - state.bound / whole_feed(rating).main
    return None


def _bed_names(axes: Axes, legs: Sequence[Leg]) -> None:
    """Names left of where each bed begins, pushed apart."""
    beds = [leg for leg in legs if leg.kind == "bed" and leg.T[-1] != leg.T[0]]
    beds.sort(key=lambda leg: float(leg.X[0]))
    box, point = axes.get_window_extent(), axes.figure.dpi / 72.0
    wanted = [float(axes.transData.transform((0.0, 100.0 * float(leg.X[0])))[1]) for leg in beds]
    lowest = box.y0 + 0.6 * look.LINE_POINTS * point
    for place, leg in zip(
        look.spaced([max(y, lowest) for y in wanted], look.LINE_POINTS * point), beds, strict=True
    ):
        start = float(displayed(leg.T[:1], "temperature")[0])
        y = float(axes.transData.inverted().transform((0.0, place))[1])
        axes.annotate(
            leg.owner,
            (start, y),
            (-5, 0),
            textcoords="offset points",
            ha="right",
            va="center",
            fontsize=look.SMALL,
            color=look.SPLIT_REACTANT,
            zorder=7,
            bbox=look.CLEARED,
        )


def _key_rows(
    rating: Rating, behind: Background | None, legs: Sequence[Leg], with_today: bool
) -> list[look.KeyRow]:
    """What the kinds of line mean, as far as they are there."""
    injects = any(leg.kind == "injection" for leg in legs)
    single = behind is not None and behind.rates is not None
    best = behind is not None and behind.rates is not None and bool(np.isfinite(behind.rates.best).any())
    rows = [
        look.KeyRow("this setting", look.THIS_WEIGHT),
        look.KeyRow("today", look.TODAY_WEIGHT) if with_today else None,
        look.KeyRow("injection", look.THIS_WEIGHT * GAP_PART, look.DOTTED) if injects else None,
        look.KeyRow("limit", look.LIMIT_WEIGHT, look.DASHED, look.LIMIT) if _limits(rating) else None,
        look.KeyRow("best rate", 1.0, look.CHAIN, look.INK) if best else None,
        look.KeyRow(f"equal rate, {unit(RATE)}", RATE_WEIGHT, look.SOLID, RATE_GREY) if single else None,
    ]
    return [row for row in rows if row is not None]


def _notes(figure: Figure, rating: Rating, behind: Background | None) -> None:
    """What the lines behind the way hold for, and the caution."""
    lines = [fill(line, NOTE_WIDTH) for line in explained(rating, behind)]
    text = "\n".join([*lines, SHORT])
    figure.text(
        look.LEFT, 0.1 / HEIGHT, text, ha="left", va="bottom", fontsize=look.SMALL - 0.4, linespacing=1.3
    )


def explained(rating: Rating, behind: Background | None) -> list[str]:
    """Sentences that say for what the lines of equilibrium and rate hold."""
    name = rating.main_reactant
    if behind is None:
        return [f"No reversible reaction uses {name}: there is no line of equilibrium."]
    feed = f"all feeds together at {told(whole_feed(rating).p, 'pressure')}"
    if any(step.kind == "remove" for step in rating.steps):
        feed += " and nothing removed"
    own = " by the law's own constant" if behind.own_K else ""
    if behind.rates is not None:
        return [f"Equilibrium{own}, best rate and equal rates: for {feed}, catalyst activity 1."]
    return [
        f"Several reactions: the train shows {name} used by all of them and may cross the equilibrium,",
        f"which is that of {behind.reaction} alone{own}, for {feed}, without by-products. No rates drawn.",
    ]
