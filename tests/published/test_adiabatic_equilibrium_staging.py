"""FO: Fogler, Elements of Chemical Reaction Engineering, 3rd ed. 1999, Ex. 8-8 and 8-9.

Data read: A <=> B in liquid, Ke(298 K) = 1e5, dH = -20 000 cal/mol, Cp 50 cal/(mol K) of both, R = 1.987
cal/(mol K), pure A at 300 K. Recomputed rows as printed; the book reads some answers from a graph.
"""

from __future__ import annotations

from math import exp, log

import numpy as np
import pytest

from reactorstage.chemistry import ln_K
from reactorstage.train.result import Rating
from tests.bed.build import Tree, changed, programme
from tests.published.bed_volume import isomerising, volume_for
from tests.published.ideal import R, arrhenius, isomers

CAL = R / 1.987
"""J in a calorie of a book with R = 1.987 cal/(mol K)."""

HEAT, CHANGE = -20_000.0 * CAL, R * (log(1e5) - 20_000.0 / 1.987 / 298.0)
SPECIES = isomers(HEAT, CHANGE, 50.0 * CAL)
T_TABLE = (350.0, 400.0, 425.0, 450.0, 475.0, 500.0)
KE = ((661.62, 661.6), (18.17, 18.17), (4.14, 4.14), (1.11, 1.11), (0.34, 0.34), (0.12, 0.12))
XE = ((0.998, 1.00), (0.948, 0.95), (0.805, 0.80), (0.526, 0.53), (0.255, 0.25), (0.106, 0.11))
"""Recomputed and book's values by T in K."""


def bed(species: Tree, T: float, volume: str) -> Tree:
    """40 mol/s of A; the example gives no kinetics, and its answers need none: these are chosen."""
    return isomerising(species, arrhenius(5.0, 5000.0, "mol/(m^3 s)", 400.0), T, "40 mol/s", volume)


def number(rating: Rating, name: str) -> float:
    value = rating.number(name)
    assert value is not None
    return value


@pytest.mark.parametrize(("T", "Ke"), list(zip(T_TABLE, KE, strict=True)))
def test_FO_1_equilibrium_constant(T: float, Ke: tuple[float, float]) -> None:
    """Recomputed as printed (one unit of the last digit); book one unit of its last digit."""
    table = programme(bed(SPECIES, 300.0, "1 m^3")).model.chemistry.table
    K = exp(float(ln_K(table, np.array([[-1.0, 1.0]]), T)[0]))
    recomputed, book = Ke
    assert pytest.approx(recomputed, abs=0.01) == K
    assert pytest.approx(book, abs=0.1 if T == 350.0 else 0.01) == K


@pytest.mark.parametrize(("T", "Xe"), list(zip(T_TABLE, XE, strict=True)))
def test_FO_1_equilibrium_conversion(T: float, Xe: tuple[float, float]) -> None:
    """A long bed, kept at T by 1e7 times the heat capacity; recomputed 0.001, book 0.01."""
    rating = programme(bed(isomers(HEAT, CHANGE, 5e8 * CAL), T, "1e6 m^3")).rate()
    assert number(rating, "bed 1.rise") == pytest.approx(0.0, abs=1e-4)
    X = number(rating, "bed 1.conversion of A")
    recomputed, book = Xe
    assert pytest.approx(recomputed, abs=1e-3) == X
    assert pytest.approx(book, abs=1e-2) == X


def long_bed() -> Rating:
    return programme(bed(SPECIES, 300.0, "1e5 m^3")).rate()


def test_FO_2_adiabatic_equilibrium_from_300_K() -> None:
    """Recomputed X 0.4010 (1e-4) and 460.4 K (0.05 K); book, from a graph, 0.41 and 465 K, 3 %."""
    X, T = number(long_bed(), "bed 1.conversion of A"), number(long_bed(), "bed 1.exit temperature")
    assert pytest.approx(0.4010, abs=1e-4) == X
    assert pytest.approx(460.4, abs=0.05) == T
    assert pytest.approx(0.41, rel=0.03) == X
    assert pytest.approx(465.0, rel=0.03) == T


def test_FO_2_equilibrium_temperature_is_reported_there() -> None:
    """The end of the long bed is where its approach to equilibrium vanishes."""
    assert number(long_bed(), "bed 1.approach to equilibrium of turn") == pytest.approx(0.0, abs=1e-3)


def test_FO_3_bed_1_of_the_train_and_its_cooler() -> None:
    """95 % of equilibrium, then to 350 K. Recomputed X 0.3809 (1e-3), 452.4 K (0.1 K), 204.8 kcal/s; the
    book rounds its temperature: 0.40, 460 K, 220 kcal/s.
    """
    wanted = 0.95 * number(long_bed(), "bed 1.conversion of A")
    cooled = {"cool": {"to": "350 K", "heat to": "unpriced"}}
    tree = changed(bed(SPECIES, 300.0, "1 m^3"), "train", 2, "effluent", to=[cooled])
    _, rating = volume_for(tree, wanted)
    assert number(rating, "bed 1.conversion of A") == pytest.approx(0.3809, abs=1e-3)
    assert number(rating, "bed 1.exit temperature") == pytest.approx(452.4, abs=0.1)
    assert number(rating, "effluent.heat removed") / (1e3 * CAL) == pytest.approx(204.8, abs=0.1)
