"""Exchangers, devices given by area, heated feeds: against textbook formulas for constant heat capacities."""

from __future__ import annotations

import re
from copy import deepcopy
from math import exp

import numpy as np
import pytest

import reactorstage as rs
from reactorstage.train.closures import bernoulli, log_mean
from reactorstage.train.result import Rating
from tests.bed.build import FLUID, HEAD, Tree, load, programme
from tests.published.ideal import constant

CP = {"A": 50.0, "B": 80.0}
"""J/(mol K)."""

FLOW, SHOT, T_FEED = 10.0, 4.0, 300.0


def train(exchanger: Tree | None = None, **more: Tree) -> Tree:
    """A heated in entry by the effluent; 4 mol/s of hot B come in behind bed 1. Nothing reacts."""
    entry: list[Tree] = [{"take": "A"}]
    effluent: list[Tree] = []
    if exchanger is not None:
        entry.append({"heat": {"exchanger": "X"}})
        effluent.append({"cool": {"exchanger": "X"}})
    constant_of = {"rate per": "bed volume", "driven by": "mole fraction", "constant": "1 mol/(m^3 s)"}
    bed: Tree = {
        "catalyst": "1 m^3",
        "state": "bypassed",
        "bulk density": "1000 kg/m^3",
        "pressure drop factor": 0,
    }
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": {"A": constant("C2H6", 0.0, 200.0, CP["A"]), "B": constant("C2H6", 0.0, 200.0, CP["B"])},
        "fluid": FLUID,
        "reactions": {"none": {"equation": "A => B", **constant_of}},
        "feeds": {
            "A": {"flow": f"{FLOW!r} mol/s", "temperature": f"{T_FEED!r} K", "composition": {"A": "100 %"}},
            "B": {"flow": f"{SHOT!r} mol/s", "temperature": "900 K", "composition": {"B": "100 %"}},
        },
        "exchangers": {"X": exchanger} if exchanger is not None else {},
        "train": [
            {"entry": entry},
            {"bed 1": {**bed, "inlet pressure": "2 bar(a)"}},
            {"gap 1": [{"inject": "B"}]},
            {"bed 2": bed},
            {"effluent": effluent},
        ],
        **more,
    }


def rated(tree: Tree) -> Rating:
    rating = programme(tree).rate()
    assert not rating.failure
    assert rating.atoms < 1e-12 and rating.energy < 1e-12
    assert max(rating.closed.residuals.values(), default=0.0) < 1e-11
    return rating


def hot_inlet(T_bed_1: float) -> float:
    """K behind the injection of B: the mixture of both."""
    return (FLOW * CP["A"] * T_bed_1 + SHOT * CP["B"] * 900.0) / (FLOW * CP["A"] + SHOT * CP["B"])


def effectiveness(NTU: float, C: float, parallel: bool) -> float:
    """Kays & London, Compact Heat Exchangers (from memory); C = C_min/C_max."""
    if parallel:
        return (1.0 - exp(-NTU * (1.0 + C))) / (1.0 + C)
    gone = exp(-NTU * (1.0 - C))
    return NTU / (1.0 + NTU) if C == 1.0 else (1.0 - gone) / (1.0 - C * gone)


@pytest.mark.parametrize("parallel", [False, True])
@pytest.mark.parametrize("area", [0.1, 1.0, 5.0])
def test_area_gives_the_textbook_effectiveness(area: float, parallel: bool) -> None:
    """Published formula, 1e-9: C_cold = 500 W/K, C_hot = 820 W/K, 300 W/(m2 K)."""
    given = {"area": f"{area} m^2", "coefficient": "300 W/(m^2 K)"}
    arrangement = "parallel flow" if parallel else "countercurrent"
    rating = rated(train({**given, "arrangement": arrangement}))
    eps = effectiveness(300.0 * area / 500.0, 500.0 / 820.0, parallel)
    [found] = rating.closed.exchanges
    assert found.effectiveness == pytest.approx(eps, rel=1e-9)
    assert rating.number("exchanger X.effectiveness") == found.effectiveness
    T_1 = found.cold[1]
    assert pytest.approx(eps * (hot_inlet(T_1) - T_FEED), rel=1e-9) == T_1 - T_FEED
    assert found.heat == pytest.approx(500.0 * (T_1 - T_FEED), rel=1e-9)
    assert found.hot[0] - found.hot[1] == pytest.approx(found.heat / 820.0, rel=1e-9)
    assert rating.number("exchanger X.heat") == found.heat == -rating.number("entry.heat removed")


def test_effectiveness_is_of_the_stream_that_changes_more() -> None:
    """Closed form: T_1 = T_f + eps (T_hot - T_f), T_hot linear in T_1; 1e-9."""
    rating = rated(train({"effectiveness": "60 %"}))
    a, b = FLOW * CP["A"], SHOT * CP["B"]
    T_1 = (T_FEED * 0.4 + 0.6 * b * 900.0 / (a + b)) / (1.0 - 0.6 * a / (a + b))
    assert rating.number("bed 1.inlet temperature") == pytest.approx(T_1, rel=1e-9)


def test_a_stream_that_goes_round_in_part_changes_more_in_the_exchanger() -> None:
    """Closed form: 30 % of the cold stream go round; what passes reaches eps, the mixture 70 % of the way."""
    rating = rated(train({"effectiveness": "60 %", "cold bypass": "30 %"}))
    [found] = rating.closed.exchanges
    hot, T_1 = found.hot[0], rating.number("bed 1.inlet temperature")
    assert found.cold[1] == pytest.approx(T_FEED + 0.6 * (hot - T_FEED), rel=1e-9)
    assert pytest.approx(0.7 * found.cold[1] + 0.3 * T_FEED, rel=1e-9) == T_1
    assert found.heat == pytest.approx(500.0 * (T_1 - T_FEED), rel=1e-9)
    hot_side = rated(train({"effectiveness": "60 %", "hot bypass": "50 %"}))
    [other] = hot_side.closed.exchanges
    assert other.hot[0] - other.hot[1] == pytest.approx(0.6 * (other.hot[0] - T_FEED), rel=1e-9)
    left = hot_side.number("effluent.exit temperature")
    assert left == pytest.approx(0.5 * (other.hot[0] + other.hot[1]), rel=1e-9)


def test_fouling_adds_to_the_resistance() -> None:
    """Closed form: 1/U = 1/300 + 0.002, so the fouled area does what 187.5 W/(m2 K) do."""
    fouled = {"area": "2 m^2", "coefficient": "300 W/(m^2 K)", "fouling resistance": "0.002 m^2 K/W"}
    clean = {"area": "2 m^2", "coefficient": "187.5 W/(m^2 K)"}
    dirty = rated(train(fouled)).number("exchanger X.heat")
    assert dirty == pytest.approx(rated(train(clean)).number("exchanger X.heat"), rel=1e-10)


def test_equal_heat_capacities_are_rounded_by_next_to_nothing() -> None:
    """Closed form at C_hot = C_cold (no shot): T_1 = T_hot has no difference; with 1e-4 mol/s of B as good
    as none.
    """
    tree = train({"area": "2 m^2", "coefficient": "300 W/(m^2 K)"})
    tree["feeds"]["B"]["flow"] = "1e-4 mol/s"
    [found] = rated(tree).closed.exchanges
    assert found.effectiveness == pytest.approx(1.2 / 2.2, rel=1e-4)


LEVELS: Tree = {"minimum approach": "5 K", "steam": {"cools down to": "350 K", "earns": "10 EUR/MWh"},
                "oven": {"heats up to": "800 K", "costs": "30 EUR/MWh"}}  # fmt: skip


@pytest.mark.parametrize("resistance", [0.0, 0.004])
def test_a_cooler_given_by_its_area(resistance: float) -> None:
    """Closed form: T_out = T_level + (T_in - T_level) exp(-U A / C), 1e-9."""
    cooler: Tree = {"area": "3 m^2", "coefficient": "250 W/(m^2 K)", "heat to": "steam"}
    if resistance:
        cooler["fouling resistance"] = f"{resistance} m^2 K/W"
    tree = train(**{"heat levels": LEVELS})
    tree["train"][-1] = {"effluent": [{"cool": cooler}]}
    rating = rated(tree)
    T_in, U = hot_inlet(T_FEED), 1.0 / (1.0 / 250.0 + resistance)
    T_out = 350.0 + (T_in - 350.0) * exp(-3.0 * U / 820.0)
    assert rating.number("effluent.exit temperature") == pytest.approx(T_out, rel=1e-9)
    assert rating.number("level steam.heat") == pytest.approx(820.0 * (T_in - T_out), rel=1e-9)


def test_a_heater_given_by_its_area() -> None:
    """Closed form as for the cooler, from the other side."""
    tree = train(**{"heat levels": LEVELS})
    tree["train"][0]["entry"].append(
        {"heat": {"area": "3 m^2", "coefficient": "250 W/(m^2 K)", "heat from": "oven"}}
    )
    T_1 = 800.0 - 500.0 * exp(-750.0 / 500.0)
    assert rated(tree).number("bed 1.inlet temperature") == pytest.approx(T_1, rel=1e-9)


def test_a_feed_heated_before_it_enters() -> None:
    """Closed form: a hot effluent warms feed B; C_B = 320 W/K is the smaller one, so eps is its share of
    the way.
    """
    tree = train()
    tree["feeds"]["B"]["temperature"], tree["feeds"]["A"]["temperature"] = "300 K", "700 K"
    tree["exchangers"] = {"X": {"effectiveness": "50 %", "with feed": "B"}}
    tree["train"][-1] = {"effluent": [{"cool": {"exchanger": "X"}}]}
    rating = rated(tree)
    [found] = rating.closed.exchanges
    assert (found.from_, found.to) == ("effluent", "feed B")
    assert found.cold[1] == pytest.approx(300.0 + 0.5 * (found.hot[0] - 300.0), rel=1e-9)
    mixed = (500.0 * 700.0 + 320.0 * found.cold[1]) / 820.0
    assert found.hot[0] == pytest.approx(mixed, rel=1e-9)
    assert rating.number("effluent.exit temperature") == pytest.approx(
        (500.0 * 700.0 + 320.0 * 300.0) / 820.0
    )


def test_lean_gas_reheated_by_an_earlier_gap() -> None:
    """Heat goes downstream too: gap 1 gives what the effluent takes, the cold one entering at 320 K."""
    tree = train()
    tree["exchangers"] = {"X": {"effectiveness": "50 %"}}
    tree["heat levels"] = LEVELS
    tree["train"][2] = {"gap 1": [{"inject": "B"}, {"cool": {"exchanger": "X"}}]}
    tree["train"][-1] = {
        "effluent": [
            {"cool": {"to": "320 K", "heat to": "unpriced"}},
            {"remove": {"B": "100 %"}},
            {"heat": {"exchanger": "X"}},
        ]
    }
    rating = rated(tree)
    [found] = rating.closed.exchanges
    assert (found.from_, found.to) == ("gap 1", "effluent")
    assert found.cold[1] == pytest.approx(320.0 + 0.5 * (hot_inlet(T_FEED) - 320.0), rel=1e-9)
    assert rating.number("effluent.flow of B") == 0.0
    assert rating.number("effluent.removed B") == pytest.approx(SHOT)


def test_a_closure_without_a_solution_says_the_nearest_miss() -> None:
    """Closed form: 100 % of equal capacities would bring the feed to the temperature behind the heater."""
    tree = train({"effectiveness": "100 %"})
    tree["feeds"]["B"]["flow"] = "1e-6 mol/s"
    heater = {"heat": {"heat added": "0.02 MW", "heat from": "unpriced"}}
    tree["train"][-1]["effluent"].insert(0, heater)
    rating = programme(tree).rate()
    assert rating.status == "no answer"
    assert re.search(r"exchanger X: no heat between .* MW fits it; nearest at", rating.failure)


def test_an_exchanger_wired_the_wrong_way_breaks_a_rule() -> None:
    tree = train({"effectiveness": "60 %"})
    tree["feeds"]["A"]["temperature"], tree["feeds"]["B"]["temperature"] = "600 K", "300 K"
    broken = {one.label for one in programme(tree).rate().limits if not one.met}
    assert "an exchanger may not work backwards" in broken


def test_a_temperature_cross_is_reported() -> None:
    """In parallel flow 90 % of the greater change crosses: the ends lie 40 % of the way beyond each other."""
    tree = train({"effectiveness": "90 %", "arrangement": "parallel flow"})
    rating = programme(tree).rate()
    [state] = [one for one in rating.limits if one.label == "no temperature cross" and not one.met]
    assert state.quantity == "exchanger X.difference at the cold end"


def test_a_bypassed_exchanger_does_nothing_and_its_limits_rest() -> None:
    limits = {"warm": {"of": "exchanger X.heat", "at least": "1 MW"}}
    tree = train({"effectiveness": "60 %", "state": "bypassed"}, limits=limits)
    rating = rated(tree)
    assert rating.number("bed 1.inlet temperature") == T_FEED
    assert rating.quantities["exchanger X.heat"].reason == "the exchanger is bypassed"
    assert rating.limits == ()


def test_a_step_that_bypasses_takes_its_exchanger_out_of_use() -> None:
    tree = train({"effectiveness": "60 %"})
    tree["train"][-1]["effluent"][0]["cool"]["state"] = "bypassed"
    rating = rated(tree)
    assert rating.number("bed 1.inlet temperature") == T_FEED and not rating.closed.exchanges


@pytest.mark.parametrize("z", [-400.0, -3.0, -1e-3, -1e-4, 0.0, 1e-4, 2e-3, 5.0, 300.0])
def test_bernoulli_and_its_slope(z: float) -> None:
    """Central difference of the closed form z / (1 - exp(-z)) in extended precision."""
    x = np.longdouble(z if z else 1e-3)
    step = np.longdouble(1e-6)
    there = [v / -np.expm1(-v) for v in (x - step, x, x + step)]
    value, slope = bernoulli(float(x))
    assert value == pytest.approx(float(there[1]), rel=1e-9, abs=1e-300)
    assert slope == pytest.approx(float((there[2] - there[0]) / (2 * step)), rel=1e-6, abs=1e-9)


def test_log_mean_of_equal_differences() -> None:
    assert log_mean(10.0, 10.0) == 10.0
    assert log_mean(20.0, 10.0) == pytest.approx(10.0 / np.log(2.0))


@pytest.mark.parametrize(
    "exchanger",
    [
        {"area": "2 m^2", "coefficient": "300 W/(m^2 K)", "fouling resistance": "1e-4 m^2 K/W"},
        {"area": "2 m^2", "coefficient": "300 W/(m^2 K)", "arrangement": "parallel flow"},
        {"effectiveness": "60 %", "cold bypass": "20 %"},
    ],
)
def test_derivatives_of_residuals(exchanger: Tree) -> None:
    """Central differences of residuals on one mesh, 1e-6; every number of the exchanger is free."""
    tree = train(exchanger)
    for key, value in exchanger.items():
        if key != "arrangement":
            number, _, unit = value.partition(" ")
            low, high = (f"{float(number) * f!r} {unit}" for f in (0.5, 1.5))
            tree["exchangers"]["X"] = {
                **tree["exchangers"]["X"],
                key: {"now": value, "from": low, "to": high},
            }
    made = programme(deepcopy(tree))
    x = made.now
    evaluation, mesh = made.start_mesh(x)
    assert evaluation.residual_dx is not None
    for k, number in enumerate(made.numbers):
        step = 1e-5 * (number.high - number.low)
        ahead, back = x.copy(), x.copy()
        ahead[k] += step
        back[k] -= step
        ends = [made.evaluate(one, mesh).residual for one in (ahead, back)]
        assert ends[0] is not None and ends[1] is not None
        difference = (ends[0] - ends[1]) / (2.0 * step)
        assert evaluation.residual_dx[:, k] == pytest.approx(difference, rel=1e-6)


@pytest.mark.parametrize("by_area", [False, True])
def test_a_stream_that_holds_a_temperature_asks_for_a_size(by_area: bool) -> None:
    """Closed form: the feed is brought to 420 K; effectiveness, or area by Q = U A LMTD, follow; 1e-9."""
    tree = train({"coefficient": "300 W/(m^2 K)"} if by_area else {})
    tree["train"][0]["entry"][-1] = {"heat": {"exchanger": "X", "to": "420 K"}}
    rating = rated(tree)
    hot = hot_inlet(420.0)
    Q = 500.0 * 120.0
    assert rating.number("exchanger X.heat") == pytest.approx(Q, rel=1e-9)
    assert rating.number("exchanger X.effectiveness") == pytest.approx(120.0 / (hot - 300.0), rel=1e-9)
    a, b = hot - 420.0, hot - Q / 820.0 - 300.0
    if by_area:
        area = Q / (300.0 * (a - b) / np.log(a / b))
        assert rating.number("exchanger X.area") == pytest.approx(area, rel=1e-9)


@pytest.mark.parametrize("size", [{}, {"coefficient": "300 W/(m^2 K)"}])
def test_derivatives_where_the_size_follows(size: Tree) -> None:
    """Central differences of residuals on one mesh, 1e-6, by the temperature held and all unknowns."""
    tree = train(size)
    to = {"now": "420 K", "from": "380 K", "to": "450 K"}
    tree["train"][0]["entry"][-1] = {"heat": {"exchanger": "X", "to": to}}
    made = programme(tree)
    x = made.now
    evaluation, mesh = made.start_mesh(x)
    assert evaluation.residual_dx is not None and len(made.numbers) == 3
    for k, number in enumerate(made.numbers):
        step = 1e-6 * (number.high - number.low)
        ends = [made.evaluate(x + side * step * np.eye(3)[k], mesh).residual for side in (1.0, -1.0)]
        assert ends[0] is not None and ends[1] is not None
        difference = (ends[0] - ends[1]) / (2.0 * step)
        size_of = np.abs(evaluation.residual_dx[:, k]).max()
        assert evaluation.residual_dx[:, k] == pytest.approx(difference, abs=1e-6 * size_of)


def test_a_held_inlet_with_the_hot_side_before_it() -> None:
    """Heat goes downstream; equal heat capacities are rounded within 1e-4 of the effectiveness."""
    tree = train({})
    tree["train"][0]["entry"].pop()
    tree["train"][3]["bed 2"]["inlet temperature"] = "500 K"
    reheat = {"heat": {"exchanger": "X", "holds": "bed 2.inlet temperature"}}
    cooled = {"cool": {"to": "350 K", "heat to": "unpriced"}}
    tree["train"][2] = {"gap 1": [{"inject": "B"}, {"cool": {"exchanger": "X"}}, cooled, reheat]}
    tree["train"][-1] = {"effluent": []}
    tree["heat levels"] = LEVELS
    rating = rated(tree)
    assert rating.number("bed 2.inlet temperature") == 500.0
    assert rating.number("exchanger X.heat") == pytest.approx(820.0 * 150.0, rel=1e-9)
    assert rating.number("exchanger X.effectiveness") == pytest.approx(
        150.0 / (hot_inlet(T_FEED) - 350.0), rel=1e-4
    )


def test_an_area_that_follows_can_be_priced_and_limited() -> None:
    """A free inlet temperature, area at a price and heat for nothing: the search shuts the exchanger or
    fills it.
    """
    tree = train({"coefficient": "300 W/(m^2 K)"}, aim="most exchanger X.heat")
    tree["limits"] = {"plot": {"of": "exchanger X.area", "at most": "2 m^2"}}
    tree["prices"] = {"area": {"of": "exchanger X.area", "costs": "0.01 EUR/(m^2 h)"}}
    to = {"now": "350 K", "from": "310 K", "to": "600 K"}
    tree["train"][0]["entry"][-1] = {"heat": {"exchanger": "X", "to": to}}
    best = rs.optimise(load(tree), starts=3, explain=False).best
    assert best is not None
    assert best.number("exchanger X.area") == pytest.approx(2.0, rel=1e-6)
    assert best.number("money.area") * 3600.0 == pytest.approx(0.02, rel=1e-6)
    fixed = rated(train({"area": "2 m^2", "coefficient": "300 W/(m^2 K)"}))
    assert best.number("exchanger X.heat") == pytest.approx(fixed.number("exchanger X.heat"), rel=1e-6)
