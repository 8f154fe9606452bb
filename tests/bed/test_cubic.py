"""The compiled equations of state against their readable form, whose derivatives come by complex step.

Independent program: `reactorstage.chemistry.cubic`, itself held against Cantera and CoolProp.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reactorstage.bed.compiled import entry
from reactorstage.bed.cubic import (
    BULK,
    FIELD,
    H_RES,
    H_RES_P,
    H_RES_T,
    PAIRS,
    SPECIES,
    VOLUME,
    VOLUME_P,
    VOLUME_T,
    Z,
    at_slopes,
    cubic,
    cubic_length,
    pack_cubic,
)
from reactorstage.chemistry import R_GAS
from reactorstage.chemistry.cubic import (
    EQUATIONS,
    FOUND,
    LIQUID,
    NOT_FINITE,
    OTHER_PHASE,
    VAPOUR,
    CubicFluid,
    cubic_state,
)
from tests.chemistry.fluids import (
    MIXTURES,
    Floats,
    by_flows,
    by_pressure,
    by_temperature,
    mixture,
    random_states,
    stiffness,
)

length, first_slope = cubic_length.py_func, at_slopes.py_func


@entry
def cubic_alone(real, start, S, T, p, work, at, extent):
    """`cubic` as Python can call it."""
    return cubic(real, start, S, T, p, work, at, extent)


def run(
    fluid: CubicFluid, F: Floats, T: float, p: float, phase: str, extent: int = PAIRS, start: int = 0
) -> tuple[int, Floats]:
    """Status and results; constants and results stand behind `start` numbers that are none of theirs."""
    S, gap = len(F), start
    real = np.concatenate([np.full(start, np.nan), pack_cubic(fluid, phase)])
    work = np.concatenate([F, np.full(gap, -7.0), np.full(length(S), np.nan), np.full(5, -7.0)])
    status = cubic_alone(real, start, S, T, p, work, S + gap, extent)
    assert np.array_equal(work[:S], F, equal_nan=True)
    assert np.all(work[S : S + gap] == -7.0) and np.all(work[-5:] == -7.0)
    return status, work[S + gap : -5]


def named(fluid: CubicFluid, results: Floats) -> dict[str, Any]:
    S = len(fluid.b)
    rows = results[FIELD : FIELD + 5 * S].reshape(5, S)
    found: dict[str, Any] = {"Z": results[Z], "V": results[VOLUME], "H": results[H_RES]}
    found |= {"V_T": results[VOLUME_T], "V_p": results[VOLUME_P]}
    found |= {"H_T": results[H_RES_T], "H_p": results[H_RES_P]}
    found |= dict(zip(("ln_phi", "ln_phi_T", "ln_phi_p", "V_F", "H_F"), rows, strict=True))
    slopes = results[first_slope(S) : first_slope(S) + S * S].reshape(S, S)
    return {**found, "ln_phi_F": slopes}


def expected(fluid: CubicFluid, F: Floats, T: float, p: float, phase: str) -> dict[str, tuple[Any, float]]:
    """The same from the readable form, each with its natural size."""
    where, state, n = (fluid, F, T, p, phase), cubic_state(fluid, F, T, p, phase), float(np.sum(F))
    V, RT = float(state.V), R_GAS * T
    return {
        "Z": (state.Z, float(state.Z)),
        "V": (state.V, V),
        "V_T": (by_temperature(*where, lambda one: one.V), V / T),
        "V_p": (by_pressure(*where, lambda one: one.V), V / p),
        "V_F": (by_flows(*where, lambda one: one.V), V / n),
        "H": (state.H, n * RT),
        "H_T": (by_temperature(*where, lambda one: one.H), n * R_GAS),
        "H_p": (by_pressure(*where, lambda one: one.H), n * RT / p),
        "H_F": (by_flows(*where, lambda one: one.H), RT),
        "ln_phi": (state.ln_phi, 1.0),
        "ln_phi_T": (by_temperature(*where, lambda one: one.ln_phi), 1.0 / T),
        "ln_phi_p": (by_pressure(*where, lambda one: one.ln_phi), 1.0 / p),
        "ln_phi_F": (by_flows(*where, lambda one: one.ln_phi), 1.0 / n),
    }


@pytest.mark.parametrize("phase", [VAPOUR, LIQUID])
@pytest.mark.parametrize("equation", EQUATIONS)
@pytest.mark.parametrize("name", MIXTURES)
def test_values_and_slopes(name: str, equation: str, phase: str) -> None:
    """To 1e-12 of the larger of value and natural size, less near the end of a phase, where slopes grow."""
    fluid, seen = mixture(equation, name), set()
    for F, T, p in random_states(fluid, 60, seed=7):
        status, results = run(fluid, F, T, p, phase)
        assert status == cubic_state(fluid, F, T, p, phase).status
        tight, here = min(1.0, stiffness(fluid, F, T, p, phase)), named(fluid, results)
        for quantity, (there, size) in expected(fluid, F, T, p, phase).items():
            limit = 1e-12 / tight * max(size, float(np.max(np.abs(there))))
            np.testing.assert_allclose(here[quantity], there, rtol=0.0, atol=limit, err_msg=quantity)
        seen.add(status)
    assert FOUND in seen or name == "ammonia"


def test_ideal_limit() -> None:
    """Closed form: at 1 mPa all residuals vanish in proportion to pressure, without rounding noise."""
    fluid, F, T = mixture("Peng-Robinson 1976", "alkylation"), np.array([3.0, 1.0, 0.2, 0.5]), 500.0
    low, high = (named(fluid, run(fluid, F, T, p, VAPOUR)[1]) for p in (1e-3, 2e-3))
    for quantity in ("ln_phi", "ln_phi_T", "ln_phi_F", "H", "H_T", "H_F"):
        np.testing.assert_allclose(high[quantity], 2.0 * low[quantity], rtol=1e-6)
    for quantity in ("ln_phi_p", "H_p"):
        np.testing.assert_allclose(high[quantity], low[quantity], rtol=1e-6)
    assert low["V"] == pytest.approx(4.7 * R_GAS * T / 1e-3, rel=1e-9)
    assert np.max(np.abs(low["ln_phi"])) < 1e-9


@pytest.mark.parametrize("phase", [VAPOUR, LIQUID])
def test_less_is_the_beginning_of_all(phase: str) -> None:
    """What a smaller extent computes is the same to the last digit, and nothing else stands there."""
    fluid, F = mixture("Soave 1972", "ammonia"), np.array([1.0, 3.0, 0.5])
    whole = named(fluid, run(fluid, F, 420.0, 5e6, phase)[1])
    of_species = {"ln_phi", "ln_phi_p", "V_F", "H_F"}
    for extent, left_out in ((BULK, {*of_species, "ln_phi_F"}), (SPECIES, {"ln_phi_F"})):
        part = named(fluid, run(fluid, F, 420.0, 5e6, phase, extent, start=3)[1])
        for quantity, value in whole.items():
            if quantity in left_out:
                assert np.all(np.isnan(part[quantity]))
            elif quantity != "ln_phi_T" or extent == SPECIES:
                np.testing.assert_array_equal(part[quantity], value)


def test_slightly_negative_flows() -> None:
    """Trial points go there: values stay smooth through zero."""
    fluid, T, p = mixture("Peng-Robinson 1978", "methanol"), 520.0, 8e6
    F = np.array([0.2, 0.05, 0.7, -1e-4, 0.0, 0.05])
    status, results = run(fluid, F, T, p, VAPOUR)
    assert status == FOUND
    here = named(fluid, results)
    for quantity, (there, size) in expected(fluid, F, T, p, VAPOUR).items():
        np.testing.assert_allclose(here[quantity], there, rtol=1e-12, atol=1e-12 * size, err_msg=quantity)


def test_status() -> None:
    fluid, F = mixture("Soave 1972", "alkylation"), np.array([1.0, 0.1, 0.1, 0.3])
    assert run(fluid, F, 600.0, 1e6, VAPOUR)[0] == FOUND
    assert run(fluid, F, 300.0, 50e5, VAPOUR)[0] == OTHER_PHASE
    assert run(fluid, F, 300.0, 50e5, LIQUID)[0] == FOUND
    assert run(fluid, F, 500.0, 1e3, LIQUID)[0] == OTHER_PHASE
    wrong = [(0.0 * F, 600.0, 1e6), (-F, 600.0, 1e6), (F, -1.0, 1e6), (F, 600.0, 0.0), (F, 600.0, -1e5)]
    for flows, T, p in [*wrong, (F * np.nan, 600.0, 1e6), (F, np.nan, 1e6), (F, 600.0, np.inf)]:
        assert run(fluid, flows, T, p, VAPOUR)[0] == NOT_FINITE


def test_one_species() -> None:
    """Gibbs energy of a pure fluid: ln phi does not depend on the flow, V and H are proportional to it."""
    fluid, n = mixture("Peng-Robinson 1976", "ammonia"), np.array([0.0, 0.0, 2.0])
    here = named(fluid, run(fluid, n, 450.0, 8e6, VAPOUR)[1])
    assert here["ln_phi_F"][2, 2] == pytest.approx(0.0, abs=1e-14)
    assert here["V_F"][2] == pytest.approx(here["V"] / 2.0, rel=1e-13)
    assert here["H_F"][2] == pytest.approx(here["H"] / 2.0, rel=1e-13)
