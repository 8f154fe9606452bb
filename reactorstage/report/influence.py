"""What moves the answer, as a picture: change of the best cost with a small step of each parameter."""

from __future__ import annotations

from collections.abc import Sequence
from textwrap import fill

from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.aim import MONEY, Aim
from reactorstage.report.drivers import aim_change, change_text, drivers
from reactorstage.train.influence import Influence

ROWS = 16
ROW_INCHES = 0.235
ABOVE, BELOW = 0.6, 0.74
NAMES = 0.42
NAME_WIDTH = 46
"""Letters of a name that fit beside its bar; longer ones go on in a second line."""
FAINTEST = 1e-3
WORSE, BETTER = look.INK, look.LIMIT
NOTE = (
    "Each parameter alone, to first order, everything else re-optimised; the limits at work stay at work. "
    "Steps are not equally likely."
)


def says_something(found: Sequence[Influence]) -> bool:
    """Whether there is anything to draw."""
    return any(one.change != 0.0 for one in found)


def influence_figure(found: Sequence[Influence], aim: Aim, title: str, status: str) -> Figure:
    """Bars to the right where what is aimed at rises, to the left where it falls, largest on top."""
    rows = drivers(found)[:ROWS]
    rows = [row for row in rows if abs(row.change) > FAINTEST * abs(rows[0].change)]
    height = ABOVE + BELOW + ROW_INCHES * len(rows)
    figure = look.new_figure(height, title, status)
    box = (NAMES, BELOW / height, look.RIGHT - NAMES + 0.07, ROW_INCHES * len(rows) / height)
    axes = figure.add_axes(box)
    sizes = [aim_change(row.change, aim) for row in rows]
    colours = [WORSE if row.change > 0.0 else BETTER for row in rows]
    axes.barh(range(len(rows)), sizes, height=0.62, color=colours, linewidth=0, zorder=3)
    axes.axvline(0.0, color=look.INK, linewidth=0.8, zorder=4)
    low, high = min(0.0, *sizes), max(0.0, *sizes)
    room = 0.02 * (high - low), 0.2 * (high - low)
    axes.set_xlim(low - room[low < 0.0], high + room[high > 0.0])
    for place, (row, size) in enumerate(zip(rows, sizes, strict=True)):
        _value(axes, place, size, change_text(row.change, aim))
    names = [fill(_kept_together(row.words), NAME_WIDTH) for row in rows]
    axes.set_yticks(range(len(rows)), names, fontsize=look.SMALL, linespacing=0.95)
    axes.set_ylim(len(rows) - 0.4, -0.6)
    axes.tick_params(axis="y", length=0)
    axes.tick_params(axis="x", labelsize=look.TEXT - 0.5)
    axes.spines["left"].set_visible(False)
    axes.grid(axis="x", color=look.BAND, linewidth=0.8, zorder=0)
    axes.set_axisbelow(True)
    axes.set_xlabel(_label(aim))
    figure.text(look.LEFT - 0.09, 0.1 / height, NOTE, ha="left", va="bottom", fontsize=look.SMALL - 0.4)
    return figure


def _kept_together(words: str) -> str:
    """The words with a step behind them that does not break across lines."""
    what, bracket, step = words.rpartition(" (")
    return what + bracket + step.replace(" ", "\u00a0")


def _label(aim: Aim) -> str:
    if aim.kind == MONEY:
        return f"change of the best cost, {aim.unit} (to the right: dearer)"
    side = "worse" if aim.sign > 0.0 else "better"
    return f"change of the best {aim.quantity}, {aim.unit or 'its number'} (to the right: {side})"


def _value(axes: Axes, place: int, size: float, text: str) -> None:
    """The number at the end of its bar."""
    right = size >= 0.0
    axes.annotate(
        text,
        (size, place),
        (4 if right else -4, 0),
        textcoords="offset points",
        ha="left" if right else "right",
        va="center",
        fontsize=look.SMALL,
    )
