"""Sets of display units: one at a time, consistent, and never in JSON.

Factors are held against Pint, an independent program, whose Btu differs by 1.4e-7 from ours.
"""

from __future__ import annotations

import re
from dataclasses import replace
from functools import cache

import pint
import pytest

from reactorstage.case import units
from reactorstage.commands.layout import table_lines
from reactorstage.errors import CallError
from reactorstage.report.beds import bed_table
from reactorstage.report.display import in_units, places, shown, told, unit
from reactorstage.report.gaps import gap_table
from reactorstage.report.profiles_csv import headings
from reactorstage.report.result_json import as_text, rating_json
from reactorstage.report.sentences import notes
from reactorstage.report.unit_sets import RATE, RATE_SCALE, UNIT_SETS, Scale
from tests.report import synthetic

ABSOLUTE_ZERO = {"degC": -273.15, "degF": -459.67, "K": 0.0}
SI_OF = {kind.name: kind.si_unit for kind in units.KINDS.values()} | {RATE: "mol/(kg s)"}
ROWS = [(one.name, kind, scale) for one in UNIT_SETS.values() for kind, scale in one.scales.items()]


@cache
def registry() -> pint.UnitRegistry:
    return pint.UnitRegistry()


def pint_text(text: str) -> str:
    """A unit of ours as Pint reads it."""
    plain = re.sub(r"\((?:a|g)\)", "", text).replace("10^6 Btu", "1e6 Btu").replace("1000 lb", "1000 * lb")
    words = {
        "lbmol": "(453.59237 mol)",
        "R": "delta_degF",
        "m^3": "m**3",
        "ft^3": "ft**3",
        "kmol": "(1000 mol)",
    }
    for ours, theirs in words.items():
        plain = re.sub(rf"(?<![\w]){re.escape(ours)}(?![\w])", theirs.replace(" ", " * "), plain)
    return re.sub(r"(?<=[\w)]) (?=[\w(])", " * ", plain)


@pytest.mark.parametrize(("name", "kind", "scale"), [*ROWS, ("trade", RATE, RATE_SCALE)])
def test_scale_is_that_of_its_unit(name: str, kind: str, scale: Scale) -> None:
    if kind == "temperature":
        assert -scale.offset == pytest.approx(ABSOLUTE_ZERO[scale.unit])
        assert 180.0 * scale.scale == pytest.approx(100.0 if scale.unit == "degF" else 180.0)
        return
    factor = registry().parse_expression(f"1 * {pint_text(scale.unit)}")
    assert factor.to(pint_text(SI_OF[kind])).magnitude == pytest.approx(scale.scale, rel=1e-6)


def test_gauge_pressure_counts_from_one_atmosphere() -> None:
    with in_units("gauge"):
        assert shown(units.ATMOSPHERE, "pressure") == pytest.approx(0.0)
        assert shown(units.ATMOSPHERE, "pressure difference") == pytest.approx(1.01325)


def test_differences_of_temperature_have_no_offset() -> None:
    with in_units("US"):
        assert (told(637.15, "temperature"), told(46.0, "temperature difference")) == ("687.2 degF", "82.8 R")


def test_the_set_ends_with_its_block_even_after_an_error() -> None:
    with pytest.raises(ZeroDivisionError), in_units("SI"):
        assert unit("power") == "kW"
        raise ZeroDivisionError
    assert unit("power") == "MW"


def test_an_unknown_set_is_a_wrong_call() -> None:
    with pytest.raises(CallError, match=r"metric.*trade"), in_units("metric"):
        pass


def test_decimals_follow_the_size_of_the_unit() -> None:
    with in_units("SI"):
        assert (places("power", 3), places("molar flow", 1), places("temperature", 1)) == (1, 2, 1)
    assert places("power", 3) == 3


@pytest.mark.parametrize("name", [name for name in UNIT_SETS if name != "trade"])
def test_a_screen_and_a_csv_hold_units_of_one_set_alone(name: str) -> None:
    rating = synthetic.rating()
    with in_units(name):
        lines = [*table_lines(bed_table(rating), 160), *table_lines(gap_table(rating), 160)]
        text = " ".join([*lines, *headings(rating)]).replace("steam 9 bar", "")
    foreign = {units.KINDS[kind].display_unit for kind in UNIT_SETS[name].scales if kind in units.KINDS}
    foreign -= {scale.unit for scale in UNIT_SETS[name].scales.values()} | {"K", "t"}
    assert [word for word in foreign if re.search(rf"(?<!\w){re.escape(word)}(?!\w)", text)] == []


def test_json_does_not_change_with_the_set() -> None:
    rating = synthetic.rating()
    trade = as_text(rating_json(rating))
    with in_units("US"):
        assert as_text(rating_json(rating)) == trade


def test_a_note_about_an_unlit_bed_follows_the_set() -> None:
    """Closed form: 31 K are 55.8 R, 0.3 K are 0.54 R."""
    note = "Bed 2 is practically unlit: it rises 0.3 K of a possible 31 K."
    rating = replace(synthetic.rating(), notes=(note, "4 % of bed 1 lies outside."))
    assert notes(rating)[0] == note
    with in_units("US"):
        assert notes(rating) == [
            "Bed 2 is practically unlit: it rises 0.5 R of a possible 55.8 R.", "4 % of bed 1 lies outside.",
        ]  # fmt: skip
