"""Heat, rates and worths as pictures, and the numbers behind every picture."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import reactorstage
from reactorstage.face import Optimisation
from reactorstage.report import look
from reactorstage.report.cascade import cascades, composite
from reactorstage.report.cautions import SHORT
from reactorstage.report.figures import figure_files
from reactorstage.report.heat import bound_of
from reactorstage.report.profiles import train_profiles
from reactorstage.report.rates import lighting, used
from reactorstage.report.worths import worth_bars
from tests.report import synthetic
from tests.report.test_figures import outside, overlapping, texts

STREAMS = st.lists(
    st.tuples(st.floats(300.0, 700.0), st.floats(300.0, 700.0), st.floats(0.0, 1e7)), min_size=1, max_size=6
)


@pytest.fixture(scope="module")
def found(lead: Path) -> Optimisation:
    return reactorstage.optimise(reactorstage.load(lead), starts=6)


@pytest.fixture(scope="module")
def files(found: Optimisation) -> dict[str, bytes]:
    assert found.best is not None
    return figure_files(found.best, found.today, "best found", found.optimum)


def rows(data: bytes) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(data.decode())))


def test_every_picture_has_its_numbers_and_their_caution(files: dict[str, bytes]) -> None:
    names = {name.partition(".")[0] for name in files}
    assert names == {"temperature", "composition", "selectivity", "rates", "conversion", "heat", "worths"}
    for name in names:
        content = rows(files[f"{name}.csv"])
        assert content[0]["note"] == SHORT and not any(row["note"] for row in content[1:])
        assert len(content) >= 3 and {f"{name}.png", f"{name}.svg"} <= set(files)


def test_numbers_are_those_of_the_result(found: Optimisation, files: dict[str, bytes]) -> None:
    assert found.best is not None
    this = [row for row in rows(files["temperature.csv"]) if row["setting"] == "this setting"]
    last = [
        float(row["temperature, degC"]) for row in this if (row["place"], row["line"]) == ("bed 4", "bed")
    ][-1]
    exit_ = found.best.number("bed 4.exit temperature")
    assert exit_ is not None and last == pytest.approx(exit_ - 273.15, abs=1e-6)
    flows = [row for row in rows(files["composition.csv"]) if row["setting"] == "this setting"]
    slip = found.best.number("effluent.flow of ethylene")
    assert slip is not None and float(flows[-1]["flow of ethylene, kmol/h"]) == pytest.approx(
        3.6 * slip, rel=1e-6
    )
    assert {row["setting"] for row in rows(files["conversion.csv"])} == {
        "this setting",
        "today",
        "equilibrium",
    }


def test_the_rate_integrates_to_what_is_used(found: Optimisation) -> None:
    """Closed form: the integral of the rate over the catalyst is what the beds use of the main reactant."""
    assert found.best is not None
    for bed in train_profiles(found.best):
        total = np.trapezoid(used(found.best)(bed), bed.catalyst)
        assert total == pytest.approx(bed.F[0, 1] - bed.F[-1, 1], rel=2e-3)


def test_light_off_lies_in_order_inside_each_bed(found: Optimisation) -> None:
    assert found.best is not None
    for place in lighting(found.best, train_profiles(found.best)):
        depths = [depth for depth in place.depths if depth is not None]
        assert len(depths) == 3 and place.start < depths[0] < depths[1] < depths[2] < place.end


@given(STREAMS)
def test_a_composite_holds_all_heat_and_never_falls(streams: list[tuple[float, float, float]]) -> None:
    T, heat = composite([(np.array(sorted((one, other))), np.array([0.0, Q])) for one, other, Q in streams])
    assert np.all(np.diff(T) > 0.0) and np.all(np.diff(heat) >= -1e-6)
    assert heat[-1] == pytest.approx(sum(Q for *_, Q in streams), rel=1e-9, abs=1e-6)


def test_levels_take_all_heat_and_keep_the_approach(found: Optimisation) -> None:
    assert found.best is not None
    removed, added = cascades(found.best)
    for side in (removed, added):
        assert sum(rung.heat for rung in side.rungs) == pytest.approx(side.total, rel=1e-6)
    start = 0.0
    for rung in removed.rungs:
        coldest = float(np.interp(start, removed.heat, removed.T))
        assert coldest >= bound_of(removed, rung) - 0.2  # lines between points and the rounded hot end
        start += rung.heat
    assert added.T[-1] <= bound_of(added, added.rungs[-1])


def test_worth_bars_are_those_of_the_optimum(found: Optimisation) -> None:
    assert found.best is not None
    bars = worth_bars(found.optimum, found.best)
    assert bars[0].name == "light-off, beds 1-4" and bars[0].step == "1 K"
    assert bars[0].saves is not None and bars[0].saves == pytest.approx(3.7, abs=0.1)
    sizes = [max(bar.saves or 0.0, bar.costs or 0.0) for bar in bars]
    assert sizes == sorted(sizes, reverse=True)


def test_unpriced_heat_is_said_to_be_left_out() -> None:
    from reactorstage.report.heat import heat_figure

    with look.drawing():
        figure = heat_figure(synthetic.rating(), "a", "b")
        assert any("unpriced: effluent" in text.get_text() for text in texts(figure))
        assert overlapping(figure) == [] and outside(figure) == []
