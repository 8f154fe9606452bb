"""The numbers behind each picture."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

import numpy as np

from reactorstage.report.aim import Aim
from reactorstage.report.cascade import Cascade
from reactorstage.report.composition import panels_of
from reactorstage.report.conversion import background, way
from reactorstage.report.diagram import temperature_range
from reactorstage.report.display import shown, unit
from reactorstage.report.drivers import aim_change, drivers
from reactorstage.report.heat import bound_of, steps
from reactorstage.report.profiles import BedProfile, displayed, train_profiles
from reactorstage.report.rates import lighting, used
from reactorstage.report.sheet import Cell, Sheet, sheet
from reactorstage.report.temperature import equilibria, places_of_gaps
from reactorstage.report.unit_sets import RATE
from reactorstage.report.worths import WorthBar
from reactorstage.train.influence import Influence
from reactorstage.train.result import Array, LimitState, Rating

THIS, TODAY = "this setting", "today"
Pairs = Sequence[tuple[str, Rating]]


def settings(rating: Rating, today: Rating | None) -> list[tuple[str, Rating]]:
    """This setting and, where there is one to compare with, today's."""
    return [(THIS, rating), *([(TODAY, today)] if today is not None else [])]


def temperature_sheet(rating: Rating, today: Rating | None) -> Sheet:
    """Beds point by point, steps of gaps by their ends, equilibrium and limits as levels."""
    rows: list[list[Cell]] = []
    for name, one in settings(rating, today):
        beds = train_profiles(one)
        rows += [[name, bed.owner, "bed", x, T] for bed in beds for x, T in _points(bed.catalyst, bed.T)]
        rows += [[name, *row] for row in _gap_rows(one, beds)]
        rows += [
            [name, bed.owner, "equilibrium", x, T]
            for bed in beds
            for x, T in _ends(bed, equilibria(one, beds).get(bed.owner))
        ]
    rows += [row for state in rating.limits for row in _limit_rows(rating, state)]
    return sheet(["setting", "place", "line", _catalyst(), f"temperature, {unit('temperature')}"], rows)


def _points(*columns: Array) -> Iterator[tuple[float, ...]]:
    return (tuple(map(float, row)) for row in np.column_stack(columns))


def _ends(bed: BedProfile, value: float | None) -> list[tuple[float, float]]:
    return [] if value is None else [(float(bed.catalyst[k]), value) for k in (0, -1)]


def _catalyst() -> str:
    return f"catalyst from train inlet, {unit('mass')}"


def _gap_rows(rating: Rating, beds: Sequence[BedProfile]) -> Iterator[list[Cell]]:
    for place, x in places_of_gaps(beds):
        for step in rating.steps:
            if step.owner == place:
                for T in (step.T_before, step.T_after):
                    yield [place, step.kind, x, shown(T, "temperature")]


def _limit_rows(rating: Rating, state: LimitState) -> Iterator[list[Cell]]:
    if state.kind == "temperature" and not state.implied:
        bed = next((bed for bed in train_profiles(rating) if bed.owner == state.owner), None)
        for x, bound in _ends(bed, shown(state.bound, state.kind)) if bed is not None else ():
            yield ["limit", state.owner, f"{state.label}, {state.direction}", x, bound]


def _along(
    rating: Rating, today: Rating | None, columns: Sequence[tuple[str, Callable[[Rating, BedProfile], Array]]]
) -> Sheet:
    """Values along the beds of both settings."""
    rows: list[list[Cell]] = []
    for name, one in settings(rating, today):
        for bed in train_profiles(one):
            values = [value(one, bed) for _, value in columns]
            rows += [[name, bed.owner, *point] for point in _points(bed.catalyst, *values)]
    return sheet(["setting", "bed", _catalyst(), *(heading for heading, _ in columns)], rows)


def composition_sheet(rating: Rating, today: Rating | None) -> Sheet:
    """Flows of the species that are drawn."""
    drawn = [curve.species for panel in panels_of(rating) for curve in panel.curves]
    return _along(
        rating, today, [(f"flow of {name}, {unit('molar flow')}", _of_species("F", name)) for name in drawn]
    )


def selectivity_sheet(rating: Rating, today: Rating | None) -> Sheet:
    """Made of each species per 100 mol of the main reactant converted: summed and at the point."""
    basis = f"mol per 100 mol {rating.main_reactant} converted"
    return _along(
        rating,
        today,
        [
            (f"{name} {words}, {basis}", _of_species(part, name))
            for name in (rating.product, *rating.by_products)
            for part, words in (("cumulative", "summed from the inlet"), ("point", "at this point"))
        ],
    )


def _of_species(part: str, name: str) -> Callable[[Rating, BedProfile], Array]:
    def value(rating: Rating, bed: BedProfile) -> Array:
        if name not in rating.species:
            return np.full(len(bed.catalyst), np.nan)
        column: Array = getattr(bed, part)[:, rating.species.index(name)]
        return column

    return value


def rates_sheet(rating: Rating, today: Rating | None) -> Sheet:
    """Rates of the main reactant; where 10, 50 and 90 % of each rise are made."""
    made = _along(
        rating, today, [(f"{rating.main_reactant} used, {unit(RATE)}", lambda r, bed: used(r)(bed))]
    )
    depths = [
        [f"{share} % of the rise", place.owner, depth, None]
        for place in lighting(rating, train_profiles(rating))
        for share, depth in zip((10, 50, 90), place.depths, strict=True)
    ]
    return sheet(made.headings, [*made.rows, *depths])


def conversion_sheet(rating: Rating, today: Rating | None) -> Sheet:
    """The way through the train; equilibrium and best rate behind it."""
    ways = [(name, way(one)) for name, one in settings(rating, today)]
    rows: list[list[Cell]] = [
        [name, leg.owner, leg.kind, T, X]
        for name, legs in ways
        for leg in legs
        for T, X in _points(displayed(leg.T, "temperature"), 100.0 * leg.X)
    ]
    behind = background(rating, *temperature_range(rating, [leg for _, legs in ways for leg in legs]))
    if behind is not None:
        T = displayed(behind.T, "temperature")
        rows += [
            ["equilibrium", "", behind.reaction, *point] for point in _points(T, 100.0 * behind.equilibrium)
        ]
    if behind is not None and behind.rates is not None:
        best = displayed(behind.rates.best, "temperature")
        rows += [["best rate", "", behind.reaction, *p] for p in _points(best, 100.0 * behind.rates.X)]
    heading = f"{rating.main_reactant} converted, % of what was fed so far"
    return sheet(["setting", "place", "line", f"temperature, {unit('temperature')}", heading], rows)


def heat_sheet(sides: Sequence[Cascade]) -> Sheet:
    """Streams summed from the cold end; ends of levels with the temperature that streams must stay beyond."""
    rows: list[list[Cell]] = []
    for side in sides:
        name = "heat added" if side.heating else "heat removed"
        rows += [
            [name, "streams", *point, None]
            for point in _points(displayed(side.heat, "power"), displayed(side.T, "temperature"))
        ]
        for start, end, rung in steps(side):
            level, bound = (shown(T, "temperature") for T in (rung.T, bound_of(side, rung)))
            rows += [[name, rung.name, shown(Q, "power"), level, bound] for Q in (start, end)]
    degrees = unit("temperature")
    return sheet(
        ["side", "line", f"heat from the cold end, {unit('power')}", f"temperature, {degrees}",
         f"with minimum approach, {degrees}"],
        rows,
    )  # fmt: skip


def worths_sheet(bars: Sequence[WorthBar], heading: str) -> Sheet:
    """The bars."""
    rows = [[bar.name, bar.step, bar.saves, bar.costs] for bar in bars]
    return sheet(["limit", "step", f"relaxing saves, {heading}", f"tightening costs, {heading}"], rows)


def influence_sheet(found: Sequence[Influence], aim: Aim) -> Sheet:
    """Every parameter with its step and what that does to the best answer."""
    rows: list[list[Cell]] = [[row.words, aim_change(row.change, aim)] for row in drivers(found)]
    return sheet(["parameter and its step", f"change of the best answer, {aim.heading}"], rows)
