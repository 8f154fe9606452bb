"""Effectiveness factors: closed forms, published polynomials, limits, equilibrium untouched."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.chemistry import (
    R_GAS,
    Constant,
    Polynomial,
    RateLaw,
    SpeciesTable,
    Thiele,
    ln_K,
    rate_laws,
    rates,
    species_from_cantera,
    table_of,
)
from reactorstage.chemistry.effectiveness import of_modulus
from reactorstage.chemistry.law import SHAPES

T, P = 700.0, 2e5
F = np.array([0.05, 0.09, 0.04, 0.82])
SLAB, SPHERE = SHAPES["slab"], SHAPES["sphere"]


def law(effectiveness: Polynomial | Thiele | None, **other: Any) -> RateLaw:
    plain: dict[str, Any] = {
        "label": "one",
        "stoichiometry": {"SO2": -1.0, "O2": -0.5, "SO3": 1.0},
        "orders": {"SO2": 1.0, "O2": 1.0},
        "constant": Constant(0.5),
        "driver": "mole fraction",
        "reversible": True,
    }
    return RateLaw(**{**plain, "effectiveness": effectiveness, **other})


def rate(table: SpeciesTable, one: RateLaw, F: Any = F, T: Any = T, p: Any = P, factor: float = 1.0) -> Any:
    return rates(rate_laws([one], table.names), table, F, T, p, np.full(1, factor))[0]


# Closed forms; limits for large moduli 1/phi and 3/phi - 3/phi^2 (Thiele 1939; Aris 1975, from memory).
@pytest.mark.parametrize("phi", [1e-3, 0.05, 0.0999, 0.1001, 1.0, 7.0, 60.0, 1e3])
def test_slab_and_sphere(phi: float) -> None:
    assert of_modulus(SLAB, phi**2) == pytest.approx(np.tanh(phi) / phi, rel=1e-12)
    if phi > 0.09:
        closed = 3 * (phi / np.tanh(phi) - 1) / phi**2
        assert of_modulus(SPHERE, phi**2) == pytest.approx(closed, rel=1e-11)
    if phi > 50.0:
        assert of_modulus(SLAB, phi**2) == pytest.approx(1 / phi, rel=1e-12)
        assert of_modulus(SPHERE, phi**2) == pytest.approx(3 / phi - 3 / phi**2, rel=1e-12)


@pytest.mark.parametrize("kind", [SLAB, SPHERE])
def test_series_and_closed_forms_meet(kind: int) -> None:
    below, above = of_modulus(kind, 0.01 * (1 - 1e-12)), of_modulus(kind, 0.01 * (1 + 1e-12))
    assert below == pytest.approx(above, rel=1e-12)
    assert of_modulus(kind, 0.0) == 1.0


def test_a_fixed_effectiveness_multiplies_the_rate(oxidation: SpeciesTable) -> None:
    found, plain = rate(oxidation, law(Polynomial((0.37,)))), rate(oxidation, law(None))
    assert found == pytest.approx(0.37 * plain, rel=1e-6)


# Dyson and Simon, Ind. Eng. Chem. Fundam. 7 (1968) 605: b0 + b1 T + b2 Z + b3 T^2 + b4 Z^2 + b5 T^3 + b6 Z^3
# of promoted iron, Z the converted part of the nitrogen; coefficients at 150, 225, 300 atm from memory.
DYSON_SIMON = {
    150: (-17.539096, 0.07697849, 6.900548, -1.082790e-4, -26.42469, 4.927648e-8, 38.93727),
    225: (-8.2125534, 0.03774149, 6.190112, -5.354571e-5, -20.86963, 2.379142e-8, 27.88403),
    300: (-4.6757259, 0.02354872, 4.687353, -3.463308e-5, -11.28031, 1.540881e-8, 10.46627),
}


@pytest.mark.parametrize("atm", DYSON_SIMON)
@pytest.mark.parametrize(("T", "Z"), [(650.0, 0.05), (700.0, 0.12), (740.0, 0.2)])
def test_the_polynomial_of_dyson_and_simon(atm: int, T: float, Z: float) -> None:
    """Its own form, evaluated beside ours; the mole fractions are those of 1 N2 converted to Z."""
    b = DYSON_SIMON[atm]
    closed = b[0] + b[1] * T + b[2] * Z + b[3] * T**2 + b[4] * Z**2 + b[5] * T**3 + b[6] * Z**3
    table = table_of([species_from_cantera(name, name) for name in ("N2", "H2", "NH3")])
    eta = Polynomial((b[0], b[1], b[3], b[5]), (b[2], b[4], b[6]), "N2", "NH3")
    ammonia = np.array([1.0 - Z, 3.0 * (1.0 - Z), 2.0 * Z])
    for size in (1.0, 0.5):
        one = law(
            eta,
            stoichiometry={"N2": -size, "H2": -3 * size, "NH3": 2 * size},
            orders={"N2": 1.0},
            reversible=False,
        )
        found = rate(table, one, ammonia, T) / rate(table, replace(one, effectiveness=None), ammonia, T)
        assert found == pytest.approx(closed, rel=1e-6)
        assert 0.2 < found < 1.1


def test_a_polynomial_that_falls_below_zero_is_held_above_it(oxidation: SpeciesTable) -> None:
    found, plain = rate(oxidation, law(Polynomial((7.0, -0.02)))), rate(oxidation, law(None))
    assert 0.0 < found / plain < 1e-7


# Generalised first-order modulus: phi = size sqrt(r rho/(De C)), C = y p/(R T) of the key species.
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize(("key", "per_rate"), [("SO2", 1.0), ("O2", 0.5)])
@pytest.mark.parametrize("factor", [1e-4, 0.02, 1.0])
def test_from_a_thiele_modulus(
    oxidation: SpeciesTable, shape: str, key: str, per_rate: float, factor: float
) -> None:
    plain = rate(oxidation, law(None), factor=factor)
    C = F[oxidation.names.index(key)] * P / (R_GAS * T)
    phi = 2e-3 * np.sqrt(per_rate * plain * 1_300.0 / (2e-6 * C))
    eta = np.tanh(phi) / phi if shape == "slab" else 3 * (phi / np.tanh(phi) - 1) / phi**2
    found = rate(oxidation, law(Thiele(2e-3, 2e-6, key, shape, 1_300.0)), factor=factor)
    assert found == pytest.approx(eta * plain, rel=1e-9)


@pytest.mark.parametrize(
    "eta",
    [
        Polynomial((0.3,)),
        Polynomial((-2.0, 4e-3), (0.3, -0.1), "SO2", "SO3"),
        Thiele(2e-3, 2e-6, "SO2", "slab", 1_300.0),
        Thiele(2e-3, 2e-6, "O2", "sphere", 1_300.0),
    ],
)
def test_no_effectiveness_moves_an_equilibrium(oxidation: SpeciesTable, eta: Polynomial | Thiele) -> None:
    """At Q = K the rate is zero, and next to it the effectiveness is that of a rate of zero."""
    K = np.exp(ln_K(oxidation, np.array([[-1.0, -0.5, 1.0, 0.0]]), T)[0])
    so2 = 0.1 / (K * (0.09 * P / 1e5) ** 0.5)
    still = np.array([so2, 0.09, 0.1, 0.81 - so2])
    moved = still * np.array([1.1, 1.0, 1.0, 1.0])
    assert abs(rate(oxidation, law(eta), still)) < 1e-10 * abs(rate(oxidation, law(eta), moved))


@given(key=st.sampled_from(["SO2", "O2"]), shape=st.sampled_from(list(SHAPES)), ln_k=st.floats(-12.0, 8.0))
def test_complex_steps_agree_with_central_differences(
    oxidation: SpeciesTable, key: str, shape: str, ln_k: float
) -> None:
    one = law(Thiele(2e-3, 2e-6, key, shape, 1_300.0), constant=Constant(ln_k, 700.0, 9e3))
    laws, start = rate_laws([one], oxidation.names), np.array([*F, T, P])

    def found(z: np.ndarray) -> Any:
        return rates(laws, oxidation, z[:4], z[4], z[5], np.ones(1))[0]

    for i, size in enumerate(start):
        unit = np.eye(6)[i]
        exact = found(start + 1e-30j * unit).imag / 1e-30
        step = 1e-5 * size
        central = (found(start + step * unit) - found(start - step * unit)) / (2 * step)
        assert central == pytest.approx(exact, rel=1e-5, abs=1e-7 * abs(found(start)) / size)
