"""Numbers and lists in words."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.report import display
from reactorstage.report.table import folded


@pytest.mark.parametrize(
    ("owners", "text"),
    [
        (["bed 1"], "bed 1"),
        (["bed 1", "bed 2", "bed 3"], "beds 1-3"),
        (["bed 3", "bed 2"], "beds 2 and 3"),
        (["bed 1", "bed 2", "bed 4"], "beds 1, 2 and 4"),
        (["gap 1", "gap 2", "effluent"], "gaps 1 and 2 and effluent"),
        (["effluent"], "effluent"),
        ([], ""),
    ],
)
def test_owners_are_drawn_together(owners: list[str], text: str) -> None:
    assert display.owners_text(owners) == text


@pytest.mark.parametrize(
    ("value", "kind", "text"),
    [
        (697.15, "temperature", "424 degC"),
        (11.6, "ratio", "11.6 mol/mol"),
        (2.0e6, "power", "2 MW"),
        (1.35e3 / 3600, "molar flow", "1.35 kmol/h"),
        (0.0, "power", "0 MW"),
        (0.85, "fraction", "85 %"),
    ],
)
def test_bounds_read_as_their_owner_wrote_them(value: float, kind: str, text: str) -> None:
    assert display.allowed(value, kind) == text


def test_a_value_that_is_not_there_is_a_dash() -> None:
    assert display.told(None, "temperature") == "-"
    assert display.fixed(None, 2) == "-"


def test_no_number_is_shown_as_minus_zero() -> None:
    assert display.fixed(-0.0001, 1) == "0.0"
    assert display.brief(-0.0) == "0"


@given(st.floats(0.5, 9e5))
def test_brief_numbers_keep_three_figures_and_have_no_exponent(value: float) -> None:
    text = display.brief(value)
    assert "e" not in text
    assert float(text) == pytest.approx(value, rel=1e-3)


def test_margins_of_temperature_are_differences() -> None:
    assert display.difference(1.0, "temperature") == 1.0
    assert display.unit(display.difference_kind("temperature")) == "K"
    assert display.unit(display.difference_kind("pressure")) == "bar"


def test_a_column_has_no_more_decimals_than_it_needs() -> None:
    assert display.same_decimals([384.0, 384.0, None], 1) == ["384", "384", "-"]
    assert display.same_decimals([384.0, 397.9], 1) == ["384.0", "397.9"]


@given(st.text("abcdefghilmnoprstuyz -", min_size=1, max_size=40))
def test_folding_a_name_loses_no_letter(name: str) -> None:
    joined = "".join(part.removesuffix("-") if i == 0 else part for i, part in enumerate(folded(name)))
    assert joined.replace("-", "").replace(" ", "") == name.replace("-", "").replace(" ", "")


def test_names_fold_where_a_syllable_begins() -> None:
    assert folded("diethylbenzene") == ("diethyl-", "benzene")
    assert folded("sulfur dioxide") == ("sulfur", "dioxide")
    assert folded("benzene") == ("benzene",)
