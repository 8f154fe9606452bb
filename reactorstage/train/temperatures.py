"""Temperatures that a case states, in the order of the pipe: at bed inlets, and against the species data."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from typing import TYPE_CHECKING

import numpy as np

from reactorstage.case import units
from reactorstage.case.model import Number
from reactorstage.chemistry.reaction import Equation
from reactorstage.chemistry.species import SpeciesTable
from reactorstage.train.composition import feed_moles

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Section, Step
    from reactorstage.errors import Problem

Place = tuple[str | int, ...]

CLOSE = 1e-6
"""Kelvin by which a stated temperature may miss the end of the data: rounding of units."""

MOST = 3
"""Species that are named together."""


def at_inlets(case: Case, table: SpeciesTable) -> list[Number]:
    """What is known before any calculation of the temperatures at which beds are entered.

    Of each bed the one stated, else that of the device before it; of the first bed without either the mean
    of its feeds by moles. Beds behind mere mixing are left out.
    """
    found: list[Number] = []
    arriving: list[tuple[float, Number]] = []
    for section in case.train:
        for step in section.steps:
            if step.to is not None:
                arriving = [(1.0, step.to)]
            elif step.feed in case.feeds and section.kind == "entry":
                feed = case.feeds[step.feed]
                arriving.append((float(feed_moles(case, table, feed).sum()), feed.temperature))
        if section.bed is not None:
            given = section.bed.inlet_temperature
            found += [given] if given is not None else [_mean(arriving)] if arriving else []
            arriving = []
    return found


def _mean(arriving: Sequence[tuple[float, Number]]) -> Number:
    """Mean of now, low and high by weight; a fixed number counts as its own ends."""
    if len(arriving) == 1:
        return arriving[0][1]
    weights = [weight for weight, _ in arriving]
    rows = [
        (one.now, one.now if one.low is None else one.low, one.now if one.high is None else one.high)
        for _, one in arriving
    ]
    now, low, high = np.average(rows, axis=0, weights=weights if sum(weights) > 0.0 else None)
    return Number(float(now), float(low), float(high), "temperature")


def beyond_data(case: Case, table: SpeciesTable, equations: Iterable[Equation]) -> Iterator[Problem]:
    """One problem for each stated temperature at which the data of a species there do not hold."""
    made = {name for equation in equations for name in equation.stoichiometry}
    for name, feed in case.feeds.items():
        holds = [s for s, share in feed.composition.items() if share > 0.0]
        yield from _misses(case, ("feeds", name, "temperature"), name, feed.temperature, table, holds)
    there: set[str] = set()
    for section in case.train:
        for number, step in enumerate(section.steps):
            if step.feed in case.feeds:
                there |= {s for s, share in case.feeds[step.feed].composition.items() if share > 0.0}
            elif step.to is not None:
                yield from _misses(case, _place(section, number, step), section.owner, step.to, table, there)
        if section.bed is not None:
            if section.bed.inlet_temperature is not None:
                place = (*section.path, "inlet temperature")
                stated = section.bed.inlet_temperature
                yield from _misses(case, place, section.owner, stated, table, there)
            there |= made


def _place(section: Section, number: int, step: Step) -> Place:
    return (*section.path, number, step.kind, "to")


def _misses(
    case: Case, place: Place, what: str, stated: Number, table: SpeciesTable, there: Iterable[str]
) -> Iterator[Problem]:
    """The first of now, from, to that lies beyond the data of the species `there`."""
    ends = {"now": stated.now, "from": stated.low, "to": stated.high}
    for key, T in ends.items():
        words = "" if T is None else _beyond(T, table, set(there))
        if words and T is not None:
            message = f"{what}: {degrees(T)} is {words}"
            hint = "correct the temperature, or give these species data that hold there"
            yield case.problem((*place, key) if stated.free else place, message, hint)
            return


def _beyond(T: float, table: SpeciesTable, there: set[str]) -> str:
    """Which data do not reach T, K; empty when all do."""
    rows = [s for s, name in enumerate(table.names) if name in there]
    low, high = common_range(table, rows)
    if low - CLOSE <= T <= high + CLOSE:
        return ""
    side, words = ("below", lowest_data(table, rows)) if low > T else ("above", highest_data(table, rows))
    return f"{side} the range of the species data ({words})"


def common_range(table: SpeciesTable, rows: Sequence[int]) -> tuple[float, float]:
    """Temperatures, K, at which the data of all species `rows` hold."""
    edges = table.edges[list(rows)]
    return float(edges[:, 0].max()), float(edges[:, -1].min())


def lowest_data(table: SpeciesTable, rows: Sequence[int]) -> str:
    """Where the data of `rows` that begin last begin, in words."""
    T = common_range(table, rows)[0]
    return f"{_named(table, rows, 0, T)} begin at {degrees(T)}"


def highest_data(table: SpeciesTable, rows: Sequence[int]) -> str:
    """Where the data of `rows` that end first end, in words."""
    T = common_range(table, rows)[1]
    return f"{_named(table, rows, -1, T)} end at {degrees(T)}"


def _named(table: SpeciesTable, rows: Sequence[int], edge: int, T: float) -> str:
    names = [table.names[s] for s in rows if table.edges[s, edge] == T]
    more = f" and {len(names) - MOST} more" if len(names) > MOST else ""
    return f"those of {', '.join(names[:MOST])}{more}"


def degrees(T: float) -> str:
    """K in degC, to a hundredth."""
    shown = round(units.to_display(T, "temperature"), 2)
    return f"{shown:g} degC"
