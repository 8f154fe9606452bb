"""All pictures of one result as files in memory, each with the numbers behind it."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from matplotlib.figure import Figure

from reactorstage.optimiser.result import Optimum
from reactorstage.report import look, sheets
from reactorstage.report.aim import aim_of
from reactorstage.report.cascade import cascades
from reactorstage.report.composition import composition_figure
from reactorstage.report.conversion import has_conversion
from reactorstage.report.diagram import conversion_figure
from reactorstage.report.heat import heat_figure
from reactorstage.report.influence import influence_figure
from reactorstage.report.influence import says_something as moves_something
from reactorstage.report.rates import rates_figure
from reactorstage.report.selectivity import says_something, selectivity_figure
from reactorstage.report.sheet import Sheet
from reactorstage.report.temperature import temperature_figure
from reactorstage.report.worths import worth_bars, worths_figure
from reactorstage.train.influence import Influence
from reactorstage.train.result import Rating


@dataclass(frozen=True)
class Picture:
    """A figure under its file name, with the numbers behind it."""

    name: str
    figure: Figure
    numbers: Sheet


def figure_files(
    rating: Rating,
    today: Rating | None,
    status: str,
    optimum: Optimum | None = None,
    influences: Sequence[Influence] = (),
) -> dict[str, bytes]:
    """PNG, SVG and CSV of every picture that the result supports.

    today is drawn thin behind the rating; status stands under the title; an optimum adds the worth of limits,
    influences what moves the answer.
    Nothing is drawn of a train of which no bed was rated.
    """
    with look.drawing():
        files: dict[str, bytes] = {}
        for picture in pictures(rating, today, status, optimum, influences):
            files |= look.as_files(picture.figure, picture.name)
            files[f"{picture.name}.csv"] = picture.numbers.csv()
    return files


def pictures(
    rating: Rating,
    today: Rating | None,
    status: str,
    optimum: Optimum | None = None,
    influences: Sequence[Influence] = (),
) -> Iterator[Picture]:
    """The pictures one by one; to be used inside `look.drawing()`."""
    if not any(profile.w[-1] > 0.0 for profile in rating.profiles):
        return
    behind = today if today is not None and today.profiles and not today.failure else None
    title, both = rating.case.name, (rating, behind)
    yield Picture("temperature", temperature_figure(*both, title, status), sheets.temperature_sheet(*both))
    yield Picture("composition", composition_figure(*both, title, status), sheets.composition_sheet(*both))
    if says_something(rating):
        yield Picture(
            "selectivity", selectivity_figure(*both, title, status), sheets.selectivity_sheet(*both)
        )
    if rating.main_reactant in rating.species:
        yield Picture("rates", rates_figure(*both, title, status), sheets.rates_sheet(*both))
    if has_conversion(rating):
        yield Picture("conversion", conversion_figure(*both, title, status), sheets.conversion_sheet(*both))
    if sides := cascades(rating):
        yield Picture("heat", heat_figure(rating, title, status), sheets.heat_sheet(sides))
    if bars := worth_bars(optimum, rating) if optimum is not None else []:
        numbers = sheets.worths_sheet(bars, aim_of(rating).heading)
        yield Picture("worths", worths_figure(bars, rating, title, status), numbers)
    if moves_something(influences):
        figure = influence_figure(influences, aim_of(rating), title, "what moves the answer")
        yield Picture("influence", figure, sheets.influence_sheet(influences, aim_of(rating)))
