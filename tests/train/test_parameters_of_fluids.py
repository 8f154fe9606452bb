"""Derivatives by parameters of trains of real gas and liquid, against central differences."""

from __future__ import annotations

import pytest

import tests.train.test_parameters as of_cases
from tests.bed.build import programme
from tests.bed.fluid_cases import CASES

NARROWER = 0.3
"""Steps of differences by those of the shipped cases: temperatures of these trains bend more."""

newton_to_rounding = of_cases.newton_to_rounding


@pytest.mark.parametrize("name", CASES)
@pytest.mark.usefixtures("newton_to_rounding")
def test_derivatives_by_every_parameter_are_central_differences_in_fluids(
    name: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    train = programme(CASES[name]())
    monkeypatch.setattr(of_cases, "STEPS", {kind: NARROWER * step for kind, step in of_cases.STEPS.items()})
    monkeypatch.setattr(of_cases, "programme", lambda _: train)
    of_cases.test_derivatives_by_every_parameter_are_central_differences(name)
