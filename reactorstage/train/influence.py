"""What moves the best cost: its derivative by every parameter of a case, at an answer.

By the envelope theorem (Fiacco 1983, from memory) the derivative of the optimal cost by a parameter p is that
of the Lagrangian at the answer, dC/dp - sum_i lambda_i dg_i/dp, with the free numbers standing still. Where
more limits hold the answer than it has free numbers the multipliers are one choice of several, and a change
the other way may differ.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed import data as kernel
from reactorstage.errors import ComputationError
from reactorstage.train.parameters import Parameter, directions, parameters_of
from reactorstage.train.passing import FINAL

if TYPE_CHECKING:
    from reactorstage.train.programme import Model, TrainProgramme

Array = NDArray[np.float64]

PART = 0.01
KILOJOULE = 1e3
MIXTURE = 1e-3
HELD_TEMPERATURES = ("temperature", "temperature difference")


@dataclass(frozen=True)
class Influence:
    """change of the best cost for a step of a parameter, per second; slope is that per SI unit of it.

    step is in SI of kind, relative where it is a part (1 %) of the value. group gathers parameters of the
    same meaning in several places: (word, owners).
    """

    name: str
    step: float
    kind: str
    relative: bool
    slope: float
    change: float
    group: tuple[str, str] = ("", "")


def influences(programme: TrainProgramme, x: Array, multipliers: Array) -> tuple[Influence, ...]:
    """Every parameter, price and bound with what a small step of it does to the best cost, largest first.

    multipliers (M,) are money per second and own unit of each limit, as an answer of the optimiser has
    them. Raises ComputationError where the train has no answer at x.
    """
    found = [
        *_by_parameters(programme, x, multipliers),
        *_by_prices(programme, x),
        *_by_bounds(programme, multipliers),
    ]
    return tuple(sorted(found, key=lambda one: (-abs(one.change), one.name)))


def _by_parameters(programme: TrainProgramme, x: Array, multipliers: Array) -> Iterator[Influence]:
    """Numbers of the case that are not free, kinetics, thermochemistry and compositions."""
    model = programme.model
    picked = [one for one in parameters_of(model) if _asked_for(model, one)]
    v = model.inputs.all_numbers(x)
    u, du_dv = model.inputs.of_numbers(v)
    du, moved = directions(picked, du_dv)
    outcome = model.passing.adaptive(u, du, FINAL, moved=moved)
    if outcome.failure:
        raise ComputationError(outcome.failure)
    base = model.base(outcome.out, u, du, x, model.wanted, moved=moved)
    slopes = programme.lagrangian_of(base, multipliers)
    for one, slope in zip(picked, slopes * np.array([one.factor for one in picked]), strict=True):
        step, kind, relative = _step(model, one, v)
        if step > 0.0:
            yield Influence(one.name, step, kind, relative, slope, slope * step, _group(one.name))


def _asked_for(model: Model, one: Parameter) -> bool:
    """Left out are free numbers and the one species of a pure feed, which is its flow under another name."""
    if one.kind < 0:
        return one.index not in model.inputs.free
    if one.kind == kernel.COMPOSITION:
        return bool(model.layout.compositions.flat[one.index] < 1.0)
    return True


def _step(model: Model, one: Parameter, v: Array) -> tuple[float, str, bool]:
    """A small step of a parameter in SI, its kind, and whether it is a part of the value."""
    if one.kind < 0:
        kind = model.inputs.numbers[one.index].kind
        if kind in HELD_TEMPERATURES:
            return 1.0, "temperature difference", False
        if kind == "fraction":
            return PART, "fraction", False
        return PART * abs(float(v[one.index])), kind, True
    if one.kind in (kernel.LN_K, kernel.LN_K_TERM):
        return PART, "fraction", True
    if one.kind == kernel.COMPOSITION:
        return MIXTURE, "fraction", False
    if one.kind == kernel.ENTROPY:
        return 1.0, "molar entropy", False
    return KILOJOULE, "molar energy", False


def _group(name: str) -> tuple[str, str]:
    """Word and owner of a number that beds or gaps have each."""
    owner, _, word = name.partition(".")
    return (word, owner) if owner.startswith(("bed ", "gap ")) else ("", "")


def _by_prices(programme: TrainProgramme, x: Array) -> Iterator[Influence]:
    """Prices on quantities and of heat levels, where money is what is least or most: 1 % of each."""
    if programme.case.aim.quantity != "money.total":
        return
    rating = programme.rate(x, dense=False)
    sign = 1.0 if programme.case.aim.direction == "least" else -1.0
    for label in programme.case.prices:
        money = sign * rating.money[label]
        yield Influence(f"price {label}", PART, "fraction", True, money, PART * money)
    levels: dict[str, float] = {}
    for sale in rating.heat:
        levels[sale.level] = levels.get(sale.level, 0.0) + sign * sale.money
    for level, money in levels.items():
        if money != 0.0:
            yield Influence(f"price of level {level}", PART, "fraction", True, money, PART * money)


def _by_bounds(programme: TrainProgramme, multipliers: Array) -> Iterator[Influence]:
    """Bounds of limits, each by the step by which its worth is asked, towards more freedom."""
    for row, worth in zip(programme.limits, multipliers, strict=True):
        if worth > 0.0 and not row.implied:
            name = f"limit {row.label}, {row.owner}"
            group = (f"limit {row.label} relaxed", row.owner)
            yield Influence(name, row.step, row.kind, False, -worth, -worth * row.step, group)
