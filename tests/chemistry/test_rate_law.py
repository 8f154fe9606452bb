"""Rate laws: published constants and rates, zero at equilibrium, derivatives, checks."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.chemistry import (
    DRIVERS,
    R_GAS,
    Constant,
    Denominator,
    Equation,
    Polynomial,
    RateLaw,
    RateLaws,
    SpeciesTable,
    Term,
    Thiele,
    basis_factors,
    inline_species,
    ln_K,
    parse_equation,
    rate_laws,
    rates,
    species_from_cantera,
    stoichiometric_matrix,
    table_of,
)
from reactorstage.chemistry.rates import ln_k, power

ATM = 101325.0


def law_of(equation: Equation, constant: Constant, **other: Any) -> RateLaw:
    """Orders as written, driven by partial pressure, unless said otherwise."""
    plain: dict[str, Any] = {
        "label": "one",
        "stoichiometry": equation.stoichiometry,
        "orders": equation.reactants,
        "constant": constant,
        "driver": "partial pressure",
        "reversible": equation.reversible,
    }
    return RateLaw(**{**plain, **other})


def one_law(table: SpeciesTable, text: str, constant: Constant, **other: Any) -> RateLaws:
    return rate_laws([law_of(parse_equation(text, table.names), constant, **other)], table.names)


@pytest.fixture(scope="module")
def isomers() -> SpeciesTable:
    """A and B of equal data, for laws of which only the constant matters."""
    return table_of([inline_species(name, "CH2", 0.0, 0.0, 1e5, [30.0]) for name in "AB"])


# EB-1: Turton, Bailie, Whiting, Shaeiwitz, Analysis, Synthesis and Design of Chemical Processes, 3rd
# ed. 2009, App. B.2; pre-exponential factors and energies (kcal/kmol) from memory, constants at
# 673.15 K recomputed with R = 1.987 kcal/(kmol K). CU-2: the same book, App. B.8, from memory,
# recomputed, per m3 of reactor with 800 kg/m3. m3/(kmol s), m6/(kmol2 s).
@pytest.mark.parametrize(
    ("k0", "energy", "T", "expected"),
    [
        (1.00e6, 22_500.0, 673.15, 4.9474e-2),
        (6.00e5, 22_500.0, 673.15, 2.9685e-2),
        (7.80e6, 25_000.0, 673.15, 5.9530e-2),
        (3.80e8, 20_000.0, 673.15, 121.87),
        (2.8e7, 24_900.0, 623.15, 5.1708e-2),
        (2.32e9, 35_080.0, 623.15, 1.15156e-3),
    ],
)
def test_EB_1_and_CU_2_rate_constants(
    isomers: SpeciesTable, k0: float, energy: float, T: float, expected: float
) -> None:
    laws = one_law(isomers, "A => B", Constant(np.log(k0), E_over_R=energy / 1.987))
    assert np.exp(ln_k(laws, T)[0]) == pytest.approx(expected, rel=1e-3)


# CU-1: the laws of Turton (as CU-2) per kg of catalyst, 3.5e4 and 2.9e6 with 24.90 and 35.08 kcal/mol
# and R = 1.987 cal/(mol K), are at 800 kg/m3 those of Luyben, Ind. Eng. Chem. Res. 49 (2010) 719, per m3
# of reactor, 2.8e7 exp(-104174/RT) and 2.32e9 exp(-146742/RT), J/mol, to 0.1 % of factor and energy.
# All from memory.
@pytest.mark.parametrize(
    ("per_kg", "kcal", "per_m3", "joule"),
    [(3.5e4, 24.90, 2.8e7, 104_174.0), (2.9e6, 35.08, 2.32e9, 146_742.0)],
)
def test_CU_1_per_catalyst_mass_and_per_bed_volume(
    isomers: SpeciesTable, per_kg: float, kcal: float, per_m3: float, joule: float
) -> None:
    by_mass = one_law(isomers, "A => B", Constant(np.log(per_kg), E_over_R=kcal * 1e3 / 1.987))
    by_volume = one_law(
        isomers, "A => B", Constant(np.log(per_m3), E_over_R=joule / 8.314), basis="bed volume"
    )
    assert by_volume.E_over_R[0] == pytest.approx(by_mass.E_over_R[0], rel=1e-3)
    F, T, p = np.array([1.0, 1.0]), 623.15, 25e5
    found = rates(by_volume, isomers, F, T, p, basis_factors(by_volume, 800.0, 0.5))
    expected = rates(by_mass, isomers, F, T, p, basis_factors(by_mass, 800.0, 0.5))
    ratio_of_energies = np.exp(by_mass.E_over_R[0] / T - by_volume.E_over_R[0] / T)
    assert found[0] == pytest.approx(expected[0] * ratio_of_energies, rel=1e-12)


def test_basis_factors(isomers: SpeciesTable) -> None:
    equation = parse_equation("A => B", isomers.names)
    bases = ("catalyst mass", "bed volume", "void volume")
    laws = rate_laws([law_of(equation, Constant(0.0), basis=basis) for basis in bases], isomers.names)
    assert basis_factors(laws, 640.0, 0.4) == pytest.approx([1.0, 1 / 640.0, 0.4 / 640.0])


def test_a_constant_at_a_reference_temperature(isomers: SpeciesTable) -> None:
    """Closed form: k(T_ref) is the constant given, and E = R T1 T2/(T2 - T1) ln(k2/k1)."""
    laws = one_law(isomers, "A => B", Constant(np.log(4.2e-3), 673.15, 66e3 / R_GAS))
    assert np.exp(ln_k(laws, 673.15)[0]) == pytest.approx(4.2e-3, rel=1e-14)
    k_1, k_2 = (ln_k(laws, T)[0] for T in (630.0, 700.0))
    assert R_GAS * 630.0 * 700.0 / 70.0 * (k_2 - k_1) == pytest.approx(66e3, rel=1e-12)


# SO2-5: Eklund, The Rate of Oxidation of Sulfur Dioxide with a Commercial Vanadium Catalyst (1956), as
# in Fogler, Elements of Chemical Reaction Engineering: k = exp(-176008/T - 110.1 ln T + 912.8), T in
# degrees Rankine. Law from memory, constants recomputed.
@pytest.mark.parametrize(
    ("T", "expected"), [(700.0, 2.553e-6), (750.0, 1.421e-5), (800.0, 4.031e-5), (850.0, 6.748e-5)]
)
def test_SO2_5_a_constant_with_a_logarithm(isomers: SpeciesTable, T: float, expected: float) -> None:
    constant = Constant(912.8 - 110.1 * np.log(1.8), E_over_R=176_008.0 / 1.8, c=-110.1)
    laws = one_law(isomers, "A => B", constant)
    assert np.exp(ln_k(laws, T)[0]) == pytest.approx(expected, rel=2e-4)


def test_a_constant_with_all_four_terms(isomers: SpeciesTable) -> None:
    """Closed form: ln k = a + b/T + c ln T + d T, and the same from a finite reference."""
    T = 640.0
    expected = 3.0 - 9000.0 / T + 0.7 * np.log(T) - 0.002 * T
    free = one_law(isomers, "A => B", Constant(3.0, np.inf, 9000.0, 0.7, -0.002))
    assert ln_k(free, T)[0] == pytest.approx(expected, rel=1e-13)
    at_600 = 3.0 - 9000.0 / 600.0 + 0.7 * np.log(600.0) - 0.002 * 600.0
    tied = one_law(isomers, "A => B", Constant(at_600, 600.0, 9000.0, 0.7, -0.002))
    assert ln_k(tied, T)[0] == pytest.approx(expected, rel=1e-13)


# SO2-6: Collina, Corbetta, Cappelli (1971), as in Froment and Bischoff, Chemical Reactor Analysis and
# Design, ch. 11, with its own Kp = exp(11300/T - 10.68) atm^-1/2; law from memory, rates recomputed.
# kmol/(kg h) at half conversion of 7.8/10.8/81.4 % SO2/O2/N2 at 1 atm.
@pytest.mark.parametrize(
    ("T", "expected"), [(693.0, 7.011e-4), (723.0, 7.939e-3), (753.0, 1.457e-2), (783.0, 2.091e-2)]
)
def test_SO2_6_a_law_with_a_denominator(T: float, expected: float) -> None:
    so2, o2, n2 = (inline_species(name, name, 0.0, 0.0, ATM, [30.0]) for name in ("SO2", "O2", "N2"))
    so3 = inline_species("SO3", "SO3", -11_300.0 * R_GAS, -10.68 * R_GAS, ATM, [45.0])
    table = table_of([so2, o2, so3, n2])
    assert ln_K(table, np.array([[-1, -0.5, 1, 0]]), T)[0] == pytest.approx(
        11_300.0 / T - 10.68 - 0.5 * np.log(1.01325), rel=1e-10
    )
    per_Pa = -np.log(ATM)
    slowed = Denominator(
        power=2.0,
        terms=(
            Term(Constant(0.0)),
            Term(Constant(-9.953 + per_Pa, E_over_R=-8_619.0), {"SO2": 1.0}),
            Term(Constant(-71.745 + per_Pa, E_over_R=-52_596.0), {"SO3": 1.0}),
        ),
    )
    constant = Constant(12.160 - np.log(22.414) + 2 * per_Pa + np.log(1e3 / 3600.0), E_over_R=5_473.0)
    laws = one_law(
        table,
        "SO2 + 1/2 O2 <=> SO3",
        constant,
        orders={"SO2": 1.0, "O2": 1.0},
        denominators=(slowed,),
    )
    assert laws.beta.tolist() == [[0.0, 0.5, 1.0, 0.0]]
    F = np.array([3.9, 10.8 - 1.95, 3.9, 81.4])
    found = rates(laws, table, F, T, ATM, np.ones(1))[0] * 3.6
    assert found == pytest.approx(expected, rel=2e-4)


def test_offsets_of_several_denominators(isomers: SpeciesTable) -> None:
    """Closed form: (1 + K1 pA)(2 + K2 pB^2)^0.5 below the second of three laws."""
    first = Denominator((Term(Constant(0.0)), Term(Constant(np.log(3e-6)), {"A": 1.0})))
    second = Denominator((Term(Constant(np.log(2.0))), Term(Constant(np.log(5e-12)), {"B": 2.0})), 0.5)
    equation = parse_equation("A => B", isomers.names)
    plain = law_of(equation, Constant(0.0))
    laws = rate_laws([plain, replace(plain, denominators=(first, second)), plain], isomers.names)
    assert laws.den_start.tolist() == [0, 0, 2, 2]
    assert laws.term_start.tolist() == [0, 2, 4]
    found = rates(laws, isomers, np.array([1.0, 3.0]), 600.0, 4e5, np.ones(3))
    slowing = (1 + 3e-6 * 1e5) * (2 + 5e-12 * 3e5**2) ** 0.5
    assert found == pytest.approx([1e5, 1e5 / slowing, 1e5], rel=1e-13)


def test_arrays_are_of_the_kinds_a_kernel_reads(isomers: SpeciesTable) -> None:
    laws = one_law(isomers, "A <=> B", Constant(0.0))
    integers = {
        "driver",
        "reversible",
        "own_K",
        "basis",
        "den_start",
        "term_start",
        "eta_kind",
        "eta_species",
    }
    for one in fields(RateLaws):
        array = getattr(laws, one.name)
        assert array.dtype == (np.int64 if one.name in integers else np.float64), one.name
        assert array.flags.c_contiguous, one.name
    assert laws.gamma.shape == (0, 2)


@pytest.mark.parametrize("driver", DRIVERS)
@pytest.mark.parametrize(
    ("equation", "orders", "m"),
    [
        ("benzene + ethylene <=> ethylbenzene", {"benzene": 1.0, "ethylene": 1.0}, 1.0),
        ("benzene + ethylene <=> ethylbenzene", {"benzene": 0.6, "ethylene": 1.5}, 0.5),
        ("2 benzene + 2 ethylene <=> 2 ethylbenzene", {"benzene": 1.0, "ethylene": 1.0}, 0.5),
        ("diethylbenzene + benzene <=> 2 ethylbenzene", {"benzene": 1.0, "diethylbenzene": 1.0}, 1.0),
    ],
)
@pytest.mark.parametrize(("T", "p"), [(640.0, 19.4e5), (760.0, 1.1e5)])
def test_no_net_rate_at_equilibrium(
    alkylation: SpeciesTable,
    driver: str,
    equation: str,
    orders: dict[str, float],
    m: float,
    T: float,
    p: float,
) -> None:
    """The composition is made to fit K of the equation at 1 bar: prod (y_i p/1 bar)^nu_i = K."""
    laws = one_law(alkylation, equation, Constant(0.0, 673.15), driver=driver, orders=orders, m=m)
    last = int(np.flatnonzero(laws.nu[0] > 0.0)[0])
    y = np.array([0.02, 0.005, 0.0, 1.0, 0.003])
    others = [i for i in np.flatnonzero(laws.nu[0]) if i != last]
    ln_others = sum(laws.nu[0, i] * np.log(y[i] * p / 1e5) for i in others)
    K = ln_K(alkylation, laws.nu, T)[0]
    y[last] = np.exp((K - ln_others) / laws.nu[0, last]) * 1e5 / p
    y[2] = 1.0 - (y.sum() - y[2])
    net = rates(laws, alkylation, y, T, p, np.ones(1))[0]
    one_way = rates(replace(laws, reversible=np.zeros(1, np.int64)), alkylation, y, T, p, np.ones(1))[0]
    assert one_way > 0.0
    assert abs(net) <= 1e-12 * one_way


@pytest.fixture(scope="module")
def mixed_laws(alkylation: SpeciesTable) -> RateLaws:
    """Every driver, broken orders and a denominator, on the five species of the lead case."""
    first, second, trans = (
        parse_equation(text, alkylation.names)
        for text in (
            "benzene + ethylene <=> ethylbenzene",
            "ethylbenzene + ethylene <=> diethylbenzene",
            "diethylbenzene + benzene <=> 2 ethylbenzene",
        )
    )
    slowed = Denominator((Term(Constant(0.0)), Term(Constant(-1.0, 600.0, -3000.0), {"benzene": 1.3})), 2.0)
    return rate_laws(
        [
            law_of(first, Constant(-25.0, 673.15, 8000.0), denominators=(slowed,)),
            law_of(second, Constant(-8.0, 673.15, 10_600.0, 0.4, 1e-4), driver="concentration"),
            law_of(
                trans,
                Constant(-3.0, 673.15, 12_600.0),
                driver="mole fraction",
                orders={"benzene": 0.7, "diethylbenzene": 1.4},
                m=0.5,
            ),
        ],
        alkylation.names,
    )


FLOWS = np.array([230.0, 17.0, 0.5, 60.0, 5.0])


def test_complex_steps_and_central_differences_agree(alkylation: SpeciesTable, mixed_laws: RateLaws) -> None:
    start = np.array([*FLOWS, 667.0, 18.3e5])

    def found(z: np.ndarray) -> np.ndarray:
        return rates(mixed_laws, alkylation, z[:5], z[5], z[6], np.array([1.0, 0.9, 0.8]))

    for i, size in enumerate(start):
        unit = np.eye(7)[i]
        exact = found(start + 1e-30j * unit).imag / 1e-30
        step = 1e-6 * size
        central = (found(start + step * unit) - found(start - step * unit)) / (2 * step)
        np.testing.assert_allclose(central, exact, rtol=1e-6, atol=1e-8 * np.abs(found(start)).max() / size)


@given(order=st.permutations(range(5)), T=st.floats(500.0, 800.0), p=st.floats(1e5, 4e6))
def test_the_order_of_species_changes_no_rate(order: list[int], T: float, p: float) -> None:
    specs = ["C6H6", "C2H4", "C2H6", "C8H10,ethylbenz", "C7H8"]
    shuffled = [specs[i] for i in order]
    found = []
    for names, F in ((specs, FLOWS), (shuffled, FLOWS[order])):
        table = table_of([species_from_cantera(name, name) for name in names])
        laws = one_law(
            table, "C6H6 + C2H4 <=> C8H10,ethylbenz", Constant(0.0), orders={"C2H4": 1, "C6H6": 1.2}
        )
        found.append(rates(laws, table, F, T, p, np.ones(1))[0])
    assert found[0] == pytest.approx(found[1], rel=1e-11)


@given(scale=st.floats(1e-6, 1e6))
def test_rates_do_not_depend_on_the_scale_of_flow(
    alkylation: SpeciesTable, mixed_laws: RateLaws, scale: float
) -> None:
    plain = rates(mixed_laws, alkylation, FLOWS, 667.0, 18e5, np.ones(3))
    np.testing.assert_allclose(
        rates(mixed_laws, alkylation, scale * FLOWS, 667.0, 18e5, np.ones(3)), plain, rtol=1e-12
    )


def test_one_law_in_three_drivers_is_one_rate(alkylation: SpeciesTable) -> None:
    """Closed form: the constants of first orders differ by 1/(R T) and 1/p per order."""
    T, p = 667.0, 18e5
    found = [
        rates(
            one_law(
                alkylation, "benzene + ethylene <=> ethylbenzene", Constant(-2 * np.log(total)), driver=driver
            ),
            alkylation,
            FLOWS,
            T,
            p,
            np.ones(1),
        )[0]
        for driver, total in (
            ("concentration", p / (R_GAS * T)),
            ("partial pressure", p),
            ("mole fraction", 1.0),
        )
    ]
    assert found == pytest.approx([found[0]] * 3, rel=1e-12)


@given(a=st.floats(1e-4, 1.0), n=st.sampled_from([-2.0, -0.5, 0.3, 0.5, 1.7, 2.5]))
def test_smooth_powers_are_powers_above_their_width(a: float, n: float) -> None:
    assert power(a, n, 1e-12) == pytest.approx(a**n, rel=1e-14)


@pytest.mark.parametrize("n", [-1.0, -0.5, 0.3, 0.5, 1.5])
def test_smooth_powers_go_through_zero(n: float) -> None:
    """Finite at and below zero, odd for orders above zero and even below, with finite slopes."""
    sign = 1.0 if n < 0.0 else -1.0
    for a in (0.0, 1e-13, 1e-12, 1e-6):
        assert np.isfinite(power(a, n, 1e-12))
        assert power(-a, n, 1e-12) == pytest.approx(sign * power(a, n, 1e-12), rel=1e-12)
        slope = power(a + 1e-30j, n, 1e-12).imag / 1e-30
        central = (power(a + 1e-16, n, 1e-12) - power(a - 1e-16, n, 1e-12)) / 2e-16
        assert slope == pytest.approx(central, rel=1e-3, abs=1e-3 * 1e-12 ** (n - 1.0))


@pytest.mark.parametrize("n", [0.0, 1.0, 2.0, 3.0])
def test_whole_orders_are_multiplications(n: float) -> None:
    assert power(-0.25, n, 1e-3) == (-0.25) ** int(n)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"driver": "pressure"}, "one: driven by 'pressure' is not one of concentration, partial pressure"),
        ({"basis": "volume"}, "one: rate per 'volume' is not one of catalyst mass"),
        ({"orders": {"A": 1.0, "C": 1.0}}, "one: no species 'C' among A, B"),
        ({"stoichiometry": {"A": -1.0, "D": 1.0}}, "one: no species 'D' among A, B"),
        ({"stoichiometry": {"A": 0.0}}, "one: the reaction changes nothing"),
        ({"m": 0.0}, "one: the power of K is 0; it must be above zero"),
        ({"constant": Constant(-np.inf)}, "one: the rate constant must be above zero and finite"),
        ({"constant": Constant(0.0, 0.0)}, "one: the rate constant has the reference temperature 0 K"),
        ({"K": Constant(np.nan)}, "one: the equilibrium constant must be above zero and finite"),
        ({"floors": {"C": 0.01}}, "one: no species 'C' among A, B"),
        ({"floors": {"A": 0.01}}, "one: a floor of A changes nothing: its orders are whole"),
        (
            {"orders": {"A": 0.5}, "floors": {"A": 0.0}},
            "one: the floor of A must lie above 0 and at most 0.1",
        ),
        (
            {"orders": {"A": 0.5}, "floors": {"A": 0.2}},
            "one: the floor of A must lie above 0 and at most 0.1",
        ),
        ({"denominators": (Denominator(()),)}, "one: a denominator needs terms and a power other than zero"),
        ({"denominators": (Denominator((Term(Constant(np.nan)),)),)}, "the constant of a denominator's term"),
        ({"effectiveness": Thiele(1e-3, 1e-6, "B", "slab", 1e3)}, "one: B is not consumed"),
        (
            {"effectiveness": Thiele(1e-3, 1e-6, "A", "cube", 1e3)},
            "one: shape 'cube' is not one of slab, sphere",
        ),
        ({"effectiveness": Thiele(0.0, 1e-6, "A", "slab", 1e3)}, "one: size, diffusivity and density"),
        ({"effectiveness": Polynomial(())}, "one: an effectiveness takes one to 5 powers of T"),
        ({"effectiveness": Polynomial((1.0,), (0.1,), "B", "A")}, "not of 'B' into 'A'"),
    ],
)
def test_a_wrong_law_says_what_is_wrong(isomers: SpeciesTable, change: dict[str, Any], message: str) -> None:
    law = law_of(parse_equation("A <=> B", isomers.names), Constant(0.0))
    with pytest.raises(ValueError, match=message):
        rate_laws([replace(law, **change)], isomers.names)


def test_a_low_order_is_accepted_without_a_backward_rate(isomers: SpeciesTable) -> None:
    laws = one_law(isomers, "A => B", Constant(0.0), orders={"A": 0.5})
    assert rates(laws, isomers, np.array([1.0, 3.0]), 600.0, 4e4, np.ones(1))[0] == pytest.approx(100.0)


def test_rows_of_the_matrix_are_those_of_the_equations(
    alkylation: SpeciesTable, mixed_laws: RateLaws
) -> None:
    texts = ("benzene + ethylene <=> ethylbenzene", "ethylbenzene + ethylene <=> diethylbenzene")
    equations = [parse_equation(text, alkylation.names) for text in texts]
    expected = stoichiometric_matrix(equations, alkylation.names)
    np.testing.assert_array_equal(mixed_laws.nu[:2], expected)
    np.testing.assert_array_equal(mixed_laws.beta[:2], np.maximum(expected, 0.0))
