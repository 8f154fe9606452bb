"""A train without an answer: a sentence with bed, depth and reason, never an exception and never a NaN."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest

from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.build import EVERY_BED, FLUID, HEAD, Tree, changed, one_bed, programme


def inline(enthalpy: float, low: float = 250.0, high: float = 900.0) -> Tree:
    """A C4H10 isomer with data from `low` to `high` K."""
    return {
        "formula": "C4H10",
        "enthalpy of formation": f"{enthalpy} kJ/mol",
        "entropy": "300 J/(mol K)",
        "standard pressure": "1 bar(a)",
        "heat capacity": {"powers of T": ["150 J/(mol K)"]},
        "valid": {"temperature": f"{low} K to {high} K"},
    }


def isomer_bed(
    heat: float, T: float = 600.0, catalyst: str = "5 t", bed: Tree | None = None, E: float = 60.0
) -> Tree:
    """A => B that gives off -`heat` kJ/mol: 100 kJ/mol is 667 K; E in kJ/mol."""
    reaction = {
        "equation": "A => B",
        "rate per": "catalyst mass",
        "driven by": "mole fraction",
        "constant": {"at": "600 K", "is": "0.1 mol/(kg s)", "activation energy": f"{E} kJ/mol"},
    }
    feed = {"flow": "100 mol/s", "temperature": f"{T} K", "composition": {"A": "100 %"}}
    return one_bed({"A": inline(0.0), "B": inline(heat)}, {"turn": reaction}, feed, catalyst, "5 bar(a)", bed)


def assert_clean(rating: Rating) -> None:
    """No NaN anywhere: what does not exist is None with a reason."""
    for name, value in rating.quantities.items():
        assert value.value is None or math.isfinite(value.value), name
        assert value.value is not None or value.reason, name
    for profile in rating.profiles:
        assert all(np.isfinite(a).all() for a in (profile.w, profile.T, profile.p, profile.F, profile.r))


@pytest.mark.parametrize(
    ("tree", "reason"),
    [
        (isomer_bed(-100.0), r"bed 1 at \d+ % of its depth: the temperature rises above the range"),
        (isomer_bed(80.0, T=500.0, E=0.0), r"bed 1 at \d+ % .*: the temperature falls below the range"),
        (isomer_bed(-10.0, T=890.0), r"bed 1 at \S+ % .*: the temperature rises above the range"),
        (
            isomer_bed(-10.0, bed={**EVERY_BED, "equivalent size": "0.05 mm"}),
            r"bed 1 at \d+ % .*: the pressure is exhausted",
        ),
    ],
    ids=["runaway", "too cold", "inlet near the end of the data", "no pressure"],
)
def test_a_bed_that_cannot_be_integrated_says_where_and_why(tree: Tree, reason: str) -> None:
    train = programme(tree)
    rating = train.rate()
    assert rating.status == "no answer"
    assert re.match(reason, rating.failure), rating.failure
    assert_clean(rating)
    evaluation, mesh = train.start_mesh(np.zeros(0))
    assert evaluation.failure == rating.failure
    assert mesh is None


def test_the_work_cap_names_the_place() -> None:
    train = programme(isomer_bed(-20.0))
    u, du = train.model.inputs.values(np.zeros(0))
    outcome = train.model.passing.adaptive(u, du, 1e-7, most=5)
    assert outcome.failure.startswith("bed 1 at ")
    assert outcome.failure.endswith("more integration steps would be needed than allowed")
    assert outcome.steps <= 5


def three_beds(catalyst: str = "20 t") -> Tree:
    """Two beds with little to convert; a second feed of pure A turns the third into a runaway."""
    tree = isomer_bed(-150.0, T=580.0)
    side = {"flow": "60 mol/s", "temperature": "580 K", "composition": {"A": "100 %"}}
    feeds = {"fresh": {**tree["feeds"]["fresh"], "composition": {"B": "95 %", "A": "rest"}}}
    bed = {"bulk density": "1000 kg/m^3", "pressure drop factor": 0, "catalyst": catalyst}
    train = [
        {"entry": [{"take": "fresh"}]},
        {"bed 1": {**bed, "inlet pressure": "5 bar(a)"}},
        {"gap 1": []},
        {"bed 2": bed},
        {"gap 2": [{"inject": "side"}]},
        {"bed 3": bed},
        {"effluent": []},
    ]
    return {
        **tree,
        **HEAD,
        "aim": "least train.catalyst",
        "fluid": FLUID,
        "feeds": {**feeds, "side": side},
        "train": train,
    }


def test_the_beds_before_a_failure_are_rated() -> None:
    rating = programme(three_beds()).rate()
    assert rating.failure.startswith("bed 3 at ")
    assert [profile.owner for profile in rating.profiles] == ["bed 1", "bed 2"]
    assert_clean(rating)
    for bed in ("bed 1", "bed 2"):
        for name in ("exit temperature", "rise", "exit flow of B", "peak temperature", "catalyst"):
            assert rating.number(f"{bed}.{name}") is not None, f"{bed}.{name}"
    assert rating.number("bed 3.exit temperature") is None
    assert rating.number("bed 3.inlet temperature") is not None


def test_a_cooler_that_takes_more_than_there_is_names_the_gap() -> None:
    cool = {"cool": {"heat removed": "9 MW", "heat to": "unpriced"}}
    rating = programme(changed(three_beds(), "train", 2, to={"gap 1": [cool]})).rate()
    assert rating.failure == (
        "gap 1: the temperature falls below the range of the species data "
        "(those of A, B begin at -23.15 degC); a stream kept warmer, or data that hold there, would pass"
    )
    assert_clean(rating)


def test_failures_are_values_for_the_optimiser() -> None:
    """Inside the range of a free number the runaway begins: evaluations on both sides return."""
    tree = isomer_bed(-60.0)
    tree["feeds"]["fresh"]["temperature"] = {"now": "450 K", "from": "300 K", "to": "890 K"}
    train: TrainProgramme = programme(tree)
    evaluation, mesh = train.start_mesh(np.array([450.0]))
    assert evaluation.ok
    for T in (300.0, 520.0, 700.0, 890.0, 2000.0, -5.0):
        found = train.evaluate(np.array([T]), mesh)
        assert found.ok == (found.failure == "")
        assert not found.ok or np.isfinite(found.cost_dx).all()
    assert not train.evaluate(np.array([890.0]), mesh).ok


@pytest.mark.parametrize("activity", [0, 1e-9])
def test_dead_catalyst_passes_the_stream(activity: float) -> None:
    tree = isomer_bed(-60.0)
    tree["train"][1]["bed 1"]["catalyst activity"] = activity
    tree["feeds"]["fresh"]["temperature"] = {"now": "450 K", "from": "300 K", "to": "890 K"}
    tree["limits"] = {"hot": {"of": "bed 1.exit temperature", "at least": "0 K"}}
    train = programme(tree)
    evaluation, _ = train.start_mesh(np.array([450.0]))
    assert evaluation.margin[0] == pytest.approx(450.0, rel=1e-6)
    assert evaluation.margin_dx[0, 0] == pytest.approx(1.0, rel=1e-6)


def test_a_bed_that_starts_empty_can_be_filled_on_the_same_steps() -> None:
    """Steps of a bed without catalyst serve an evaluation with catalyst, or the evaluation refuses them."""
    tree = isomer_bed(-20.0)
    tree["train"][1]["bed 1"]["catalyst"] = {"now": "0 kg", "from": "0 kg", "to": "500 kg"}
    tree["limits"] = {"hot": {"of": "bed 1.exit temperature", "at least": "0 K"}}
    train = programme(tree)
    _, mesh = train.start_mesh(np.array([0.0]))
    found = train.evaluate(np.array([300.0]), mesh)
    right, _ = train.start_mesh(np.array([300.0]))
    assert not found.ok or found.margin[0] == pytest.approx(right.margin[0], rel=1e-3)


def test_the_first_catalyst_in_an_empty_bed_has_a_derivative() -> None:
    """At zero catalyst d(exit temperature)/d(catalyst) is the slope at the inlet: closed form r dT/dxi."""
    tree = isomer_bed(-20.0)
    tree["train"][1]["bed 1"]["catalyst"] = {"now": "0 kg", "from": "0 kg", "to": "500 kg"}
    tree["limits"] = {"hot": {"of": "bed 1.exit temperature", "at least": "0 K"}}
    train = programme(tree)
    evaluation, _ = train.start_mesh(np.array([0.0]))
    slope = 0.1 * 20e3 / (100.0 * 150.0)
    assert evaluation.margin_dx[0, 0] == pytest.approx(slope, rel=1e-6)
