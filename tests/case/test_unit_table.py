"""The table of common units against Pint and against published factors."""

from __future__ import annotations

import pytest

from reactorstage.case.unit_text import COMMON, DIMENSIONS, from_pint, parse_unit, registry
from reactorstage.case.units import in_unit, to_si

# NIST Special Publication 811 (2008), appendix B, and exact definitions; values from memory.
PUBLISHED = [
    ("1 atm", "Pa", 101325.0),
    ("1 bar", "Pa", 1e5),
    ("1 psi", "Pa", 6.894757e3),
    ("1 torr", "Pa", 1.333224e2),
    ("1 kgf/cm^2", "Pa", 9.80665e4),
    ("1 cal", "J", 4.184),
    ("1 BTU", "J", 1.05505585262e3),
    ("1 kWh", "J", 3.6e6),
    ("1 hp", "W", 7.456999e2),
    ("1 lb", "kg", 4.5359237e-1),
    ("1 ft", "m", 3.048e-1),
    ("1 inch", "m", 2.54e-2),
    ("1 gallon", "m^3", 3.785412e-3),
    ("1 poise", "Pa s", 1e-1),
    ("1 day", "s", 8.64e4),
    ("1 lb/ft^3", "kg/m^3", 1.601846e1),
]


@pytest.mark.parametrize(("text", "unit", "expected"), PUBLISHED)
def test_factors_agree_with_published_ones(text: str, unit: str, expected: float) -> None:
    assert in_unit(text, unit) == pytest.approx(expected, rel=5e-7)


@pytest.mark.parametrize("word", sorted(set(COMMON) - {"%"}))
def test_table_agrees_with_pint(word: str) -> None:
    pint = registry().Quantity(1.0, word).to_base_units()
    assert COMMON[word].factor == pytest.approx(pint.magnitude, rel=1e-12)
    assert {d: p for d, p in zip(DIMENSIONS, COMMON[word].powers, strict=True) if p} == dict(
        pint.dimensionality
    )


@pytest.mark.parametrize(
    "text",
    ["kmol/(kg h bar^2)", "J/(mol K^2)", "kW/(m^2 K)", "mol/(m^3 s)", "kJ/kmol", "kmol/(m^3 h bar^0.5)"],
)
def test_compound_units_agree_with_pint(text: str) -> None:
    assert parse_unit(text).factor == pytest.approx(registry().Quantity(1.0, text).to_base_units().magnitude)


def test_units_outside_the_table_come_from_pint() -> None:
    assert "stone" not in COMMON
    assert to_si("1 stone", "mass") == pytest.approx(6.35029318)  # 14 lb, exact by definition


@pytest.mark.parametrize("word", ["degC", "dB", "candela", "ampere", "xyzzy"])
def test_pint_words_that_are_no_plain_factor_are_left_out(word: str) -> None:
    assert from_pint(word) is None
