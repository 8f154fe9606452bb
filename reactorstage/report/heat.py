"""Heat over temperature: what streams give and need, the levels that take and give it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.cascade import Cascade, Rung, cascades, left_out, passed_on
from reactorstage.report.cautions import SHORT
from reactorstage.report.display import allowed, and_list, brief, shown, unit
from reactorstage.report.profiles import displayed
from reactorstage.train.result import Array, Rating

HEIGHT, BOTTOM, TOP = 4.1, 0.95, 0.72
BETWEEN = 0.06
LEAST_WIDTH = 0.28
ROOM = 0.2
SUMMED = "Streams are summed from the cold end"
ORDER = "levels lie in the order in which the heat reaches them"


def heat_figure(rating: Rating, title: str, status: str) -> Figure:
    """Heat removed on the left, heat added on the right, over one temperature axis."""
    sides = cascades(rating)
    figure = look.new_figure(HEIGHT, title, status)
    low, high = temperature_range(sides)
    for place, side in zip(_widths(sides), sides, strict=True):
        axes = figure.add_axes((place[0], BOTTOM / HEIGHT, place[1], (HEIGHT - BOTTOM - TOP) / HEIGHT))
        axes.set_ylim(*displayed_range(low, high))
        _side(axes, side)
        first = side is sides[0]
        axes.tick_params(labelleft=first, labelsize=look.TEXT - 0.5)
        if first:
            look.value_axis(axes, f"temperature, {unit('temperature')}")
            axes.yaxis.set_label_coords(-0.083 * (look.RIGHT - look.LEFT) / place[1], 0.5)
    look.key(figure, _key_rows(sides), look.TEMPERATURE)
    figure.text(
        look.LEFT, 0.1 / HEIGHT, "\n".join(notes(rating, sides)), va="bottom", fontsize=look.SMALL - 0.4
    )
    return figure


def notes(rating: Rating, sides: Sequence[Cascade]) -> list[str]:
    """How the lines are made, the approach, what is not drawn."""
    approach = (
        [f"Minimum approach {allowed(sides[0].approach, 'temperature difference')}."] if rating.heat else []
    )
    absent = left_out(rating)
    missing = [f"Not drawn, since its heat is unpriced: {and_list(absent)}."] if absent else []
    between = ["Heat that passes between two streams is left out."] if passed_on(rating) else []
    said = " ".join([*approach, *missing, *between])
    first = f"{SUMMED}; {ORDER}." if any(side.rungs for side in sides) else f"{SUMMED}."
    return [first, *([said] if said else []), SHORT]


def heading(side: Cascade) -> str:
    """The name of the heat axis."""
    return f"heat {'added' if side.heating else 'removed'}, {unit('power')}"


def temperature_range(sides: Sequence[Cascade]) -> tuple[float, float]:
    """Lowest and highest temperature of streams and levels, K, with room."""
    T = [float(T) for side in sides for T in (*side.T, *(rung.T for rung in side.rungs))]
    room = ROOM * max(max(T) - min(T), 10.0)
    return min(T) - room, max(T) + room


def displayed_range(low: float, high: float) -> tuple[float, float]:
    """Two temperatures in display units."""
    return shown(low, "temperature") or 0.0, shown(high, "temperature") or 0.0


def _widths(sides: Sequence[Cascade]) -> list[tuple[float, float]]:
    """Left edge and width of each side, in proportion to its heat as far as it stays readable."""
    room = 0.97 - look.LEFT - BETWEEN * (len(sides) - 1)
    parts = [max(side.total, 1.0) for side in sides]
    shares = [max(part / sum(parts), LEAST_WIDTH) for part in parts]
    widths = [room * share / sum(shares) for share in shares]
    starts = [look.LEFT + sum(widths[:k]) + BETWEEN * k for k in range(len(sides))]
    return list(zip(starts, widths, strict=True))


def _side(axes: Axes, side: Cascade) -> None:
    axes.plot(
        displayed(side.heat, "power"),
        displayed(side.T, "temperature"),
        color=look.TEMPERATURE,
        linewidth=look.THIS_WEIGHT,
        zorder=4,
    )
    axes.set_xlim(0.0, shown(side.total, "power") or 1.0)
    axes.set_xlabel(heading(side))
    for start, end, rung in steps(side):
        _rung(axes, side, start, end, rung)


def steps(side: Cascade) -> list[tuple[float, float, Rung]]:
    """Heat at which each level begins and ends, W, from the cold end."""
    found, start = [], 0.0
    for rung in side.rungs:
        found.append((start, start + rung.heat, rung))
        start += rung.heat
    return found


def bound_of(side: Cascade, rung: Rung) -> float:
    """The temperature, K, that streams must stay beyond to use a level."""
    return rung.T - side.approach if side.heating else rung.T + side.approach


def _rung(axes: Axes, side: Cascade, start: float, end: float, rung: Rung) -> None:
    """A level, dashed where the approach to it ends, with its name and heat."""
    ends: Array = displayed(np.array([start, end]), "power")
    level, bound = (shown(T, "temperature") or 0.0 for T in (rung.T, bound_of(side, rung)))
    axes.plot(ends, [level, level], color=look.HEAT, linewidth=look.THIS_WEIGHT, zorder=3)
    axes.plot(
        ends, [bound, bound], color=look.LIMIT, linewidth=look.LIMIT_WEIGHT, linestyle=look.DASHED, zorder=2
    )
    above = side.heating
    axes.annotate(
        f"{rung.name}\n{brief(shown(rung.heat, 'power'), 3)} {unit('power')}",
        (float(ends.mean()), level),
        (0, 3 if above else -3),
        textcoords="offset points",
        ha="center",
        va="bottom" if above else "top",
        fontsize=look.SMALL - 0.4,
        color=look.HEAT,
        linespacing=1.1,
        zorder=6,
    )


def _key_rows(sides: Sequence[Cascade]) -> list[look.KeyRow]:
    rows = [look.KeyRow("streams", look.THIS_WEIGHT)]
    if any(side.rungs for side in sides):
        rows.append(look.KeyRow("level", look.THIS_WEIGHT, look.SOLID, look.HEAT))
        rows.append(look.KeyRow("minimum approach", look.LIMIT_WEIGHT, look.DASHED, look.LIMIT))
    return rows
