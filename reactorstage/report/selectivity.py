"""Selectivity along the train: at each point and summed up from the inlet."""

from __future__ import annotations

from collections.abc import Callable, Sequence

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.profiles import BedProfile, train_profiles
from reactorstage.train.result import Array, Rating

PANEL_HEIGHT, BETWEEN, BELOW, ABOVE = 1.9, 0.18, 0.55, 0.95
STILL_REACTING = 0.02
POINTS_REACH = 1.5


def selectivity_figure(rating: Rating, today: Rating | None, title: str, status: str) -> Figure:
    """Product above, by-products below, per 100 mol of the main reactant converted."""
    roles = _roles(rating)
    height = ABOVE + BELOW + len(roles) * (PANEL_HEIGHT + BETWEEN)
    figure = look.new_figure(height, title, status)
    beds = train_profiles(rating)
    before = train_profiles(today) if today is not None else []
    for number, (species, colour, styles) in enumerate(roles):
        top = height - ABOVE - number * (PANEL_HEIGHT + BETWEEN)
        axes = look.panel(figure, top - PANEL_HEIGHT, top)
        look.bed_bands(axes, beds, names=number == 0)
        _draw(axes, rating, beds, before, species, colour, styles)
        look.catalyst_axis(axes, shown=number == len(roles) - 1)
        look.value_axis(axes, f"mol per 100 mol\n{rating.main_reactant} converted")
    _key(figure, today is not None)
    return figure


def says_something(rating: Rating) -> bool:
    """Without by-products selectivity is 100 % everywhere and needs no picture."""
    known = set(rating.species)
    return bool(rating.by_products) and {rating.product, rating.main_reactant} <= known


def _roles(rating: Rating) -> list[tuple[tuple[str, ...], str, tuple[look.LineStyle, ...]]]:
    others = rating.by_products[: len(look.BY_PRODUCT_LINES)]
    return [
        ((rating.product,), look.PRODUCT, (look.SOLID,)),
        (others, look.BY_PRODUCT, look.BY_PRODUCT_LINES),
    ]


def _draw(
    axes: Axes,
    rating: Rating,
    beds: Sequence[BedProfile],
    before: Sequence[BedProfile],
    species: Sequence[str],
    colour: str,
    styles: Sequence[look.LineStyle],
) -> None:
    least = least_loss(rating, (*beds, *before))
    points, sums, labels = [], [], []
    for name, style in zip(species, styles, strict=False):
        index = rating.species.index(name)
        point, summed = point_value(rating, index, least), _summed(index)
        look.along(axes, before, summed, colour, style, look.TODAY_WEIGHT)
        look.along(axes, beds, summed, colour, style, look.THIS_WEIGHT)
        look.along(axes, beds, point, colour, look.DOTTED, look.POINT_WEIGHT)
        points += [point(bed) for bed in beds]
        sums += [summed(bed) for bed in (*beds, *before)]
        labels.append((float(beds[-1].cumulative[-1, index]), look.two_lines(name), colour))
    _set_range(axes, np.concatenate(points), np.concatenate(sums))
    look.end_labels(axes, [label for label in labels if np.isfinite(label[0])])


def least_loss(rating: Rating, beds: Sequence[BedProfile]) -> float:
    """The rate of loss of the main reactant below which the point value says nothing, kmol/(kg h)."""
    fastest = max((float(np.max(_loss(rating, bed), initial=0.0)) for bed in beds), default=0.0)
    return STILL_REACTING * fastest


def _loss(rating: Rating, bed: BedProfile) -> Array:
    return -(bed.r @ rating.nu)[:, rating.species.index(rating.main_reactant)]


def point_value(rating: Rating, index: int, least: float) -> Callable[[BedProfile], Array]:
    return lambda bed: np.where(_loss(rating, bed) > least, bed.point[:, index], np.nan)


def _summed(index: int) -> Callable[[BedProfile], Array]:
    return lambda bed: bed.cumulative[:, index]


def _set_range(axes: Axes, points: Array, sums: Array) -> None:
    """All sums, and point values as far as they leave the sums readable."""
    sums, points = sums[np.isfinite(sums)], points[np.isfinite(points)]
    if not sums.size:
        axes.set_ylim(0.0, 100.0)
        return
    low, high = float(sums.min()), float(sums.max())
    reach = POINTS_REACH * max(high - low, 1.0)
    low, high = max(min(low, *points), low - reach), min(max(high, *points), high + reach)
    room = max(0.06 * (high - low), 0.2)
    axes.set_ylim(low - room, high + room)


def _key(figure: Figure, with_today: bool) -> None:
    rows = [look.KeyRow("summed from the inlet", look.THIS_WEIGHT)]
    rows += [look.KeyRow("summed, today", look.TODAY_WEIGHT)] if with_today else []
    rows.append(look.KeyRow("at this point", look.POINT_WEIGHT, look.DOTTED))
    look.key(figure, rows, look.INK)
