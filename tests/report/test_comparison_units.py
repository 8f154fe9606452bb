"""Comparisons in other sets of units: values of result files are turned, money and plain numbers are not."""

from __future__ import annotations

import pytest

from reactorstage.report.comparison import Difference, LimitDifference
from reactorstage.report.comparison_units import difference_shown, limit_shown
from reactorstage.report.display import in_units


@pytest.mark.parametrize(
    ("units", "unit", "value", "shown_unit", "shown"),
    [
        ("US", "degC", 100.0, "degF", 212.0),
        ("US", "K", 10.0, "R", 18.0),
        ("SI", "degC", 100.0, "K", 373.15),
        ("SI", "bar(a)", 2.0, "kPa(a)", 200.0),
        ("gauge", "bar(a)", 2.01325, "bar(g)", 1.0),
        ("gauge", "bar", 2.0, "bar", 2.0),
        ("SI", "kmol/h", 3.6, "mol/s", 1.0),
        ("SI", "EUR/h", 5.0, "EUR/h", 5.0),
        ("US", "%", 5.0, "%", 5.0),
        ("US", "mol/mol", 5.0, "mol/mol", 5.0),
        ("trade", "degC", 100.0, "degC", 100.0),
    ],
)
def test_values_are_shown_in_the_chosen_set(
    units: str, unit: str, value: float, shown_unit: str, shown: float
) -> None:
    """Closed forms; one standard atmosphere is 1.01325 bar."""
    with in_units(units):
        row = difference_shown(Difference("x", unit, value, None))
        limit = limit_shown(LimitDifference("x", unit, "at most", (None, value), (value, None), ("", "")))
    assert (row.unit, limit.unit) == (shown_unit, shown_unit)
    assert row.first == pytest.approx(shown, rel=1e-12) and row.second is None
    assert limit.allowed[1] == limit.values[0] == pytest.approx(shown, rel=1e-12)
