"""Published rate laws through the case file: constants, rates and equilibria of their publications."""

from __future__ import annotations

import re
from math import exp, log, log10

import numpy as np
import pytest

from reactorstage.chemistry import rates
from reactorstage.chemistry.rates import ln_k, ln_K_of_laws
from reactorstage.train.chemistry import CaseChemistry, read_chemistry
from tests.bed.build import Tree, load, one_bed
from tests.chemistry.published_laws import (
    COLLINA,
    EKLUND,
    FROM_CO2,
    LAWS,
    METHANOL,
    REVERSE_SHIFT,
    SO2,
    temkin,
)

ATM = 101_325.0


def chemistry(species: Tree, reactions: Tree, composition: Tree, T: str = "700 K") -> CaseChemistry:
    feed = {"flow": "100 kmol/h", "temperature": T, "composition": composition}
    return read_chemistry(load(one_bed(species, reactions, feed, "1 t")))


def of_law(name: str) -> CaseChemistry:
    return chemistry(*LAWS[name])


# SO2-5: R.-B. Eklund, The Rate of Oxidation of Sulfur Dioxide with a Commercial Vanadium Catalyst (1956), as
# in Fogler, Elements of Chemical Reaction Engineering; law from memory, k recomputed, as printed.
@pytest.mark.parametrize(
    ("T", "k"), [(700.0, 2.553e-6), (750.0, 1.421e-5), (800.0, 4.031e-5), (850.0, 6.748e-5)]
)
def test_SO2_5_Eklund(T: float, k: float) -> None:
    found = of_law("Eklund")
    assert exp(ln_k(found.laws, T)[0]) * ATM / 1e3 == pytest.approx(k, rel=2e-4)
    so2, o2, so3 = 0.05, 0.09, 0.04
    Kp = exp(42_311.0 / 1.987 / (1.8 * T) - 11.24)
    closed = k * (so2 / so3) ** 0.5 * (o2 - (so3 / (Kp * so2)) ** 2)
    F = np.array([so2, o2, so3, 1.0 - so2 - o2 - so3])
    assert rates(found.laws, found.table, F, T, ATM, np.ones(1))[0] / 1e3 == pytest.approx(closed, rel=3e-4)


# SO2-6: Collina, Corbetta, Cappelli (1971), as in Froment and Bischoff, Chemical Reactor Analysis and Design,
# ch. 11; law from memory, rates recomputed, as printed: half conversion of 7.8/10.8/81.4 % SO2/O2/N2 at
# 1 atm, kmol/(kg h).
@pytest.mark.parametrize(
    ("T", "expected"), [(693.0, 7.011e-4), (723.0, 7.939e-3), (753.0, 1.457e-2), (783.0, 2.091e-2)]
)
def test_SO2_6_Collina(T: float, expected: float) -> None:
    found = of_law("Collina")
    F = np.array([3.9, 10.8 - 1.95, 3.9, 81.4])
    rate = rates(found.laws, found.table, F, T, ATM, np.ones(1))[0]
    assert rate * 3.6 == pytest.approx(expected, rel=2e-4)


def test_both_laws_of_SO2_agree_within_a_factor_of_4() -> None:
    """What is published of the two together (`SO2-5`, `SO2-6`): the same only within a factor of 4."""
    F = np.array([3.9, 10.8 - 1.95, 3.9, 81.4])
    found = [of_law(name) for name in ("Eklund", "Collina")]
    eklund, collina = (rates(one.laws, one.table, F, 753.0, ATM, np.ones(1))[0] for one in found)
    assert 0.25 < eklund / collina < 4.0


# NH3-4: Temkin and Pyzhev (1940) with alpha = 1/2 and the constants of Morud and Skogestad, AIChE J. 44
# (1998) 888, from memory; k1/k-1 recomputed, as printed.
@pytest.mark.parametrize(("T", "expected"), [(700.0, 1.426e-4), (750.0, 3.98e-5)])
def test_NH3_4_Temkin(T: float, expected: float) -> None:
    found = of_law("Temkin")
    assert exp(ln_K_of_laws(found.laws, found.table, T)[0]) == pytest.approx(expected, rel=4e-4)
    n2, h2, nh3, p = 0.22, 0.66, 0.04, 200.0
    k1, k2 = 1.79e4 * exp(-87_090.0 / 8.314 / T), 2.57e16 * exp(-198_464.0 / 8.314 / T)
    closed = k1 * n2 * p * (h2 * p) ** 1.5 / (nh3 * p) - k2 * nh3 * p / (h2 * p) ** 1.5
    F = np.array([n2, h2, nh3, 0.08])
    rate = rates(found.laws, found.table, F, T, p * 1e5, np.ones(1))[0]
    assert rate * 3.6 == pytest.approx(closed, rel=1e-6)


@pytest.mark.parametrize("alpha", [0.3, 0.55, 0.75])
def test_Temkin_with_free_alpha(alpha: float) -> None:
    """Closed form of Temkin and Pyzhev (1940) in the constants of `published_laws`."""
    species, _, feed = LAWS["Temkin"]
    found = chemistry(species, {"synthesis": temkin(alpha)}, feed)
    T, p, (n2, h2, nh3) = 720.0, 150.0, (0.22, 0.66, 0.04)
    k1, K = 1.79e4 * exp(-87_090.0 / 8.314 / T), 1.79e4 / 2.57e16 * exp(111_374.0 / 8.314 / T)
    ahead = k1 * n2 * p * ((h2 * p) ** 3 / (nh3 * p) ** 2) ** alpha
    back = k1 / K * ((nh3 * p) ** 2 / (h2 * p) ** 3) ** (1.0 - alpha)
    rate = rates(found.laws, found.table, np.array([n2, h2, nh3, 0.08]), T, p * 1e5, np.ones(1))[0]
    assert rate * 3.6 == pytest.approx(ahead - back, rel=1e-6)


# ME-1: Graaf et al. (1986), from memory; recomputed at 493.2 K, as printed.
def test_ME_1_equilibrium_constants_of_methanol() -> None:
    found = of_law("methanol")
    K1, K3 = np.exp(ln_K_of_laws(found.laws, found.table, 493.2))
    assert pytest.approx(4.2125e-5, rel=2e-5) == K1
    assert pytest.approx(6.6963e-3, rel=2e-5) == K3


# ME-2: Vanden Bussche and Froment, J. Catal. 161 (1996) 1, from memory; recomputed, 0.1 %: 50 bar, CO 4,
# CO2 3, H2 82 %, no water, the rest inert; mol/(kg s).
@pytest.mark.parametrize(("T", "expected"), [(493.2, (0.052609, 0.0079000)), (523.15, (0.064523, 0.037666))])
def test_ME_2_inlet_rates_of_methanol(T: float, expected: tuple[float, float]) -> None:
    found = of_law("methanol")
    F = np.array([4.0, 3.0, 82.0, 0.0, 0.0, 11.0])
    assert rates(found.laws, found.table, F, T, 50e5, np.ones(2)) == pytest.approx(expected, rel=1e-3)


@pytest.mark.parametrize("name", LAWS)
@pytest.mark.parametrize("T", [600.0, 760.0])
def test_no_net_rate_where_Q_is_the_law_s_own_K(name: str, T: float) -> None:
    """One product is made to fit; the others, and floored species, are as they are: closed form."""
    T = T - 100.0 if name == "methanol" else T
    found = of_law(name)
    y = np.array([0.3, 0.2, 0.25, 1e-3, 2e-3, 0.2])[: len(found.species)]
    for r in range(len(found.reactions)):
        fitted = fit_product(found, y, r, T, p=30e5)
        net = rates(found.laws, found.table, fitted, T, 30e5, np.ones(len(found.reactions)))[r]
        moved = fitted * np.where(found.laws.nu[r] > 0.0, 1.1, 1.0)
        off = rates(found.laws, found.table, moved, T, 30e5, np.ones(len(found.reactions)))[r]
        assert abs(net) < 1e-10 * abs(off), found.reactions[r]


def fit_product(found: CaseChemistry, y: np.ndarray, r: int, T: float, p: float) -> np.ndarray:
    """Amounts with sum 1 at which prod (y_i p/1 bar)^nu_i = K of reaction r; a product and an inert move."""
    nu = found.laws.nu[r]
    last, inert = int(np.flatnonzero(nu > 0.0)[-1]), int(np.flatnonzero(nu == 0.0)[-1])
    used = [i for i in np.flatnonzero(nu) if i != last]
    ln_K = ln_K_of_laws(found.laws, found.table, T)[r]
    ln_Q = sum(nu[i] * np.log(y[i] * p / 1e5) for i in used)
    fitted = y.copy()
    fitted[last] = np.exp((ln_K - ln_Q) / nu[last]) * 1e5 / p
    fitted[inert] = 1.0 - (fitted.sum() - fitted[inert])
    return fitted


def test_the_constants_of_the_reverse_shift_with_both_signs_swapped_are_refused() -> None:
    """A widely copied misprint: log10 K3 = 2073/T - 2.029, from memory; K and its slope both tell."""
    from reactorstage.errors import CaseProblems
    from tests.chemistry.published_laws import LOG10_K3, TEN, exp_of

    swapped = {"equilibrium constant": exp_of(-TEN * LOG10_K3[0], -TEN * LOG10_K3[1])}
    species, reactions, feed = LAWS["methanol"]
    wrong = {**reactions, "reverse shift": {**REVERSE_SHIFT, "backward": swapped}}
    with pytest.raises(CaseProblems) as caught:
        chemistry(species, wrong, feed)
    (problem,) = caught.value.problems
    assert "heat of reaction of -39.7 kJ/mol where the species data say 40.2 kJ/mol" in problem.message
    assert "times that of the Gibbs energies at 180 degC (351.3 against 0.002695 at 1 bar)" in problem.message


def test_K_of_methanol_from_CO_closes_the_loop() -> None:
    """CO + 2 H2 = CH3OH is from CO2 less the reverse shift: log10 K = 5139/T - 12.621, from memory."""
    from reactorstage.errors import CaseProblems
    from tests.chemistry.published_laws import TEN, exp_of

    species, reactions, feed = LAWS["methanol"]
    third = {
        "equation": "CO + 2 H2 <=> CH3OH",
        "rate per": "catalyst mass",
        "driven by": "partial pressure",
        "constant": "1e-6 mol/(kg s bar^3)",
        "backward": {
            "equilibrium constant": exp_of(-TEN * 12.621, TEN * 5_139.0, unit="bar^-2"),
            "may differ from Gibbs by": "25 %",
        },
    }
    found = chemistry(species, {**reactions, "from CO": third}, feed, "500 K")
    K = np.exp(ln_K_of_laws(found.laws, found.table, 500.0))
    assert K[2] == pytest.approx(K[0] / K[1], rel=1e-9)
    assert log10(K[0]) == pytest.approx(3_066.0 / 500.0 - 10.592, rel=1e-12)
    larger = exp_of(-TEN * 12.621 + log(1.35), TEN * 5_139.0, unit="bar^-2")
    third["backward"]["equilibrium constant"] = larger
    with pytest.raises(CaseProblems) as caught:
        chemistry(species, {**reactions, "from CO": third}, feed, "500 K")
    (problem,) = caught.value.problems
    assert re.search(r"together change nothing, but .* multiply to (1.35|0.7407), not 1", problem.message)


def test_each_law_names_its_source() -> None:
    for law in (EKLUND, COLLINA, FROM_CO2, REVERSE_SHIFT, temkin()):
        assert "from memory" in law["source"]
    assert set(METHANOL) >= {"CO", "CO2"} and set(SO2) >= {"SO2", "SO3"}


@pytest.mark.parametrize("name", LAWS)
def test_many_compositions_at_once(name: str) -> None:
    found = of_law(name)
    F = np.random.default_rng(1).uniform(0.01, 1.0, (len(found.species), 7))
    factor = np.ones(len(found.reactions))
    together = rates(found.laws, found.table, F, 650.0, 20e5, factor)
    singly = [rates(found.laws, found.table, column, 650.0, 20e5, factor) for column in F.T]
    np.testing.assert_allclose(together.T, singly, rtol=1e-12)
