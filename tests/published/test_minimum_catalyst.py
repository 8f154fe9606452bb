"""OPT: least catalyst of a cooled train of adiabatic beds, one reversible exothermic reaction.

Kinetics of `liquid`, 72 K of rise for full conversion, 1000 mol/min, volumes and inlet temperatures free,
coolers free of charge. At the optimum, with X_i and T behind and before coolers (Konoki, Kagaku Kogaku 20,
1956 and 24, 1960; Horn, Z. Elektrochem. 65, 1961; Aris, The Optimal Design of Chemical Reactors, 1961; all
from memory):

    (1) r(X_i, T_out,i) = r(X_i, T_in,i+1)      (2) integral over each bed of d(1/r)/dT at constant X, dX = 0

The optima were recomputed for this purpose by direct minimisation and by solving (1) and (2), which agree to
1e-9; none is published. Tolerances: 1e-4 relative on volumes, 0.02 K, 1e-4 on conversions.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from itertools import pairwise

import numpy as np
import pytest

import reactorstage
from reactorstage.optimiser.result import INSIDE
from reactorstage.train.result import Rating
from tests.bed.build import Tree, load
from tests.published.liquid import conversions, cooled, exits, inlets, inverse_by_T, rate, value, volumes
from tests.published.quadrature import Path, least_volume, volume_table

SLOPE = 72.0


@dataclass(frozen=True)
class Reference:
    """A recomputed optimum: L, conversions behind the beds, K, L."""

    X_out: float
    total: float
    X: tuple[float, ...]
    T_in: tuple[float, ...]
    T_out: tuple[float, ...]
    V: tuple[float, ...]


OPT = {
    "OPT-1": Reference(0.8, 1692.885, (0.8,), (288.877,), (346.477,), (1692.885,)),
    "OPT-2": Reference(
        0.8, 596.4465, (0.51535, 0.8), (326.686, 323.178), (363.791, 343.673), (179.861, 416.586)
    ),
    "OPT-3": Reference(
        0.9,
        1083.456,
        (0.48006, 0.75985, 0.9),
        (331.085, 326.490, 321.702),
        (365.649, 346.635, 331.793),
        (140.314, 313.305, 629.837),
    ),
}


@cache
def optimum(beds: int, X: float, hottest: str = "") -> Rating:
    """The best answer of a search from four starts, with exits at most `hottest`."""
    limits: Tree = {"hot": {"of": "every bed.exit temperature", "at most": hottest}} if hottest else {}
    return solved(cooled(beds, X, limits=limits))


def solved(tree: Tree) -> Rating:
    outcome = reactorstage.optimise(load(tree), starts=4, explain=False)
    assert outcome.status == INSIDE
    assert outcome.best is not None
    return outcome.best


def found(check: str) -> Rating:
    return optimum(len(OPT[check].V), OPT[check].X_out)


@pytest.mark.parametrize("check", list(OPT))
def test_OPT_1_to_3_volumes(check: str) -> None:
    """Total and each bed; at an optimum the total is flat in all else, the beds are not."""
    assert value(found(check), "train.catalyst") == pytest.approx(OPT[check].total, rel=1e-4)
    assert volumes(found(check)) == pytest.approx(OPT[check].V, rel=1e-4)


@pytest.mark.parametrize("check", list(OPT))
def test_OPT_1_to_3_conversions(check: str) -> None:
    assert conversions(found(check), -1) == pytest.approx(OPT[check].X, abs=1e-4)


@pytest.mark.parametrize("check", list(OPT))
def test_OPT_1_to_3_temperatures(check: str) -> None:
    assert inlets(found(check)) == pytest.approx(OPT[check].T_in, abs=0.02)
    assert exits(found(check)) == pytest.approx(OPT[check].T_out, abs=0.02)


def paths(rating: Rating) -> list[Path]:
    """The beds of a rating as adiabatic paths, to be integrated without the package."""
    ends = zip(conversions(rating, 0), conversions(rating, -1), inlets(rating), strict=True)
    return [Path(float(a), float(b), float(T), SLOPE) for a, b, T in ends]


def ratios(rating: Rating) -> np.ndarray:
    """Condition (1): rate before each cooler by the rate behind it, less one."""
    beds = paths(rating)
    before = [rate(bed.X_out, bed.T_out) for bed in beds[:-1]]
    behind = [rate(bed.X_in, bed.T_in) for bed in beds[1:]]
    return np.divide(before, behind) - 1.0


def stationarity(rating: Rating) -> np.ndarray:
    """Condition (2): the integral over each bed, L min/(mol K); 1e-6 of it moves the train by 1e-3 L/K."""
    return np.array([bed.integral(inverse_by_T) for bed in paths(rating)])


@pytest.mark.parametrize("check", list(OPT))
def test_beds_found_are_the_quadrature_of_the_published_law(check: str) -> None:
    """Independent program: volume, exit temperature and rates along each bed from the law alone, 1e-7."""
    rating = found(check)
    for bed, profile, volume in zip(paths(rating), rating.profiles, volumes(rating), strict=True):
        assert volume == pytest.approx(1000.0 * bed.time, rel=1e-7)
        assert profile.T[-1] == pytest.approx(bed.T_out, abs=1e-6)
        X = profile.F[:, 1] / profile.F.sum(axis=1)
        assert 60.0 * profile.r[:, 0] == pytest.approx(rate(X, profile.T), rel=1e-6)


def test_OPT_4_rates_across_the_cooler_of_OPT_2() -> None:
    """Condition (1), 1e-6; 0.789437 mol/(L min) on both sides (1e-4), also by the profiles of the rating."""
    rating = found("OPT-2")
    assert np.abs(ratios(rating)).max() < 1e-6
    first, second = rating.profiles
    for r in (first.r[-1, 0], second.r[0, 0]):
        assert 60.0 * r == pytest.approx(0.789437, rel=1e-4)


def test_OPT_4_rates_across_the_coolers_of_OPT_3() -> None:
    """Condition (1), 1e-6."""
    assert np.abs(ratios(found("OPT-3"))).max() < 1e-6


def test_OPT_4_rates_across_the_coolers_of_OPT_3_as_far_as_temperatures_go() -> None:
    """2e-5, where 0.02 K at the inlet of bed 1 are worth 7.5e-3."""
    assert np.abs(ratios(found("OPT-3"))).max() < 2e-5


@pytest.mark.parametrize("check", ["OPT-2", "OPT-3"])
def test_OPT_4_inlet_temperatures_are_stationary(check: str) -> None:
    """Condition (2), 1e-6."""
    assert np.abs(stationarity(found(check))).max() < 1e-6


def test_OPT_4_conditions_can_fail() -> None:
    """0.02 K at one inlet, the volume then made up, breaks both conditions far beyond their tolerances."""
    first, second = paths(found("OPT-2"))
    warmer = Path(first.X_in, first.X_out, first.T_in + 0.02, SLOPE)
    assert abs(warmer.integral(inverse_by_T)) > 1e-5
    assert abs(rate(warmer.X_out, warmer.T_out) / rate(second.X_in, second.T_in) - 1.0) > 1e-4


def test_OPT_5_hottest_exit_355_K() -> None:
    """656.384 L, X1 0.5202, held by bed 1 alone: 317.544 -> 355.000 and 323.475 -> 343.618 K (recomputed)."""
    rating = optimum(2, 0.8, "355 K")
    assert value(rating, "train.catalyst") == pytest.approx(656.384, rel=1e-4)
    assert conversions(rating, -1) == pytest.approx([0.5202, 0.8], abs=1e-4)
    assert inlets(rating) == pytest.approx([317.544, 323.475], abs=0.02)
    assert exits(rating) == pytest.approx([355.000, 343.618], abs=0.02)
    at_work = {one.owner for one in rating.limits if one.label == "hot" and one.at_work}
    assert at_work == {"bed 1"}


def test_OPT_5_unheld_bed_stays_stationary() -> None:
    """Condition (2) goes on to hold for bed 2, whose inlet is free, and not for bed 1; (1) falls with it."""
    held, free = stationarity(optimum(2, 0.8, "355 K"))
    assert abs(free) < 1e-6
    assert held < -1e-3


@cache
def cheapest(beds: int) -> Rating:
    """Cost V + 60 per bed, V in L."""
    tree = cooled(beds, 0.8)
    prices = {
        "catalyst": {"of": "train.catalyst", "costs": "1 EUR/(kg h)"},
        "vessels": {"of": "train.number of beds", "costs": "60 EUR/h"},
    }
    return solved({**tree, "aim": "least money.total", "prices": prices})


def test_OPT_6_three_beds_are_cheapest() -> None:
    """Exact: of one to four beds, three (recomputed)."""
    costs = [3600.0 * value(cheapest(beds), "money.total") for beds in (1, 2, 3, 4)]
    assert int(np.argmin(costs)) + 1 == 3
    totals = [value(cheapest(beds), "train.catalyst") + 60.0 * beds for beds in (1, 2, 3, 4)]
    assert costs == pytest.approx(totals, rel=1e-9)


def test_OPT_6_money_and_catalyst_give_the_same_train() -> None:
    """A price on the catalyst and a fixed sum per bed move nothing within a number of beds."""
    assert volumes(cheapest(2)) == pytest.approx(OPT["OPT-2"].V, rel=1e-4)


def test_more_beds_need_less_and_never_less_than_the_optimal_progression() -> None:
    """401.1 L (AR-3, recomputed) with the best temperature everywhere bounds every train from below."""
    total = [value(cheapest(beds), "train.catalyst") for beds in (1, 2, 3, 4)]
    assert all(after < before for before, after in pairwise(total))
    assert total[-1] > 401.1


@cache
def table(dX: float, dT: float) -> np.ndarray:
    return volume_table(np.linspace(0.0, 0.9, round(0.9 / dX) + 1), np.arange(270.0, 370.1, dT), SLOPE)


@pytest.mark.parametrize(("beds", "X"), [(2, 0.8), (3, 0.8), (4, 0.8), (3, 0.9)])
def test_dynamic_programming_finds_the_same_volume(beds: int, X: float) -> None:
    """Independent program: Bellman's recursion over conversions and inlet temperatures on a grid.

    A grid can only be worse than the optimum; its excess is of second order, so halving it leaves a quarter.
    """
    V = value(optimum(beds, X), "train.catalyst")
    excess = [
        least_volume(table(dX, dT), beds, round(X / dX)) / V - 1.0 for dX, dT in ((0.01, 1.0), (0.005, 0.5))
    ]
    assert 0.0 < excess[1] < 3e-4
    assert excess[1] < 0.5 * excess[0]
