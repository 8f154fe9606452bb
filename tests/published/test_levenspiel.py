"""Levenspiel, Chemical Reaction Engineering, 3rd ed. 1999, ch. 9: liquid A <=> R (all book data from memory).

k1 = exp(17.34 - 48900/RT), k2 = exp(42.04 - 124200/RT) 1/min, R = 8.314, C_A0 4 mol/L, 1000 mol/min,
slope 72 K. The liquid becomes an ideal gas with rates driven by mole fractions. Optima of two and three beds
with cooling between them (OPT) were recomputed in two ways; none is published.
"""

from __future__ import annotations

from math import exp

import numpy as np
import pytest

from reactorstage.chemistry import ln_K
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import HEAD, Tree, programme
from tests.published.ideal import R, arrhenius, isomers

BOOK = R / 8.314
HEAT, CHANGE = -(124_200.0 - 48_900.0) * BOOK, (17.34 - 42.04) * R
SPECIES = isomers(HEAT, CHANGE, -HEAT / 72.0)
REACTION = {
    "equation": "A <=> B",
    "rate per": "bed volume",
    "driven by": "mole fraction",
    "constant": arrhenius(4000.0 * exp(17.34), 48_900.0 / 8.314, "mol/(m^3 min)"),
}
NU = np.array([[-1.0, 1.0]])


def beds(volumes: list[float], T_in: list[float], free: bool = False) -> Tree:
    """A train with coolers in between, volumes in L and inlet temperatures in K, all free or none."""
    train: list[Tree] = []
    for b, (volume, T) in enumerate(zip(volumes, T_in, strict=True), start=1):
        step = "heat" if b == 1 else "cool"
        device = {"holds": f"bed {b}.inlet temperature", "heat from" if b == 1 else "heat to": "unpriced"}
        steps = [{"take": "fresh"}] if b == 1 else []
        train.append({"entry" if b == 1 else f"gap {b - 1}": [*steps, {step: device}]})
        bed: Tree = {"catalyst": f"{volume!r} L", "inlet temperature": f"{T!r} K"}
        if free:
            bed["catalyst"] = {"now": f"{volume!r} L", "from": "1 L", "to": "3000 L"}
            bed["inlet temperature"] = {"now": f"{T!r} K", "from": "270 K", "to": "370 K"}
        if b == 1:
            bed["inlet pressure"] = "1 bar(a)"
        train.append({f"bed {b}": {**bed, "bulk density": "1000 kg/m^3", "pressure drop factor": 0}})
    feed = {"flow": "1000 mol/min", "temperature": "280 K", "composition": {"A": "100 %"}}
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": SPECIES,
        "fluid": {"density": "ideal gas", "viscosity": "1e-3 Pa s"},
        "reactions": {"turn": REACTION},
        "feeds": {"fresh": feed},
        "train": [*train, {"effluent": []}],
        "limits": {"done": {"of": "train.conversion of A", "at least": "0 %"}},
    }


def test_AR_1_equilibrium_constant_at_298_K() -> None:
    """Book 300, recomputed 299.8 from dG298 = -14130 J/mol."""
    assert exp(_ln_K(gibbs_data(298.0), 298.0)) == pytest.approx(299.8, rel=1e-3)


@pytest.mark.parametrize(("T", "X"), [(55, 0.949), (65, 0.892), (75, 0.792), (85, 0.648), (95, 0.480)])
def test_AR_2_equilibrium_conversions(T: float, X: float) -> None:
    """From dG298 and dH298 (recomputed; book from memory, 0.791 at 75 degC); 298.15 K taken for 298."""
    K = exp(_ln_K(gibbs_data(298.15), T + 273.15))
    assert pytest.approx(X, abs=1.5e-3) == K / (1.0 + K)


def gibbs_data(T: float) -> Tree:
    """dG -14130 and dH -75300 J/mol at T."""
    return isomers(-75_300.0, (-75_300.0 + 14_130.0) / T, 100.0)


def _ln_K(species: Tree, T: float) -> float:
    tree = {**beds([1.0], [300.0]), "species": species}
    return float(ln_K(programme(tree).model.chemistry.table, NU, T)[0])


def test_AR_5_adiabatic_plug_flow_from_its_best_inlet_temperature() -> None:
    """1692.89 L, 15.73 -> 73.33 degC (recomputed, 0.01 %); book (from memory) 1720 L, 16 -> 73.5 degC."""
    rating = programme(beds([1692.885], [288.877])).rate()
    assert rating.number("train.conversion of A") == pytest.approx(0.8, abs=1e-5)
    assert rating.number("bed 1.exit temperature") - 273.15 == pytest.approx(73.33, abs=0.005)
    profile = programme(beds([3000.0], [288.877])).rate().profiles[0]
    volume = np.interp(0.8, 1.0 - profile.F[:, 0] / profile.F[0, 0], profile.w)
    assert volume == pytest.approx(1692.885, rel=1e-4)
    assert volume == pytest.approx(1720.0, rel=0.02)


OPTIMA = {
    "AR-5": ([1692.885], [288.877], 0.8),
    "OPT-2": ([179.861, 416.586], [326.686, 323.178], 0.8),
    "OPT-3": ([140.314, 313.305, 629.837], [331.085, 326.490, 321.702], 0.9),
}


@pytest.mark.parametrize("check", list(OPTIMA))
def test_conversion_is_stationary_at_the_recomputed_optima(check: str) -> None:
    """Konoki's conditions as derivatives: equal worth of catalyst in every bed, none of inlet temperatures.

    Temperatures are known to 0.001 K, which at these net rates is up to 4e-4 of the worths.
    """
    volumes, T_in, X = OPTIMA[check]
    train: TrainProgramme = programme(beds(volumes, T_in, free=True))
    evaluation = train.final(np.array([number.now for number in train.numbers]))
    margin, slopes = evaluation.margin[0], evaluation.margin_dx[0]
    fed = evaluation.weight[0]
    assert margin / fed == pytest.approx(X, abs=1e-5)
    names = [number.name for number in train.numbers]
    per_litre = [slopes[names.index(f"bed {b + 1}.catalyst")] for b in range(len(volumes))]
    per_kelvin = [slopes[names.index(f"bed {b + 1}.inlet temperature")] / fed for b in range(len(volumes))]
    assert per_litre == pytest.approx([per_litre[0]] * len(volumes), rel=5e-4)
    assert np.abs(per_kelvin).max() < 2e-6


def test_OPT_2_rate_is_equal_on_both_sides_of_the_cooler() -> None:
    """0.789437 mol/(L min) (recomputed)."""
    volumes, T_in, _ = OPTIMA["OPT-2"]
    first, second = programme(beds(volumes, T_in)).rate().profiles
    assert first.F[-1, 1] / first.F[0, 0] == pytest.approx(0.51535, abs=1e-5)
    for r in (first.r[-1, 0], second.r[0, 0]):
        assert r * 1000.0 * 60.0 / 1000.0 == pytest.approx(0.789437, rel=1e-4)
