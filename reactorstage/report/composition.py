"""Flows along the train: bulk species, split reactant on a logarithmic axis, by-products."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.display import unit
from reactorstage.report.profiles import BedProfile, train_profiles
from reactorstage.train.result import Array, Rating

PANEL_HEIGHT, BETWEEN, BELOW, ABOVE = 1.75, 0.16, 0.55, 0.95
MOST_BY_PRODUCTS = len(look.BY_PRODUCT_LINES)


@dataclass(frozen=True)
class Curve:
    """One species: its colour by role, its line style among those of the same role."""

    species: str
    colour: str
    style: look.LineStyle = look.SOLID


@dataclass(frozen=True)
class Panel:
    """Species that share an axis, and what the axis is called."""

    name: str
    curves: tuple[Curve, ...]
    logarithmic: bool = False


def composition_figure(rating: Rating, today: Rating | None, title: str, status: str) -> Figure:
    """One panel per size of flow; every panel over the same catalyst axis."""
    panels = panels_of(rating)
    height = ABOVE + BELOW + len(panels) * (PANEL_HEIGHT + BETWEEN)
    figure = look.new_figure(height, title, status)
    beds = train_profiles(rating)
    before = train_profiles(today) if today is not None else []
    for number, content in enumerate(panels):
        top = height - ABOVE - number * (PANEL_HEIGHT + BETWEEN)
        axes = look.panel(figure, top - PANEL_HEIGHT, top)
        look.bed_bands(axes, beds, names=number == 0)
        _draw(axes, content, rating, beds, before)
        look.catalyst_axis(axes, shown=number == len(panels) - 1)
    look.key(figure, look.setting_key(today is not None), look.INK)
    return figure


def panels_of(rating: Rating) -> list[Panel]:
    """Panels with at least one species; species that take no part are not shown."""
    known = set(rating.species)
    bulk = [Curve(rating.excess_reactant, look.EXCESS_REACTANT), Curve(rating.product, look.PRODUCT)]
    others = [
        Curve(species, look.BY_PRODUCT, style)
        for species, style in zip(rating.by_products, look.BY_PRODUCT_LINES, strict=False)
    ]
    flow = unit("molar flow")
    found = [
        Panel(f"flow, {flow}", tuple(curve for curve in bulk if curve.species in known)),
        Panel(f"{rating.main_reactant}, {flow}", (Curve(rating.main_reactant, look.SPLIT_REACTANT),), True),
        Panel(f"by-products, {flow}", tuple(curve for curve in others if curve.species in known)),
    ]
    return [panel for panel in found if panel.curves and panel.curves[0].species in known]


def _draw(
    axes: Axes, content: Panel, rating: Rating, beds: Sequence[BedProfile], before: Sequence[BedProfile]
) -> None:
    for curve in content.curves:
        index = rating.species.index(curve.species)
        look.along(axes, before, _flow(index), curve.colour, curve.style, look.TODAY_WEIGHT, joined=True)
        look.along(axes, beds, _flow(index), curve.colour, curve.style, look.THIS_WEIGHT, joined=True)
    values = [bed.F[:, rating.species.index(c.species)] for bed in (*beds, *before) for c in content.curves]
    _set_range(axes, np.concatenate(values), content.logarithmic)
    look.value_axis(axes, content.name)
    last = beds[-1].F[-1]
    look.end_labels(
        axes,
        [
            (float(last[rating.species.index(c.species)]), look.two_lines(c.species), c.colour)
            for c in content.curves
        ],
    )


def _flow(index: int) -> Callable[[BedProfile], Array]:
    return lambda bed: bed.F[:, index]


def _set_range(axes: Axes, values: Array, logarithmic: bool) -> None:
    """From zero for plain axes; the decades that are met (six at most) for logarithmic ones."""
    top = float(np.max(values, initial=0.0)) or 1.0
    if not logarithmic:
        axes.set_ylim(0.0, 1.08 * top)
        return
    positive = values[values > top * 1e-6]
    low = float(np.min(positive)) if positive.size else top / 10.0
    axes.set_yscale("log")
    axes.set_ylim(min(low / 1.5, top / 10.0), top * 1.5)
    look.plain_log_ticks(axes)
