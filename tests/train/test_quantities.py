"""Derived quantities against their definitions, and what limits and the aim can be put on.

Closed forms of flows and temperatures that other tests hold against independent programs; approach to
equilibrium by Cantera's Gibbs energies.
"""

from __future__ import annotations

from concurrent.futures import ThreadPoolExecutor

import cantera as ct
import numpy as np
import pytest
import yaml
from scipy.optimize import brentq

import reactorstage as rs
from reactorstage.errors import CaseProblems
from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.build import Tree, changed, programme
from tests.bed.outside import species


@pytest.fixture(scope="module")
def tree(request: pytest.FixtureRequest) -> Tree:
    """The lead case without limits."""
    path = request.config.rootpath / "cases" / "selkemouth-ethylation.yaml"
    found: Tree = yaml.load(path.read_text(), Loader=yaml.BaseLoader)
    return {**found, "limits": {}}


@pytest.fixture(scope="module")
def rating(tree: Tree) -> Rating:
    """With limits that ask for quantities of two species, which a rating lists only then."""
    wanted = {
        "a": {"of": "every bed.selectivity to ethylbenzene from ethylene", "at least": "1 %"},
        "b": {"of": "train.selectivity to ethylbenzene from ethylene", "at least": "1 %"},
        "c": {"of": "train.overall ratio benzene/ethylene", "at least": "1 mol/mol"},
        "d": {"of": "every bed.inlet ratio benzene/ethylene", "at least": "1 mol/mol"},
    }
    return programme({**tree, "limits": wanted}).rate()


def test_bed_quantities_are_what_their_names_say(rating: Rating) -> None:
    for bed in ("bed 1", "bed 4"):

        def value(name: str, bed: str = bed) -> float:
            found = rating.number(f"{bed}.{name}")
            assert found is not None
            return found

        fed, left = value("inlet flow of ethylene"), value("exit flow of ethylene")
        made = value("exit flow of ethylbenzene") - value("inlet flow of ethylbenzene")
        assert value("conversion of ethylene") == pytest.approx(1.0 - left / fed, rel=1e-12)
        assert value("made ethylbenzene") == pytest.approx(made, rel=1e-12)
        assert value("selectivity to ethylbenzene from ethylene") == pytest.approx(
            made / (fed - left), rel=1e-12
        )
        ratio = value("inlet flow of benzene") / fed
        assert value("inlet ratio benzene/ethylene") == pytest.approx(ratio, rel=1e-12)
        assert value("rise") == pytest.approx(
            value("exit temperature") - value("inlet temperature"), rel=1e-12
        )
        drop = value("inlet pressure") - value("exit pressure")
        assert value("pressure drop") == pytest.approx(drop, rel=1e-12)


def test_train_quantities_are_what_their_names_say(rating: Rating) -> None:
    fed, left = 0.9985 * 268.0 / 3.6, rating.number("effluent.flow of ethylene")
    made = rating.number("effluent.flow of ethylbenzene")
    assert rating.number("train.conversion of ethylene") == pytest.approx(1.0 - left / fed, rel=1e-12)
    assert rating.number("train.made ethylbenzene") == pytest.approx(made, rel=1e-12)
    selectivity = rating.number("train.selectivity to ethylbenzene from ethylene")
    assert selectivity == pytest.approx(made / (fed - left), rel=1e-12)
    assert rating.number("train.overall ratio benzene/ethylene") == pytest.approx(
        965.0 / 3.6 / fed, rel=1e-12
    )
    assert rating.number("train.catalyst") == pytest.approx(13_300.0)
    drops = sum(rating.number(f"bed {bed}.pressure drop") for bed in (1, 2, 3, 4))
    assert rating.number("train.pressure drop") == pytest.approx(drops, rel=1e-12)
    flows = [rating.number(f"effluent.flow of {name}") for name in rating.species]
    share = rating.number("effluent.mole fraction of ethylbenzene")
    assert share == pytest.approx(made / sum(flows), rel=1e-12)


@pytest.mark.parametrize("bed", ["bed 1", "bed 4"])
def test_approach_to_equilibrium_is_the_distance_to_where_the_quotient_is_K(rating: Rating, bed: str) -> None:
    """Independent program: Cantera's Gibbs energies."""
    names = ("benzene", "ethylene", "ethylbenzene")
    gas = ct.Solution(thermo="ideal-gas", species=[species(name) for name in names])
    flows = np.array([rating.number(f"{bed}.exit flow of {name}") for name in names])
    total = sum(rating.number(f"{bed}.exit flow of {name}") for name in rating.species)
    a = flows / total * rating.number(f"{bed}.exit pressure") / ct.one_atm

    def away(T: float) -> float:
        gas.TP = T, ct.one_atm
        return float(np.log(a[2] / a[0] / a[1]) + np.array([-1, -1, 1]) @ gas.standard_gibbs_RT)

    T = rating.number(f"{bed}.exit temperature")
    expected = brentq(away, 500.0, 1200.0, xtol=1e-10) - T
    assert rating.number(f"{bed}.approach to equilibrium of ethylation") == pytest.approx(expected, abs=1e-5)


def test_share_outside_validity_is_that_of_the_catalyst(tree: Tree) -> None:
    """To half the spacing of the profile's points."""
    window = {"temperature": "390 degC to 440 degC", "pressure": "18 bar(a) to 30 bar(a)"}
    limited = changed(tree, "reactions", "every reaction", "valid", to=window)
    rating = programme(limited).rate()
    for profile in rating.profiles:
        w = np.linspace(0.0, profile.w[-1], 200_001)
        T, p = np.interp(w, profile.w, profile.T), np.interp(w, profile.w, profile.p)
        share = np.mean((T < 663.15) | (p < 18e5))
        found = rating.number(f"{profile.owner}.outside validity of ethylation")
        assert found == pytest.approx(share, abs=6e-3), profile.owner


@pytest.mark.parametrize("direction", ["least", "most"])
@pytest.mark.parametrize(
    "quantity",
    [
        "train.selectivity to ethylbenzene from ethylene",
        "bed 1.approach to equilibrium of ethylation",
        "bed 2.depth at 90 % of rise",
        "effluent.mole fraction of diethylbenzene",
        "level steam 28 bar.heat",
    ],
)
def test_any_quantity_can_be_the_aim(tree: Tree, quantity: str, direction: str) -> None:
    """Sign and derivatives of the cost, by central differences."""
    seen = {"x": {"of": quantity, "at least": "0 MW" if quantity.startswith("level") else _zero(quantity)}}
    train = programme({**tree, "aim": f"{direction} {quantity}", "limits": seen})
    evaluation, mesh = train.start_mesh(train.now)
    sign = 1.0 if direction == "least" else -1.0
    assert evaluation.cost == pytest.approx(sign * train.rate().number(quantity), rel=1e-4)
    for d, number in enumerate(train.numbers):
        step = 1e-3 * (number.high - number.low) * np.eye(len(train.numbers))[d]
        high, low = (train.evaluate(train.now + way * step, mesh).cost for way in (1.0, -1.0))
        slope = (high - low) / (2.0 * step[d])
        assert evaluation.cost_dx[d] == pytest.approx(slope, rel=1e-4, abs=1e-6 * abs(evaluation.cost))


def _zero(quantity: str) -> str:
    return "0 K" if "approach" in quantity else "0 %"


def test_a_rating_lists_its_aim(tree: Tree) -> None:
    quantity = "train.selectivity to ethylbenzene from ethylene"
    assert quantity in programme({**tree, "aim": f"most {quantity}"}).rate().quantities


def test_unknown_quantities_name_near_ones(tree: Tree) -> None:
    limits = {"x": {"of": "bed 1.exit temperatur", "at most": "424 degC"}}
    with pytest.raises(CaseProblems, match="did you mean 'exit temperature'"):
        programme({**tree, "limits": limits})


def test_money_can_be_limited(tree: Tree) -> None:
    """A bound on cost is a limit like any other: trade-offs are made of it."""
    limits = {"budget": {"of": "money.total", "at most": "1000 EUR/h"}}
    rating = programme({**tree, "limits": limits}).rate()
    assert [one.margin * 3600.0 for one in rating.limits if one.label == "budget"] == pytest.approx(
        [1000.0 - rating.number("money.total") * 3600.0]
    )


@pytest.mark.parametrize(
    "quantity",
    [
        "depth at 90 % of rise",
        "approach to equilibrium of ethylation",
        "inlet ratio benzene/ethylene",
        "conversion of ethylene",
    ],
)
def test_a_limit_on_what_does_not_exist_in_one_bed_lets_the_train_be_evaluated(
    tree: Tree, quantity: str
) -> None:
    """Bed 1 gets no ethylene: its limit is met, as the rating says, and the other beds count."""
    now = {"bed 1": "0 kmol/h", "bed 2": "100 kmol/h", "bed 3": "100 kmol/h", "bed 4": "rest"}
    shut = changed(tree, "feeds", "ethylene", "split", to={"now": now, "free": "all"})
    unit = {"depth": "99 %", "approach": "-900 K", "inlet": "0 mol/mol", "conversion": "0 %"}[
        quantity.split()[0]
    ]
    bound = {"at most" if quantity.startswith("depth") else "at least": unit}
    train = programme({**shut, "limits": {"x": {"of": f"every bed.{quantity}", **bound}}})
    states = [one for one in train.rate().limits if one.label == "x"]
    assert states[0].value is None
    assert states[0].met
    evaluation, _ = train.start_mesh(train.now)
    assert evaluation.ok, evaluation.failure


def test_the_depth_of_the_peak_has_exact_derivatives_or_none() -> None:
    """A limit on it must not be given a slope of zero while the peak moves: refused, or differences agree."""
    from tests.bed.test_places import inside_bed

    try:
        train, found = inside_bed({"depth of the peak": "0 %"})
    except CaseProblems:
        return
    x = np.array([number.now for number in train.numbers])
    mesh = train.model.passing.adaptive(*train.model.inputs.values(x), 1e-9, most=20_000).stages
    step = 1e-3 * x[0] * np.eye(len(x))[0]
    high, low = (train.evaluate(x + way * step, mesh).margin[0] for way in (1.0, -1.0))
    assert found.margin_dx[0, 0] == pytest.approx((high - low) / (2.0 * step[0]), rel=0.05)


def test_an_inlet_is_not_held_through_a_device_that_fixes_its_outlet(tree: Tree) -> None:
    """A cooler holds bed 2's inlet, then a heater goes `to` a temperature: one of them must be refused."""
    steps = [
        {"inject": "ethylene"},
        {"cool": {"holds": "bed 2.inlet temperature", "heat to": "unpriced"}},
        {"heat": {"to": "390 degC", "heat from": "fired heater"}},
    ]
    with pytest.raises(CaseProblems):
        programme(changed(tree, "train", 2, to={"gap 1": steps}))


def test_a_free_flow_needs_a_split_that_follows_it(tree: Tree) -> None:
    """Four fixed flows cannot sum to a flow that may change: refuse, or let the shots follow."""
    feed = {
        **tree["feeds"]["ethylene"],
        "flow": {"now": "268 kmol/h", "from": "200 kmol/h", "to": "300 kmol/h"},
        "split": {"now": {f"bed {bed}": "67 kmol/h" for bed in (1, 2, 3, 4)}},
    }
    try:
        train = programme(changed(tree, "feeds", "ethylene", to=feed))
    except CaseProblems:
        return
    x = train.now + np.where([n.name == "feed ethylene.flow" for n in train.numbers], 5.0, 0.0)
    rating = train.rate(x)
    shots = sum(rating.number(f"bed {bed}.injected ethylene") for bed in (1, 2, 3, 4))
    assert shots == pytest.approx(rating.number("feed ethylene.flow"), rel=1e-9)


def test_evaluations_do_not_disturb_each_other_in_threads(tree: Tree) -> None:
    train: TrainProgramme = programme(tree)
    _, mesh = train.start_mesh(train.now)
    points = [train.now + 0.01 * k for k in range(60)]
    alone = [train.evaluate(x, mesh).cost for x in points]
    with ThreadPoolExecutor(4) as pool:
        together = list(pool.map(lambda x: train.evaluate(x, mesh).cost, points))
    assert alone == together


def test_the_same_case_gives_the_same_digits(tree: Tree) -> None:
    first, second = programme(tree).rate(), programme(tree).rate()
    assert first.quantities == second.quantities
    assert rs.__version__
