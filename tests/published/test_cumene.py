"""CU: vapour-phase cumene, Turton, Bailie, Whiting, Shaeiwitz, Analysis, Synthesis and Design of Chemical
Processes, App. B.8 (constants from memory).

    r1 = 3.5e4 exp(-24.90/RT) C_P C_B      r2 = 2.9e6 exp(-35.08/RT) C_P C_C

in mol/(g cat s), mol/L and kcal/mol.

9.36 m3 of bed at 25 bar with 800 kg of catalyst per m3, no pressure drop; feed propylene 105, propane 5.5,
benzene 207 kmol/h. The expected flows were recomputed with an independent model; the book's own reactor is
cooled and is no target.
"""

from __future__ import annotations

import pytest

from reactorstage.train.result import Rating
from tests.bed.build import Tree, one_bed, programme
from tests.published.aromatics import R_BOOK, fed, species
from tests.published.ideal import arrhenius, powers

FEED = {"benzene": 207.0, "propylene": 105.0, "propane": 5.5}
NAMES = ("propylene", "propane", "benzene", "cumene", "diisopropylbenzene")
CARBON = {
    "propylene": "C3H6",
    "propane": "C3H8",
    "benzene": "C6H6",
    "cumene": "C9H12",
    "diisopropylbenzene": "C12H18",
}


def propylation(equation: str, k0: float, E: float) -> Tree:
    constant = arrhenius(k0, 1e3 * E / R_BOOK, "mol/(g s (mol/L)^2)")
    return {
        "equation": equation,
        "rate per": "catalyst mass",
        "driven by": "concentration",
        "constant": constant,
    }


REACTIONS = {
    "first": propylation("benzene + propylene => cumene", 3.5e4, 24.90),
    "second": propylation("cumene + propylene => diisopropylbenzene", 2.9e6, 35.08),
}


def rated(T: float, known: Tree) -> Rating:
    every = {"bulk density": "800 kg/m^3", "pressure drop factor": 0}
    return programme(one_bed(known, REACTIONS, fed(FEED, T), "9.36 m^3", "25 bar(a)", every)).rate()


def behind(rating: Rating, name: str) -> float:
    """kmol/h."""
    value = rating.number(f"bed 1.exit flow of {name}")
    assert value is not None
    return 3.6 * value


def exit_celsius(rating: Rating) -> float:
    value = rating.number("bed 1.exit temperature")
    assert value is not None
    return value - 273.15


def test_CU_3_isothermal_bed() -> None:
    """360 degC; recomputed flows within 0.5 %.

    Beds are adiabatic, so the bed is made isothermal by species of equal enthalpy: formation enthalpies of
    zero and heat capacities that go with the carbon number make both heats of reaction zero at all T.
    Inert gas in plenty would do it too, but dilute.
    """
    carbons = {name: int(formula[1:].partition("H")[0]) for name, formula in CARBON.items()}
    cold = {name: powers(CARBON[name], 0.0, 300.0, [20.0 * n]) for name, n in carbons.items()}
    rating = rated(360.0, cold)
    assert exit_celsius(rating) == pytest.approx(360.0, abs=1e-6)
    expected = {"propylene": 32.1936, "benzene": 134.6152, "cumene": 71.9632, "diisopropylbenzene": 0.4216}
    for name, flow in expected.items():
        assert behind(rating, name) == pytest.approx(flow, rel=5e-3), name


def test_CU_4_adiabatic_bed() -> None:
    """From 330 degC; recomputed: propylene fully converted, 522.9 degC (1 K), DIPB 3.2475 kmol/h (0.5 %)."""
    rating = rated(330.0, species(*NAMES))
    assert behind(rating, "propylene") < 1e-6
    assert exit_celsius(rating) == pytest.approx(522.9, abs=1.0)
    assert behind(rating, "diisopropylbenzene") == pytest.approx(3.2475, rel=5e-3)
