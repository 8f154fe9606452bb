"""Very long beds end at the adiabatic equilibrium that Cantera finds, and a rate vanishes at equilibrium.

TH-4 recomputed with the NASA polynomials and Cantera 3.2 (enthalpy-pressure equilibrium); nothing published.
"""

from __future__ import annotations

import cantera as ct
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from reactorstage.train.result import Rating
from tests.bed.build import Tree, one_bed, programme
from tests.bed.outside import species

ALKYLATION = {
    "equation": "benzene + ethylene <=> ethylbenzene",
    "rate per": "catalyst mass",
    "driven by": "partial pressure",
    "constant": {"at": "400 degC", "is": "4.2e-3 kmol/(kg h bar^2)", "activation energy": "66 kJ/mol"},
}
OXIDATION = {
    "equation": "SO2 + 0.5 O2 <=> SO3",
    "rate per": "bed volume",
    "driven by": "concentration",
    "orders": {"SO2": 1, "O2": 1},
    "constant": "2 m^3/(mol s)",
}


def long_bed(reaction: Tree, shares: dict[str, float], T: float, p: float) -> Rating:
    feed = {
        "flow": "300 mol/s",
        "temperature": f"{T!r} K",
        "composition": {
            name: "rest" if i == 0 else f"{100.0 * y!r} %" for i, (name, y) in enumerate(shares.items())
        },
    }
    named = {"benzene": "C6H6", "ethylene": "C2H4", "ethylbenzene": "C8H10,ethylbenz"}
    known = {name: {"gas data": named.get(name, name)} for name in shares}
    rating = programme(one_bed(known, {"only": reaction}, feed, "4000 t", f"{p!r} Pa")).rate()
    assert not rating.failure
    return rating


def equilibrium(shares: dict[str, float], T: float, p: float) -> ct.Solution:
    gas = ct.Solution(thermo="ideal-gas", species=[species(name) for name in shares])
    gas.TPX = T, p, shares
    gas.equilibrate("HP", rtol=1e-12)
    return gas


@pytest.mark.parametrize(("ratio", "T_out", "conversion"), [(5, 775.77, 0.98055), (8, 741.11, 0.99146)])
def test_TH_4_long_alkylation_bed(ratio: int, T_out: float, conversion: float) -> None:
    """Check values TH-4a and TH-4b (recomputed): 673.15 K, 20 bar, tolerances 0.05 K and 1e-4."""
    shares = {"benzene": ratio / (ratio + 1.0), "ethylene": 1.0 / (ratio + 1.0), "ethylbenzene": 0.0}
    rating = long_bed(ALKYLATION, shares, 673.15, 20e5)
    assert rating.number("bed 1.exit temperature") == pytest.approx(T_out, abs=0.05)
    assert rating.number("bed 1.conversion of ethylene") == pytest.approx(conversion, abs=1e-4)
    assert rating.number("bed 1.approach to equilibrium of only") == pytest.approx(0.0, abs=1e-6)


@settings(max_examples=10)
@given(st.floats(3.0, 12.0), st.floats(600.0, 720.0), st.floats(5e5, 40e5))
def test_long_alkylation_bed_ends_at_canteras_equilibrium(ratio: float, T: float, p: float) -> None:
    shares = {"benzene": ratio / (ratio + 1.0), "ethylene": 1.0 / (ratio + 1.0), "ethylbenzene": 0.0}
    assert_equilibrium(long_bed(ALKYLATION, shares, T, p), equilibrium(shares, T, p))


@settings(max_examples=10)
@given(st.floats(0.05, 0.12), st.floats(0.06, 0.14), st.floats(680.0, 760.0))
def test_long_oxidation_bed_ends_at_canteras_equilibrium(so2: float, o2: float, T: float) -> None:
    """Half-order backward rate; the number of moles changes."""
    shares = {"N2": 1.0 - so2 - o2, "SO2": so2, "O2": o2, "SO3": 0.0}
    assert_equilibrium(long_bed(OXIDATION, shares, T, 1.3e5), equilibrium(shares, T, 1.3e5))


def assert_equilibrium(rating: Rating, gas: ct.Solution) -> None:
    flows = np.array([rating.number(f"bed 1.exit flow of {name}") for name in rating.species])
    assert np.abs(flows / flows.sum() - gas.X).max() < 1e-6
    assert rating.number("bed 1.exit temperature") == pytest.approx(gas.T, rel=1e-6)
