"""Money of the heat ladder against the best price of every slice of heat.

Independent program: Cantera's enthalpies and, for capacities, a linear programme over slices.
"""

from __future__ import annotations

import numpy as np
import pytest

import reactorstage as rs
from reactorstage.train.result import LimitState, Rating
from tests.bed.build import Tree, load, programme
from tests.train.heat_cases import (
    FLOW,
    LEVELS,
    MWH,
    RUNGS,
    best_cost,
    best_cost_with_capacities,
    heat_between,
    still_train,
)

EVERY = "every cooling level"
WITHIN = 3e-4
"""Hot and cold ends within 0.05 K of a level are rounded; elsewhere the ladder is exact."""


def cooled(to: object, heat_to: object = EVERY) -> list[Tree]:
    return [{"cool": {"to": to, "heat to": heat_to}}]


def broken(rating: Rating) -> list[LimitState]:
    return [one for one in rating.limits if not one.met]


@pytest.mark.parametrize("T_hot", [700.0, 516.0, 480.0, 400.0])
@pytest.mark.parametrize("T_cold", [650.0, 500.0, 460.0, 350.0])
def test_a_cooler_sells_every_slice_at_the_best_price(T_hot: float, T_cold: float) -> None:
    if T_cold > T_hot:
        return
    rating = programme(still_train(cooled(f"{T_cold} K"), T=f"{T_hot} K")).rate()
    assert rating.status == "inside all limits"
    assert rating.number("effluent.heat removed") == pytest.approx(heat_between(T_hot, T_cold), rel=1e-9)
    expected = best_cost(T_hot, T_cold, RUNGS)
    assert rating.number("money.heat of effluent") == pytest.approx(expected, rel=WITHIN)
    assert rating.number("money.total") == pytest.approx(expected, rel=WITHIN)
    sold = sum(rating.number(f"level {name}.heat") for name in LEVELS)
    assert sold == pytest.approx(heat_between(T_hot, T_cold), rel=1e-9)


def test_a_level_that_pays_less_than_a_colder_one_is_left_alone() -> None:
    levels = {**LEVELS, "steam 28 bar": {"cools down to": "500 K", "earns": "9 EUR/MWh"}}
    rating = programme(still_train(cooled("470 K"), levels=levels)).rate()
    expected = best_cost(700.0, 470.0, {**RUNGS, "steam 28 bar": (515.0, -9.0)})
    assert rating.number("money.heat of effluent") == pytest.approx(expected, rel=WITHIN)
    assert rating.number("level steam 28 bar.heat") == pytest.approx(0.0, abs=1.0)


@pytest.mark.parametrize("levels", [["air"], ["steam 9 bar", "air"]])
def test_only_the_named_levels_are_used(levels: list[str]) -> None:
    rating = programme(still_train(cooled("350 K", levels))).rate()
    expected = best_cost(700.0, 350.0, {name: RUNGS[name] for name in levels})
    assert rating.number("money.heat of effluent") == pytest.approx(expected, rel=WITHIN)


FREE = {"now": "500 K", "from": "350 K", "to": "690 K"}


@pytest.mark.parametrize("T", [350.0, 459.0, 460.0, 461.0, 500.0, 515.0, 516.0, 600.0, 690.0])
def test_a_free_cold_end_has_the_same_money_on_both_sides_of_a_level(T: float) -> None:
    """Its heat above each level is an internal number; `complete` finds the best one."""
    train = programme(still_train(cooled(FREE)))
    x = np.array([T if number.role != "internal" else 0.0 for number in train.numbers])
    assert any(number.role == "internal" for number in train.numbers)
    rating = train.rate(train.complete(x))
    assert rating.status == "inside all limits"
    assert rating.number("money.total") == pytest.approx(best_cost(700.0, T, RUNGS), rel=WITHIN)


def test_the_optimum_settles_on_a_level() -> None:
    """Above 515 K cooling earns 19 EUR/MWh, below 13: with cold heat at 15 EUR/MWh the answer is 515 K."""
    prices = {"cold": {"of": "effluent.heat removed", "costs": "15 EUR/MWh"}}
    found = rs.optimise(load(still_train(cooled(FREE), prices=prices)), starts=3, explain=False)
    assert found.status == "inside all limits"
    assert found.best.number("effluent.exit temperature") == pytest.approx(515.0, abs=0.02)
    expected = best_cost(700.0, 515.0, RUNGS) + heat_between(700.0, 515.0) * 15.0 / MWH
    assert found.best.number("money.total") == pytest.approx(expected, rel=1e-3)


@pytest.mark.parametrize("level", ["steam 28 bar", "steam 9 bar"])
@pytest.mark.parametrize("capacity", [0.0, 1.0, 3.0, 100.0])
def test_capacities_are_shared_by_all_coolers(level: str, capacity: float) -> None:
    """MW of one level; two coolers at different temperatures, four levels."""
    steam = {"cools down to": "410 K", "earns": "7 EUR/MWh"}
    levels = {**LEVELS, "steam 3.5 bar": steam, level: {**LEVELS[level], "capacity": f"{capacity} MW"}}
    entry = [{"cool": {"to": "620 K", "heat to": EVERY}}]
    rating = programme(still_train(cooled("400 K"), entry, levels)).rate()
    assert rating.status == "inside all limits"
    rungs = {**RUNGS, "steam 3.5 bar": (425.0, -7.0)}
    limited = {name: (*rung, capacity * 1e6 if name == level else 1e12) for name, rung in rungs.items()}
    expected = best_cost_with_capacities([(700.0, 620.0), (620.0, 400.0)], limited)
    assert rating.number("money.heat") == pytest.approx(expected, rel=WITHIN)
    assert rating.number(f"level {level}.heat") <= capacity * 1e6 + 1.0


HEATERS: Tree = {
    "steam": {"heats up to": "480 K", "costs": "14 EUR/MWh"},
    "oil": {"heats up to": "570 K", "costs": "25 EUR/MWh"},
    "furnace": {"heats up to": "900 K", "costs": "34 EUR/MWh"},
}
ENDS = {"steam": 465.0, "oil": 555.0, "furnace": 885.0}


@pytest.mark.parametrize(
    ("T_in", "T_out"), [(400.0, 450.0), (400.0, 500.0), (400.0, 700.0), (470.0, 560.0), (600.0, 700.0)]
)
def test_a_heater_takes_the_cheapest_level_that_is_hot_enough(T_in: float, T_out: float) -> None:
    entry = [{"heat": {"to": f"{T_out} K", "heat from": "every heating level"}}]
    rating = programme(still_train([], entry, HEATERS, f"{T_in} K")).rate()
    expected = heater_cost(T_in, T_out)
    assert rating.number("money.heat of entry") == pytest.approx(expected, rel=WITHIN)
    assert rating.number("entry.heat removed") == pytest.approx(-heat_between(T_out, T_in), rel=1e-9)


def heater_cost(T_in: float, T_out: float) -> float:
    cost, T = 0.0, T_in
    for name, end in ENDS.items():
        top = min(max(end, T), T_out)
        price = float(HEATERS[name]["costs"].split()[0])
        cost, T = cost + heat_between(top, T) * price / MWH, top
    return cost


def test_several_heaters_and_coolers_add_up() -> None:
    entry = [
        {"heat": {"to": "520 K", "heat from": ["steam", "oil"]}},
        {"heat": {"to": "700 K", "heat from": "furnace"}},
    ]
    rating = programme(still_train(cooled("400 K"), entry, {**HEATERS, **LEVELS}, "400 K")).rate()
    oil = heat_between(465.0, 400.0) * 14.0 + heat_between(520.0, 465.0) * 25.0
    bought = (oil + heat_between(700.0, 520.0) * 34.0) / MWH
    sold = best_cost(700.0, 400.0, RUNGS)
    assert rating.number("money.heat of entry") == pytest.approx(bought, rel=WITHIN)
    assert rating.number("money.total") == pytest.approx(bought + sold, rel=WITHIN)
    by_level = {(sale.owner, sale.level): sale.heat for sale in rating.heat}
    assert by_level["entry", "furnace"] == pytest.approx(heat_between(700.0, 520.0), rel=1e-9)


def test_a_capacity_of_a_heating_level_sends_the_rest_to_the_next_one() -> None:
    """Half of what 400 to 450 K needs may come from steam at 14, the rest from oil at 25 EUR/MWh."""
    half = 0.5 * heat_between(450.0, 400.0)
    levels = {**HEATERS, "steam": {**HEATERS["steam"], "capacity": f"{half / 1e6!r} MW"}}
    entry = [{"heat": {"to": "450 K", "heat from": "every heating level"}}]
    rating = programme(still_train([], entry, levels, "400 K")).rate()
    assert rating.status == "inside all limits"
    assert rating.number("money.heat of entry") == pytest.approx(half * (14.0 + 25.0) / MWH, rel=WITHIN)


def test_an_outlet_colder_than_every_level_is_out_of_reach() -> None:
    rating = programme(still_train(cooled("340 K"))).rate()
    assert [one.label for one in broken(rating)] == ["reach of air"]
    assert rating.status == "limits broken"


def test_an_outlet_hotter_than_every_heater_is_out_of_reach() -> None:
    entry = [{"heat": {"to": "890 K", "heat from": "every heating level"}}]
    rating = programme(still_train([], entry, HEATERS, "600 K")).rate()
    assert [one.label for one in broken(rating)] == ["reach of furnace"]


def test_a_cooler_may_not_heat() -> None:
    rating = programme(still_train(cooled("600 K"), T="550 K")).rate()
    assert [one.label for one in broken(rating)] == ["a cooler may not heat"]
    assert rating.number("effluent.heat removed") < 0.0
    assert rating.status == "limits broken"


def test_a_heater_may_not_cool() -> None:
    entry = [{"heat": {"to": "500 K", "heat from": "furnace"}}]
    rating = programme(still_train([], entry, HEATERS, "600 K")).rate()
    assert [one.label for one in broken(rating)] == ["a heater may not cool"]


def test_unpriced_heat_is_free_and_said_so() -> None:
    rating = programme(still_train(cooled("400 K", "unpriced"))).rate()
    assert rating.unpriced == ("effluent",)
    assert any("effluent carries no price" in note for note in rating.notes)
    assert rating.number("money.total") == 0.0


def test_a_feed_by_mass_has_the_same_money_as_one_by_moles() -> None:
    tree = still_train(cooled(FREE))
    first = programme(tree).rate()
    tree["feeds"]["fresh"]["flow"] = f"{FLOW * 0.0781118!r} kg/s"
    second = programme(tree).rate()
    assert second.number("money.total") == pytest.approx(first.number("money.total"), rel=1e-4)


def test_derivatives_of_money_with_internal_numbers_are_central_differences() -> None:
    train = programme(still_train(cooled(FREE)))
    x = train.complete(np.array([470.0 if n.role != "internal" else 0.0 for n in train.numbers]))
    evaluation, mesh = train.start_mesh(x)
    for d in range(len(x)):
        step = 1e-4 * max(abs(x[d]), 1.0) * np.eye(len(x))[d]
        high, low = train.evaluate(x + step, mesh), train.evaluate(x - step, mesh)
        slope = (high.cost - low.cost) / (2.0 * step[d])
        assert evaluation.cost_dx[d] == pytest.approx(slope, rel=1e-6, abs=1e-15), train.numbers[d].name


def test_rungs_are_what_the_levels_say() -> None:
    """The hand table of this test against the tree that the program reads."""
    assert {name: float(level["cools down to"].split()[0]) + 15.0 for name, level in LEVELS.items()} == {
        name: reach for name, (reach, _) in RUNGS.items()
    }
