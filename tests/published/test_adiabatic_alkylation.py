"""TH-4, TH-5: adiabatic temperature rises with NASA polynomials (Cantera's nasa_gas.yaml).

Recomputed independently with Cantera's equilibrium at constant enthalpy and pressure and its enthalpies.
"""

from __future__ import annotations

import pytest

from reactorstage.train.result import Rating
from tests.bed.build import Tree, one_bed, programme

GAS = {"B": "C6H6", "E": "C2H4", "EB": "C8H10,ethylbenz", "A": "C2H2,acetylene", "H2": "H2"}


def rated(equation: str, fed: dict[str, float], T: str, p: str) -> Rating:
    """A long bed with a rate that is invented: only its end counts."""
    names = [name for name in GAS if name in {*fed, *equation.split()}]
    reaction = {
        "equation": equation,
        "rate per": "catalyst mass",
        "driven by": "partial pressure",
        "constant": "1e-3 mol/(kg s bar^2)",
    }
    total = sum(fed.values())
    first, *others = fed
    shares = {name: f"{100.0 * fed[name] / total!r} %" for name in others}
    feed = {"flow": "100 mol/s", "temperature": T, "composition": {first: "rest", **shares}}
    species: Tree = {name: {"gas data": GAS[name]} for name in names}
    return programme(one_bed(species, {"only": reaction}, feed, "1e6 t", p)).rate()


def number(rating: Rating, name: str) -> float:
    value = rating.number(name)
    assert value is not None
    return value


@pytest.mark.parametrize(
    ("ratio", "T", "X"),
    [pytest.param(5.0, 775.77, 0.98055, id="TH-4a"), pytest.param(8.0, 741.11, 0.99146, id="TH-4b")],
)
def test_TH_4_long_bed_ends_at_equilibrium(ratio: float, T: float, X: float) -> None:
    """From 673.15 K at 20 bar, only ethylbenzene made, by benzene/ethylene; 0.05 K, conversion 1e-4."""
    rating = rated("B + E <=> EB", {"B": ratio, "E": 1.0}, "673.15 K", "20 bar(a)")
    assert number(rating, "bed 1.exit temperature") == pytest.approx(T, abs=0.05)
    assert number(rating, "bed 1.conversion of E") == pytest.approx(X, abs=1e-4)
    assert number(rating, "bed 1.approach to equilibrium of only") == pytest.approx(0.0, abs=0.01)


@pytest.mark.parametrize(
    ("ratio", "rise"), [pytest.param(5.0, 104.56, id="TH-4a"), pytest.param(8.0, 68.53, id="TH-4b")]
)
def test_TH_4_rise_at_complete_conversion(ratio: float, rise: float) -> None:
    """0.05 K, with the reaction written irreversible."""
    rating = rated("B + E => EB", {"B": ratio, "E": 1.0}, "673.15 K", "20 bar(a)")
    assert number(rating, "bed 1.conversion of E") == pytest.approx(1.0, abs=1e-9)
    assert number(rating, "bed 1.rise") == pytest.approx(rise, abs=0.05)


@pytest.mark.parametrize(("T", "rise"), [("50 degC", 37.99), ("80 degC", 36.03)])
def test_TH_5_selective_hydrogenation(T: str, rise: float) -> None:
    """1 mol % acetylene of the whole feed, H2/acetylene 1.5, rest ethylene; only acetylene reacts; 0.05 K."""
    rating = rated("A + H2 => E", {"E": 97.5, "A": 1.0, "H2": 1.5}, T, "20 bar(a)")
    assert number(rating, "bed 1.conversion of A") == pytest.approx(1.0, abs=1e-9)
    assert number(rating, "bed 1.rise") == pytest.approx(rise, abs=0.05)
