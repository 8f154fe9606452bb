"""ME-3 to ME-5: methanol on a bench scale, Vanden Bussche and Froment, A steady-state kinetic model for
methanol synthesis and the water gas shift reaction, J. Catal. 161 (1996) 1, Table 3 and Fig. 5.

34.8 g of catalyst over 0.15 m, 493.2 K, 50 bar, 2.8e-5 kg/s of CO 4, CO2 3, H2 82 % and an inert that the
paper does not name, argon here; ideal gas, NASA polynomials. Inputs and constants from memory of the paper.
ME-1 and ME-2, constants and rates: `tests/chemistry/test_published_laws.py`.
"""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest

from reactorstage.train.result import Rating
from tests.bed.build import Tree, one_bed, programme
from tests.chemistry.published_laws import LAWS, gas

SHOWN = ("CO", "CH3OH", "CO2", "H2O")


@cache
def bench() -> Rating:
    species, reactions, composition = LAWS["methanol"]
    return rated(species, reactions, composition, "0.0348 kg")


def rated(species: Tree, reactions: Tree, composition: Tree, catalyst: str) -> Rating:
    feed = {"flow": "2.8e-5 kg/s", "temperature": "493.2 K", "composition": composition}
    return programme(one_bed(species, reactions, feed, catalyst, "50 bar(a)")).rate()


def percent(rating: Rating) -> np.ndarray:
    """Mole % of SHOWN at the exit."""
    F = rating.profiles[0].F[-1]
    return 100.0 * F[[rating.species.index(name) for name in SHOWN]] / F.sum()


def test_ME_3_adiabatic_bench_reactor() -> None:
    """Recomputed, 0.05 K and 0.002 mol %."""
    assert bench().profiles[0].T[-1] == pytest.approx(553.18, abs=0.05)
    assert percent(bench()) == pytest.approx([2.996, 2.244, 2.074, 1.061], abs=0.002)


def test_ME_3_along_the_bed() -> None:
    """CO is most at 3.7 mm and 95 % of the rise are reached by 35 mm (recomputed, as printed)."""
    along = bench().profiles[0]
    y = along.F / along.F.sum(axis=1, keepdims=True)
    mm = 150.0 * along.w / along.w[-1]
    assert mm[np.argmax(y[:, 0])] == pytest.approx(3.7, abs=0.1)
    assert np.interp(0.95, (along.T - along.T[0]) / np.ptp(along.T), mm) == pytest.approx(35.0, abs=0.5)


def test_ME_4_adiabatic_equilibrium_is_reported() -> None:
    """Of what enters, by the Gibbs energies: 556.68 K (recomputed with Cantera, 0.05 K)."""
    assert bench().number("bed 1.equilibrium temperature") == pytest.approx(556.68, abs=0.05)


def test_ME_4_adiabatic_equilibrium_is_where_a_long_bed_ends() -> None:
    """The law with equilibrium from Gibbs energies: 556.68 K, 0.002 mol % (recomputed with Cantera)."""
    species, reactions, composition = LAWS["methanol"]
    gibbs = {name: {**law, "backward": "from Gibbs energies"} for name, law in reactions.items()}
    rating = rated(species, gibbs, composition, "3000 kg")
    assert rating.profiles[0].T[-1] == pytest.approx(556.68, abs=0.05)
    assert percent(rating) == pytest.approx([2.913, 2.363, 2.056, 1.086], abs=0.002)


def test_ME_4_the_law_rests_at_its_own_constants() -> None:
    """The bench reactor ends where a long bed does, 3.5 K below the Gibbs energies: the constants of Graaf et
    al. (from memory) lie up to 16 % off those of the NASA polynomials. Not to be mixed.
    """
    long = rated(*LAWS["methanol"], "3000 kg")
    assert long.profiles[0].T[-1] == pytest.approx(bench().profiles[0].T[-1], abs=0.01)
    assert long.number("bed 1.approach to equilibrium of from CO2") == pytest.approx(0.0, abs=1e-3)


def test_ME_5_against_the_figure_of_the_paper() -> None:
    """Exit of Fig. 5 550.4 K (from memory), 3 K: with argon, which takes up little heat, 2.8 K hotter."""
    assert bench().profiles[0].T[-1] == pytest.approx(550.4, abs=3.0)


def test_ME_5_the_inert_makes_the_difference() -> None:
    """With nitrogen 0.8 K, with methane 2.3 K colder than with argon (frozen), 0.5 K above the figure."""
    species, reactions, composition = LAWS["methanol"]
    others = {name: data for name, data in species.items() if name != "Ar"}
    shares = {name: share for name, share in composition.items() if name != "Ar"}
    ends = [
        rated({**others, **gas(inert)}, reactions, {**shares, inert: "rest"}, "0.0348 kg").profiles[0].T[-1]
        for inert in ("N2", "CH4")
    ]
    assert ends == pytest.approx([552.40, 550.89], abs=0.05)
    assert ends[1] == pytest.approx(550.4, abs=0.6)
