"""Beds without an answer, and beds that get nothing or a trace of a feed that is divided."""

from __future__ import annotations

import re
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from reactorstage.train.passing import FINAL, SEARCH
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import Tree, programme
from tests.bed.hard import Hard, Model, Reaction, run
from tests.bed.hard_beds import THIN, TO_B, TO_P, cooling, equilibrium, pair, runaway, turn

HOT, COLD = "the temperature rises above the range", "the temperature falls below the range"
NO_PRESSURE, USED_UP = "the pressure is exhausted", "a reactant is used up but its reaction runs on"

RUNAWAY = runaway("hot", 20.0)
STILL = turn("still", 0.0, Reaction(TO_B, 1e-9), THIN, 2000.0, p=2e5, packing=(0.6, 0.003))
COOLING = replace(cooling("cold", 180e3, 480.0, 100.0, False), reactions=(Reaction(TO_B, 2.0),))


def place(bed: Hard, tolerance: float, reason: str) -> float:
    """Depth in per cent that the failure names."""
    outcome = run(bed, tolerance)
    found = re.match(rf"bed 1 at (\S+) % of its depth: {reason}", outcome.failure)
    assert found, outcome.failure
    assert outcome.evaluations < 4000
    return float(found[1])


def crossing(bed: Hard, state: int, value: float) -> float:
    """Depth in per cent at which one state of the reference reaches a value."""

    def event(w: float, z: Any) -> float:
        return float(z[state] - value)

    event.terminal = True  # type: ignore[attr-defined]
    return float(100.0 * Model(bed).solve(events=event).t_events[0][0] / bed.W)


@pytest.mark.parametrize("tolerance", [SEARCH, FINAL])
@pytest.mark.parametrize(
    ("bed", "reason", "state", "value"),
    [
        (replace(RUNAWAY, data_range=(250.0, 1500.0)), HOT, -1, 1500.0),
        (replace(RUNAWAY, species=pair(-600e3)), HOT, -1, 3000.0),
        (COOLING, COLD, -1, 200.0),
        (turn("order 0", 0.0, Reaction(TO_B, 1.0, orders={"A": 0.0}), THIN, 20.0), USED_UP, 0, 0.0),
        (replace(RUNAWAY, packing=(0.2, 0.002), p=1.2e5, W=4.0), NO_PRESSURE, -2, 10.0),
    ],
    ids=["above the data", "above 3000 K", "below the data", "order zero", "no pressure left"],
)
def test_the_place_is_that_of_the_reference(
    bed: Hard, reason: str, state: int, value: float, tolerance: float
) -> None:
    """Independent program; the message gives whole per cent, or two figures below one."""
    right = crossing(bed, state, value)
    assert place(bed, tolerance, reason) == pytest.approx(right, abs=0.6 if right > 1.0 else 0.06 * right)


@pytest.mark.parametrize("tolerance", [SEARCH, FINAL])
def test_pressure_ends_where_ergun_says(tolerance: float) -> None:
    """Closed form: without reaction p dp/dw is constant, and p ends at W = p^2 / (2 |p dp/dw|)."""
    model = Model(STILL)
    W = STILL.p / (-2.0 * model.drop(model.F, STILL.p, STILL.T))
    assert place(STILL, tolerance, NO_PRESSURE) == pytest.approx(100.0 * W / STILL.W, abs=0.6)


@pytest.mark.parametrize(("T", "reason"), [(700.0, HOT), (621.0, HOT), (579.0, COLD), (400.0, COLD)])
def test_an_inlet_outside_the_data(T: float, reason: str) -> None:
    """A free temperature beyond its range and that of the data, 580 to 620 K."""
    train = replace(RUNAWAY, data_range=(580.0, 620.0)).train
    names = [number.name for number in train.numbers]
    x = np.where([name.endswith(".temperature") for name in names], T, train.now)
    rating = train.rate(x)
    assert rating.failure.startswith(f"bed 1 at 0 % of its depth: {reason}"), rating.failure


@pytest.mark.parametrize("order", [-0.5, -1.0, -2.0])
def test_a_reactant_of_negative_order_is_used_up(order: float) -> None:
    """Closed form, isothermal: y^(1 - n) falls evenly and ends at F y^(1 - n) / (k (1 - n))."""
    bed = turn("negative", 0.0, Reaction(TO_B, 1.0, orders={"A": order}), THIN, 20.0)
    W = 100.0 * 0.1 ** (1.0 - order) / (1.0 - order)
    assert place(bed, FINAL, USED_UP) == pytest.approx(100.0 * W / bed.W, abs=0.6)


def divided(law: Reaction) -> TrainProgramme:
    """Two beds; 8 mol/s of A are divided between them, bed 1 gets x[1] and bed 2 the rest."""
    base = replace(equilibrium("divided", 30.0), reactions=(law,))
    tree: Tree = base.tree()
    bed = tree["train"][1]["bed 1"]
    fluid = {"temperature": "500 K"}
    split = {"now": {"bed 1": {"now": "1 mol/s", "from": "0 mol/s", "to": "9 mol/s"}, "bed 2": "rest"}}
    alkene = {"flow": {"now": "8 mol/s", "from": "1 mol/s", "to": "12 mol/s"}, "composition": {"A": "100 %"}}
    feeds = {
        "gas": {**fluid, "flow": "90 mol/s", "composition": {"H": "12 %", "I": "rest"}},
        "alkene": {**fluid, **alkene, "split": split},
    }
    train = [
        {"entry": [{"take": "gas"}, {"inject": "alkene"}]},
        {"bed 1": bed},
        {"gap 1": [{"inject": "alkene"}]},
        {"bed 2": {key: value for key, value in bed.items() if key != "inlet pressure"}},
        {"effluent": []},
    ]
    limits = {
        "slip": {"of": "effluent.flow of A", "at least": "0 mol/s"},
        "first": {"of": "bed 1.made P", "at least": "0 mol/s"},
        "made": {"of": "effluent.flow of P", "at least": "0 mol/s"},
        "hot": {"of": "bed 2.exit temperature", "at least": "0 K"},
    }
    return programme({**tree, "feeds": feeds, "train": train, "limits": limits})


LAWS = {
    "first order": Reaction(TO_P, 3.0, 70e3),
    "reversible": Reaction(TO_P, 300.0, 70e3, reversible=True),
    "half order": Reaction(TO_P, 1.0, 70e3, orders={"A": 0.5, "H": 1.0}),
    "half order in excess": Reaction(TO_P, 1.0, 70e3, orders={"A": 1.0, "H": 0.5}),
    "second order": Reaction(TO_P, 30.0, 70e3, orders={"A": 2.0, "H": 1.0}),
}


@pytest.mark.parametrize("name", LAWS)
def test_a_bed_may_get_nothing_a_trace_or_slightly_less_than_nothing(name: str) -> None:
    """No jump at zero, on either side, and derivatives that are differences of the frozen values."""
    train = divided(LAWS[name])
    x = np.array([number.now for number in train.numbers])
    assert train.numbers[1].name == "bed 1.injected alkene"
    for share in (0.0, 8.0):
        x[1] = share
        exact, _ = train.start_mesh(x)
        for away in (-1e-6, -1e-9, -1e-12, 0.0, 1e-12, 1e-9, 1e-6):
            x[1] = share + away
            found, mesh = train.start_mesh(x)
            assert found.ok, found.failure
            assert found.margin == pytest.approx(exact.margin, rel=1e-6, abs=2.0 * abs(away) + 1e-9)
            assert_differences(train, x, mesh)


def assert_differences(train: TrainProgramme, x: np.ndarray, mesh: Any) -> None:
    """Margins' derivatives by x[1] are central differences over 1e-7 mol/s."""
    h = 1e-7
    centre = train.evaluate(x, mesh)
    ends = [train.evaluate(x + h * sign * np.eye(len(x))[1], mesh) for sign in (-1, 1)]
    assert centre.ok and ends[0].ok and ends[1].ok
    slope = (ends[1].margin - ends[0].margin) / (2.0 * h)
    sizes = [100.0 if row.quantity.endswith("temperature") else 1.0 for row in train.limits]
    scale = np.maximum(np.abs(centre.margin_dx[:, 1]), sizes)
    assert np.all(np.abs(slope - centre.margin_dx[:, 1]) < 1e-4 * scale)


def test_a_bed_into_which_nothing_flows_says_so() -> None:
    """The only feed before bed 1 is divided, and all of it goes to bed 2."""
    gas = {"flow": "100 mol/s", "temperature": "500 K", "composition": {"A": "10 %", "I": "rest"}}
    share = {"now": "10 mol/s", "from": "0 mol/s", "to": "90 mol/s"}
    bed = {"catalyst": "1 kg", "bulk density": "1000 kg/m^3", "pressure drop factor": 0}
    tree = {
        **turn("none", -60e3, Reaction(TO_B, 1.0), THIN, 1.0).tree(),
        "feeds": {"gas": {**gas, "split": {"now": {"bed 1": share, "bed 2": "rest"}}}},
        "train": [
            {"entry": [{"take": "gas"}]},
            {"bed 1": {**bed, "inlet pressure": "5 bar(a)"}},
            {"gap 1": [{"inject": "gas"}]},
            {"bed 2": bed},
            {"effluent": []},
        ],
    }
    train = programme(tree)
    assert train.start_mesh(np.array([1e-9]))[0].ok
    for flow in (0.0, -1e-9):
        evaluation, mesh = train.start_mesh(np.array([flow]))
        assert evaluation.failure == "bed 1 at 0 % of its depth: nothing flows into it"
        assert mesh is None
