"""Groups of isomers: the published formulas, the fit, and that h, s, cp and K belong together."""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.chemistry import R_GAS, Species, inline_species, species_from_cantera, table_of, thermo
from reactorstage.chemistry.isomers import isomer_group

CP = [-37.4, 0.8671, -5.56e-4, 1.411e-7]
DIETHYLBENZENE = [
    inline_species(name, "C10H14", h, s, 1e5, CP)
    for name, h, s in (("ortho", -15.73e3, 435.8), ("meta", -21.00e3, 440.2), ("para", -20.37e3, 433.9))
]
"""Enthalpies and entropies of table TH-1 (data package `chemicals`); one heat capacity, invented, for all."""

GROUPS = {
    "diethylbenzenes": DIETHYLBENZENE,
    "butenes": [species_from_cantera(f"C4H8,{n}", n) for n in ("1-butene", "isobutene", "cis2-buten")],
    "butanes": [species_from_cantera(f"C4H10,{n}", n) for n in ("n-butane", "isobutane")],
}


def gibbs_of_group(isomers: list[Species], T: float) -> float:
    """-R T ln sum exp(-G_i/(R T)): Alberty and Gehrig, J. Phys. Chem. Ref. Data 14 (1985), from memory."""
    g = thermo.gibbs(table_of(isomers), T)
    return float(-R_GAS * T * np.log(np.sum(np.exp(-(g - g.min()) / (R_GAS * T)))) + g.min())


@pytest.mark.parametrize("name", GROUPS)
def test_the_fit_is_the_group_within_a_joule(name: str) -> None:
    isomers = GROUPS[name]
    group = table_of([isomer_group("group", isomers)])
    for T in np.linspace(200.0, 1500.0, 131):
        assert thermo.gibbs(group, T)[0] == pytest.approx(gibbs_of_group(isomers, T), abs=1.0)
        slope = (gibbs_of_group(isomers, T * 1.0001) - gibbs_of_group(isomers, T * 0.9999)) / (2e-4 * T)
        assert -thermo.s(group, T)[0] == pytest.approx(slope, abs=0.02)


@pytest.mark.parametrize("name", GROUPS)
def test_enthalpy_entropy_and_heat_capacity_of_the_group_belong_together(name: str) -> None:
    """cp = dh/dT = T ds/dT by complex step, and no jump where ranges meet."""
    one = isomer_group("group", GROUPS[name])
    group = table_of([one])
    for T in (250.0, 340.0, 500.0, 800.0, 1100.0, 1700.0):
        cp = thermo.cp(group, T)[0]
        assert thermo.h(group, T + 1e-20j)[0].imag / 1e-20 == pytest.approx(cp, rel=1e-12)
        assert thermo.s(group, T + 1e-20j)[0].imag / 1e-20 * T == pytest.approx(cp, rel=1e-12)
    for edge in one.edges[1:3]:
        below, above = edge, np.nextafter(edge, 1e9)
        assert thermo.h(group, above)[0] == pytest.approx(thermo.h(group, below)[0], abs=1e-4)
        assert thermo.s(group, above)[0] == pytest.approx(thermo.s(group, below)[0], abs=1e-7)
        assert thermo.cp(group, above)[0] == pytest.approx(thermo.cp(group, below)[0], abs=0.05)


def test_alike_isomers_differ_from_one_by_the_entropy_of_mixing() -> None:
    """Closed form: n isomers of equal data are one with R ln n more entropy."""
    twins = [inline_species(name, "C10H14", -2e4, 435.0, 1e5, CP) for name in ("a", "b", "c")]
    group, one = table_of([isomer_group("group", twins)]), table_of(twins[:1])
    for T in (298.15, 500.0, 900.0):
        assert thermo.s(group, T)[0] - thermo.s(one, T)[0] == pytest.approx(R_GAS * np.log(3.0), abs=1e-6)
        assert thermo.h(group, T)[0] == pytest.approx(thermo.h(one, T)[0], abs=1e-3)
        assert thermo.cp(group, T)[0] == pytest.approx(thermo.cp(one, T)[0], abs=1e-5)


def test_K_to_the_group_is_the_sum_of_those_to_its_members() -> None:
    """Closed form: sum of exp(-dG_i/(R T)) of making each isomer from the same reactants."""
    group, members = table_of([isomer_group("group", DIETHYLBENZENE)]), table_of(DIETHYLBENZENE)
    for T in (450.0, 673.15):
        made = np.exp(-thermo.gibbs(members, T) / (R_GAS * T)).sum()
        assert np.exp(-thermo.gibbs(group, T)[0] / (R_GAS * T)) == pytest.approx(made, rel=1e-5)


def test_what_is_no_group() -> None:
    with pytest.raises(ValueError, match="at least two members"):
        isomer_group("group", DIETHYLBENZENE[:1])
    other = inline_species("other", "C10H12", 0.0, 400.0, 1e5, CP)
    with pytest.raises(ValueError, match="other is no isomer of ortho: their formulas differ"):
        isomer_group("group", [DIETHYLBENZENE[0], other])
    cold = inline_species("cold", "C10H14", 0.0, 400.0, 1e5, CP, (100.0, 150.0))
    with pytest.raises(ValueError, match="share no range of temperature"):
        isomer_group("group", [DIETHYLBENZENE[0], cold])
