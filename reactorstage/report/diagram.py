"""Key conversion against temperature: beds, gaps and limits over equilibrium, best rate and equal rates."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.cautions import SHORT
from reactorstage.report.conversion import Background, Leg, background, levels, way, whole_feed
from reactorstage.report.display import allowed, brief, owners_text, shown, told, unit
from reactorstage.report.profiles import displayed
from reactorstage.report.temperature import WORDS
from reactorstage.train.result import Array, LimitState, Rating

HEIGHT = 5.2
BOTTOM, TOP = 0.98, 0.95
RIGHT_ROOM, LEFT_ROOM = 0.14, 0.2
REACH = 0.3
TOP_PERCENT = 103.0
MOST_LEVELS = 7
RATE = "#a9b0b8"
RATE_WEIGHT, LINE_WEIGHT, GAP_PART = 0.7, 1.4, 0.5
BEST: look.LineStyle = (0, (7.0, 2.0, 1.5, 2.0))
LABEL_HEIGHT, LABEL_APART = 0.03, 0.07
HEAD_APART = 62.0


def conversion_figure(rating: Rating, today: Rating | None, title: str, status: str) -> Figure:
    """The way through the train, today's thin behind it, limits dashed; what the lines are for, below."""
    legs, before = way(rating), way(today) if today is not None else []
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
    look.value_axis(axes, f"{rating.main_reactant} converted, % of what was fed so far")
    axes.tick_params(labelsize=look.TEXT - 0.5)
    look.key(figure, _key_rows(rating, behind, legs, today is not None), look.SPLIT_REACTANT)
    _notes(figure, rating, behind)
    return figure


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
        axes.plot(best, 100.0 * behind.rates.X, color=look.INK, linewidth=1.0, linestyle=BEST, zorder=2.4)
    return labels


def _rates(axes: Axes, behind: Background | None, legs: Sequence[Leg]) -> None:
    """Lines of equal rate, each with its value where it rises through the foot of the picture."""
    if behind is None or behind.rates is None:
        return
    T, X = displayed(behind.T, "temperature"), 100.0 * behind.rates.X
    rate = 1e3 * displayed(behind.rates.rate, "molar flow")
    values = levels(rate, MOST_LEVELS)
    if not values:
        return
    axes.contour(T, X, rate, levels=values, colors=RATE, linewidths=RATE_WEIGHT, zorder=1.5)
    foot = int(np.searchsorted(behind.rates.X, LABEL_HEIGHT))
    for x, value in _placed(axes, T, rate[foot], values, legs):
        axes.annotate(
            brief(value),
            (x, float(X[foot])),
            ha="center",
            va="center",
            fontsize=look.SMALL - 0.6,
            color=look.LIMIT,
            zorder=1.6,
            bbox=look.CLEARED | {"alpha": 1.0},
        )


def _placed(
    axes: Axes, T: Array, row: Array, values: Sequence[float], legs: Sequence[Leg]
) -> list[tuple[float, float]]:
    """Where the rates of a row rise through the values, leaving out what would stand on something else."""
    left, right = axes.get_xlim()
    apart = LABEL_APART * (right - left)
    taken = [left, right, *(float(displayed(leg.T[:1], "temperature")[0]) for leg in legs if leg.X[0] < 0.1)]
    found = []
    top = int(np.nanargmax(row))
    for value in values:
        if not row[0] < value < row[top]:
            continue
        x = float(np.interp(value, row[: top + 1], T[: top + 1]))
        if all(abs(x - other) > apart for other in taken):
            taken.append(x)
            found.append((x, value))
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
    rows = [
        look.KeyRow("this setting", look.THIS_WEIGHT),
        look.KeyRow("today", look.TODAY_WEIGHT) if with_today else None,
        look.KeyRow("injection", look.THIS_WEIGHT * GAP_PART, look.DOTTED) if injects else None,
        look.KeyRow("limit", look.LIMIT_WEIGHT, look.DASHED, look.LIMIT) if _limits(rating) else None,
        look.KeyRow("best rate", 1.0, BEST, look.INK) if single else None,
        look.KeyRow("equal rate, kmol/(t h)", RATE_WEIGHT, look.SOLID, RATE) if single else None,
    ]
    return [row for row in rows if row is not None]


def _notes(figure: Figure, rating: Rating, behind: Background | None) -> None:
    """What the lines behind the way hold for, and the caution."""
    lines = [*explained(rating, behind), SHORT]
    text = "\n".join(lines)
    figure.text(
        look.LEFT, 0.1 / HEIGHT, text, ha="left", va="bottom", fontsize=look.SMALL - 0.4, linespacing=1.3
    )


def explained(rating: Rating, behind: Background | None) -> list[str]:
    """Sentences that say for what the lines of equilibrium and rate hold."""
    name = rating.main_reactant
    if behind is None:
        return [f"No reversible reaction uses {name}: there is no line of equilibrium."]
    feed = f"all feeds together at {told(whole_feed(rating).p, 'pressure')}"
    if behind.rates is not None:
        return [f"Equilibrium, best rate and equal rates: for {feed}, catalyst activity 1."]
    return [
        f"Several reactions: the way shows {name} used by all of them. Equilibrium is that of {behind.reaction}",
        f"alone, for {feed}, without by-products; the way may cross it. No lines of rate.",
    ]
