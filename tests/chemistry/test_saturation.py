"""Bubble and dew points against handbook boiling points, CoolProp and the conditions that define them."""

from __future__ import annotations

from math import isinf

import numpy as np
import pytest

from reactorstage.chemistry.critical import critical_data
from reactorstage.chemistry.cubic import LIQUID, VAPOUR, CubicFluid, cubic_fluid, cubic_state
from reactorstage.chemistry.saturation import bubble_temperature, dew_temperature, saturation_sum
from tests.chemistry.fluids import Floats, constants, mixture
from tests.chemistry.test_cubic import coolprop

HYDROCARBONS = ("methane", "ethane", "propane", "butane", "pentane", "hexane", "decane", "benzene", "toluene")


def hydrocarbons() -> CubicFluid:
    return cubic_fluid("Peng-Robinson 1976", [critical_data(name) for name in HYDROCARBONS])


@pytest.mark.parametrize("equation", ["Peng-Robinson 1976", "Soave 1972"])
@pytest.mark.parametrize(
    ("name", "boils", "within"),
    [
        ("benzene", 353.2, 0.5),
        ("toluene", 383.8, 0.5),
        ("ethylbenzene", 409.3, 1.0),
        ("propane", 231.1, 0.7),
        ("hexane", 341.9, 0.7),
        ("NH3", 239.8, 1.0),
        ("H2O", 373.1, 3.0),
    ],
)
def test_normal_boiling_points(equation: str, name: str, boils: float, within: float) -> None:
    """Published: boiling points at 1 atm of any handbook, K, from memory; constants are those of the file.

    Such equations are fitted to vapour pressures through kappa, less well for water.
    """
    fluid, F = cubic_fluid(equation, [constants(name)]), np.array([2.0])
    dew, bubble = dew_temperature(fluid, F, 101_325.0), bubble_temperature(fluid, F, 101_325.0)
    assert dew is not None and bubble is not None
    assert dew.temperature == pytest.approx(boils, abs=within)
    assert bubble.temperature == pytest.approx(dew.temperature, rel=1e-9)
    assert bubble.p == pytest.approx(dew.p, rel=1e-6)


@pytest.mark.parametrize(("backend", "precision"), [("SRK", 2e-9), ("PR", 1e-9)])
def test_against_coolprop(backend: str, precision: float) -> None:
    """Independent program: CoolProp's flash at vapour fraction 0 and 1; measured 6e-10."""
    import CoolProp

    state, fluid = coolprop(backend, 0.04)
    state.unspecify_phase()
    for y in ([0.6, 0.2, 0.05, 0.15], [0.1, 0.8, 0.05, 0.05], [0.25, 0.25, 0.25, 0.25]):
        state.set_mole_fractions(y)
        for p in (1e5, 1e6, 3e6):
            for fraction, boundary in ((0.0, bubble_temperature), (1.0, dew_temperature)):
                state.update(CoolProp.PQ_INPUTS, p, fraction)
                here = boundary(fluid, np.array(y), p)
                assert here is not None
                assert here.temperature == pytest.approx(state.T(), rel=precision)


def random_mixtures(S: int, count: int, highest: float) -> list[tuple[Floats, float]]:
    rng = np.random.default_rng(6)
    return [(rng.dirichlet(0.5 * np.ones(S)), float(10.0 ** rng.uniform(3.0, highest))) for _ in range(count)]


def test_every_hydrocarbon_mixture_has_both_points_with_equal_fugacities() -> None:
    """Closed form: y_i phi_i is the same in both phases. Nine species, 10 mbar to 40 bar."""
    fluid = hydrocarbons()
    for y, p in random_mixtures(len(HYDROCARBONS), 60, 6.6):
        dew, bubble = dew_temperature(fluid, y, p), bubble_temperature(fluid, y, p)
        assert dew is not None and bubble is not None
        assert bubble.temperature < dew.temperature
        for point, own, other in ((dew, VAPOUR, LIQUID), (bubble, LIQUID, VAPOUR)):
            T, x = point.temperature, point.fractions
            here, there = cubic_state(fluid, y, T, p, own), cubic_state(fluid, x, T, p, other)
            assert np.sum(x) == pytest.approx(1.0, rel=1e-12)
            np.testing.assert_allclose(y * np.exp(here.ln_phi), x * np.exp(there.ln_phi), rtol=1e-8)


def test_slopes_of_the_points() -> None:
    """Central differences of the temperatures themselves; the point does not move with the scale of flows."""
    fluid, F, p, h = hydrocarbons(), np.array([1.0, 2.0, 3.0, 4.0, 3.0, 2.0, 0.5, 2.0, 1.0]), 8e5, 1e-3
    for boundary in (dew_temperature, bubble_temperature):
        point = boundary(fluid, F, p)
        assert point is not None
        for i in range(len(F)):
            step = h * np.eye(len(F))[i]
            up, down = boundary(fluid, F + step, p), boundary(fluid, F - step, p)
            assert up is not None and down is not None
            stepped = (up.temperature - down.temperature) / (2.0 * h)
            assert point.F[i] == pytest.approx(stepped, rel=1e-4, abs=1e-5)
        up, down = boundary(fluid, F, p + 100.0), boundary(fluid, F, p - 100.0)
        assert up is not None and down is not None
        assert point.p == pytest.approx((up.temperature - down.temperature) / 200.0, rel=1e-5)
        assert pytest.approx(0.0, abs=1e-8) == F @ point.F


@pytest.mark.parametrize("phase", [VAPOUR, LIQUID])
def test_saturation_sum_and_its_slopes(phase: str) -> None:
    """Zero at the boundary, positive inside; central differences, also by a species that is absent."""
    fluid, F, p = hydrocarbons(), np.array([1.0, 0.0, 3.0, 4.0, 3.0, 2.0, 0.5, 2.0, 0.0]), 8e5
    point = (dew_temperature if phase == VAPOUR else bubble_temperature)(fluid, F, p)
    assert point is not None
    inwards = -1.0 if phase == VAPOUR else 1.0

    def excess(F: Floats, T: float, p: float) -> float:
        found = saturation_sum(fluid, F, T, p, phase)
        assert found is not None
        return found.excess

    assert excess(F, point.temperature, p) == pytest.approx(0.0, abs=1e-9)
    assert excess(F, point.temperature - 5.0 * inwards, p) < 0.0
    T = point.temperature + 5.0 * inwards
    found = saturation_sum(fluid, F, T, p, phase)
    assert found is not None and found.excess > 0.0
    by_T = (excess(F, T + 0.01, p) - excess(F, T - 0.01, p)) / 0.02
    by_p = (excess(F, T, p + 10.0) - excess(F, T, p - 10.0)) / 20.0
    assert (found.T, found.p) == (pytest.approx(by_T, rel=1e-6), pytest.approx(by_p, rel=1e-6))
    for i, step in enumerate(1e-4 * np.eye(len(F))):
        stepped = (excess(F + step, T, p) - excess(F - step, T, p)) / 2e-4
        assert found.F[i] == pytest.approx(stepped, rel=1e-5, abs=1e-8)
    again = saturation_sum(fluid, F, T, p, phase, found.ratios)
    assert again is not None and again.excess == pytest.approx(found.excess, rel=1e-10)


def test_where_no_boundary_exists() -> None:
    hydrogen, benzene = (cubic_fluid("Soave 1972", [critical_data(name)]) for name in ("H2", "benzene"))
    one = np.ones(1)
    assert dew_temperature(hydrogen, one, 50e5) is None
    assert dew_temperature(benzene, one, 60e5) is None
    assert bubble_temperature(benzene, one, 60e5) is None
    assert dew_temperature(benzene, one, 40e5) is not None
    assert dew_temperature(benzene, 0.0 * one, 40e5) is None
    syngas, F = mixture("Peng-Robinson 1978", "methanol"), np.array([0.25, 0.05, 0.65, 0.02, 0.02, 0.01])
    assert bubble_temperature(syngas, F, 80e5) is None
    assert dew_temperature(syngas, F, 80e5) is not None
    heavy = hydrocarbons()
    assert dew_temperature(heavy, np.ones(9), 400e5) is None


def test_saturation_sum_far_from_the_boundary() -> None:
    fluid, F = hydrocarbons(), np.ones(9)
    assert saturation_sum(fluid, F, 900.0, 1e6) is None
    assert saturation_sum(fluid, F, -5.0, 1e6) is None
    dense = saturation_sum(fluid, F, 250.0, 100e5)
    assert dense is not None and isinf(dense.excess)
    assert np.all(dense.F == 0.0) and dense.T == dense.p == 0.0
