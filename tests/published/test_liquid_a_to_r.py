"""AR: liquid A <=> R, Levenspiel, Chemical Reaction Engineering, 3rd ed. 1999, ch. 9, Ex. 9.1-9.6.

All published data from memory; the recomputed values come from quadrature of the published law. Case and law:
`liquid`.
"""

from __future__ import annotations

from functools import cache
from math import exp

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

import reactorstage
from reactorstage.chemistry import ln_K
from reactorstage.chemistry.rates import ln_k
from reactorstage.face import Optimisation
from tests.bed.build import Tree, changed, load, programme
from tests.published.bed_volume import isomerising
from tests.published.ideal import isomers
from tests.published.liquid import FLOW, HEAT, REACTION, SPECIES, cooled, value

NU = np.array([[-1.0, 1.0]])
FEED = f"{FLOW} mol/min"


def gibbs_data(T: float) -> Tree:
    """Species with dG298 -14 130 and dH298 -75 300 J/mol, 298 being T."""
    return isomers(-75_300.0, (-75_300.0 + 14_130.0) / T, 100.0)


def K_of(species: Tree, T: float) -> float:
    tree = isomerising(species, REACTION["constant"], 300.0, FEED, "1 L")
    return exp(float(ln_K(programme(tree).model.chemistry.table, NU, T)[0]))


def test_AR_1_equilibrium_constant_at_298_K() -> None:
    """Book 300 (from memory), recomputed 299.8, 0.1 %."""
    K = K_of(gibbs_data(298.0), 298.0)
    assert pytest.approx(299.8, rel=1e-3) == K
    assert pytest.approx(300.0, rel=1e-3) == K


@pytest.mark.parametrize(
    ("celsius", "recomputed", "book"),
    [(55, 0.949, 0.949), (65, 0.892, 0.892), (75, 0.792, 0.791), (85, 0.648, 0.648), (95, 0.480, 0.480)],
)
def test_AR_2_equilibrium_conversion(celsius: int, recomputed: float, book: float) -> None:
    """From dG298 and dH298, 0.001; book from memory."""
    K = K_of(gibbs_data(298.0), celsius + 273.0)
    assert pytest.approx(recomputed, abs=1e-3) == K / (1.0 + K)
    assert pytest.approx(book, abs=1e-3) == K / (1.0 + K)


def test_AR_3_optimal_progression_up_to_95_celsius() -> None:
    """X 0.8 at the best temperature everywhere: 401.1 L (recomputed, 0.2 %); book 405 L (from memory, 2 %).

    No train of adiabatic beds does it: rates of the compiled case are used, at the best T for each X.
    """
    chemistry = programme(isomerising(SPECIES, REACTION["constant"], 300.0, FEED, "1 L")).model.chemistry
    T = np.linspace(300.0, 368.15, 400)
    k = 0.06 * np.exp([float(ln_k(chemistry.laws, one)[0]) for one in T])
    K = np.exp([float(ln_K(chemistry.table, NU, one)[0]) for one in T])
    nodes, weights = np.polynomial.legendre.leggauss(400)
    X = 0.4 * (nodes + 1.0)
    fastest = (k * ((1.0 - X[:, None]) - X[:, None] / K)).max(axis=1)
    volume = FLOW * float(0.4 * weights @ (1.0 / fastest))
    assert volume == pytest.approx(401.1, rel=2e-3)
    assert volume == pytest.approx(405.0, rel=2e-2)


def test_AR_4_stirred_tank_at_its_best_temperature() -> None:
    """X 0.8: 2026 L, 0.3948 mol/(L min) at 62.1 degC (recomputed, as printed); book 2000 L (1.5 %).

    The rate is the one at the inlet of a bed fed with 20 % A and 80 % B, the mixture in the tank.
    """
    tank = {"A": "20 %", "B": "rest"}
    tree = isomerising(SPECIES, REACTION["constant"], 330.0, FEED, "1e-3 L", composition=tank)
    warm = {"now": "330 K", "from": "300 K", "to": "368 K"}
    train = programme(changed(tree, "feeds", "fresh", "temperature", to=warm))

    def rate(T: float) -> float:
        return 60.0 * float(train.rate(np.array([T])).profiles[0].r[0, 0])

    best = minimize_scalar(lambda T: -rate(T), bounds=(310.0, 360.0), options={"xatol": 1e-4})
    assert best.x - 273.15 == pytest.approx(62.1, abs=0.1)
    assert rate(best.x) == pytest.approx(0.3948, abs=1e-4)
    volume = FLOW * 0.8 / rate(best.x)
    assert volume == pytest.approx(2026.0, abs=1.0)
    assert volume == pytest.approx(2000.0, rel=1.5e-2)


@cache
def best_single_bed() -> Optimisation:
    return reactorstage.optimise(load(cooled(1, 0.8)), starts=4, explain=False)


def test_AR_5_adiabatic_plug_flow_from_its_best_inlet_temperature() -> None:
    """Found by the search: 1692.89 L (recomputed, 0.01 %), 15.73 -> 73.33 degC; book 1720 L (2 %)."""
    rating = best_single_bed().best
    assert rating is not None
    volume = value(rating, "train.catalyst")
    assert volume == pytest.approx(1692.89, rel=1e-4)
    assert volume == pytest.approx(1720.0, rel=2e-2)
    inlet, out = (value(rating, f"bed 1.{end} temperature") - 273.15 for end in ("inlet", "exit"))
    assert (inlet, out) == pytest.approx((15.73, 73.33), abs=0.01)
    assert (inlet, out) == pytest.approx((16.0, 73.5), abs=0.5)


def test_AR_5_slope_is_72_kelvin() -> None:
    """18 000 cal/mol over 250 cal/(mol K); the constants give -75 300 J/mol."""
    assert pytest.approx(-75_300.0, rel=1e-4) == HEAT
    rating = best_single_bed().best
    assert rating is not None
    slope = value(rating, "bed 1.rise") / value(rating, "bed 1.conversion of A")
    assert slope == pytest.approx(72.0, rel=1e-6)
