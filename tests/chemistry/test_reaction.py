"""Equations, balances, heats of reaction and equilibrium constants."""

from __future__ import annotations

import numpy as np
import pytest
from chemicals.reaction import Hfg, S0g
from hypothesis import given
from hypothesis import strategies as st
from scipy.optimize import brentq

from reactorstage.chemistry import (
    R_GAS,
    Species,
    SpeciesTable,
    balance_message,
    data_range,
    equilibrium_temperature,
    h,
    heat_of_reaction,
    imbalance,
    independent_count,
    inline_species,
    ln_K,
    ln_Q,
    parse_equation,
    species_from_cantera,
    stoichiometric_matrix,
    table_of,
)

NAMES = ("benzene", "ethylene", "ethane", "ethylbenzene", "diethylbenzene")
ALKYLATION = (
    "benzene + ethylene <=> ethylbenzene",
    "ethylbenzene + ethylene <=> diethylbenzene",
    "diethylbenzene + benzene <=> 2 ethylbenzene",
)
ODD_NAMES = ("1,3-butadiene", "1-butene", "steam 2", "2 steam", "Na+", "n-butane")


def matrix(table: SpeciesTable, *equations: str) -> np.ndarray:
    return stoichiometric_matrix([parse_equation(text, table.names) for text in equations], table.names)


def test_an_equation_is_read() -> None:
    equation = parse_equation("diethylbenzene + benzene <=> 2 ethylbenzene", NAMES)
    assert equation.stoichiometry == {"diethylbenzene": -1.0, "benzene": -1.0, "ethylbenzene": 2.0}
    assert equation.reactants == {"diethylbenzene": 1.0, "benzene": 1.0}
    assert equation.products == {"ethylbenzene": 2.0}
    assert equation.reversible
    assert not parse_equation("ethylene => ethane", NAMES).reversible


@pytest.mark.parametrize(
    ("text", "stoichiometry"),
    [
        ("1,3-butadiene + steam 2 => 1-butene", {"1,3-butadiene": -1, "steam 2": -1, "1-butene": 1}),
        ("2 1,3-butadiene => 0.5 1-butene", {"1,3-butadiene": -2, "1-butene": 0.5}),
        ("2 steam => 2 steam 2", {"2 steam": -1, "steam 2": 2}),
        ("1/2 Na+ + n-butane <=> 1.5 1-butene", {"Na+": -0.5, "n-butane": -1, "1-butene": 1.5}),
        ("n-butane + n-butane=>1-butene", {"n-butane": -2, "1-butene": 1}),
        ("2n-butane => .5 1-butene", {"n-butane": -2, "1-butene": 0.5}),
    ],
)
def test_names_with_digits_spaces_and_signs(text: str, stoichiometry: dict[str, float]) -> None:
    assert parse_equation(text, ODD_NAMES).stoichiometry == stoichiometry


def test_a_species_on_both_sides_is_netted_and_kept_among_the_reactants() -> None:
    equation = parse_equation("ethylene + 2 ethane => ethane + ethylene + benzene", NAMES)
    assert equation.stoichiometry == {"ethane": -1.0, "benzene": 1.0}
    assert equation.reactants == {"ethylene": 1.0, "ethane": 2.0}
    assert equation.products == {"ethane": 1.0, "ethylene": 1.0, "benzene": 1.0}


def test_fractions_net_exactly() -> None:
    equation = parse_equation("1/3 ethane + 1/3 ethane + 1/3 ethane => ethane + ethylene", NAMES)
    assert equation.stoichiometry == {"ethylene": 1.0}


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("benzene + ethylene = ethylbenzene", "has no arrow; write one '<=>'"),
        ("benzene => ethylene => ethane", "has 2 arrows"),
        (" => ethane", "has an empty side"),
        ("ethane <=> ", "has an empty side"),
        ("ethane + + ethylene => benzene", r"a species is missing beside '\+'"),
        ("benzen + ethylene => ethane", "no species 'benzen'; did you mean 'benzene'?"),
        ("2 ethylen => ethane", "no species 'ethylen'; did you mean 'ethylene'?"),
        ("xyz => ethane", "no species 'xyz'; species are benzene, ethylene"),
        ("benzene+ethylene => ethane", r"no species 'benzene\+ethylene'; put spaces round '\+'"),
        ("-1 ethane => ethylene", "no species '-1 ethane'"),
        ("0 ethane => ethylene", "the coefficient of '0 ethane' must be above zero"),
        ("1/0 ethane => ethylene", "the coefficient of '1/0 ethane' must be above zero"),
        ("ethane + ethylene => ethylene + ethane", "changes nothing"),
    ],
)
def test_a_wrong_equation_says_what_is_wrong(text: str, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        parse_equation(text, NAMES)


def test_balanced_and_unbalanced_equations(alkylation: SpeciesTable) -> None:
    for text in ALKYLATION:
        equation = parse_equation(text, NAMES)
        assert imbalance(equation, alkylation) == {"C": 0.0, "H": 0.0}
        assert balance_message(equation, alkylation) == ""
    wrong = parse_equation("benzene + ethylene => diethylbenzene", NAMES)
    assert imbalance(wrong, alkylation) == {"C": 2.0, "H": 4.0}
    assert balance_message(wrong, alkylation) == "C: 8 left, 10 right; H: 10 left, 14 right"


def test_independent_reactions(alkylation: SpeciesTable) -> None:
    """The second ethylation is the first minus the transalkylation."""
    nu = matrix(alkylation, *ALKYLATION)
    assert nu.shape == (3, 5)
    assert independent_count(nu) == 2
    assert independent_count(nu[:0]) == 0


def from_chemicals(name: str, formula: str, cas: str) -> Species:
    """Heat capacity left at zero: used at 298.15 K only."""
    return inline_species(name, formula, Hfg(cas), S0g(cas), 1e5, [0.0])


REFERENCE = {
    "B": ("C6H6", "71-43-2"),
    "C2H4": ("C2H4", "74-85-1"),
    "EB": ("C8H10", "100-41-4"),
    "o-DEB": ("C10H14", "135-01-3"),
    "m-DEB": ("C10H14", "141-93-5"),
    "p-DEB": ("C10H14", "105-05-5"),
    "C3H6": ("C3H6", "115-07-1"),
    "cumene": ("C9H12", "98-82-8"),
    "SO2": ("SO2", "7446-09-5"),
    "O2": ("O2", "7782-44-7"),
    "SO3": ("SO3", "7446-11-9"),
    "N2": ("N2", "7727-37-9"),
    "H2": ("H2", "1333-74-0"),
    "NH3": ("NH3", "7664-41-7"),
    "CO": ("CO", "630-08-0"),
    "CO2": ("CO2", "124-38-9"),
    "H2O": ("H2O", "7732-18-5"),
    "CH3OH": ("CH4O", "67-56-1"),
    "C2H2": ("C2H2", "74-86-2"),
}


# TH-2: reactions at 298.15 K, ideal gas, from formation enthalpies and entropies of the open-source
# data package `chemicals` 1.5.2; kJ/mol and -, one unit in the last printed digit.
@pytest.mark.parametrize(
    ("equation", "heat", "ln_K_25", "digit"),
    [
        ("B + C2H4 <=> EB", -105.84, 27.31, 0.01),
        ("EB + C2H4 <=> o-DEB", -98.19, 22.3, 0.1),
        ("EB + C2H4 <=> m-DEB", -103.46, 24.9, 0.1),
        ("EB + C2H4 <=> p-DEB", -102.83, 23.9, 0.1),
        ("o-DEB + B <=> 2 EB", -7.65, 5.0, 0.1),
        ("m-DEB + B <=> 2 EB", -2.38, 2.4, 0.1),
        ("p-DEB + B <=> 2 EB", -3.01, 3.4, 0.1),
        ("B + C3H6 <=> cumene", -99.55, 22.19, 0.01),
        ("SO2 + 1/2 O2 <=> SO3", -98.90, 28.59, 0.01),
        ("N2 + 3 H2 <=> 2 NH3", -91.12, 12.93, 0.01),
        ("CO2 + 3 H2 <=> CH3OH + H2O", -49.05, -1.53, 0.01),
        ("CO + 2 H2 <=> CH3OH", -90.17, 10.01, 0.01),
        ("CO2 + H2 <=> CO + H2O", 41.13, -11.54, 0.01),
        ("C2H2 + H2 <=> C2H4", -175.76, 57.39, 0.01),
    ],
)
def test_TH_2_heats_and_equilibrium_constants(
    equation: str, heat: float, ln_K_25: float, digit: float
) -> None:
    table = table_of([from_chemicals(name, *data) for name, data in REFERENCE.items()])
    nu = matrix(table, equation)
    assert balance_message(parse_equation(equation, table.names), table) == ""
    assert heat_of_reaction(table, nu, 298.15)[0] == pytest.approx(heat * 1e3, abs=10.0)
    assert ln_K(table, nu, 298.15)[0] == pytest.approx(ln_K_25, abs=digit)


# TH-3, recomputed from the NASA polynomials distributed with Cantera 3.2 (nasa_gas.yaml, McBride,
# Gordon and Reno, NASA TM-4513, 1993); kJ/mol, one unit in the last printed digit. The fits of SO2
# and SO3 start at 300 K, hence a little more for them.
@pytest.mark.parametrize(
    ("spec", "enthalpy", "digit"),
    [
        ("C2H4", 52.500, 0.001),
        ("C3H6,propylene", 19.710, 0.001),
        ("C6H6", 82.880, 0.001),
        ("C7H8", 50.170, 0.001),
        ("C8H10,ethylbenz", 29.920, 0.001),
        ("SO2", -296.833, 0.005),
        ("SO3", -395.750, 0.02),
        ("NH3", -45.940, 0.001),
        ("CH3OH", -200.939, 0.002),
    ],
)
def test_TH_3_formation_enthalpies(spec: str, enthalpy: float, digit: float) -> None:
    table = table_of([species_from_cantera(spec, "x")])
    assert h(table, 298.15)[0] == pytest.approx(enthalpy * 1e3, abs=digit * 1e3)


def K_at_1_atm(table: SpeciesTable, nu: np.ndarray, T: float) -> float:
    """Published constants use 1 atm: K(1 atm) = K(1 bar) (1 bar/1 atm)^(sum nu)."""
    return float(np.exp(ln_K(table, nu, T)[0]) * 1.01325 ** -nu.sum())


@pytest.mark.parametrize(
    ("T", "heat", "K"),
    [(298.0, -105.46, 6.269e11), (600.0, -103.99, 349.6), (700.0, -103.28, 17.96), (800.0, -102.48, 1.970)],
)
def test_TH_3_ethylation(alkylation: SpeciesTable, T: float, heat: float, K: float) -> None:
    """TH-3 as above; at "298" 298.15 K makes K 2 % smaller than 298 K does."""
    nu = matrix(alkylation, ALKYLATION[0])
    T = 298.15 if T == 298.0 else T
    assert heat_of_reaction(alkylation, nu, T)[0] == pytest.approx(heat * 1e3, abs=10.0)
    assert K_at_1_atm(alkylation, nu, T) == pytest.approx(K, rel=6e-4)


def test_TH_3_sulfur_dioxide_oxidation(oxidation: SpeciesTable) -> None:
    """TH-3 and the NASA column of SO2-4 (1 atm): K 286.2, 34.45, 6.678 at 700, 800, 900 K."""
    nu = matrix(oxidation, "SO2 + 1/2 O2 <=> SO3")
    assert heat_of_reaction(oxidation, nu, 700.0)[0] == pytest.approx(-98.72e3, abs=10.0)
    for T, K in ((700.0, 286.2), (800.0, 34.45), (900.0, 6.678)):
        assert K_at_1_atm(oxidation, nu, T) == pytest.approx(K, rel=3e-4)


# TH-4: adiabatic alkylation, 673.15 K, 20 bar, ethylbenzene the only product; recomputed from the
# same NASA polynomials with a separate equilibrium program.
@pytest.mark.parametrize(
    ("ratio", "rise", "T_equilibrium", "conversion"),
    [(5.0, 104.56, 775.77, 0.98055), (8.0, 68.53, 741.11, 0.99146)],
)
def test_TH_4_adiabatic_alkylation(
    alkylation: SpeciesTable, ratio: float, rise: float, T_equilibrium: float, conversion: float
) -> None:
    nu = matrix(alkylation, ALKYLATION[0])
    F_in = np.array([ratio, 1.0, 0.0, 0.0, 0.0])
    H_in = F_in @ h(alkylation, 673.15)

    def T_after(X: float) -> float:
        F = F_in + nu[0] * X
        return float(brentq(lambda T: F @ h(alkylation, T) - H_in, 600.0, 900.0))

    assert T_after(1.0) - 673.15 == pytest.approx(rise, abs=0.05)
    assert T_after(conversion) == pytest.approx(T_equilibrium, abs=0.05)
    lnQ = ln_Q(nu, F_in + nu[0] * conversion, 20e5)[0]
    assert equilibrium_temperature(alkylation, nu[0], lnQ, 673.15) == pytest.approx(T_equilibrium, abs=0.05)


# FO-1: Fogler, Elements of Chemical Reaction Engineering, 3rd ed. 1999, Ex. 8-8: A <=> B with
# Ke(298 K) = 1e5, heat -20 000 cal/mol, R = 1.987 cal/(mol K); constants recomputed there.
@pytest.mark.parametrize(
    ("T", "K"), [(350, 661.62), (400, 18.17), (425, 4.14), (450, 1.11), (475, 0.34), (500, 0.12)]
)
def test_FO_1_equilibrium_constants(T: float, K: float) -> None:
    heat = -20_000.0 / 1.987 * R_GAS
    entropy = R_GAS * np.log(1e5) + heat / 298.0
    table = table_of(
        [
            inline_species("A", "CH2", 0.0, 0.0, 1e5, [209.2]),
            inline_species("B", "CH2", heat, entropy, 1e5, [209.2]),
        ]
    )
    found = float(np.exp(ln_K(table, matrix(table, "A <=> B"), float(T))[0]))
    assert found == pytest.approx(K, abs=0.005)


@given(T=st.floats(310.0, 900.0))
def test_k_and_heat_of_reaction_agree(alkylation: SpeciesTable, T: float) -> None:
    """van 't Hoff: d ln K/d(1/T) = -dH/R, by central differences."""
    nu = matrix(alkylation, *ALKYLATION)
    step = 1e-4 / T
    slope = (ln_K(alkylation, nu, 1 / (1 / T + step)) - ln_K(alkylation, nu, 1 / (1 / T - step))) / (2 * step)
    expected = -heat_of_reaction(alkylation, nu, T) / R_GAS
    np.testing.assert_allclose(slope, expected, rtol=1e-6, atol=1e-6 * 1e4)


@given(T=st.floats(200.0, 1500.0))
def test_constants_round_a_loop_of_reactions_multiply_to_one(alkylation: SpeciesTable, T: float) -> None:
    """Ethylation = second ethylation + transalkylation, whatever the data."""
    first, second, trans = ln_K(alkylation, matrix(alkylation, *ALKYLATION), T)
    assert np.exp(second + trans - first) == pytest.approx(1.0, abs=1e-10)


@given(order=st.permutations(range(5)), T=st.floats(300.0, 1200.0))
def test_the_order_of_species_changes_nothing(alkylation: SpeciesTable, order: list[int], T: float) -> None:
    species = [species_from_cantera(s, s) for s in ("C6H6", "C2H4", "C2H6", "C8H10,ethylbenz", "C3H8")]
    plain, mixed = table_of(species), table_of([species[i] for i in order])
    equations = ("C6H6 + C2H4 <=> C8H10,ethylbenz", "3 C2H4 + 2 C2H6 <=> C6H6 + 4/3 C3H8")
    for quantity in (ln_K, heat_of_reaction):
        np.testing.assert_allclose(
            quantity(mixed, matrix(mixed, *equations), T),
            quantity(plain, matrix(plain, *equations), T),
            rtol=1e-10,
            atol=1e-9,
        )


def test_quotient_of_an_ideal_gas(alkylation: SpeciesTable) -> None:
    """Closed form: y_EB/(y_B y_E) (1 bar/p)."""
    nu = matrix(alkylation, *ALKYLATION)
    F = np.array([6.0, 1.0, 1.0, 2.0, 0.0])
    assert ln_Q(nu, F, 2e6)[0] == pytest.approx(np.log(0.2 / (0.6 * 0.1) / 20.0))
    assert ln_Q(nu, F, 2e6)[1:].tolist() == [-np.inf, np.inf]
    assert np.isnan(ln_Q(nu, np.array([1.0, 0.0, 0.0, 0.0, 0.0]), 2e6)[1])


@given(T=st.floats(305.0, 1400.0), guess=st.floats(100.0, 3000.0))
def test_equilibrium_temperature_undoes_ln_K(alkylation: SpeciesTable, T: float, guess: float) -> None:
    """To 1e-4 K: where the ranges of the NASA data meet, at 1000 K, they jump by about 1e-5 K."""
    nu = matrix(alkylation, ALKYLATION[0])
    target = float(ln_K(alkylation, nu, T)[0])
    assert equilibrium_temperature(alkylation, nu[0], target, guess) == pytest.approx(T, abs=1e-4)


@pytest.mark.parametrize("target", [np.inf, -np.inf, np.nan, 1e4, -1e4])
def test_no_equilibrium_temperature_where_there_is_none(alkylation: SpeciesTable, target: float) -> None:
    nu = matrix(alkylation, ALKYLATION[0])
    assert equilibrium_temperature(alkylation, nu[0], target, 650.0) is None


def test_data_that_share_no_temperature_give_no_equilibrium() -> None:
    cold = inline_species("cold", "CH2", 0.0, 200.0, 1e5, [40.0], (200.0, 400.0))
    hot = inline_species("hot", "CH2", -1e4, 190.0, 1e5, [40.0], (500.0, 900.0))
    table = table_of([cold, hot])
    nu = matrix(table, "cold <=> hot")
    assert data_range(table, nu[0]) == (500.0, 400.0)
    assert equilibrium_temperature(table, nu[0], 0.0, 450.0) is None
