"""How fast the main reactant is used along the train, and how deep in each bed it begins to react."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from reactorstage.report import look
from reactorstage.report.display import unit
from reactorstage.report.profiles import BedProfile, train_profiles
from reactorstage.report.unit_sets import RATE
from reactorstage.train.result import Array, Rating

HEIGHT, BOTTOM, TOP = 3.6, 0.82, 0.95
SHARES = (10, 50, 90)
UNLIT = "#d9dce0"
DOTS = "Dots: where 50 and 90 % of the rise of a bed are made. A bed that reacts late is barely lit."
Value = Callable[[BedProfile], Array]


@dataclass(frozen=True)
class Lighting:
    """Catalyst coordinates, counted from the train inlet, where a bed has made shares of its rise.

    start and end are those of the bed; depths the places of 10, 50 and 90 % (None where there is no rise).
    """

    owner: str
    start: float
    end: float
    depths: tuple[float | None, ...]

    @property
    def dark(self) -> tuple[float, float] | None:
        """The stretch before 10 % of the rise is made; None where nothing can be told."""
        return None if self.depths[0] is None else (self.start, self.depths[0])


def lighting(rating: Rating, beds: Sequence[BedProfile]) -> list[Lighting]:
    """Where each bed that holds catalyst reacts."""
    found = []
    for bed in beds:
        start, end = float(bed.catalyst[0]), float(bed.catalyst[-1])
        values = [rating.quantities.get(f"{bed.owner}.depth at {share} % of rise") for share in SHARES]
        parts = [None if value is None else value.value for value in values]
        depths = [None if part is None else start + part * (end - start) for part in parts]
        if end > start:
            found.append(Lighting(bed.owner, start, end, tuple(depths)))
    return found


def used(rating: Rating) -> Value:
    """The rate (N,) at which a bed uses the main reactant, in display units."""
    index = rating.species.index(rating.main_reactant)
    return lambda bed: -(bed.r @ rating.nu)[:, index]


def rates_figure(rating: Rating, today: Rating | None, title: str, status: str) -> Figure:
    """Rate of the main reactant, today's thin behind it; the stretch before 10 % of each rise shaded."""
    beds = train_profiles(rating)
    figure = look.new_figure(HEIGHT, title, status)
    axes = look.panel(figure, BOTTOM, HEIGHT - TOP)
    look.bed_bands(axes, beds, names=True)
    before = train_profiles(today) if comparable(rating, today) and today is not None else []
    value = used(rating)
    look.along(axes, before, value, look.SPLIT_REACTANT, look.SOLID, look.TODAY_WEIGHT)
    look.along(axes, beds, value, look.SPLIT_REACTANT, look.SOLID, look.THIS_WEIGHT)
    top = max(float(value(bed).max()) for bed in (*beds, *before))
    low = min(0.0, *(float(value(bed).min()) for bed in beds))
    axes.set_ylim(low, 1.1 * (top or 1.0))
    _lit(axes, beds, value, lighting(rating, beds))
    look.catalyst_axis(axes, shown=True)
    look.value_axis(axes, f"{rating.main_reactant} used,\n{unit(RATE)}")
    look.key(figure, _key_rows(bool(before)), look.SPLIT_REACTANT)
    figure.text(look.LEFT, 0.1 / HEIGHT, DOTS, va="bottom", fontsize=look.SMALL - 0.4)
    return figure


def comparable(rating: Rating, today: Rating | None) -> bool:
    """Whether today's rating uses the same main reactant."""
    return today is not None and today.main_reactant == rating.main_reactant


def _lit(axes: Axes, beds: Sequence[BedProfile], value: Value, places: Sequence[Lighting]) -> None:
    """Shade where less than 10 % of a rise is made; dots where 50 and 90 % are."""
    known = {bed.owner: bed for bed in beds}
    for place in places:
        if place.dark is not None:
            axes.axvspan(*place.dark, color=UNLIT, linewidth=0, zorder=0.5)
        bed = known[place.owner]
        for depth, share in zip(place.depths[1:], SHARES[1:], strict=True):
            if depth is not None:
                _dot(axes, depth, float(np.interp(depth, bed.catalyst, value(bed))), f"{share} %")


def _dot(axes: Axes, x: float, y: float, text: str) -> None:
    axes.plot([x], [y], marker="o", markersize=4, color=look.SPLIT_REACTANT, zorder=6)
    axes.annotate(
        text,
        (x, y),
        (4, 4),
        textcoords="offset points",
        ha="left",
        va="bottom",
        fontsize=look.SMALL - 0.6,
        bbox=look.CLEARED,
        zorder=7,
    )


def _key_rows(with_today: bool) -> list[look.KeyRow]:
    return [
        *look.setting_key(with_today),
        look.KeyRow("below 10 % of the rise", 7.0, look.SOLID, UNLIT),
    ]
