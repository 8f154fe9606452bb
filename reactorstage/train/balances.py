"""Balances of atoms and energy over a whole train, and quenches that quench nothing."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.thermo import cp, h
from reactorstage.train.closures import FeedHeat
from reactorstage.train.passing import Outcome

if TYPE_CHECKING:
    from reactorstage.train.programme import Model

Array = NDArray[np.float64]


def closure(model: Model, base: Array) -> tuple[float, float]:
    """Relative closure of atoms and of energy over the whole train, recycles and exchangers included.

    Atoms: largest difference between feeds and what leaves of an element, by its flow. Energy: feeds less
    heat removed less the enthalpy of what leaves, found anew from its flows and temperature, by the enthalpy
    that the train turns over (sum of absolute changes along beds and heat removed). What leaves is effluent
    and removals; a recycle that leaves and one that enters are counted as they are stated on either side, so
    that a loop that is not closed shows here.
    """
    layout, table, mixture = model.layout, model.chemistry.table, model.chemistry.mixture
    S, width = layout.species, layout.width
    fed, enthalpy, turned = np.zeros(S), 0.0, 0.0
    for operation, amount in layout.amounts.items():
        feed = int(layout.operations[operation][1])
        flow = base[layout.rows + amount] * layout.compositions[feed]
        state = layout.rows + layout.feed_temperature[layout.feeds[feed]]
        fed += flow
        given = model.case.feeds[layout.feeds[feed]]
        if flow.any():
            enthalpy += float(mixture.enthalpy(flow, float(base[state]), float(base[state + 1]), given.phase))
    left_F, left_H = _left(model, base)
    elements = np.abs(fed @ table.atoms)
    atoms = float((np.abs((fed - left_F) @ table.atoms) / np.where(elements > 0.0, elements, 1.0)).max())
    for place in layout.places:
        for device in place.devices:
            Q = layout.heat_removed(device).value(base)
            enthalpy -= Q
            turned += abs(Q)
    for bed in layout.beds:
        inlet, out = base[bed.inlet * width :][:width], base[bed.exit * width :][:width]
        turned += abs(float(out[:S] @ (h(table, float(out[S + 2])) - h(table, float(inlet[S + 2])))))
    for one in layout.closures:
        if isinstance(one, FeedHeat):
            enthalpy += one.sign * one.heat.value(base)
    record = base[(len(layout.operations) - 1) * width :][:width]
    one_kelvin = float(record[:S] @ cp(table, float(record[S + 2])))
    return atoms, abs(enthalpy - left_H) / max(turned, one_kelvin)


def _left(model: Model, base: Array) -> tuple[Array, float]:
    """Flows (S,) and enthalpy of what leaves for good, with what recycles draw less what they bring."""
    layout, mixture = model.layout, model.chemistry.mixture
    S, width, end = layout.species, layout.width, len(layout.operations) - 1

    def record(operation: int) -> Array:
        return base[operation * width : (operation + 1) * width]

    def enthalpy(flows: Array, operation: int) -> float:
        there = record(operation)
        return (
            float(mixture.enthalpy(flows, float(there[S + 2]), float(there[S + 1]))) if flows.any() else 0.0
        )

    F = record(end)[:S].copy()
    H = enthalpy(F, end)
    for place in layout.places:
        for operation, kind, _ in place.others:
            if kind in ("remove", "draw"):
                gone = record(operation - 1)[:S] - record(operation)[:S]
                F, H = F + gone, H + float(record(operation - 1)[S] - record(operation)[S])
    for operation in layout.returned:
        F -= record(operation)[:S] - record(operation - 1)[:S]
        H -= float(record(operation)[S] - record(operation - 1)[S])
    return F, H


def warm_quenches(model: Model, base: Array, outcome: Outcome) -> list[str]:
    """Injections of gaps that are no colder than what leaves the bed before them."""
    layout, notes = model.layout, []
    for place in layout.places:
        for operation, name in place.injections if place.kind == "gap" and not outcome.failure else ():
            before = layout.temperature(place.first - 1).value(base)
            own = _injected_temperature(model, base, operation, name)
            flow = base[layout.rows + layout.amount(operation)]
            if flow > 0.0 and own >= before:
                notes.append(
                    f"{name} enters {place.owner} at {own - 273.15:.0f} degC, no colder than the "
                    f"{before - 273.15:.0f} degC of what leaves the bed: it quenches nothing."
                )
    return notes


def _injected_temperature(model: Model, base: Array, operation: int, name: str) -> float:
    """Temperature of what is injected, K."""
    layout = model.layout
    if operation in layout.amounts:
        return float(base[layout.rows + layout.operations[operation][3]])
    return layout.temperature(layout.recycles[name][1]).value(base)
