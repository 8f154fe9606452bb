"""SO2-7: a double-contact converter, invented, in the ranges of the trade.

Ranges: handbook knowledge, from memory, no publication recorded. Law: the published one of `converter`, with
NASA polynomials, from the case file.

10 % SO2, 11 % O2, three beds, absorption of all SO3, a fourth bed as a train of its own.
"""

from __future__ import annotations

from functools import cache

import pytest

from reactorstage.train.result import Rating
from tests.bed.build import Tree, programme
from tests.chemistry.published_laws import SO2
from tests.published.converter import converter

FED = {"SO2": 500.0, "O2": 550.0, "N2": 3950.0}
"""kmol/h."""

RANGES = {
    1: ((410.0, 440.0), (590.0, 640.0), (60.0, 70.0)),
    2: ((430.0, 450.0), (500.0, 530.0), (85.0, 93.0)),
    3: ((430.0, 445.0), (450.0, 475.0), (95.0, 97.0)),
    4: ((410.0, 430.0), (430.0, 450.0), (99.5, 99.8)),
}
"""By bed: inlet and exit in degC, cumulative conversion in %."""


def gas(flows: dict[str, float]) -> Tree:
    total = sum(flows.values())
    shares = {name: f"{100.0 * flow / total!r} %" for name, flow in flows.items() if name != "N2"}
    return {
        "flow": f"{total!r} kmol/h",
        "temperature": "80 degC",
        "composition": {**shares, "N2": "rest"},
    }


@cache
def before_absorption() -> Rating:
    beds = [("25 t", "430 degC"), ("30 t", "440 degC"), ("45 t", "440 degC")]
    return programme(converter(SO2, gas(FED), beds, "1.3 bar(a)")).rate()


@cache
def after_absorption() -> Rating:
    left = before_absorption().profiles[-1].F[-1]
    flows = {
        name: 3.6 * float(flow)
        for name, flow in zip(before_absorption().species, left, strict=True)
        if name != "SO3"
    }
    return programme(converter(SO2, gas(flows), [("30 t", "425 degC")], "1.2 bar(a)")).rate()


@pytest.mark.parametrize("bed", RANGES)
def test_SO2_7_bed(bed: int) -> None:
    rating = before_absorption() if bed < 4 else after_absorption()
    along = rating.profiles[bed - 1 if bed < 4 else 0]
    gone = 100.0 * (1.0 - 3.6 * along.F[-1, rating.species.index("SO2")] / FED["SO2"])
    shown = (along.T[0] - 273.15, along.T[-1] - 273.15, gone)
    for value, (low, high) in zip(shown, RANGES[bed], strict=True):
        assert low <= value <= high, shown


def test_SO2_7_what_lies_outside_the_law_is_said() -> None:
    """The law holds from 420 to 590 degC; bed 1 ends above, by the ranges of the trade as well."""
    said = [note for note in before_absorption().notes if "outside the stated validity of oxidation" in note]
    (note,) = said
    assert " of bed 1 lies" in note
    share = before_absorption().number("bed 1.outside validity of oxidation")
    assert share is not None and 0.3 < share < 1.0
