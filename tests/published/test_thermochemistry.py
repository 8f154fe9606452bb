"""TH-1 to TH-3: species data of two open sources, as printed, against cases that use them.

TH-1 and TH-2: defaults of the open data package `chemicals` 1.5.2 (formation enthalpies, entropies, TRC heat
capacities), recomputed. TH-3: NASA polynomials of Cantera 3.2 (nasa_gas.yaml; McBride, Gordon and Reno, NASA
TM-4513, 1993), recomputed; their heats and constants stand in `tests/chemistry/test_reaction.py`.
"""

from __future__ import annotations

from math import log

import pytest
from chemicals import Hfg, Pc, S0g, Tb, Tc, heat_capacity, omega

from reactorstage.chemistry import cp, h, heat_of_reaction, ln_K, s, species_from_cantera
from reactorstage.train.chemistry import CaseChemistry, read_chemistry
from tests.bed.build import Tree, load, one_bed
from tests.published.aromatics import TABLE, species
from tests.published.ideal import R, constant

TH_1: dict[str, tuple[str, tuple[float, ...], tuple[float | None, ...]]] = {
    "ethylene": ("74-85-1", (169.4, 282.4, 50.42, 0.087), (52.56, 219.3, 43.0, 62.6, 77.6)),
    "propylene": ("115-07-1", (225.5, 364.2, 45.55, 0.146), (20.37, 266.7, 64.7, 95.1, 119.1)),
    "benzene": ("71-43-2", (353.2, 562.0, 49.07, 0.211), (83.18, 269.2, 83.1, 139.1, 176.9)),
    "toluene": ("108-88-3", (383.7, 591.8, 41.26, 0.266), (50.41, 321.1, 104.5, 170.6, 217.3)),
    "ethylbenzene": ("100-41-4", (409.3, 617.1, 36.22, 0.305), (29.90, 360.6, 128.3, 206.3, 261.9)),
    "o-DEB": ("135-01-3", (456.6, 668.0, 28.80, 0.340), (-15.73, 435.8, 183.7, 279.0, 348.1)),
    "m-DEB": ("141-93-5", (454.2, 657.1, 29.19, 0.393), (-21.00, 440.2, 178.0, 276.2, 346.7)),
    "p-DEB": ("105-05-5", (457.1, 657.9, 28.03, 0.409), (-20.37, 433.9, 177.3, 274.7, 345.5)),
    "cumene": ("98-82-8", (425.6, 631.0, 32.09, 0.326), (4.00, 386.5, 160.7, 251.9, 312.2)),
    "m-DIPB": ("99-62-7", (476.1, 664.4, 23.49, 0.486), (-77.60, 500.0, None, None, None)),
    "p-DIPB": ("100-18-5", (483.4, 675.0, 23.00, 0.482), (-77.60, 489.0, None, None, None)),
    "o-DIPB": ("577-55-9", (477.9, 669.0, 24.46, 0.474), (None, None, None, None, None)),
    "n-propylbenzene": ("103-65-1", (432.4, 638.4, 32.00, 0.344), (7.90, 397.9, 153.4, 242.2, 305.2)),
    "SO2": ("7446-09-5", (263.1, 430.6, 78.87, 0.256), (-296.80, 248.2, 40.1, 46.9, 51.6)),
    "SO3": ("7446-11-9", (317.6, 491.0, 82.07, 0.412), (-395.70, 256.8, 51.0, 63.6, 71.2)),
    "NH3": ("7664-41-7", (239.8, 405.6, 113.63, 0.256), (-45.56, 192.8, 35.7, 42.0, 48.4)),
    "CH3OH": ("67-56-1", (337.6, 513.4, 82.16, 0.562), (-200.70, 239.9, 44.2, 59.7, 73.9)),
}
"""CAS number; Tb K, Tc K, Pc bar, omega; dHf kJ/mol, S J/(mol K), Cp J/(mol K) at 300, 500, 700 K."""


def in_kilo(value: float | None) -> float | None:
    return None if value is None else value / 1e3


def trc_capacity(cas: str, T: float) -> float | None:
    """J/(mol K); None where the package has no TRC coefficients."""
    table = heat_capacity.TRC_gas_data
    if cas not in table.index:
        return None
    return float(heat_capacity.TRCCp(T, *table.loc[cas][[f"a{k}" for k in range(8)]]))


def chemistry_of(known: Tree, equation: str) -> CaseChemistry:
    """Of a case with these species and one reaction."""
    first = next(iter(known))
    reaction = {
        "equation": equation,
        "rate per": "catalyst mass",
        "driven by": "mole fraction",
        "constant": "1 mol/(kg s)",
    }
    feed = {"flow": "1 mol/s", "temperature": "300 K", "composition": {first: "100 %"}}
    return read_chemistry(load(one_bed(known, {"one": reaction}, feed, "1 kg")))


@pytest.mark.parametrize("name", TH_1)
def test_TH_1_data_are_those_of_the_package(name: str) -> None:
    """One unit of the last printed digit; None where the package has nothing."""
    cas, constants, ideal = TH_1[name]
    found = (Tb(cas), Tc(cas), Pc(cas) / 1e5, omega(cas))
    for value, printed, digit in zip(found, constants, (0.1, 0.1, 0.01, 0.001), strict=True):
        assert value == pytest.approx(printed, abs=digit)
    rows = [in_kilo(Hfg(cas)), S0g(cas), *(trc_capacity(cas, T) for T in (300.0, 500.0, 700.0))]
    for value, printed, digit in zip(rows, ideal, (0.01, 0.1, 0.1, 0.1, 0.1), strict=True):
        assert (value is None) == (printed is None)
        assert value is None or value == pytest.approx(printed, abs=digit)


PRINTED = {"diethylbenzene": "p-DEB", "diisopropylbenzene": "p-DIPB"}
"""What stands for the lumps of the examples."""


@pytest.mark.parametrize("name", TABLE)
def test_TH_1_species_of_the_examples(name: str) -> None:
    """Inline species of the alkylation examples through a case: enthalpy, entropy and Cp as printed."""
    table = chemistry_of({**species(name), "twin": species(name)[name]}, f"{name} <=> twin").table
    _, _, (enthalpy, entropy, *capacities) = TH_1[PRINTED.get(name, name)]
    assert enthalpy is not None
    assert h(table, 298.15)[0] == pytest.approx(1e3 * enthalpy, abs=1e-6)
    assert s(table, 298.15)[0] == pytest.approx(entropy, abs=1e-9)
    for T, printed in zip((300.0, 500.0, 700.0), capacities, strict=True):
        assert printed is None or cp(table, T)[0] == pytest.approx(printed, abs=1e-9)


FORMULAS = {
    "B": ("C6H6", "71-43-2"),
    "E": ("C2H4", "74-85-1"),
    "P": ("C3H6", "115-07-1"),
    "EB": ("C8H10", "100-41-4"),
    "C": ("C9H12", "98-82-8"),
    "o-DEB": ("C10H14", "135-01-3"),
    "m-DEB": ("C10H14", "141-93-5"),
    "p-DEB": ("C10H14", "105-05-5"),
    "m-DIPB": ("C12H18", "99-62-7"),
    "p-DIPB": ("C12H18", "100-18-5"),
    "SO2": ("SO2", "7446-09-5"),
    "SO3": ("SO3", "7446-11-9"),
    "O2": ("O2", "7782-44-7"),
    "N2": ("N2", "7727-37-9"),
    "H2": ("H2", "1333-74-0"),
    "NH3": ("NH3", "7664-41-7"),
    "CO": ("CO", "630-08-0"),
    "CO2": ("CO2", "124-38-9"),
    "H2O": ("H2O", "7732-18-5"),
    "CH3OH": ("CH4O", "67-56-1"),
    "C2H2": ("C2H2", "74-86-2"),
}


def from_package(*names: str) -> Tree:
    """Inline species; the heat capacity does not matter at 298.15 K."""
    return {
        name: constant(FORMULAS[name][0], Hfg(FORMULAS[name][1]), S0g(FORMULAS[name][1]), 100.0)
        for name in names
    }


# one unit of the last printed digit
@pytest.mark.parametrize(
    ("equation", "heat", "gibbs", "ln_of_K"),
    [
        ("B + E <=> EB", -105.84, "-67.71", "27.31"),
        ("EB + E <=> o-DEB", -98.19, "-55.2", "22.3"),
        ("EB + E <=> m-DEB", -103.46, "-61.8", "24.9"),
        ("EB + E <=> p-DEB", -102.83, "-59.3", "23.9"),
        ("o-DEB + B <=> 2 EB", -7.65, "-12.5", "5.0"),
        ("m-DEB + B <=> 2 EB", -2.38, "-5.9", "2.4"),
        ("p-DEB + B <=> 2 EB", -3.01, "-8.4", "3.4"),
        ("B + P <=> C", -99.55, "-55.01", "22.19"),
        ("C + P <=> m-DIPB", -101.97, "-56.3", "22.7"),
        ("C + P <=> p-DIPB", -101.97, "-53.0", "21.4"),
        ("m-DIPB + B <=> 2 C", 2.42, "1.3", "-0.5"),
        ("p-DIPB + B <=> 2 C", 2.42, "-2.0", "0.8"),
        ("SO2 + 0.5 O2 <=> SO3", -98.90, "-70.87", "28.59"),
        ("N2 + 3 H2 <=> 2 NH3", -91.12, "-32.05", "12.93"),
        ("CO2 + 3 H2 <=> CH3OH + H2O", -49.05, "3.78", "-1.53"),
        ("CO + 2 H2 <=> CH3OH", -90.17, "-24.82", "10.01"),
        ("CO2 + H2 <=> CO + H2O", 41.13, "28.60", "-11.54"),
        ("C2H2 + H2 <=> E", -175.76, "-142.28", "57.39"),
    ],
)
def test_TH_2_reactions_at_298_K(equation: str, heat: float, gibbs: str, ln_of_K: str) -> None:
    """kJ/mol, through a case with inline species."""
    names = [word for word in equation.split() if word in FORMULAS]
    found = chemistry_of(from_package(*names), equation)
    nu = found.laws.nu
    lnK = float(ln_K(found.table, nu, 298.15)[0])
    assert heat_of_reaction(found.table, nu, 298.15)[0] / 1e3 == pytest.approx(heat, abs=0.01)
    assert lnK == pytest.approx(float(ln_of_K), abs=digit_of(ln_of_K))
    assert -R * 298.15 * lnK / 1e3 == pytest.approx(float(gibbs), abs=digit_of(gibbs))


def digit_of(printed: str) -> float:
    """One unit of the last digit."""
    return float(10.0 ** -len(printed.partition(".")[2]))


STATISTICAL = {"o": 6.0, "m": 6.0, "p": 12.0}
"""K of DEB + B = 2 EB by symmetry alone; 2.4 for all three lumped (recomputed)."""


def test_TH_2_statistical_constants_of_transalkylation() -> None:
    """Isomers of equal enthalpy whose entropies give these K, then lumped by the case: 1/K = sum of 1/K_i."""
    base = {"B": constant("C6H6", 0.0, 270.0, 80.0), "EB": constant("C8H10", 0.0, 360.0, 130.0)}
    isomers = [constant("C10H14", 0.0, 450.0 - R * log(K), 180.0) for K in STATISTICAL.values()]
    for isomer, K in zip(isomers, STATISTICAL.values(), strict=True):
        assert lumped({**base, "DEB": isomer}) == pytest.approx(log(K), abs=1e-9)
    assert lumped({**base, "DEB": {"isomers": isomers}}) == pytest.approx(log(2.4), abs=1e-6)


def lumped(known: Tree) -> float:
    """ln K of transalkylation at 298.15 K."""
    found = chemistry_of(known, "DEB + B <=> 2 EB")
    return float(ln_K(found.table, found.laws.nu, 298.15)[0])


IN_NASA_GAS = (
    "C6H6",
    "C2H4",
    "C3H6,propylene",
    "C7H8",
    "C8H10,ethylbenz",
    "C8H8,styrene",
    "C2H6",
    "C3H8",
    "SO2",
    "SO3",
    "O2",
    "N2",
    "H2",
    "NH3",
    "CO",
    "CO2",
    "CH3OH",
    "H2O",
    "C2H2,acetylene",
    "C3H4,propyne",
    "Ar",
    "CH4",
)


@pytest.mark.parametrize("name", IN_NASA_GAS)
def test_TH_3_species_of_the_data_file(name: str) -> None:
    assert species_from_cantera(name, "x").source == f"nasa_gas.yaml:{name}"


@pytest.mark.parametrize("name", ["C9H12", "C10H14", "C12H18"])
def test_TH_3_no_file_has_cumene_or_what_is_heavier(name: str) -> None:
    """They must be written inline; C10H14 and C12H18 are diethyl- and diisopropylbenzene."""
    with pytest.raises(LookupError, match="no species"):
        species_from_cantera(name, "x")


@pytest.mark.parametrize("name", ["C6H6", "SO2"])
def test_TH_3_gri30_has_no_aromatics_and_no_sulfur(name: str) -> None:
    with pytest.raises(LookupError, match="no species"):
        species_from_cantera(f"gri30.yaml:{name}", "x")
