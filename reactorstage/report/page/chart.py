"""Charts of the page: one panel, drawn as SVG without any library.

A chart is small: several stand side by side on a wide screen and below each other on a narrow one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from markupsafe import Markup

from reactorstage.report.look import spaced
from reactorstage.report.page.scale import Scale, tick_text
from reactorstage.train.result import Array

WIDTH = 460.0
LEFT, RIGHT, TOP, BOTTOM = 46.0, 452.0, 32.0, 252.0
FOOT = 40.0
LINE = 12.0
BARE_TOP = 24.0
STROKE = 18.0


@dataclass(frozen=True)
class Curve:
    """A line through points (N,), nan where it breaks.

    kind is its style, bed names the switch that hides it, today tells lines of today's setting.
    """

    x: Array
    y: Array
    colour: str
    kind: str = "this"
    bed: str = ""
    today: bool = False


@dataclass(frozen=True)
class Label:
    """A text at a value; anchor is start, middle or end, shift in pixels."""

    x: float
    y: float
    text: str
    anchor: str = "start"
    shift: tuple[float, float] = (0.0, 0.0)
    colour: str = ""
    bed: str = ""


@dataclass(frozen=True)
class Area:
    """A shaded stretch of the x axis with its name above; x counts in the axis."""

    low: float
    high: float
    name: str = ""
    kind: str = "band"
    bed: str = ""


@dataclass(frozen=True)
class Bar:
    """A filled box between two corners in values; kind is its outline."""

    x: tuple[float, float]
    y: tuple[float, float]
    colour: str
    kind: str = "bar"


@dataclass(frozen=True)
class Mark:
    """A point at a value: `best` is a dot, `was` an upright stroke."""

    x: float
    y: float
    kind: str


@dataclass(frozen=True)
class Reading:
    """What the read-out says of a line at the points of each bed: numbers of this setting and today as text.

    x and y hold the values where its dot stands, per bed.
    """

    name: str
    unit: str
    now: tuple[tuple[str, ...], ...]
    today: tuple[tuple[str, ...], ...]
    x: tuple[Array, ...]
    y: tuple[Array, ...]


@dataclass(frozen=True)
class Chart:
    """A panel with its axes; alt tells in words what it shows; key holds (kind, colour, words) rows."""

    key: str
    title: str
    alt: str
    x_name: str
    y_name: str
    x_range: tuple[float, float]
    y_range: tuple[float, float]
    curves: tuple[Curve, ...] = ()
    labels: tuple[Label, ...] = ()
    areas: tuple[Area, ...] = ()
    bars: tuple[Bar, ...] = ()
    marks: tuple[Mark, ...] = ()
    legend: tuple[tuple[str, str, str], ...] = ()
    readings: tuple[Reading, ...] = ()
    logarithmic: bool = False
    upright: bool = True
    bare_y: bool = False
    note: str = ""
    left: float = LEFT
    bottom: float = BOTTOM

    @property
    def x(self) -> Scale:
        return Scale(*self.x_range, self.left, RIGHT)

    @property
    def y(self) -> Scale:
        return Scale(*self.y_range, self.bottom, TOP, self.logarithmic)


def svg(chart: Chart) -> Markup:
    """The chart as an SVG element whose name and description are those of the chart."""
    parts = [*_frame(chart), *_areas(chart), *_bars(chart)]
    parts += [_curve(chart, curve) for curve in chart.curves]
    parts += [_mark(chart, mark) for mark in chart.marks]
    parts += [_label(chart, label) for label in chart.labels]
    inside = Markup("").join([*parts, _cursor(chart)])
    above = 0.0 if chart.y_name or chart.areas else BARE_TOP
    return Markup(
        '<svg id="{0}" viewBox="0 {10:g} {1:g} {2:g}" role="img" aria-labelledby="{0}-name {0}-alt">'
        '<title id="{0}-name">{3}</title><desc id="{0}-alt">{4}</desc>'
        '<clipPath id="{0}-clip"><rect x="{5:g}" y="{6:g}" width="{7:g}" height="{8:g}"/></clipPath>{9}</svg>'
    ).format(
        f"chart-{chart.key}", WIDTH, chart.bottom + FOOT - above, chart.title, chart.alt,
        chart.left, TOP - 2, RIGHT - chart.left, chart.bottom - TOP + 4, inside, above,
    )  # fmt: skip


TICK_X = Markup(
    '<path class="tick" d="M{0:.1f} {1:g}v4"/>'
    '<text class="small" x="{0:.1f}" y="{2:g}" text-anchor="middle">{3}</text>'
)
TICK_Y = Markup(
    '<path class="grid" d="M{0:g} {1:.1f}H{2:g}"/>'
    '<text class="small" x="{3:g}" y="{4:.1f}" text-anchor="end">{5}</text>'
)
AXES = Markup('<path class="axis" d="M{:g} {:g}V{:g}H{:g}"/>')
AXIS_NAMES = Markup('<text x="{:g}" y="{:g}" text-anchor="end">{}</text><text x="0" y="11">{}</text>')


def _frame(chart: Chart) -> list[Markup]:
    """Axes with their ticks and names."""
    foot = chart.bottom
    x_ticks = [TICK_X.format(_at(chart.x, tick), foot, foot + 15, tick_text(tick)) for tick in chart.x.ticks]
    y_ticks = [
        TICK_Y.format(chart.left, y, RIGHT, chart.left - 5, y + 4, tick_text(tick))
        for tick in ([] if chart.bare_y else chart.y.ticks)
        for y in [_at(chart.y, tick)]
    ]
    names = AXIS_NAMES.format(RIGHT, foot + 33, chart.x_name, chart.y_name)
    foreign = chart.bare_y and chart.x_range[0] != 0.0
    return [*y_ticks, *x_ticks, AXES.format(chart.left, foot if foreign else TOP, foot, RIGHT), names]


def _at(scale: Scale, value: float) -> float:
    return float(scale.place(np.array([value]))[0])


def _areas(chart: Chart) -> list[Markup]:
    found = []
    for area in chart.areas:
        x0, x1 = (float(v) for v in chart.x.place(np.array([area.low, area.high])))
        found.append(
            Markup('<rect class="{}"{} x="{:.1f}" y="{:g}" width="{:.1f}" height="{:g}"/>').format(
                area.kind, _switch(area.bed), x0, TOP, max(x1 - x0, 0.0), chart.bottom - TOP
            )
        )
        if area.name and x1 - x0 > 6.0 * len(area.name):
            found.append(
                Markup('<text class="small"{} x="{:.1f}" y="{:g}" text-anchor="middle">{}</text>').format(
                    _switch(area.bed), (x0 + x1) / 2, TOP - 3, area.name
                )
            )
    return found


def _bars(chart: Chart) -> list[Markup]:
    found = []
    for bar in chart.bars:
        xs, ys = np.sort(chart.x.place(np.array(bar.x))), np.sort(chart.y.place(np.array(bar.y)))
        found.append(
            Markup(
                '<rect class="{}" fill="{}" x="{:.1f}" y="{:.1f}" width="{:.1f}" height="{:.1f}"/>'
            ).format(bar.kind, bar.colour, xs[0], ys[0], xs[1] - xs[0], ys[1] - ys[0])
        )
    return found


def _curve(chart: Chart, curve: Curve) -> Markup:
    path = path_text(chart.x.place(curve.x), chart.y.place(curve.y))
    if not path:
        return Markup("")
    today = Markup(' data-setting="today"') if curve.today else Markup("")
    return Markup('<path class="line {}"{}{} clip-path="url(#chart-{}-clip)" stroke="{}" d="{}"/>').format(
        curve.kind, _switch(curve.bed), today, chart.key, curve.colour, path
    )


def path_text(x: Array, y: Array) -> str:
    """`M1 2L3 4`: a path through points, begun anew behind points that are not finite."""
    there = np.isfinite(x) & np.isfinite(y)
    begun = there & ~np.concatenate([[False], there[:-1]])
    parts = [f"{'M' if begun[k] else 'L'}{x[k]:.1f} {y[k]:.1f}" for k in np.flatnonzero(there)]
    return "".join(parts) if len(parts) > 1 else ""


def _mark(chart: Chart, mark: Mark) -> Markup:
    x, y = _at(chart.x, mark.x), _at(chart.y, mark.y)
    if mark.kind == "best":
        return Markup('<circle class="best" cx="{:.1f}" cy="{:.1f}" r="4.5"/>').format(x, y)
    return Markup('<path class="was" d="M{:.1f} {:.1f}v{:g}"/>').format(x, y - STROKE / 2, STROKE)


def _label(chart: Chart, label: Label) -> Markup:
    x = _at(chart.x, label.x) + label.shift[0]
    y = _at(chart.y, label.y) + label.shift[1]
    fill = Markup(' fill="{}"').format(label.colour) if label.colour else Markup("")
    return Markup('<text class="small halo"{}{} x="{:.1f}" y="{:.1f}" text-anchor="{}">{}</text>').format(
        fill, _switch(label.bed), x, y, label.anchor, label.text
    )


def _switch(bed: str) -> Markup:
    return Markup(' data-bed="{}"').format(bed) if bed else Markup("")


def _cursor(chart: Chart) -> Markup:
    """The upright and the dots that the read-out moves; they are hidden until it is used."""
    if not chart.readings:
        return Markup("")
    line = (
        Markup('<path class="cursor" d="M0 {:g}V{:g}"/>').format(TOP, chart.bottom)
        if chart.upright
        else Markup("")
    )
    dots = Markup('<circle class="spot" r="4"/>') * len(chart.readings)
    return Markup('<g class="reading off" aria-hidden="true">{}{}</g>').format(line, dots)


def pixels(chart: Chart, reading: Reading) -> tuple[list[list[float]], list[list[float]]]:
    """Places of the points of each bed, rounded: x and y."""
    return (
        [_rounded(chart.x.place(values)) for values in reading.x],
        [_rounded(chart.y.place(values)) for values in reading.y],
    )


def _rounded(values: Array) -> list[float]:
    return [round(float(value), 1) if np.isfinite(value) else -1.0 for value in values]


def spread_labels(labels: Sequence[Label], chart_y: Scale) -> list[Label]:
    """Labels of one side pushed apart so that none overlap."""
    ordered = sorted(labels, key=lambda label: _at(chart_y, label.y))
    wanted = [_at(chart_y, label.y) for label in ordered]
    placed = spaced([min(max(y, TOP + 6), BOTTOM - 4) for y in wanted], LINE)
    return [
        replace(label, shift=(label.shift[0], label.shift[1] + to - y))
        for label, y, to in zip(ordered, wanted, placed, strict=True)
    ]
