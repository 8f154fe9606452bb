"""Heat that leaves and enters the train over temperature, beside the levels that take and give it.

Between the ends of an exchanger heat follows the enthalpy of the stream as an ideal gas, scaled to the heat.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from reactorstage.train.layout import mole_fractions
from reactorstage.train.result import Array, Rating, StepState

POINTS = 17
LEAST_HEAT = 1.0
"""Heats below a watt are not drawn."""


@dataclass(frozen=True)
class Rung:
    """A level in use: its name, its temperature in K, the heat in W that it takes or gives."""

    name: str
    T: float
    heat: float


@dataclass(frozen=True)
class Cascade:
    """One side: removed or added heat.

    heat and T (N,) are the sum of all streams from the cold end, W and K; rungs from the cold end in order of
    temperature; approach in K is how far a stream must stay off its level.
    """

    heating: bool
    heat: Array
    T: Array
    rungs: tuple[Rung, ...]
    approach: float

    @property
    def total(self) -> float:
        return float(self.heat[-1])


def cascades(rating: Rating) -> list[Cascade]:
    """Heat removed and heat added, as far as there is any; of priced places alone where there are some."""
    found = [_cascade(rating, heating) for heating in (False, True)]
    return [one for one in found if one is not None]


def left_out(rating: Rating) -> list[str]:
    """Unpriced places that are not drawn because others have levels to be drawn against."""
    return [owner for owner in rating.unpriced if rating.heat]


def passed_on(rating: Rating) -> list[str]:
    """Exchangers between streams: their heat enters and leaves no level, so it is not drawn."""
    return [one.name for one in rating.closed.exchanges]


def _cascade(rating: Rating, heating: bool) -> Cascade | None:
    streams = [step for step in rating.steps if _counts(step, rating, heating)]
    if not streams:
        return None
    T, heat = composite([_curve(rating, step) for step in streams])
    levels = rating.case.heat_levels
    return Cascade(heating, heat, T, _rungs(rating, heating), levels.minimum_approach if levels else 0.0)


def _counts(step: StepState, rating: Rating, heating: bool) -> bool:
    return (
        step.kind in ("heat", "cool")
        and step.what not in passed_on(rating)
        and step.T_before is not None
        and (step.heat_removed < -LEAST_HEAT if heating else step.heat_removed > LEAST_HEAT)
        and step.owner not in left_out(rating)
    )


def composite(streams: Sequence[tuple[Array, Array]]) -> tuple[Array, Array]:
    """The sum of streams (T rising K, heat W from the cold end): temperatures and heat from the coldest."""
    T = np.unique(np.concatenate([stream[0] for stream in streams]))
    heat = np.zeros(len(T))
    for own, Q in streams:
        flat = own[-1] <= own[0]
        heat += np.where(own[0] <= T, Q[-1], 0.0) if flat else np.interp(T, own, Q)
    return T, heat


def _curve(rating: Rating, step: StepState) -> tuple[Array, Array]:
    """Heat of one exchanger from its cold end over temperature; straight where the stream is not known."""
    low, high = sorted((step.T_before or step.T_after, step.T_after))
    F = flow_at(rating, step)
    if F is None or high <= low or not rating.profiles:
        return np.array([low, high]), np.array([0.0, abs(step.heat_removed)])
    assert rating.chemistry is not None
    T = np.linspace(low, high, POINTS)
    mixture, p = rating.chemistry.mixture, pressure_at(rating, step)
    H = np.array([float(mixture.enthalpy(F, float(t), p)) for t in T])
    return T, abs(step.heat_removed) * (H - H[0]) / (H[-1] - H[0])


def _number(owner: str) -> int:
    """The number of a gap; 0 for other places."""
    last = owner.rpartition(" ")[2]
    return int(last) if last.isdigit() else 0


def pressure_at(rating: Rating, step: StepState) -> float:
    """Pressure of a step, Pa: that of the exit of the bed before, in the entry that of the first inlet."""
    before = len(rating.profiles) if step.owner == "effluent" else _number(step.owner)
    return float(rating.profiles[before - 1].p[-1] if before > 0 else rating.profiles[0].p[0])


def flow_at(rating: Rating, step: StepState) -> Array | None:
    """Flows (S,) through a step of entry, gap or effluent, mol/s; None where the beds before have none."""
    if rating.chemistry is None:
        return None
    before = len(rating.profiles) if step.owner == "effluent" else _number(step.owner)
    if step.owner == "entry":
        F = np.zeros(len(rating.species))
    elif before <= len(rating.profiles) and before > 0:
        F = rating.profiles[before - 1].F[-1].copy()
    else:
        return None
    for one in rating.steps:
        if one is step:
            break
        if one.owner == step.owner and one.kind in ("take", "inject"):
            F += one.flow * mole_fractions(rating.case, rating.chemistry, rating.case.feeds[one.what])
    return F


def _rungs(rating: Rating, heating: bool) -> tuple[Rung, ...]:
    """Levels in use, the coldest first."""
    levels = rating.case.heat_levels
    if levels is None:
        return ()
    given: dict[str, float] = {}
    for sale in rating.heat:
        if sale.heating == heating and sale.heat > LEAST_HEAT:
            given[sale.level] = given.get(sale.level, 0.0) + sale.heat
    rungs = []
    for name, heat in given.items():
        level = levels.levels.get(name)
        T = None if level is None else level.heats_up_to if heating else level.cools_down_to
        if T is not None:
            rungs.append(Rung(name, T, heat))
    return tuple(sorted(rungs, key=lambda rung: rung.T))
