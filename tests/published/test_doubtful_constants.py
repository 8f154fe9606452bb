"""LEB-1, CU-6: published constants that are no target: what the tool makes of them.

LEB-1: Luyben, Design and control of the ethyl benzene process, AIChE J. 57 (2011) 655. CU-6: Gera, Panahi,
Skogestad, Kaistha, Ind. Eng. Chem. Res. (2013). All numbers from memory and unconfirmed.
"""

from __future__ import annotations

from math import exp, log

import pytest

from reactorstage.chemistry.rates import ln_k
from reactorstage.errors import CaseProblems
from reactorstage.train.chemistry import CaseChemistry, read_chemistry
from tests.bed.build import Tree, load, one_bed
from tests.chemistry.published_laws import exp_of
from tests.published.aromatics import species

PER_SECOND = [(1.528e6, 71_160.0), (2.778e7, 83_680.0), (416.7, 62_760.0)]
"""kmol/(s m3) with kmol/m3, J/mol."""

PER_HOUR = [(5.5e9, 17.0), (1.0e11, 20.0), (1.5e6, 15.0)]
"""The same per hour, kcal/mol."""


def chemistry(names: tuple[str, ...], reaction: Tree) -> CaseChemistry:
    feed = {"flow": "1 mol/s", "temperature": "500 K", "composition": {"benzene": "100 %"}}
    common = {"rate per": "bed volume", "driven by": "concentration"}
    return read_chemistry(load(one_bed(species(*names), {"one": common | reaction}, feed, "1 m^3")))


@pytest.mark.parametrize(("second", "hour"), list(zip(PER_SECOND, PER_HOUR, strict=True)))
def test_LEB_1_constants_in_both_units(second: tuple[float, float], hour: tuple[float, float]) -> None:
    """The prefactors per second are round numbers per hour, the energies round numbers in kcal (0.1 %)."""
    k = []
    for (prefactor, E), unit, energy in ((second, "s", "J/mol"), (hour, "h", "kcal/mol")):
        constant = {
            "is": f"{prefactor!r} kmol/(m^3 {unit} (kmol/m^3)^2)",
            "activation energy": f"{E!r} {energy}",
        }
        found = chemistry(
            ("benzene", "ethylene", "ethylbenzene"),
            {"equation": "benzene + ethylene => ethylbenzene", "constant": constant},
        )
        k.append([ln_k(found.laws, T)[0] for T in (480.0, 1e9)])
    assert k[0][1] == pytest.approx(k[1][1], abs=1e-3)
    assert k[0][0] - k[0][1] == pytest.approx(k[1][0] - k[1][1], rel=1e-3)
    assert exp(k[0][1]) == pytest.approx(1e-3 * second[0], rel=1e-4)


def test_CU_6_a_transalkylation_that_no_heat_of_reaction_explains() -> None:
    """Forward 2.529e8 exp(-100000/RT), reverse 3.877e9 exp(-127240/RT): -27 kJ/mol where formation enthalpies
    (TH-1) give about +2. As the K of a law it is refused, with both heats.
    """
    K = exp_of(log(2.529e8 / 3.877e9), 27_240.0 / 8.314)
    reaction = {
        "equation": "diisopropylbenzene + benzene <=> 2 cumene",
        "constant": {"is": "2.529e8 kmol/(m^3 s (kmol/m^3)^2)", "activation energy": "100 kJ/mol"},
        "backward": {"equilibrium constant": K, "may differ from Gibbs by": "10000 %"},
    }
    with pytest.raises(CaseProblems) as caught:
        chemistry(("benzene", "cumene", "diisopropylbenzene"), reaction)
    (problem,) = caught.value.problems
    assert (
        "its slope is that of a heat of reaction of -27.2 kJ/mol where the species data say 2."
        in problem.message
    )
