from __future__ import annotations

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.case.units import (
    KINDS,
    UnitProblem,
    display_unit,
    in_unit,
    penalty_to_si,
    price_to_si,
    rate_constant_to_si,
    rate_constant_unit,
    split_number,
    to_display,
    to_si,
    to_si_of,
)

# closed form: every expected value follows from the definition of the unit
RIGHT = [
    ("384 degC", "temperature", 657.15),
    ("657.15 K", "temperature", 657.15),
    ("212 degF", "temperature", 373.15),
    ("20 °C", "temperature", 293.15),
    ("15 K", "temperature difference", 15.0),
    ("19.4 bar(a)", "pressure", 1.94e6),
    ("1 bar(g)", "pressure", 201325.0),
    ("0 bar(g)", "pressure", 101325.0),
    ("100 kPa(a)", "pressure", 1e5),
    ("1 atm", "pressure", 101325.0),
    ("5 Pa", "pressure", 5.0),
    ("10 psi(g)", "pressure", 101325.0 + 68947.57293168361),
    ("0.3 bar", "pressure difference", 3e4),
    ("3.6 kmol/h", "molar flow", 1.0),
    ("3.6 t/h", "mass flow", 1.0),
    ("2.6t", "mass", 2600.0),
    ("4 m3", "volume", 4.0),
    ("4 m³", "volume", 4.0),
    ("2.4 mm", "length", 0.0024),
    ("99.85 %", "fraction", 0.9985),
    ("0.41", "fraction", 0.41),
    ("50 ppm", "fraction", 5e-5),
    ("11.6 mol/mol", "ratio", 11.6),
    ("11.6", "ratio", 11.6),
    ("1e5", "number", 1e5),
    ("010", "number", 10.0),
    ("+.5e1", "number", 5.0),
    ("66 kJ/mol", "molar energy", 66000.0),
    ("2.0 MW", "power", 2e6),
    ("36 EUR/h", "money rate", 0.01),
    ("−5 kJ/mol", "molar energy", -5000.0),
]


@pytest.mark.parametrize(("text", "kind", "expected"), RIGHT)
def test_values(text: str, kind: str, expected: float) -> None:
    assert to_si(text, kind) == pytest.approx(expected, rel=1e-14)


WRONG = [
    ("965", "molar flow", "no unit: a molar flow such as 965 kmol/h", ""),
    ("19.4 bar", "pressure", "absolute or gauge", r"bar\(a\) or bar\(g\)"),
    ("2 MPa", "pressure", "absolute or gauge", r"MPa\(a\) or MPa\(g\)"),
    ("2 barg", "pressure", "'barg'", r"write bar\(g\)"),
    ("2 bar(b)", "pressure", "cannot|not a unit", ""),
    ("-2 bar(g)", "pressure", "below vacuum", ""),
    ("0.3 bar(a)", "pressure difference", "difference of pressures", "without"),
    ("15 degC", "temperature difference", "difference of temperatures", "in K"),
    ("-300 degC", "temperature", "absolute zero", ""),
    ("384 bar(a)", "temperature", "wrong unit: a temperature", ""),
    ("384 degC", "mass", "wrong unit: a mass such as 2.6 t", ""),
    ("384 degC", "pressure", "wrong unit: a pressure", ""),
    ("5 J/(mol degC)", "molar entropy", "'degC' cannot stand inside", "write K"),
    ("5 J/mol K", "molar entropy", "two ways", r"J/\(mol K\)"),
    ("5 kmoll/h", "molar flow", "'kmoll' is not a known unit", "did you mean kmol"),
    ("5 ton", "mass", "'ton'", "write t "),
    ("5 Nm3/h", "molar flow", "normal or standard volume", "kmol/h"),
    ("5 Nm^3/h", "molar flow", "normal or standard volume", "kmol/h"),
    ("5 SCFM", "molar flow", "normal or standard volume", "kmol/h"),
    ("5 kg/kg", "ratio", "wrong unit: a ratio", ""),
    ("5 mol/mol", "fraction", "wrong unit: a fraction", ""),
    ("5 K", "number", "a plain number such as 1.0", ""),
    ("nan", "number", "finite number", ""),
    (".inf", "number", "finite number", ""),
    ("-Infinity K", "temperature", "finite number", ""),
    ("1e999 t", "mass", "finite number", ""),
    ("2,6 t", "mass", "between the digits", "after a point"),
    ("1 000 kmol/h", "molar flow", "between the digits", "together"),
    ("12:30", "number", "not a number", ""),
    ("1.2.3 t", "mass", "not a number", ""),
    ("no", "number", "'no' is not a number", ""),
    ("", "number", "not a number", ""),
    ("5 m^", "length", "not a unit that can be read", ""),
    ("5 (m", "length", "not a unit that can be read", ""),
    ("5 m^99", "length", "not a unit that can be read", ""),
    ("5 bar(a)^2", "pressure difference", "not a unit that can be read", ""),
    ("5 " + "(" * 500, "length", "not a unit that can be read", ""),
    ("5 (bar^9)^9", "pressure difference", "not a unit that can be read", ""),
    ("5 ((bar^9)^9)^9", "pressure difference", "not a unit that can be read", ""),
]


@pytest.mark.parametrize(("text", "kind", "message", "hint"), WRONG)
def test_what_is_wrong_is_said(text: str, kind: str, message: str, hint: str) -> None:
    with pytest.raises(UnitProblem, match=message) as caught:
        to_si(text, kind)
    assert re.search(hint, caught.value.hint)


def test_one_of_several_kinds_fits() -> None:
    assert to_si_of("2 t", ("mass", "volume")) == (2000.0, "mass")
    assert to_si_of("2 m^3", ("mass", "volume")) == (2.0, "volume")
    with pytest.raises(UnitProblem, match=r"a mass such as 2\.6 t or a volume such as 4\.1 m\^3 is expected"):
        to_si_of("2 K", ("mass", "volume"))


@given(
    value=st.floats(min_value=1e-6, max_value=1e6),
    kind=st.sampled_from(sorted(k for k in KINDS if k not in ("count", "number", "money rate"))),
)
def test_display_and_back(value: float, kind: str) -> None:
    shown = to_display(value, kind)
    text = f"{shown!r} {display_unit(kind)}"
    offset = KINDS[kind].offset
    assert math.isclose(to_si(text, kind), value, rel_tol=1e-12, abs_tol=1e-12 * offset)


def test_money_rate_and_back() -> None:
    assert (
        to_si(f"{to_display(0.25, 'money rate')!r} {display_unit('money rate', 'EUR')}", "money rate") == 0.25
    )


@pytest.mark.parametrize(
    ("text", "kind", "expected"),
    [
        ("62 EUR/kmol", "molar flow", 0.062),
        ("500 EUR/t", "mass flow", 0.5),
        ("36 EUR/MWh", "power", 1e-8),
        ("7.2 EUR/(t h)", "mass", 2e-6),
        ("14.4 EUR/(t year)", "mass", 14.4 / 1000 / (8000 * 3600)),
        ("3.6 EUR/h", "count", 1e-3),
        ("28.8 EUR/year", "count", 28.8 / (8000 * 3600)),
        ("3.6 EUR/(m^3 h)", "volume", 1e-3),
        ("3.6 EUR per h", "number", 1e-3),
    ],
)
def test_prices(text: str, kind: str, expected: float) -> None:
    assert price_to_si(text, kind, "EUR", 8000.0) == pytest.approx(expected, rel=1e-14)


@pytest.mark.parametrize(
    ("text", "kind", "message"),
    [
        ("62", "molar flow", "no unit: a price on a molar flow is written in EUR/kmol"),
        ("62 USD/kmol", "molar flow", "'USD' is not the currency"),
        ("62 EUR/kmol", "power", "written in EUR/MWh"),
        ("62 EUR/t", "mass", r"written in EUR/\(t h\)"),
        ("-62 EUR/kmol", "molar flow", "negative price"),
        ("62 EUR/(t year)", "mass", "speaks of a year"),
        ("62 EUR", "money rate", "wrong unit"),
    ],
)
def test_wrong_prices(text: str, kind: str, message: str) -> None:
    with pytest.raises(UnitProblem, match=message):
        price_to_si(text, kind, "EUR")


def test_price_of_a_soft_limit() -> None:
    assert penalty_to_si("7.2 EUR/h per K", "temperature", "EUR") == pytest.approx(0.002)
    assert penalty_to_si("36 EUR/h per MW", "power", "EUR") == pytest.approx(1e-8)
    assert penalty_to_si("36 EUR/h per bar", "pressure", "EUR") == pytest.approx(1e-7)
    with pytest.raises(UnitProblem, match="written in EUR/h per K"):
        penalty_to_si("5 EUR/h", "temperature", "EUR")
    with pytest.raises(UnitProblem, match="not above zero"):
        penalty_to_si("0 EUR/h per K", "temperature", "EUR")


@pytest.mark.parametrize(
    ("text", "per", "driver", "orders", "expected"),
    [
        ("3.6 kmol/(kg h bar^2)", "catalyst mass", "partial pressure", 2.0, 1e-10),
        ("3.6 kmol/(kg h bar)", "catalyst mass", "partial pressure", 1.0, 1e-5),
        ("3.6 kmol/(kg h bar^1.5)", "catalyst mass", "partial pressure", 1.5, 10**-7.5),
        ("3.6 kmol/(m^3 h bar^0.5)", "bed volume", "partial pressure", 0.5, 10**-2.5),
        ("2 mol/(kg s)", "catalyst mass", "mole fraction", 3.0, 2.0),
        ("3.6 m^3/(kg h)", "catalyst mass", "concentration", 1.0, 1e-3),
        ("3.6 m^6/(kmol kg h)", "catalyst mass", "concentration", 2.0, 1e-6),
        ("5 1/s", "void volume", "concentration", 1.0, 5.0),
        ("7 mol/(m^3 s)", "bed volume", "partial pressure", 0.0, 7.0),
    ],
)
def test_rate_constants(text: str, per: str, driver: str, orders: float, expected: float) -> None:
    assert rate_constant_to_si(text, per, driver, orders) == pytest.approx(expected, rel=1e-13)


def test_rate_constant_says_what_is_expected() -> None:
    assert rate_constant_unit("bed volume", "concentration", 2.0) == "kmol/(m^3 h (kmol/m^3)^2)"
    with pytest.raises(UnitProblem, match=r"kmol/\(kg h bar\^2\) is expected"):
        rate_constant_to_si("1 kmol/(kg h bar)", "catalyst mass", "partial pressure", 2.0)
    with pytest.raises(UnitProblem, match="no unit"):
        rate_constant_to_si("1", "catalyst mass", "mole fraction", 2.0)
    with pytest.raises(UnitProblem, match="negative"):
        rate_constant_to_si("-1 mol/(kg s)", "catalyst mass", "mole fraction", 2.0)


@given(
    exponent=st.sampled_from([0.5, 1.0, 1.5, 2.0, 3.0]),
    per=st.sampled_from(["catalyst mass", "bed volume", "void volume"]),
    driver=st.sampled_from(["partial pressure", "concentration", "mole fraction"]),
)
def test_the_expected_unit_is_accepted(exponent: float, per: str, driver: str) -> None:
    assert rate_constant_to_si(f"1 {rate_constant_unit(per, driver, exponent)}", per, driver, exponent) > 0.0


@given(st.text(max_size=80))
def test_any_text_is_a_number_or_a_unit_problem(text: str) -> None:
    for read in (split_number, lambda t: to_si(t, "pressure"), lambda t: in_unit(t, "J/(mol K)")):
        try:
            read(text)
        except UnitProblem as problem:
            assert problem.message
