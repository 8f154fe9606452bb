"""One visual language for every picture: colours, line kinds, bands, files.

A colour belongs to a physical quantity or to the role of a species and means the same in every picture;
the kind of a line (this setting, today, limit, point value) is told by its style and weight.
"""

from __future__ import annotations

import io
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Literal

import matplotlib
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from matplotlib.ticker import FuncFormatter, LogLocator, NullLocator

from reactorstage.report.display import brief, unit
from reactorstage.report.profiles import BedProfile
from reactorstage.report.table import folded
from reactorstage.train.result import Array

TEMPERATURE = "#b3331d"
SPLIT_REACTANT = "#1c5d99"
EXCESS_REACTANT = "#5f6f52"
PRODUCT = "#20242b"
BY_PRODUCT = "#c27d0e"
LIMIT = "#6b7079"
HEAT = "#6d4a96"
PRESSURE = "#3f7d20"
MONEY = "#14736b"
MONEY_LIGHT = "#9fcdc6"
INK = "#20242b"
BAND = "#eef0f2"
PAPER = "#ffffff"

SOLID: Literal["-"] = "-"
DASHED = (0, (5.0, 3.0))
DOTTED = (0, (1.2, 1.8))
CHAIN = (0, (7.0, 2.0, 1.5, 2.0))
LineStyle = Literal["-"] | tuple[int, tuple[float, ...]]
BY_PRODUCT_LINES: tuple[LineStyle, ...] = (SOLID, (0, (7.0, 2.0, 1.5, 2.0)), (0, (3.0, 1.5)), (0, (1.5, 1.5)))

THIS_WEIGHT, TODAY_WEIGHT, POINT_WEIGHT, LIMIT_WEIGHT = 2.2, 0.9, 1.4, 1.0
WIDTH = 7.6
DPI = 130
LEFT, RIGHT = 0.11, 0.865
LABEL_LEFT = -0.083
TEXT, SMALL = 9.0, 7.6
LINE_POINTS = 9.6

CLEARED = {"facecolor": PAPER, "edgecolor": "none", "alpha": 0.85, "pad": 0.2}

SETTINGS: Any = {
    "svg.hashsalt": "reactorstage",
    "svg.fonttype": "path",
    "font.family": ["DejaVu Sans"],
    "font.size": TEXT,
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.linewidth": 0.8,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "xtick.color": INK,
    "ytick.color": INK,
    "text.color": INK,
    "lines.solid_capstyle": "butt",
    "path.simplify": True,
}


@dataclass(frozen=True)
class KeyRow:
    """One kind of line in the key of a picture; no colour means the picture's own."""

    label: str
    weight: float
    style: LineStyle = SOLID
    colour: str = ""


@contextmanager
def drawing() -> Iterator[None]:
    """Our settings over Matplotlib's own defaults, whatever the user's Matplotlib is set to."""
    defaults: Any = {
        key: value for key, value in matplotlib.rcParamsDefault.items() if not key.startswith("backend")
    }
    with matplotlib.rc_context():
        dict.update(matplotlib.rcParams, defaults)
        matplotlib.rcParams.update(SETTINGS)
        yield


def new_figure(height: float, title: str, status: str) -> Figure:
    """An empty figure of common width with the case's name and the status in words."""
    figure = Figure(figsize=(WIDTH, height), facecolor=PAPER)
    FigureCanvasAgg(figure)
    top = 1.0 - 0.1 / height
    figure.text(LEFT, top, title, ha="left", va="top", fontsize=TEXT + 1.5, fontweight="bold")
    figure.text(LEFT, top - 0.21 / height, status, ha="left", va="top", fontsize=TEXT)
    return figure


def panel(figure: Figure, bottom: float, top: float) -> Axes:
    """Axes of common width between two heights in inches."""
    height = figure.get_figheight()
    return figure.add_axes((LEFT, bottom / height, RIGHT - LEFT, (top - bottom) / height))


def bed_bands(axes: Axes, beds: Sequence[BedProfile], names: bool) -> None:
    """Every second bed shaded; names over the beds, with their catalyst, where wanted and wide enough."""
    end = beds[-1].catalyst[-1]
    for number, bed in enumerate(bed for bed in beds if bed.catalyst[-1] > bed.catalyst[0]):
        first, last = float(bed.catalyst[0]), float(bed.catalyst[-1])
        if number % 2 == 0:
            axes.axvspan(first, last, color=BAND, linewidth=0, zorder=0)
        if names:
            wide = (last - first) / end > 0.07
            size = f"{brief(last - first, 3)} {unit('mass')}"
            label = f"{bed.owner}\n{size}" if wide else bed.owner.removeprefix("bed ")
            axes.annotate(
                label,
                ((first + last) / 2, 1.0),
                (0, 3),
                xycoords=("data", "axes fraction"),
                textcoords="offset points",
                ha="center",
                va="bottom",
                fontsize=SMALL,
                linespacing=1.15,
            )
    axes.set_xlim(0.0, end)


def along(
    axes: Axes,
    beds: Sequence[BedProfile],
    values: Callable[[BedProfile], Array],
    colour: str,
    style: LineStyle,
    weight: float,
    joined: bool = False,
) -> None:
    """One value along all beds; joined: with dotted uprights where a gap changes it."""
    for bed in beds:
        axes.plot(
            bed.catalyst, values(bed), color=colour, linestyle=style, linewidth=weight, zorder=3 + weight
        )
    for bed, after in pairwise(beds) if joined else ():
        ends = (float(values(bed)[-1]), float(values(after)[0]))
        axes.plot(
            [bed.catalyst[-1]] * 2, ends, color=colour, linestyle=DOTTED, linewidth=0.7 * weight, zorder=3
        )


def plain_log_ticks(axes: Axes) -> None:
    """1, 10, 100 instead of powers; also 2 and 5 where few decades are shown."""
    low, high = axes.get_ylim()
    steps = (1.0, 2.0, 5.0) if high / low < 300.0 else (1.0,)
    axes.yaxis.set_major_locator(LogLocator(10.0, steps))
    axes.yaxis.set_minor_locator(NullLocator())


def two_lines(name: str) -> str:
    """A species name as it fits beside a panel."""
    return "\n".join(folded(name, 12))


def catalyst_axis(axes: Axes, shown: bool) -> None:
    """The common x axis: catalyst counted from the train inlet."""
    axes.tick_params(labelbottom=shown, labelsize=TEXT - 0.5)
    if shown:
        axes.set_xlabel(f"catalyst from the train inlet, {unit('mass')}")


def spaced(wanted: Sequence[float], apart: float) -> list[float]:
    """Positions as near as possible to the wanted ones (in rising order) and at least so far apart."""
    blocks: list[list[float]] = []
    for value in wanted:
        blocks.append([value, 1.0])
        while len(blocks) > 1 and blocks[-1][0] - blocks[-2][0] < apart * (blocks[-1][1] + blocks[-2][1]) / 2:
            centre, count = blocks.pop()
            below, others = blocks.pop()
            blocks.append([(centre * count + below * others) / (count + others), count + others])
    return [centre + apart * (i - (count - 1) / 2) for centre, count in blocks for i in range(int(count))]


def value_axis(axes: Axes, label: str) -> None:
    """The name of the y axis at the same place in every panel, ticks as short numbers."""
    axes.set_ylabel(label)
    axes.yaxis.set_label_coords(LABEL_LEFT, 0.5)
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: f"{value:g}"))


def end_labels(axes: Axes, labels: Sequence[tuple[float, str, str]]) -> None:
    """Texts (y in data, text, colour) to the right of the panel, pushed apart so that none overlap."""
    if not labels:
        return
    box = axes.get_window_extent()
    point = axes.figure.dpi / 72.0
    rows = sorted((float(axes.transData.transform((0.0, y))[1]), text, colour) for y, text, colour in labels)
    lines = max(text.count("\n") + 1 for _, text, _ in rows)
    places = spaced([min(max(row[0], box.y0), box.y1) for row in rows], LINE_POINTS * lines * point)
    for (_, text, colour), place in zip(rows, places, strict=True):
        axes.annotate(
            text,
            (1.0, (place - box.y0) / box.height),
            (5, 0),
            xycoords="axes fraction",
            textcoords="offset points",
            ha="left",
            va="center",
            fontsize=SMALL,
            color=colour,
        )


MANY_ROWS = 5
"""Kinds of line beyond which their key is set closer, so that it stays clear of the status."""


def key(figure: Figure, rows: Sequence[KeyRow], colour: str) -> None:
    """The kinds of line, right above the panel."""
    handles = [
        Line2D([], [], color=row.colour or colour, linewidth=row.weight, linestyle=row.style) for row in rows
    ]
    place = (1.0, 1.0 - 0.24 / figure.get_figheight())
    figure.legend(
        handles,
        [row.label for row in rows],
        loc="upper right",
        bbox_to_anchor=place,
        ncols=len(rows),
        frameon=False,
        fontsize=SMALL,
        handlelength=1.8 if len(rows) <= MANY_ROWS else 1.3,
        handletextpad=0.8 if len(rows) <= MANY_ROWS else 0.4,
        columnspacing=1.2 if len(rows) <= MANY_ROWS else 0.6,
        borderaxespad=0.2,
    )


def setting_key(with_today: bool) -> list[KeyRow]:
    """This setting and, where it is drawn, today's."""
    rows = [KeyRow("this setting", THIS_WEIGHT)]
    return [*rows, KeyRow("today", TODAY_WEIGHT)] if with_today else rows


def as_files(figure: Figure, name: str) -> dict[str, bytes]:
    """The figure as PNG and SVG, byte-equal for equal content."""
    png, svg = io.BytesIO(), io.BytesIO()
    figure.savefig(png, format="png", dpi=DPI, metadata={"Software": None})
    figure.savefig(svg, format="svg", metadata={"Date": None, "Creator": None})
    return {f"{name}.png": png.getvalue(), f"{name}.svg": svg.getvalue()}
