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
STEPS = {-1: 1.5e-4, 0: 1e-3, 1: 60.0, 4: 150.0, 5: 0.2}
"""Half width of the wider central difference by kind; relative for numbers of the case, else SI."""


@cache
def programme(name: str) -> TrainProgramme:
    return reactorstage.compile(reactorstage.load(FOLDER / name))


def frozen_values(model: Model, v: Array, mesh: Stages, x: Array) -> Array:
    """Values of all listed quantities at the numbers v on a given step sequence."""
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


CLOSED = ("hathermoor", "quillmere")
"""Cases closed on themselves: differences here hold their unknowns still, those of `test_states` do not."""

OPEN = [name for name in CASES if not name.startswith(CLOSED)]


def difference(model: Model, one: Parameter, v: Array, mesh: Stages, x: Array) -> tuple[Array, float]:
    """Central difference, extrapolated from two widths (error of fourth order in the wider one)."""
    wide = STEPS[one.kind] * (max(abs(v[one.index]), 1.0) if one.kind < 0 else 1.0)
    slopes = []
    for step in (wide, 0.5 * wide):
        high, low = (moved_value(model, one, v, sign * step, mesh, x) for sign in (1.0, -1.0))
        slopes.append((high - low) / (2.0 * step))
    return (4.0 * slopes[1] - slopes[0]) / 3.0, wide


@pytest.fixture
def newton_to_rounding(monkeypatch: pytest.MonkeyPatch) -> None:
    """What Newton leaves undone is proportional to the step of a difference, and would look like a slope."""

    def tight(self: Pass, flow: float, values_only: bool = False) -> Tolerance:
        return Tolerance(flow, 100.0 * flow, 1e-15, self.named)

    monkeypatch.setattr(Pass, "tolerance", tight)


@pytest.mark.usefixtures("newton_to_rounding")
@pytest.mark.parametrize("name", OPEN)
def test_derivatives_by_every_parameter_are_central_differences(name: str) -> None:
    train = programme(name)
    model, x = train.model, train.now
    found = sensitivities(train, x, tolerance=SEARCH)
    v = model.inputs.all_numbers(x)
    u, _ = model.inputs.of_numbers(v)
    mesh = model.passing.adaptive(u, np.zeros((len(u), 1)), SEARCH).stages
    for d, one in enumerate(parameters_of(model)):
        if one.kind not in STEPS:
            continue
        slope, step = difference(model, one, v, mesh, x)
        size = np.abs(found.derivatives[:, d]) + 3e-6 * (np.abs(found.values) + 3e-2) / step
        off = np.abs(slope - found.derivatives[:, d]) / size
        there = np.isfinite(slope) & np.isfinite(found.derivatives[:, d])
        worst = int(np.argmax(np.where(there, off, 0.0)))
        assert off[worst] < 1e-6, f"{found.names[worst]} by {one.name}"


def test_derivative_by_a_mole_fraction_is_that_of_adding_the_species() -> None:
    """Closed form: an inert's flow in the effluent moves with its mole fraction by the flow of the feed."""
    train = programme("selkemouth-ethylation.yaml")
    name = "feed ethylene.mole fraction of ethane"
    found = sensitivities(train, parameters=[name], quantities=["effluent.flow of ethane"])
    flow = train.rate().number("feed ethylene.flow")
    assert found.derivatives[0, 0] == pytest.approx(flow, rel=1e-9)


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
