"""Limits of a rating: expansion, margins, soft limits, capacities, ratios without a denominator, split ends.

Expected values are closed forms of the case's own numbers.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
import yaml

from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import LimitState, Rating
from tests.bed.build import Tree, changed, programme


@pytest.fixture(scope="module")
def tree(request: pytest.FixtureRequest) -> Tree:
    """The lead case."""
    path = request.config.rootpath / "cases" / "selkemouth-ethylation.yaml"
    found: Tree = yaml.load(path.read_text(), Loader=yaml.BaseLoader)
    return found


def states(rating: Rating, label: str) -> dict[str, LimitState]:
    return {f"{one.owner} {one.direction}": one for one in rating.limits if one.label == label}


def test_every_bed_expands_and_the_particular_replaces_the_general(tree: Tree) -> None:
    limits = {
        "hot": {
            "of": "every bed.exit temperature",
            "at most": "424 degC",
            "except": {"bed 3": {"at most": "420 degC"}},
        }
    }
    found = states(programme({**tree, "limits": limits}).rate(), "hot")
    assert list(found) == [f"bed {b} at most" for b in (1, 2, 3, 4)]
    bounds = [one.bound - 273.15 for one in found.values()]
    assert bounds == pytest.approx([424.0, 424.0, 420.0, 424.0], abs=1e-9)


def test_keep_away_moves_the_bound_inwards(tree: Tree) -> None:
    limits = {"window": {"of": "bed 1.exit temperature", "between": "600 K and 700 K", "keep away": "2 K"}}
    found = states(programme({**tree, "limits": limits}).rate(), "window")
    assert [one.bound for one in found.values()] == [602.0, 698.0]


@pytest.mark.parametrize(("direction", "bound"), [("at most", "690 K"), ("at least", "700 K")])
def test_margins_are_positive_inside(tree: Tree, direction: str, bound: str) -> None:
    limits = {"hot": {"of": "every bed.exit temperature", direction: bound}}
    rating = programme({**tree, "limits": limits}).rate()
    for one in states(rating, "hot").values():
        value = rating.number(one.quantity)
        away = value - float(bound.split()[0])
        assert one.margin == pytest.approx(-away if direction == "at most" else away, abs=1e-9)
        assert one.met == (one.margin >= 0.0)


def test_a_limit_says_the_same_in_every_unit(tree: Tree) -> None:
    """Bounds in degC and K, bar(g) and bar(a), mol/mol: the same SI bound (closed form)."""
    pairs = [
        ("bed 1.exit temperature", "424 degC", "697.15 K"),
        ("bed 4.exit pressure", "17 bar(g)", "18.01325 bar(a)"),
        ("bed 1.rise", "46 K", "46 K"),
        ("effluent.flow of ethylene", "1.35 kmol/h", "0.375 mol/s"),
        ("gap 1.heat removed", "2 MW", "2000 kW"),
    ]
    limits = {
        f"{name} {k}": {"of": name, "at most": text} for name, *two in pairs for k, text in enumerate(two)
    }
    bounds = {one.label: one.bound for one in programme({**tree, "limits": limits}).rate().limits}
    for name, *_ in pairs:
        assert bounds[f"{name} 0"] == pytest.approx(bounds[f"{name} 1"], rel=1e-12)


def test_a_bed_without_ethylene_has_no_ratio_and_meets_its_limit(tree: Tree) -> None:
    now = {"bed 1": "0 kmol/h", "bed 2": "134 kmol/h", "bed 3": "67 kmol/h", "bed 4": "rest"}
    shut = changed(tree, "feeds", "ethylene", "split", to={"now": now, "free": "all"})
    rating = programme(shut).rate()
    name = "bed 1.inlet ratio benzene/ethylene"
    assert rating.number(name) is None
    assert rating.quantities[name].reason == "no ethylene"
    assert states(rating, "coking")["bed 1 at least"].met
    train = programme(shut)
    evaluation, _ = train.start_mesh(train.now)
    assert evaluation.ok
    assert np.isfinite(evaluation.margin_dx).all()


SOFT = {"of": "every bed.exit temperature", "at most": "420 degC", "soft": "5 EUR/h per K"}


def test_soft_limits_cost_their_price_for_every_kelvin_beyond(tree: Tree) -> None:
    rating = programme({**tree, "limits": {"warm": SOFT}}).rate()
    assert rating.status == "inside all limits"
    beyond = [max(0.0, rating.number(f"bed {b}.exit temperature") - 693.15) for b in (1, 2, 3, 4)]
    assert sum(beyond) > 5.0
    assert rating.money["soft limits"] * 3600.0 == pytest.approx(5.0 * sum(beyond), rel=1e-5)


def test_a_soft_limit_shows_where_it_stands_without_its_slack(tree: Tree) -> None:
    rating = programme({**tree, "limits": {"warm": SOFT}}).rate()
    for one in states(rating, "warm").values():
        assert one.soft
        assert one.margin == pytest.approx(693.15 - rating.number(one.quantity), abs=1e-6)


def test_completed_numbers_hold_at_the_tolerance_of_a_rating(tree: Tree) -> None:
    """Internal numbers are found at the search tolerance; the rating must not call their limits broken."""
    effluent = {
        "cool": {
            "to": {"now": "190 degC", "from": "150 degC", "to": "260 degC"},
            "heat to": "every cooling level",
        }
    }
    limited = changed(tree, "train", 8, to={"effluent": [effluent]})
    limited["heat levels"]["steam 9 bar"]["capacity"] = "1 MW"
    rating = programme({**limited, "limits": {}}).rate()
    broken = [(one.label, one.owner, one.margin) for one in rating.limits if not one.met]
    assert not broken
    assert rating.number("level steam 9 bar.heat") == pytest.approx(1e6, abs=1.0)


def test_the_rest_of_a_split_may_not_be_negative(tree: Tree) -> None:
    train: TrainProgramme = programme({**tree, "limits": {}})
    names = [number.name for number in train.numbers]
    x = train.now
    x[names.index("bed 1.injected ethylene")] += x[names.index("bed 3.injected ethylene")] + 1.0
    evaluation, _ = train.start_mesh(x)
    row = next(i for i, one in enumerate(train.limits) if one.label == "no negative injection")
    assert evaluation.margin[row] == pytest.approx(-1.0, abs=1e-9)


def test_the_rest_of_shares_may_not_be_negative(tree: Tree) -> None:
    now: dict[str, Any] = {"bed 1": "25 %", "bed 2": "25 %", "bed 3": "25 %", "bed 4": "rest"}
    shares = changed(tree, "feeds", "ethylene", "split", to={"now": now, "free": "all"})
    train = programme({**shares, "limits": {}})
    whole, parts = train.rate(), programme({**tree, "limits": {}}).rate()
    for bed in (1, 2, 3, 4):
        name = f"bed {bed}.injected ethylene"
        assert whole.number(name) == pytest.approx(parts.number(name), rel=1e-12)
    x = train.now + np.where(
        [number.bed == 1 and number.role == "split" for number in train.numbers], 0.5, 0.0
    )
    evaluation, _ = train.start_mesh(x)
    row = next(i for i, one in enumerate(train.limits) if one.label == "no negative injection")
    assert evaluation.margin[row] == pytest.approx(-0.25 * 268.0 / 3.6, rel=1e-9)


def test_prices_add_up_to_the_total(tree: Tree) -> None:
    prices = {
        "by-product": {"of": "effluent.flow of diethylbenzene", "costs": "62 EUR/kmol"},
        "product": {"of": "effluent.flow of ethylbenzene", "earns": "10 EUR/kmol"},
        "beds": {"of": "train.number of beds", "costs": "3 EUR/h"},
        "catalyst": {"of": "every bed.catalyst", "costs": "0.5 EUR/(t h)"},
    }
    rating = programme({**tree, "limits": {}, "prices": prices}).rate()
    money = {name: 3600.0 * value for name, value in rating.money.items()}
    assert money["by-product"] == pytest.approx(62.0 * 3.6 * rating.number("effluent.flow of diethylbenzene"))
    assert money["product"] == pytest.approx(-10.0 * 3.6 * rating.number("effluent.flow of ethylbenzene"))
    assert money["beds"] == pytest.approx(12.0)
    assert money["catalyst"] == pytest.approx(0.5 * 13.3)
    assert money["total"] == pytest.approx(sum(money[name] for name in prices) + money["heat"])


def test_cooling_before_or_after_an_injection_leaves_the_same_bed_but_another_exchanger(tree: Tree) -> None:
    """Same inlet, same heat removed; the exchanger works at other temperatures."""
    steps = tree["train"][2]["gap 1"]
    turned = changed(tree, "train", 2, to={"gap 1": list(reversed(steps))})
    first, second = (programme({**one, "limits": {}}).rate() for one in (tree, turned))
    for name in ("gap 1.heat removed", "bed 2.exit temperature", "effluent.flow of diethylbenzene"):
        assert second.number(name) == pytest.approx(first.number(name), rel=1e-9)
    exchanger = "gap 1.temperature after exchanger"
    assert second.number(exchanger) > first.number(exchanger) + 5.0
    assert second.number("bed 2.inlet temperature") == pytest.approx(
        first.number("bed 2.inlet temperature"), rel=1e-12
    )
