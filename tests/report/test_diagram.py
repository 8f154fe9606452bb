"""The conversion-temperature diagram: what its lines say, and how it is drawn."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import pairwise
from math import log
from pathlib import Path

import numpy as np
import pytest
from matplotlib.contour import QuadContourSet

import reactorstage
from reactorstage.chemistry import R_GAS, heat_of_reaction
from reactorstage.report import cautions, look
from reactorstage.report.conversion import (
    Background,
    background,
    best_temperature,
    has_conversion,
    round_rates,
    way,
    whole_feed,
)
from reactorstage.report.diagram import conversion_figure, explained, temperature_range
from reactorstage.report.figures import figure_files
from reactorstage.train.at_rest import at_rest
from reactorstage.train.result import Rating
from tests.bed.build import programme
from tests.chemistry.published_laws import SO2
from tests.published.converter import converter
from tests.report import synthetic
from tests.report.test_figures import outside, overlapping, texts

DATA = Path(__file__).parent / "data"
LEGS = {
    "oxidation": ["bed", "injection", "exchanger", "bed"],
    "lead": ["bed", "injection", "exchanger"] * 3 + ["bed"],
    "butadiene": ["bed", "exchanger", "injection", "bed"],
}


@pytest.fixture(autouse=True)
def our_settings() -> Iterator[None]:
    with look.drawing():
        yield


@pytest.fixture(scope="module")
def ratings(cases: Path, lead: Path) -> dict[str, Rating]:
    """One reversible reaction in two beds, three dependent ones in four, two of three in hydrogenation."""
    paths = {
        "oxidation": DATA / "oxidation.yaml",
        "lead": lead,
        "butadiene": cases / "quernthwaite-butadiene.yaml",
    }
    return {name: reactorstage.rate(reactorstage.load(path)) for name, path in paths.items()}


def behind(rating: Rating) -> Background:
    found = background(rating, *temperature_range(rating, way(rating)))
    assert found is not None
    return found


@pytest.mark.parametrize("name", LEGS)
def test_the_way_ends_at_the_conversion_of_the_train(ratings: dict[str, Rating], name: str) -> None:
    """Independent way: the train's conversion is counted from its feeds and what leaves it."""
    rating = ratings[name]
    legs = way(rating)
    assert [leg.kind for leg in legs] == LEGS[name]
    assert legs[0].X[0] == pytest.approx(0.0, abs=1e-9)
    converted = rating.number(f"train.conversion of {rating.main_reactant}")
    assert legs[-1].X[-1] == pytest.approx(converted, abs=1e-9)


@pytest.mark.parametrize("name", LEGS)
def test_legs_join_and_exchangers_are_level(ratings: dict[str, Rating], name: str) -> None:
    legs = way(ratings[name])
    for before, after in pairwise(legs):
        assert (after.T[0], after.X[0]) == pytest.approx((before.T[-1], before.X[-1]), abs=1e-9)
    for leg in legs:
        if leg.kind == "exchanger":
            assert leg.X[0] == leg.X[1] and leg.T[1] < leg.T[0]
        if leg.kind == "injection":
            assert leg.X[1] < leg.X[0]


def test_a_cold_shot_of_feed_goes_towards_the_feed(ratings: dict[str, Rating]) -> None:
    """Closed form: X is diluted as 1000 to 1100 kmol/h, T nearly likewise: heat capacities differ little."""
    shot = way(ratings["oxidation"])[1]
    assert shot.X[1] / shot.X[0] == pytest.approx(1000.0 / 1100.0, rel=1e-9)
    part = (shot.T[0] - shot.T[1]) / (shot.T[0] - (200.0 + 273.15))
    assert part == pytest.approx(1.0 - shot.X[1] / shot.X[0], abs=0.006)


def test_beds_end_below_the_equilibrium_and_best_rate_lies_between(ratings: dict[str, Rating]) -> None:
    rating = ratings["oxidation"]
    lines = behind(rating)
    assert lines.rates is not None
    for leg in way(rating):
        limit = np.interp(leg.T, lines.T, lines.equilibrium)
        assert np.all(limit > leg.X)
    known = np.isfinite(lines.rates.best)
    X, best = lines.rates.X[known], lines.rates.best[known]
    assert known.sum() > 20 and (np.diff(best) < 0.0).all()
    assert (np.interp(best, lines.T, lines.equilibrium) > X).all()


def test_the_line_follows_the_equilibrium_constant_of_the_law() -> None:
    """Closed form: pSO3/(pSO2 pO2^1/2) = exp(11300/T - 10.68) atm^-1/2 on the line.

    The law is that of Collina, Corbetta and Cappelli (1971), from memory, see `published_laws`; the Gibbs
    energies of the species data give another line, which the train would seem to cross.
    """
    feed = {
        "flow": "1000 kmol/h",
        "temperature": "400 degC",
        "composition": {"SO2": "7.8 %", "O2": "10.8 %", "N2": "rest"},
    }
    beds = [("20 t", "440 degC"), ("40 t", "450 degC")]
    rating = programme(converter(SO2, feed, beds, "1.3 bar(a)")).rate()
    lines = behind(rating)
    X, atm = lines.equilibrium, 1.3e5 / 101325.0
    p_SO2, p_O2, p_SO3 = (
        n / (1.0 - 0.039 * X) * atm for n in (0.078 * (1.0 - X), 0.108 - 0.039 * X, 0.078 * X)
    )
    assert p_SO3 / (p_SO2 * np.sqrt(p_O2)) == pytest.approx(np.exp(11300.0 / lines.T - 10.68), rel=1e-6)
    for leg in way(rating):
        if leg.kind == "bed":
            assert leg.X[-1] < np.interp(leg.T[-1], lines.T, X) + 1e-4
    assert explained(rating, lines)[0].startswith("Equilibrium by the law's own constant, best rate")


def test_a_reaction_that_follows_gibbs_energies_is_not_brought_to_rest_by_its_law(
    ratings: dict[str, Rating],
) -> None:
    chemistry = ratings["oxidation"].chemistry
    assert chemistry is not None
    with pytest.raises(ValueError, match="no equilibrium constant of its own"):
        at_rest(chemistry, 0, np.ones(4), 700.0, 1e5)


@pytest.mark.parametrize(
    ("F", "gone"), [((0.0, 1.0, 1.0, 5.0), None), ((1.0, 0.5, 0.0, 0.0), None), ((0.0, 1.0, 0.0, 1.0), 0)]
)
def test_coming_to_rest_begins_anywhere(F: tuple[float, ...], gone: int | None) -> None:
    """From products alone, from reactants alone, and with nothing that could react."""
    rating = programme(
        converter(
            SO2,
            {"flow": "1 kmol/h", "temperature": "400 degC", "composition": {"SO2": "7.8 %", "O2": "rest"}},
            [("1 kg", "440 degC")],
            "1 atm(a)",
        )
    ).rate()
    chemistry = rating.chemistry
    assert chemistry is not None
    found = at_rest(chemistry, 0, np.array(F), 750.0, 101325.0)
    if gone is not None:
        assert found == pytest.approx(F)
        return
    y = found / found.sum()
    assert y[2] / (y[0] * np.sqrt(y[1])) == pytest.approx(np.exp(11300.0 / 750.0 - 10.68), rel=1e-6)


def test_several_reactions_end_near_the_equilibrium_of_the_key_reaction(ratings: dict[str, Rating]) -> None:
    """By-products take part of the ethylene, so the train may pass that line, but by little."""
    lines = behind(ratings["lead"])
    assert lines.reaction == "ethylation" and lines.rates is None
    for leg in way(ratings["lead"]):
        assert leg.X[-1] < np.interp(leg.T[-1], lines.T, lines.equilibrium) + 2e-3


def test_best_temperatures_of_a_textbook_reaction() -> None:
    """Levenspiel, Chemical Reaction Engineering, 3rd ed. 1999, Ex. 9: constants from memory, closed form.

    r = k1 (1 - X) - k2 X, k = exp(a - E/(R T)): 1/T = R/(E2 - E1) (a2 - a1 + ln(E2 X/(E1 (1 - X)))).
    """
    T, X = np.linspace(290.0, 390.0, 56), np.linspace(0.5, 0.95, 10)
    forward, backward = np.exp(17.34 - 48900.0 / 8.314 / T), np.exp(42.04 - 124200.0 / 8.314 / T)
    rate = np.outer(1.0 - X, forward) - np.outer(X, backward)
    exact = (124200.0 - 48900.0) / 8.314 / (42.04 - 17.34 + np.log(124200.0 * X / (48900.0 * (1.0 - X))))
    assert best_temperature(T, rate) == pytest.approx(exact, abs=0.3)
    assert np.isnan(best_temperature(T[:5], rate[:, :5])).all()


def test_best_rate_is_that_of_denbigh(ratings: dict[str, Rating]) -> None:
    """K. G. Denbigh (1958): 1/T_best = 1/T_eq + R/(E2 - E1) ln(E2/E1), heat of reaction taken as constant."""
    rating = ratings["oxidation"]
    lines, chemistry = behind(rating), rating.chemistry
    assert lines.rates is not None and chemistry is not None
    E1 = float(chemistry.laws.E_over_R[0]) * R_GAS
    for X in (0.6, 0.7, 0.8):
        at = float(np.interp(X, lines.rates.X, lines.rates.best))
        T_eq = float(np.interp(-X, -lines.equilibrium, lines.T))
        E2 = E1 - float(heat_of_reaction(chemistry.table, chemistry.laws.nu, T_eq)[0])
        assert at == pytest.approx(1.0 / (1.0 / T_eq + R_GAS / (E2 - E1) * log(E2 / E1)), abs=2.0)


def test_rates_behind_the_way_are_those_of_the_bed(ratings: dict[str, Rating]) -> None:
    """Independent program: the compiled kernel's rates along bed 1, at nearly the mean pressure."""
    rating = ratings["oxidation"]
    lines, bed = behind(rating), rating.profiles[0]
    assert lines.rates is not None
    X = way(rating)[0].X
    for n in range(0, len(X), 12):
        if X[n] > 0.6:
            break
        row = [float(np.interp(bed.T[n], lines.T, values)) for values in lines.rates.rate]
        assert float(np.interp(X[n], lines.rates.X, row)) == pytest.approx(bed.r[n, 0], rel=0.03)


def test_the_whole_feed_is_what_the_feeds_bring(ratings: dict[str, Rating]) -> None:
    """Closed form: 268 kmol/h of ethylene feed with 99.85 % ethylene, 965 kmol/h of benzene."""
    rating = ratings["lead"]
    feed = whole_feed(rating)
    assert feed.main * 3.6 == pytest.approx(268.0 * 0.9985, rel=1e-9)
    assert feed.F[rating.species.index("benzene")] * 3.6 == pytest.approx(965.0, rel=1e-9)
    assert rating.profiles[-1].p[-1] < feed.p < rating.profiles[0].p[0]


def test_round_rates_are_round_and_few() -> None:
    assert round_rates(np.array([0.0, 37.0]), 4) == pytest.approx([2.0, 5.0, 10.0, 20.0])
    assert round_rates(np.array([np.nan, -1.0]), 4) == []


@pytest.mark.parametrize("name", LEGS)
def test_no_label_overlaps_another_or_leaves_the_page(ratings: dict[str, Rating], name: str) -> None:
    figure = conversion_figure(ratings[name], None, ratings[name].case.name, "rating, inside all limits")
    assert overlapping(figure) == []
    assert outside(figure) == []


def test_one_reaction_has_lines_of_rate_and_several_have_a_warning(ratings: dict[str, Rating]) -> None:
    one = conversion_figure(ratings["oxidation"], None, "a", "b")
    shown = "\n".join(text.get_text() for text in texts(one))
    assert any(isinstance(drawn, QuadContourSet) for drawn in one.axes[0].collections)
    assert all(word in shown for word in ("equilibrium", "best rate", "bed 2", "630 degC"))
    assert "equal rate, kmol/(t h)" in shown
    assert "catalyst activity 1" in shown and "Several reactions" not in shown
    several = conversion_figure(ratings["lead"], None, "a", "b")
    shown = "\n".join(text.get_text() for text in texts(several))
    assert not any(isinstance(drawn, QuadContourSet) for drawn in several.axes[0].collections)
    assert "Several reactions: the train shows ethylene used by all of them" in shown
    assert "that of ethylation alone" in shown and "without by-products" in shown and "best rate" not in shown
    for figure in (one, several):
        assert cautions.SHORT in "\n".join(text.get_text() for text in texts(figure))


def test_limits_are_dashed_and_grey(ratings: dict[str, Rating]) -> None:
    axes = conversion_figure(ratings["oxidation"], None, "a", "b").axes[0]
    limits = [line for line in axes.get_lines() if line.get_color() == look.LIMIT]
    assert sorted(round(float(line.get_xdata()[0]), 6) for line in limits) == [0.0, 410.0, 630.0]
    assert {round(float(line.get_ydata()[0]), 6) for line in limits} >= {90.0}
    assert all(line.is_dashed() for line in limits)


def test_todays_way_is_drawn_thin_behind(ratings: dict[str, Rating]) -> None:
    today = reactorstage.rate(
        reactorstage.load(DATA / "oxidation.yaml", ["bed 2.inlet temperature=480 degC"])
    )
    axes = conversion_figure(ratings["oxidation"], today, "a", "b").axes[0]
    beds = [line for line in axes.get_lines() if line.get_color() == look.SPLIT_REACTANT]
    weights = [line.get_linewidth() for line in beds if len(line.get_xdata()) > 2]
    assert sorted(weights) == [look.TODAY_WEIGHT] * 2 + [look.THIS_WEIGHT] * 2


def test_without_a_reversible_reaction_there_is_no_line_of_equilibrium(ratings: dict[str, Rating]) -> None:
    rating = ratings["oxidation"]
    assert rating.chemistry is not None
    one_way = tuple(replace(equation, reversible=False) for equation in rating.chemistry.equations)
    irreversible = replace(rating, chemistry=replace(rating.chemistry, equations=one_way))
    assert background(irreversible, 600.0, 900.0) is None
    assert explained(irreversible, None) == [
        "No reversible reaction uses sulphur dioxide: there is no line of equilibrium."
    ]
    shown = {text.get_text() for text in texts(conversion_figure(irreversible, None, "a", "b"))}
    assert "equilibrium" not in shown and "bed 1" in shown


def test_files_are_drawn_with_the_others_and_byte_identical(ratings: dict[str, Rating]) -> None:
    first, second = (figure_files(ratings["oxidation"], None, "rating") for _ in range(2))
    assert {"conversion.png", "conversion.svg"} <= set(first)
    assert first == second


def test_without_chemistry_or_main_reactant_nothing_is_drawn(ratings: dict[str, Rating]) -> None:
    assert not has_conversion(synthetic.rating())
    assert not has_conversion(replace(ratings["lead"], main_reactant=""))
    assert not any(name.startswith("conversion") for name in figure_files(synthetic.rating(), None, "rating"))
