"""Pictures: repeatable bytes, labels that do not overlap, content that follows the result."""

from __future__ import annotations

import struct
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations

import matplotlib
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from matplotlib.figure import Figure
from matplotlib.text import Text
from matplotlib.transforms import Bbox

from reactorstage.report import cautions, look
from reactorstage.report.composition import composition_figure, panels_of
from reactorstage.report.figures import figure_files
from reactorstage.report.rates import rates_figure
from reactorstage.report.selectivity import selectivity_figure
from reactorstage.report.temperature import temperature_figure
from reactorstage.train.result import Rating
from tests.report import synthetic

DRAW = (temperature_figure, composition_figure, rates_figure)
OTHER = synthetic.Names("oxygen", "sulfur dioxide", "sulfur trioxide", "", "oxidation", "none")


@pytest.fixture(autouse=True)
def our_settings() -> Iterator[None]:
    with look.drawing():
        yield


def texts(figure: Figure) -> list[Text]:
    """The texts that are drawn (not those of ticks outside the axes)."""
    drawn: list[Text] = []
    original = Text.draw

    def recorded(self: Text, renderer: object) -> None:
        if self.get_visible() and self.get_text().strip():
            drawn.append(self)
        original(self, renderer)  # type: ignore[arg-type]

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Text, "draw", recorded)
        figure.canvas.draw()
    return drawn


def boxes(figure: Figure) -> list[tuple[str, Bbox]]:
    return [(text.get_text(), text.get_window_extent()) for text in texts(figure)]


def overlapping(figure: Figure) -> list[tuple[str, str]]:
    """Pairs of texts whose boxes share more than a hair."""
    found = []
    for (one, a), (other, b) in combinations(boxes(figure), 2):
        wide = min(a.x1, b.x1) - max(a.x0, b.x0)
        high = min(a.y1, b.y1) - max(a.y0, b.y0)
        if wide > 1.0 and high > 2.0:
            found.append((one, other))
    return found


def outside(figure: Figure) -> list[str]:
    page = figure.bbox
    return [
        text for text, box in boxes(figure)
        if box.x0 < -1 or box.y0 < -1 or box.x1 > page.x1 + 1 or box.y1 > page.y1 + 1
    ]  # fmt: skip


def ratings() -> dict[str, tuple[Rating, Rating | None]]:
    many = [replace(synthetic.LEAD[i % 4], catalyst=1.5 + 0.2 * i) for i in range(8)]
    return {
        "lead": (synthetic.rating(), synthetic.rating(synthetic.TODAY)),
        "one bed": (synthetic.rating(synthetic.LEAD[:1]), None),
        "eight beds": (synthetic.rating(many), None),
        "no split": (
            synthetic.rating(synthetic.LEAD, synthetic.Options(OTHER, split=False, priced=False)), None,
        ),
    }  # fmt: skip


@pytest.mark.parametrize("name", ratings())
@pytest.mark.parametrize("draw", DRAW, ids=lambda function: function.__name__)
def test_no_label_overlaps_another_or_leaves_the_page(draw: object, name: str) -> None:
    rating, today = ratings()[name]
    figure = draw(rating, today, "Selkemouth Works, four-bed ethylation", "best found, inside all limits")  # type: ignore[operator]
    assert overlapping(figure) == []
    assert outside(figure) == []


def test_selectivity_labels_do_not_overlap() -> None:
    rating, today = ratings()["lead"]
    figure = selectivity_figure(rating, today, "Selkemouth Works, four-bed ethylation", "best found")
    assert overlapping(figure) == [] and outside(figure) == []


def test_files_are_byte_identical_on_repeat() -> None:
    rating, today = ratings()["lead"]
    first, second = (figure_files(rating, today, "rating") for _ in range(2))
    assert first == second
    assert sorted(first) == sorted(
        f"{name}.{kind}"
        for name in ("temperature", "composition", "selectivity", "rates", "heat")
        for kind in ("png", "svg", "csv")
    )


def test_files_do_not_depend_on_the_users_matplotlib_settings() -> None:
    rating = synthetic.rating()
    first = figure_files(rating, None, "rating")
    with matplotlib.rc_context({"axes.grid": True, "font.size": 17.0, "lines.linewidth": 9.0}):
        assert figure_files(rating, None, "rating") == first
        assert matplotlib.rcParams["font.size"] == 17.0


def test_files_are_pictures_without_dates() -> None:
    files = figure_files(synthetic.rating(), None, "rating")
    png = files["temperature.png"]
    assert png[:8] == b"\x89PNG\r\n\x1a\n"
    width, height = struct.unpack(">II", png[16:24])
    assert width == pytest.approx(look.WIDTH * look.DPI, abs=2) and height > 400
    svg = files["temperature.svg"]
    assert svg.startswith(b"<?xml") and b"<dc:date>" not in svg


def test_without_by_products_there_is_no_selectivity_picture() -> None:
    rating, _ = ratings()["no split"]
    assert not any(name.startswith("selectivity") for name in figure_files(rating, None, "rating"))


def test_a_train_without_a_rated_bed_is_not_drawn() -> None:
    assert figure_files(replace(synthetic.rating(), profiles=()), None, "no answer") == {}


def test_temperature_picture_names_heat_limits_beds_and_the_caution() -> None:
    shown = {text.get_text() for text in texts(temperature_figure(synthetic.rating(), None, "a", "b"))}
    assert {"5.11 MW in", "1.75 MW out", "0 MW", "10.9 MW out"} <= shown
    assert {"hot exit\n424 degC", "light-off\n364 degC", "bed 1\n2.6 t"} <= shown
    assert {"364.0", "397.9", "424.0"} <= shown
    assert cautions.SHORT in shown


def test_a_peak_inside_a_bed_is_marked_with_its_value() -> None:
    rating = synthetic.rating()
    hot = replace(rating.profiles[1], T_peak=440.0 + 273.15, w_peak=1500.0)
    profiles = (rating.profiles[0], hot, *rating.profiles[2:])
    figure = temperature_figure(replace(rating, profiles=profiles), None, "a", "b")
    assert "440.0" in {text.get_text() for text in texts(figure)}


def test_the_split_reactant_has_a_logarithmic_axis_of_its_own() -> None:
    panels = panels_of(synthetic.rating())
    assert [panel.logarithmic for panel in panels] == [False, True, False]
    figure = composition_figure(synthetic.rating(), None, "a", "b")
    assert [axes.get_yscale() for axes in figure.axes] == ["linear", "log", "linear"]


def test_colours_belong_to_roles_in_every_picture() -> None:
    rating = synthetic.rating()
    flows = composition_figure(rating, None, "a", "b")
    parts = selectivity_figure(rating, None, "a", "b")
    by_product = {line.get_color() for line in flows.axes[2].get_lines()}
    assert by_product == {line.get_color() for line in parts.axes[1].get_lines()} == {look.BY_PRODUCT}


@given(st.lists(st.floats(0.0, 100.0), min_size=1, max_size=12), st.floats(0.5, 20.0))
def test_spaced_places_keep_their_order_and_distance(wanted: list[float], apart: float) -> None:
    wanted = sorted(wanted)
    places = np.array(look.spaced(wanted, apart))
    assert len(places) == len(wanted)
    assert np.all(np.diff(places) >= apart - 1e-9)
    if np.all(np.diff(wanted) >= apart):
        assert places == pytest.approx(wanted)
