"""Fogler, Elements of Chemical Reaction Engineering: adiabatic equilibrium, n-butane isomerisation.

FO: 3rd ed. 1999, Ex. 8-8 and 8-9 (data read; recomputed with R = 1.987 cal/(mol K)).
NB: 4th ed. 2006, Ex. 8-3 (constants and exit at 360 K read; feed temperature and volumes from memory).
Liquids become ideal gases with rates driven by mole fractions, which here are concentrations over C_A0.
"""

from __future__ import annotations

from math import exp, log

import numpy as np
import pytest

from reactorstage.chemistry import ln_K
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import Tree, one_bed, programme
from tests.published.ideal import R, arrhenius, isomers

CAL = R / 1.987
"""J per calorie of a book that takes R = 1.987 cal/(mol K)."""

FOGLER = isomers(-20_000.0 * CAL, R * (log(1e5) - 20_000.0 / 1.987 / 298.0), 50.0 * CAL)
NU = np.array([[-1.0, 1.0]])


def turning(species: Tree, constant: Tree, T: float, flow: str, volume: str, **more: object) -> Tree:
    """A <=> B in one bed, r = k (y_A - y_B / K) per bed volume."""
    reaction = {
        "equation": "A <=> B",
        "rate per": "bed volume",
        "driven by": "mole fraction",
        "constant": constant,
    }
    feed = {"flow": flow, "temperature": f"{T!r} K", "composition": {"A": "100 %"}}
    return one_bed(species, {"turn": reaction}, feed, volume, **more)


@pytest.mark.parametrize(
    ("T", "Ke", "Xe"),
    [
        (350, 661.62, 0.998),
        (400, 18.17, 0.948),
        (425, 4.14, 0.805),
        (450, 1.11, 0.526),
        (475, 0.34, 0.255),
        (500, 0.12, 0.106),
    ],
)
def test_FO_1_equilibrium_constants(T: float, Ke: float, Xe: float) -> None:
    """Recomputed rows of FO-1, as printed."""
    table = programme(
        turning(FOGLER, {"is": "1 mol/(m^3 s)"}, 300.0, "40 mol/s", "1 m^3")
    ).model.chemistry.table
    K = exp(float(ln_K(table, NU, float(T))[0]))
    assert pytest.approx(Ke, abs=0.006) == K
    assert pytest.approx(Xe, abs=6e-4) == K / (1.0 + K)


def test_FO_2_adiabatic_equilibrium_from_300_K() -> None:
    """X 0.4010 and 460.4 K (recomputed; the book reads 0.41 and 465 K from a graph)."""
    rating = programme(turning(FOGLER, {"is": "9 mol/(m^3 s)"}, 300.0, "40 mol/s", "1000 m^3")).rate()
    assert rating.number("bed 1.conversion of A") == pytest.approx(0.4010, abs=1e-4)
    assert rating.number("bed 1.exit temperature") == pytest.approx(460.4, abs=0.05)


def test_FO_3_first_bed_to_95_percent_of_equilibrium_and_cooling_to_350_K() -> None:
    """X 0.3809, 452.4 K, duty 204.8 kcal/s (recomputed; book 0.40, 460 K, 220 kcal/s)."""
    tree = turning(FOGLER, arrhenius(5.0, 5000.0, "mol/(m^3 s)", 400.0), 300.0, "40 mol/s", "10 m^3")
    volume = volume_for(programme(longer(tree)), 0.95 * 0.40100)
    tree["train"][1]["bed 1"]["catalyst"] = f"{volume!r} m^3"
    tree["train"][2]["effluent"] = [{"cool": {"to": "350 K", "heat to": "unpriced"}}]
    rating = programme(tree).rate()
    assert rating.number("bed 1.conversion of A") == pytest.approx(0.3809, abs=1e-3)
    assert rating.number("bed 1.exit temperature") == pytest.approx(452.4, abs=0.1)
    assert rating.number("effluent.heat removed") / (1000.0 * CAL) == pytest.approx(204.8, abs=0.1)


def longer(tree: Tree) -> Tree:
    """The same with ten times the catalyst."""
    value = float(tree["train"][1]["bed 1"]["catalyst"].split()[0])
    bed = {**tree["train"][1]["bed 1"], "catalyst": f"{10.0 * value!r} m^3"}
    return {**tree, "train": [tree["train"][0], {"bed 1": bed}, tree["train"][2]]}


def volume_for(train: TrainProgramme, X: float) -> float:
    """Bed volume at which the profile of a long bed reaches X (bulk density 1000 kg/m3)."""
    profile = train.rate().profiles[0]
    conversion = 1.0 - profile.F[:, 0] / profile.F[0, 0]
    return float(np.interp(X, conversion, profile.w) / 1000.0)


def butane(volume: str) -> Tree:
    """k = 31.1 exp[7906 (T - 360)/(360 T)] 1/h, Kc = 3.03 exp[-830.3 (T - 333)/(333 T)], T = 330 + 43.3 X."""
    heat = -830.3 * R
    species = isomers(heat, R * (log(3.03) - 830.3 / 333.0), -heat / 43.3)
    constant = arrhenius(31.1 * 9.3, 7906.0, "kmol/(m^3 h)", 360.0)
    return turning(species, constant, 330.0, "146.7 kmol/h", volume)


def test_NB_1_adiabatic_equilibrium() -> None:
    """X 0.7142 at 360.9 K (recomputed)."""
    rating = programme(butane("400 m^3")).rate()
    assert rating.number("bed 1.conversion of A") == pytest.approx(0.7142, abs=1e-4)
    assert rating.number("bed 1.exit temperature") == pytest.approx(360.9, abs=0.05)


@pytest.mark.parametrize(
    ("X", "volume", "book", "within"), [(0.70, 2.500, 2.6, 0.05), (0.40, 1.152, 1.15, 0.05)]
)
def test_NB_2_and_NB_3_plug_flow_volumes(X: float, volume: float, book: float, within: float) -> None:
    """Recomputed within 0.5 %; the book's volumes (from memory) within 5 %."""
    found = volume_for(programme(butane("10 m^3")), X)
    assert found == pytest.approx(volume, rel=5e-3)
    assert found == pytest.approx(book, rel=within)


def test_NB_2_exit_temperature() -> None:
    """360.3 K (recomputed; book 360 K, read)."""
    rating = programme(butane("2.500 m^3")).rate()
    assert rating.number("bed 1.conversion of A") == pytest.approx(0.70, abs=1e-3)
    assert rating.number("bed 1.exit temperature") == pytest.approx(360.3, abs=0.05)
