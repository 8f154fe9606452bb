"""Species data and their properties, held against Cantera's own functions."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import cantera
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.chemistry import (
    P_STANDARD,
    R_GAS,
    SpeciesTable,
    cp,
    gibbs,
    h,
    inline_species,
    s,
    species_from_cantera,
    table_of,
)

DATA = Path(cantera.__file__).parent / "data"

# Shomate coefficients of carbon dioxide as the NIST Chemistry WebBook gives them (from memory); only
# agreement with Cantera's reading of the same numbers is tested.
OTHER_FORMS = """
units: {length: cm, quantity: mol, energy: cal}
species:
- name: shomate
  composition: {C: 1, O: 2}
  thermo:
    model: Shomate
    temperature-ranges: [298.0, 1200.0, 6000.0]
    reference-pressure: 1 bar
    data:
    - [24.99735, 55.18696, -33.69137, 7.948387, -0.136638, -403.6075, 228.2431]
    - [58.16639, 2.720074, -0.492289, 0.038844, -6.447293, -425.9186, 263.6125]
- name: constant
  composition: {N: 1, O: 1}
  thermo: {model: constant-cp, T0: 350.0, h0: 21.5 kcal/mol, s0: 50.0, cp0: 7.1, reference-pressure: 2 atm}
- name: one range
  composition: {Ar: 1}
  thermo: {model: NASA7, temperature-ranges: [300.0, 5000.0], data: [[2.5, 0, 0, 0, 0, -745.375, 4.366]]}
- name: too many ranges
  composition: {Ar: 1}
  thermo:
    model: NASA9
    temperature-ranges: [200.0, 300.0, 400.0, 500.0, 600.0]
    data:
    - [0, 0, 2.5, 0, 0, 0, 0, -745.375, 4.366]
    - [0, 0, 2.5, 0, 0, 0, 0, -745.375, 4.366]
    - [0, 0, 2.5, 0, 0, 0, 0, -745.375, 4.366]
    - [0, 0, 2.5, 0, 0, 0, 0, -745.375, 4.366]
- name: tabulated
  composition: {Ar: 1}
  thermo: {model: piecewise-Gibbs, h0: 0.0, data: {298.15: -9.0, 600.0: -20.0}}
"""


@pytest.fixture
def other_forms(tmp_path: Path) -> Path:
    path = tmp_path / "other forms.yaml"
    path.write_text(OTHER_FORMS, encoding="utf-8")
    return path


def assert_like_cantera(table: SpeciesTable, originals: list[Any], T: float) -> None:
    """cp, h and s against Cantera's to 1e-10 of their size (h and s: at least of R T and R)."""
    thermos = [one.thermo for one in originals]
    shift = R_GAS * np.log(np.array([one.reference_pressure for one in thermos]) / P_STANDARD)
    expected_h = 1e-3 * np.array([one.h(T) for one in thermos])
    np.testing.assert_allclose(cp(table, T), [1e-3 * one.cp(T) for one in thermos], rtol=1e-10)
    np.testing.assert_allclose(h(table, T), expected_h, rtol=1e-10, atol=1e-10 * R_GAS * T)
    np.testing.assert_allclose(s(table, T) - shift, [1e-3 * one.s(T) for one in thermos], rtol=1e-10)


def test_the_gas_constant_is_cantera_s() -> None:
    assert cantera.gas_constant * 1e-3 == pytest.approx(R_GAS, rel=1e-15)


def test_every_gas_of_the_nasa_data_has_cantera_properties_over_its_range() -> None:
    originals = cantera.Species.list_from_file(str(DATA / "nasa_gas.yaml"))
    table = table_of([species_from_cantera(one.name, one.name) for one in originals])
    lows, highs = table.edges[:, 0], table.edges[:, 3]
    assert len(table.names) > 700
    np.testing.assert_array_equal(lows, [one.thermo.min_temp for one in originals])
    np.testing.assert_array_equal(highs, [one.thermo.max_temp for one in originals])
    for T in [*np.linspace(200.0, 6000.0, 24), 298.15, 999.9, 1000.0, 1000.1]:
        inside = np.flatnonzero((lows <= T) & (highs >= T))
        part = table_of([species_from_cantera(table.names[i], table.names[i]) for i in inside])
        assert_like_cantera(part, [originals[i] for i in inside], float(T))


def test_atoms_and_molar_masses_are_cantera_s() -> None:
    originals = cantera.Species.list_from_file(str(DATA / "nasa_gas.yaml"))
    table = table_of([species_from_cantera(one.name, one.name) for one in originals])
    masses = [one.molecular_weight * 1e-3 for one in originals]
    np.testing.assert_allclose(table.molar_mass, masses, rtol=1e-12)
    for row, one in zip(table.atoms, originals, strict=True):
        assert {e: n for e, n in zip(table.elements, row, strict=True) if n} == one.composition


@pytest.mark.parametrize("T", [250.0, 700.0, 1500.0, 5999.0, 7000.0, 15000.0])
def test_nine_coefficients_of_three_ranges(T: float) -> None:
    originals = cantera.Species.list_from_file(str(DATA / "airNASA9.yaml"))
    table = table_of([species_from_cantera(f"airNASA9.yaml:{one.name}", one.name) for one in originals])
    usable = [i for i in range(len(originals)) if table.edges[i, 0] <= T <= table.edges[i, 3]]
    part = table_of([species_from_cantera(f"airNASA9.yaml:{table.names[i]}", table.names[i]) for i in usable])
    assert usable
    assert_like_cantera(part, [originals[i] for i in usable], T)


@pytest.mark.parametrize("name", ["shomate", "constant", "one range"])
@pytest.mark.parametrize("T", [320.0, 1199.0, 1201.0, 2500.0])
def test_other_forms_of_a_file_of_the_user(other_forms: Path, name: str, T: float) -> None:
    originals = {one.name: one for one in cantera.Species.list_from_file(str(other_forms), "species")}
    table = table_of([species_from_cantera(f"{other_forms}:{name}", "mine")])
    assert table.names == ("mine",)
    assert_like_cantera(table, [originals[name]], T)


def test_data_without_a_range_get_the_stated_one(other_forms: Path) -> None:
    found = species_from_cantera(f"{other_forms}:constant", "mine")
    assert found.edges.tolist() == [200.0, 3000.0, 3000.0, 3000.0]


def test_the_source_says_file_and_name(other_forms: Path) -> None:
    assert species_from_cantera(f"{other_forms}:shomate", "mine").source == "other forms.yaml:shomate"
    assert species_from_cantera("C6H6", "benzene").source == "nasa_gas.yaml:C6H6"
    assert species_from_cantera("CH2CHO", "vinoxy").source == "gri30.yaml:CH2CHO"


@pytest.mark.parametrize(
    ("spec", "nearest"),
    [
        ("C8H10", "'C8H10,ethylbenz'"),
        ("c6h6", "'C6H6'"),
        ("C2H2,acetylen", "'C2H2,acetylene'"),
        ("gri30.yaml:C2H44", "'C2H4'"),
    ],
)
def test_an_unknown_name_brings_the_nearest(spec: str, nearest: str) -> None:
    with pytest.raises(LookupError, match=f"no species .* in .*nearest: .*{nearest}"):
        species_from_cantera(spec, "x")


def test_a_name_without_neighbours_says_where_was_searched() -> None:
    with pytest.raises(
        LookupError, match=r"no species 'quite unlike any' in nasa_gas.yaml, gri30.yaml, \S+$"
    ):
        species_from_cantera("quite unlike any", "x")


def test_unusable_files_and_data(other_forms: Path, tmp_path: Path) -> None:
    with pytest.raises(FileNotFoundError, match=r"no species data file .*none\.yaml"):
        species_from_cantera(f"{tmp_path / 'none.yaml'}:C6H6", "x")
    (tmp_path / "text.yaml").write_text("just: text\n", encoding="utf-8")
    with pytest.raises(ValueError, match=r"text\.yaml is not a species data file in Cantera's format"):
        species_from_cantera(f"{tmp_path / 'text.yaml'}:C6H6", "x")
    with pytest.raises(ValueError, match=r"the data have 4 temperature ranges"):
        species_from_cantera(f"{other_forms}:too many ranges", "x")
    with pytest.raises(ValueError, match=r"forms\.yaml:tabulated: its thermochemistry .* cannot be used"):
        species_from_cantera(f"{other_forms}:tabulated", "x")


def test_a_file_is_read_again_when_it_changed(other_forms: Path) -> None:
    before = species_from_cantera(f"{other_forms}:constant", "x")
    text = OTHER_FORMS.replace("cp0: 7.1", "cp0: 8.1000")
    other_forms.write_text(text, encoding="utf-8")
    after = species_from_cantera(f"{other_forms}:constant", "x")
    assert cp(table_of([after]), 400.0)[0] - cp(table_of([before]), 400.0)[0] == pytest.approx(4.184)


POWERS = [31.0, -0.02, 6.0e-5, -3.0e-8, 5.0e-12]


def test_an_inline_species_gives_back_its_numbers() -> None:
    table = table_of([inline_species("x", "C2H4O", -52.6e3, 242.9, P_STANDARD, POWERS)])
    assert h(table, 298.15)[0] == pytest.approx(-52.6e3, rel=1e-13)
    assert s(table, 298.15)[0] == pytest.approx(242.9, rel=1e-13)
    for T in (250.0, 298.15, 640.0, 1100.0):
        assert cp(table, T)[0] == pytest.approx(np.polyval(POWERS[::-1], T), rel=1e-13)
    assert table.molar_mass[0] == pytest.approx(2 * 12.011e-3 + 4 * 1.008e-3 + 15.999e-3, rel=1e-12)


@pytest.mark.parametrize("count", [1, 2, 3, 4, 5])
def test_inline_enthalpy_and_entropy_are_integrals_of_cp(count: int) -> None:
    """Closed form: antiderivatives of the polynomial and of the polynomial over T."""
    powers = np.polynomial.Polynomial(POWERS[:count])
    over_T = np.polynomial.Polynomial(POWERS[1:count] or [0.0])
    table = table_of([inline_species("x", "CH4", 0.0, 0.0, P_STANDARD, POWERS[:count])])
    T_0, T = 298.15, 812.0
    rise = powers.integ()(T) - powers.integ()(T_0)
    growth = POWERS[0] * np.log(T / T_0) + over_T.integ()(T) - over_T.integ()(T_0)
    assert h(table, T)[0] == pytest.approx(rise, rel=1e-12)
    assert s(table, T)[0] == pytest.approx(growth, rel=1e-12)


def test_the_standard_pressure_of_an_entropy_is_moved_to_one_bar() -> None:
    """Closed form: an ideal gas gains R ln(p_high/p_low) on expansion."""
    atm = table_of([inline_species("x", "CH4", 0.0, 186.0, 101325.0, [35.0])])
    assert s(atm, 298.15)[0] == pytest.approx(186.0 + R_GAS * np.log(1.01325), rel=1e-13)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"powers_of_T": []}, "the heat capacity has 0 powers of T"),
        ({"powers_of_T": [1.0] * 6}, "the heat capacity has 6 powers of T"),
        ({"standard_pressure": 0.0}, "the standard pressure 0 Pa is not above zero"),
        ({"temperature_range": (900.0, 300.0)}, "the temperature range 900 to 300 K does not rise"),
        ({"formula": "C2H4+"}, r"formula 'C2H4\+'"),
        ({"formula": "Xx"}, "'Xx' is not an element"),
    ],
)
def test_a_wrong_inline_species_says_what_is_wrong(change: dict[str, Any], message: str) -> None:
    plain: dict[str, Any] = {
        "name": "x",
        "formula": "CH4",
        "enthalpy_of_formation": 0.0,
        "entropy": 186.0,
        "standard_pressure": 1e5,
        "powers_of_T": [35.0],
    }
    with pytest.raises(ValueError, match=message):
        inline_species(**{**plain, **change})


def test_a_table_needs_species_of_different_names(alkylation: SpeciesTable) -> None:
    one = species_from_cantera("C6H6", "benzene")
    with pytest.raises(ValueError, match="species 'benzene' given more than once"):
        table_of([one, one])
    with pytest.raises(ValueError, match="there are no species"):
        table_of([])
    assert alkylation.elements == ("C", "H")
    assert alkylation.atoms.shape == (5, 2)
    assert alkylation.coefficients.shape == (5, 3, 9)
    assert alkylation.edges.shape == (5, 4)
    assert alkylation.coefficients.flags.c_contiguous


@given(T=st.floats(310.0, 900.0))
def test_properties_are_each_other_s_derivatives(alkylation: SpeciesTable, T: float) -> None:
    """dh/dT = cp, ds/dT = cp/T, dg/dT = -s by complex step."""
    step = 1e-30j
    np.testing.assert_allclose(h(alkylation, T + step).imag / 1e-30, cp(alkylation, T), rtol=1e-12)
    np.testing.assert_allclose(s(alkylation, T + step).imag / 1e-30, cp(alkylation, T) / T, rtol=1e-12)
    np.testing.assert_allclose(gibbs(alkylation, T + step).imag / 1e-30, -s(alkylation, T), rtol=1e-11)
