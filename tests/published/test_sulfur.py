"""SO2 oxidation by the law of Collina, Corbetta, Cappelli (1971), as in Froment & Bischoff, Chemical Reactor
Analysis and Design, ch. 11 (from memory): rates, and the sharp inlet layer of its denominator.

    r = k1 pO2 pSO2 [1 - pSO3/(Kp pSO2 pO2^1/2)] / {22.414 (1 + K2 pSO2 + K3 pSO3)^2}   kmol/(kg h), atm

The beds of OPT-7 (recomputed in two ways, not published): T = T_in + 235.2 K (X - X_in).
"""

from __future__ import annotations

from itertools import pairwise
from math import log

import numpy as np
import pytest

from reactorstage.chemistry import Constant, Denominator, RateLaw, Term
from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.build import Tree, one_bed, programme
from tests.bed.laws import with_laws
from tests.published.ideal import R, constant

ATM = 101325.0
LN_ATM = log(ATM)
FEED = {"SO2": 0.078, "O2": 0.108, "SO3": 0.0, "N2": 0.814}
SLOPE = 235.2
NU = {"SO2": -1.0, "O2": -0.5, "SO3": 1.0}


def collina() -> RateLaw:
    """The law in Pa and mol/(kg s); the reaction as SO2 + 1/2 O2 = SO3."""
    kmol_per_hour = 1e3 / 3600.0 / 22.414
    slowed = Denominator(
        (
            Term(Constant(0.0)),
            Term(Constant(-9.953 - LN_ATM, E_over_R=-8619.0), {"SO2": 1.0}),
            Term(Constant(-71.745 - LN_ATM, E_over_R=-52596.0), {"SO3": 1.0}),
        ),
        2.0,
    )
    k = Constant(12.160 + log(kmol_per_hour) - 2.0 * LN_ATM, E_over_R=5473.0)
    return RateLaw(
        "oxidation", NU, {"SO2": 1.0, "O2": 1.0}, k, "partial pressure", True, denominators=(slowed,)
    )


def species() -> Tree:
    """Kp = exp(11300/T - 10.68) atm^-1/2, and heat capacities that make the slope 235.2 K."""
    cp = 11300.0 * R * FEED["SO2"] / SLOPE
    entropy = 300.0 - 10.68 * R - 0.5 * R * log(ATM / 1e5)
    return {
        "SO2": constant("SO2", 0.0, 200.0, cp),
        "O2": constant("O2", 0.0, 200.0, cp),
        "SO3": constant("SO3", -11300.0 * R, entropy, 1.5 * cp),
        "N2": constant("N2", 0.0, 200.0, cp),
    }


def bed(X_in: float, T_in: float, kg_per_kmol_per_hour: float) -> TrainProgramme:
    """A bed for 1 kmol/h of SO2 fed to the converter, X_in of it converted before."""
    moles = {name: y / FEED["SO2"] for name, y in FEED.items()}
    moles = {name: n + NU.get(name, 0.0) * X_in for name, n in moles.items()}
    total = sum(moles.values())
    shares = {name: f"{100.0 * n / total!r} %" for name, n in moles.items() if name != "N2"}
    feed = {
        "flow": f"{total!r} kmol/h",
        "temperature": f"{T_in!r} K",
        "composition": {**shares, "N2": "rest"},
    }
    stand_in = {
        "rate per": "catalyst mass",
        "driven by": "partial pressure",
        "constant": "1 mol/(kg s Pa^1.5)",
    }
    reaction = {"equation": "SO2 + 0.5 O2 <=> SO3", **stand_in}
    tree = one_bed(species(), {"oxidation": reaction}, feed, f"{kg_per_kmol_per_hour!r} kg", "1 atm(a)")
    return with_laws(programme(tree), [collina()])


@pytest.mark.parametrize(
    ("T", "rate"), [(693.0, 7.011e-4), (723.0, 7.939e-3), (753.0, 1.457e-2), (783.0, 2.091e-2)]
)
def test_SO2_6_rates_at_half_conversion(T: float, rate: float) -> None:
    """kmol/(kg h) at X = 0.5 of 7.8/10.8/81.4 %, 1 atm (law from memory, rates recomputed, as printed)."""
    found = bed(0.5, T, 1e-6).rate().profiles[0].r[0, 0]
    assert found * 3.6 == pytest.approx(rate, rel=6e-4)


@pytest.mark.parametrize(
    ("X_in", "T_in", "W", "X_out", "T_out"),
    [(0.0, 659.58, 211.12, 0.7991, 847.53), (0.7991, 689.96, 632.94, 0.97, 730.15)],
)
def test_OPT_7_beds(X_in: float, T_in: float, W: float, X_out: float, T_out: float) -> None:
    """kg per kmol SO2 fed and hour (recomputed); conversions to 1e-3, 0.5 K."""
    rating = bed(X_in, T_in, W).rate()
    assert conversion(rating) == pytest.approx(X_out, abs=1e-3)
    assert rating.number("bed 1.exit temperature") == pytest.approx(T_out, abs=0.5)


def conversion(rating: Rating) -> float:
    """Of the SO2 fed to the converter (1 kmol/h)."""
    return 1.0 - 3.6 * float(rating.profiles[0].F[-1, 0])


def test_OPT_9_rates_are_equal_on_both_sides_of_the_cooler() -> None:
    """The recomputed optimum has equal rates there (as far as its printed digits go); a quadrature too
    coarse for the inlet layer gives 0.947.
    """
    before = bed(0.0, 659.58, 211.12).rate()
    after = bed(conversion(before), 689.96, 632.94).rate()
    assert before.profiles[0].r[-1, 0] / after.profiles[0].r[0, 0] == pytest.approx(1.0, abs=1e-2)


def test_inlet_layer_is_resolved() -> None:
    """Independent program: SciPy's quadrature of dX/r from the law as published, 1e-7 on W."""
    from scipy.integrate import quad

    profile = bed(0.0, 659.58, 211.12).rate().profiles[0]
    X_out = conversion_of(profile.F[-1])

    def inverse(X: float) -> float:
        return 1.0 / published_rate(X, 659.58 + SLOPE * X)

    parts = [0.0, 1e-3, 1e-2, 0.1, 0.5, 0.7, X_out]
    W = sum(quad(inverse, a, b, epsabs=0.0, epsrel=1e-11)[0] for a, b in pairwise(parts))
    assert pytest.approx(211.12, rel=1e-7) == W


def conversion_of(F: np.ndarray) -> float:
    return float(F[2] / (F[0] + F[2]))


def published_rate(X: float, T: float) -> float:
    """kmol/(kg h), p in atm."""
    moles = np.array([0.078 * (1.0 - X), 0.108 - 0.039 * X, 0.078 * X])
    so2, o2, so3 = moles / (1.0 - 0.039 * X)
    k1, K2, K3 = np.exp([12.160 - 5473.0 / T, -9.953 + 8619.0 / T, -71.745 + 52596.0 / T])
    Kp = np.exp(11300.0 / T - 10.68)
    away = 1.0 - so3 / (Kp * so2 * np.sqrt(o2))
    return float(k1 * o2 * so2 * away / (22.414 * (1.0 + K2 * so2 + K3 * so3) ** 2))
