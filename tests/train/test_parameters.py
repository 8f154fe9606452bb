"""Derivatives by numbers and parameters of the case, and ratings in batches."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

import reactorstage
from reactorstage.bed.data import Stages, Tolerance
from reactorstage.errors import CallError
from reactorstage.train.closing import Closing
from reactorstage.train.parameters import (
    FormRows,
    Parameter,
    listed_forms,
    parameters_of,
    sensitivities,
    shifted,
)
from reactorstage.train.passing import SEARCH, Pass
from reactorstage.train.programme import Model, TrainProgramme, compile_model

Array = NDArray[np.float64]

FOLDER = Path(__file__).parents[2] / "cases"
WITH_A_BED_LESS = "selkemouth-bed-2-out.yaml"
CASES = [
    path.name
    for path in sorted(FOLDER.glob("*.yaml"))
    if path.name == WITH_A_BED_LESS or "variant of" not in path.read_text(encoding="utf-8")
]
"""Trains of their own; other variants change numbers only."""
LONG = {"selkemouth-xylenes.yaml", "marrowhythe-methanol.yaml", "pellistrand-cumene.yaml"}
FINE = 0.1 * SEARCH
STEPS = {-1: 4.5e-5, 0: 3e-4, 1: 18.0, 4: 45.0, 5: 0.06}
"""Half width of the wider central difference by kind; relative for numbers of the case, else SI."""


NEAR_A_FOLD = 0.1
"""Steps of differences in trains closed on themselves, which bend more, by those of others."""


@cache
def programme(name: str) -> TrainProgramme:
    return reactorstage.compile(reactorstage.load(FOLDER / name))


def frozen_values(model: Model, v: Array, mesh: Stages, x: Array) -> Array:
    """Values of all listed quantities at the numbers v, closed again, on a given step sequence."""
    if model.layout.closures:
        closing = Closing(model, FINE)
        v = closing.sharpened(v, closing.at(v, mesh), mesh).v
    u, _ = model.inputs.of_numbers(v)
    nothing = np.zeros((len(u), 0))
    outcome = model.passing.frozen(u, nothing, mesh)
    assert not outcome.failure
    base = model.base(outcome.out, u, nothing, x, model.catalogue.found)
    return FormRows.of(listed_forms(model)).of_base(base)[:, 0]


def moved_value(model: Model, one: Parameter, v: Array, by: float, mesh: Stages, x: Array) -> Array:
    if one.kind < 0:
        at = v.copy()
        at[one.index] += by
        return frozen_values(model, at, mesh, x)
    other = compile_model(model.case, shifted(model.chemistry, {one: by}))
    return frozen_values(other, v, mesh, x)


def difference(model: Model, one: Parameter, v: Array, mesh: Stages, x: Array) -> tuple[Array, float]:
    """Central difference, extrapolated from two widths (error of fourth order in the wider one).

    Not a number at a kink, where a level of heat begins to be reached: nothing moves on one side there.
    """
    wide = STEPS[one.kind] * (max(abs(v[one.index]), 1.0) if one.kind < 0 else 1.0)
    wide *= NEAR_A_FOLD if model.layout.closures else 1.0
    slopes, kinked, here = [], False, frozen_values(model, v, mesh, x)
    for step in (wide, 0.5 * wide):
        high, low = (moved_value(model, one, v, sign * step, mesh, x) for sign in (1.0, -1.0))
        slopes.append((high - low) / (2.0 * step))
        up, down = np.abs(high - here), np.abs(here - low)
        kinked = kinked | ((np.minimum(up, down) == 0.0) & (np.maximum(up, down) > 0.0))
    return np.where(kinked, np.nan, (4.0 * slopes[1] - slopes[0]) / 3.0), wide


def left_of_large_numbers(name: str) -> float:
    """Size, in SI, of what cancels in a quantity that may be zero: its value carries the rounding of that."""
    if name.startswith("level "):
        return 1e5
    return 1.0 if ".made " in name else 1e-2


@pytest.fixture
def newton_to_rounding(monkeypatch: pytest.MonkeyPatch) -> None:
    """What Newton leaves undone is proportional to the step of a difference, and would look like a slope."""

    def tight(self: Pass, flow: float, values_only: bool = False) -> Tolerance:
        return Tolerance(flow, 100.0 * flow, 1e-16, self.named)

    monkeypatch.setattr(Pass, "tolerance", tight)


@pytest.mark.usefixtures("newton_to_rounding")
@pytest.mark.parametrize(
    "name", [pytest.param(name, marks=pytest.mark.slow if name in LONG else ()) for name in CASES]
)
def test_derivatives_by_every_parameter_are_central_differences(name: str) -> None:
    """Depths and approaches are found by iteration: near a fold their rounding limits the differences."""
    train = programme(name)
    model, x = train.model, train.now
    found = sensitivities(train, x, tolerance=FINE)
    v = model.inputs.all_numbers(x)
    u, _ = model.inputs.of_numbers(v)
    mesh = model.passing.adaptive(u, np.zeros((len(u), 1)), FINE).stages
    cancelled = np.array([left_of_large_numbers(name) for name in found.names])
    loose = 2e-5 if model.layout.closures else 1e-6
    allowed = np.array([loose if ".depth " in name or ".approach " in name else 1e-6 for name in found.names])
    for d, one in enumerate(parameters_of(model)):
        if one.kind not in STEPS:
            continue
        slope, step = difference(model, one, v, mesh, x)
        size = np.abs(found.derivatives[:, d]) + 3e-6 * (np.abs(found.values) + cancelled) / step
        off = np.abs(slope - found.derivatives[:, d]) / size
        there = np.isfinite(slope) & np.isfinite(found.derivatives[:, d])
        off = np.where(there, off, 0.0) / allowed
        worst = int(np.argmax(off))
        assert off[worst] < 1.0, f"{found.names[worst]} by {one.name}"


def test_derivative_by_a_mole_fraction_is_that_of_adding_the_species() -> None:
    """Closed form: an inert's flow in the effluent moves with its mole fraction by the flow of the feed."""
    train = programme("selkemouth-ethylation.yaml")
    name = "feed ethylene.mole fraction of ethane"
    found = sensitivities(train, parameters=[name], quantities=["effluent.flow of ethane"])
    flow = train.rate().number("feed ethylene.flow")
    assert found.derivatives[0, 0] == pytest.approx(flow, rel=1e-9)


def test_parameters_have_names_of_their_own() -> None:
    """Three coolers of one gap that are given by their outlets are three parameters."""
    names = [one.name for one in parameters_of(programme("hathermoor-contact.yaml").model)]
    assert len(set(names)) == len(names)
    assert [name for name in names if "gap 3.exit temperature" in name] == [
        "gap 3.exit temperature",
        "gap 3.exit temperature (2)",
        "gap 3.exit temperature (3)",
    ]


def test_unknown_names_are_refused_with_the_nearest() -> None:
    train = programme("selkemouth-ethylation.yaml")
    with pytest.raises(CallError, match=r"near: .*activation energy"):
        sensitivities(train, parameters=["reaction ethylation.activation enrgy"])
    with pytest.raises(CallError, match="did you mean"):
        sensitivities(train, parameters=[], quantities=["bed 1.exit temprature"])


@pytest.mark.parametrize("jobs", [1, 2, 3])
def test_batches_are_equal_to_single_calls_to_the_last_digit(jobs: int) -> None:
    train = programme("selkemouth-ethylation.yaml")
    rng = np.random.default_rng(7)
    settings = {
        "bed 1.inlet temperature": 650.0 + 10.0 * rng.random(150),
        "reaction ethylation.ln rate constant": 0.1 * rng.standard_normal(150),
    }
    batch = reactorstage.rate_many(train, settings, jobs=jobs)
    for i in (0, 77, 149):
        single = reactorstage.rate_many(train, {name: column[i] for name, column in settings.items()})
        np.testing.assert_array_equal(batch.values[i], single.values[0])
    assert not any(batch.failures)


def test_batch_agrees_with_the_rating_of_the_case_itself() -> None:
    train = programme("selkemouth-ethylation.yaml")
    batch = reactorstage.rate_many(train, {"bed 1.inlet temperature": [657.15]})
    rating = train.rate(tolerance=1e-5)
    for name, value in zip(batch.names, batch.values[0], strict=True):
        there = rating.number(name)
        assert (there is None and np.isnan(value)) or value == pytest.approx(there, rel=1e-12, abs=1e-12), (
            name
        )


def test_thermochemistry_can_be_sampled() -> None:
    train = programme("selkemouth-ethylation.yaml")
    name = "species ethylbenzene.enthalpy of formation"
    batch = reactorstage.rate_many(train, {name: [-500.0, 0.0, 500.0]}, quantities=["bed 1.exit temperature"])
    slope = sensitivities(train, parameters=[name], quantities=["bed 1.exit temperature"]).derivatives[0, 0]
    assert (batch.values[2, 0] - batch.values[0, 0]) / 1000.0 == pytest.approx(slope, rel=1e-3)


def test_a_setting_without_an_answer_says_where_and_spoils_nothing() -> None:
    train = programme("selkemouth-ethylation.yaml")
    batch = reactorstage.rate_many(
        train, {"bed 1.pressure drop factor": [1.0, 500.0]}, quantities=["bed 1.rise"]
    )
    assert np.isfinite(batch.values[0, 0])
    assert np.isnan(batch.values[1, 0])
    assert batch.failures[0] == ""
    assert "bed 1" in batch.failures[1]
    assert "pressure is exhausted" in batch.failures[1]


def test_columns_of_different_lengths_are_refused() -> None:
    train = programme("selkemouth-ethylation.yaml")
    with pytest.raises(CallError, match="one length"):
        reactorstage.rate_many(train, {"bed 1.catalyst": [2600.0], "bed 2.catalyst": [3000.0, 3100.0]})
