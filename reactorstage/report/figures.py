"""All pictures of one result as files in memory."""

from __future__ import annotations

from collections.abc import Sequence

from reactorstage.report import look
from reactorstage.report.aim import aim_of
from reactorstage.report.composition import composition_figure
from reactorstage.report.conversion import has_conversion
from reactorstage.report.diagram import conversion_figure
from reactorstage.report.influence import influence_figure
from reactorstage.report.influence import says_something as moves_something
from reactorstage.report.selectivity import says_something, selectivity_figure
from reactorstage.report.temperature import temperature_figure
from reactorstage.train.influence import Influence
from reactorstage.train.result import Rating


def figure_files(
    rating: Rating, today: Rating | None, status: str, influences: Sequence[Influence] = ()
) -> dict[str, bytes]:
    """PNG and SVG of temperature, composition, conversion and, where there are by-products, selectivity.

    And of what moves the answer, where influences are given.

    today is drawn thin behind the rating; status stands under the title. Nothing is drawn of a train of
    which no bed was rated.
    """
    drawable = [profile for profile in rating.profiles if profile.w[-1] > 0.0]
    if not drawable:
        return {}
    behind = today if today is not None and today.profiles and not today.failure else None
    title = rating.case.name
    with look.drawing():
        files = look.as_files(temperature_figure(rating, behind, title, status), "temperature")
        files |= look.as_files(composition_figure(rating, behind, title, status), "composition")
        if has_conversion(rating):
            files |= look.as_files(conversion_figure(rating, behind, title, status), "conversion")
        if says_something(rating):
            files |= look.as_files(selectivity_figure(rating, behind, title, status), "selectivity")
        if moves_something(influences):
            figure = influence_figure(influences, aim_of(rating), title, "what moves the answer")
            files |= look.as_files(figure, "influence")
    return files
