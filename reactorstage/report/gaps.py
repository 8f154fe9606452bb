"""The gap table: entry, gaps and effluent with their heat and what it costs."""

from __future__ import annotations

from collections.abc import Sequence

from reactorstage.report.beds import Before, paired, signs_of, values_of
from reactorstage.report.display import fixed, money, places, readable, shown, unit
from reactorstage.report.table import Column, Table, marked, table
from reactorstage.train.result import Rating

UNPRICED = "unpriced (!)"


def gap_table(now: Rating, was: Rating | None = None) -> Table:
    """One row per place that has steps, in flow direction."""
    places = places_of(now)
    before = Before(was, places)
    degc, power = unit("temperature"), unit("power")
    return table(
        "GAPS",
        [
            Column(("",), tuple(place.removeprefix("gap ") for place in places), left=True),
            _temperature(now, places, "inlet temperature", ("from", degc)),
            _temperature(now, places, "temperature after injection", ("after", "injection"), rank=1),
            _temperature(now, places, "temperature after exchanger", ("after", "exchanger")),
            _taken_out(now, places),
            *paired(now, before, "heat removed", ("heat removed,", power), 3, ranks=(0, 2)),
            _money(now, places),
            _destinations(now, places),
        ],
    )


def places_of(rating: Rating) -> list[str]:
    """Owners of steps in flow direction; with a place the rating did not reach left out."""
    return list(dict.fromkeys(step.owner for step in rating.steps))


def _temperature(
    rating: Rating, places: Sequence[str], word: str, heading: tuple[str, ...], rank: int = 0
) -> Column:
    values = values_of(rating, places, word)
    return Column(heading, marked(values, 1, signs_of(rating, places, word)), rank)


def _taken_out(rating: Rating, places: Sequence[str]) -> Column | None:
    """What removals and draws take out of the stream, where there are any."""
    out = dict.fromkeys(places, 0.0)
    taking = [step for step in rating.steps if step.kind in ("remove", "draw")]
    for step in taking:
        out[step.owner] -= step.flow
    cells = tuple(readable(shown(flow, "molar flow")) if flow else "-" for flow in out.values())
    return Column(("taken out,", unit("molar flow")), cells) if taking else None


def _money(rating: Rating, places: Sequence[str]) -> Column | None:
    if not rating.heat and not rating.unpriced:
        return None
    cells = tuple(_money_cell(rating, place) for place in places)
    return Column((unit("money rate", rating.case.currency), "(cost +)"), cells, rank=1)


def _money_cell(rating: Rating, place: str) -> str:
    if place in rating.unpriced:
        return UNPRICED
    return fixed(money(rating.money.get(f"heat of {place}")), 1)


def _destinations(rating: Rating, places: Sequence[str]) -> Column | None:
    if not rating.heat:
        return None
    cells = tuple(_destination_cell(rating, place) for place in places)
    return Column((f"levels, {unit('power')}",), cells, rank=10, left=True)


def _destination_cell(rating: Rating, place: str) -> str:
    sales = [sale for sale in rating.heat if sale.owner == place and abs(sale.heat) > 1.0]
    return ", ".join(f"{sale.level} {_heat_text(shown(sale.heat, 'power') or 0.0)}" for sale in sales) or "-"


def _heat_text(heat: float) -> str:
    return readable(heat) if heat < 100.0 else fixed(heat, places("power", 2))
