"""Exchangers, recycles and states of a rated train, for people."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.case import units
from reactorstage.chemistry.thermo import cp
from reactorstage.train.closures import AREA_OF, Closure, Exchange, FeedHeat, HeldHeat, Return, row_of
from reactorstage.train.result import Closed, ExchangeState, TrainState, TurningPoint, Value
from reactorstage.train.states import SAME, Found, State, leads

if TYPE_CHECKING:
    from reactorstage.train.programme import Model

Array = NDArray[np.float64]
Tell = Callable[[float, str], str]


def closed_result(model: Model, base: Array, x: Array, known: Found) -> Closed:
    """Everything about the closures at x; base (size,) is the base vector of the rating."""
    column = base[:, None]
    closures = model.layout.closures
    return Closed(
        exchanges=tuple(_exchange(one, column) for one in closures if isinstance(one, Exchange)),
        states=tuple(_states(model, x, known)),
        folds=tuple(TurningPoint(one.exchanger, one.heat, one.needed, one.least) for one in known.folds),
        residuals=dict(_residual(model, one, column) for one in closures),
    )


def _exchange(one: Exchange, base: Array) -> ExchangeState:
    values = base[:, 0]
    first, last = (end.value(values) for end in one.ends)
    return ExchangeState(
        name=one.name,
        from_=one.from_,
        to=one.to,
        heat=one.heat.value(values),
        hot=(one.hot[0].value(values), one.hot[1].value(values)),
        cold=(one.cold[0].value(values), one.cold[1].value(values)),
        differences=(first, last),
        effectiveness=one.effectiveness(base),
        conductance=float(one.size.conductance(base)[0]) if one.size.area is not None else None,
    )


def _residual(model: Model, one: Closure, base: Array) -> tuple[str, float]:
    """Name and relative residual of a closure."""
    found = np.abs(one.residuals(base)[:, 0])
    if isinstance(one, Return):
        S = len(one.fractions)
        T = float(base[one.record + S + 2, 0])
        F = base[one.record : one.record + S, 0]
        heat = T * float(F @ cp(model.chemistry.table, T)) / float(F.sum())
        return f"recycle {one.name}", float(max(found[:S].max(), found[S] / heat))
    if isinstance(one, FeedHeat | HeldHeat):
        words = "feed" if isinstance(one, FeedHeat) else "held stream"
        size = max(abs(one.heat.value(base[:, 0])), 1.0)
        return f"{words} of exchanger {one.name}", float(found[0] / size)
    between = abs(row_of(one.hot[0] - one.cold[0], base)[0])
    scale = between if one.size.effectiveness is not None or one.parallel else abs(one.heat.value(base[:, 0]))
    name = one.name if one.name.startswith(AREA_OF) else f"exchanger {one.name}"
    return name, float(found[0] / max(scale, 1e-9))


def _states(model: Model, x: Array, known: Found) -> Iterator[TrainState]:
    from reactorstage.train.closing import Closing

    closing = Closing(model)
    here = model.inputs.all_numbers(x)[closing.unknown]
    with_heat = any(leads(one) for one in model.layout.closures)
    for one in known.states:
        trial = closing.at(one.v, slopes=False)
        if trial.base is None:
            continue
        values = trial.base[:, 0]
        exits = [model.layout.temperature(bed.exit).value(values) for bed in model.layout.beds]
        first = model.layout.temperature(model.layout.beds[0].inlet).value(values)
        apart = float(np.abs((one.v[closing.unknown] - here) / closing.span).max())
        yield TrainState(first, max(exits), _heat(one, with_heat), one.stable, apart < SAME)


def _heat(one: State, with_heat: bool) -> float | None:
    return one.heat if with_heat else None


def effectivenesses(closed: Closed) -> dict[str, Value]:
    """The effectiveness of every exchanger between streams as a quantity of the rating."""
    return {
        f"exchanger {one.name}.effectiveness": Value(
            one.effectiveness, "fraction", "" if one.effectiveness is not None else "no difference of inlets"
        )
        for one in closed.exchanges
        if not one.name.startswith(AREA_OF)
    }


def plainly(value: float, kind: str) -> str:
    """A number of a note with its unit, in trade units."""
    decimals = 0 if kind == "temperature" else 2
    return f"{units.to_display(value, kind):.{decimals}f} {units.display_unit(kind)}"


def closure_notes(closed: Closed, tell: Tell = plainly) -> list[str]:
    """What must be said of several states and of the nearest fold.

    tell(value, kind) writes a number with its unit.
    """
    notes = []
    if len(closed.states) > 1:
        shown = [one for one in closed.states if one.shown]
        others = [one for one in closed.states if not one.shown]
        head = f"This setting has {len(closed.states)} states"
        if shown:
            head += f"; shown is the one with {_state_words(shown[0], tell)}"
        notes.append(f"{head}; the others: {'; '.join(_state_words(one, tell) for one in others)}.")
    notes += [text for text in (_fold_note(closed, tell),) if text]
    return notes


def _state_words(one: TrainState, tell: Tell) -> str:
    stable = "stable by its slope" if one.stable else "UNSTABLE, a disturbance grows"
    first, hottest = (tell(T, "temperature") for T in (one.T_first, one.T_hottest))
    return f"bed 1 at {first}, hottest exit {hottest} ({stable})"


def _fold_note(closed: Closed, tell: Tell) -> str:
    """The fold nearest to the state shown: how much smaller or larger the exchanger would have to be."""
    shown = next((one for one in closed.states if one.shown), None)
    least = [one for one in closed.folds if one.least]
    if shown is None or shown.heat is None or not least:
        return ""
    below = [one for one in least if one.heat < shown.heat]
    if below:
        fold = max(below, key=lambda one: one.heat)
        return (
            f"Extinction: the state shown is lost when exchanger {fold.exchanger} falls to "
            f"{100.0 * fold.needed:.1f} % of its size, at {tell(fold.heat, 'power')}."
        )
    fold = min(least, key=lambda one: one.needed)
    return (
        f"No ignited state: the nearest fold is at {tell(fold.heat, 'power')}, where exchanger "
        f"{fold.exchanger} would need {100.0 * fold.needed:.1f} % of its size."
    )
