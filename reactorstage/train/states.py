"""All states of a train that is closed on itself, and the folds at which two of them meet and vanish.

With an exchanger the heat of the first one is taken through its whole range, the other closures solved at
each value: a state is where the exchanger passes just this heat (van Heerden 1953, the idea of the diagram).
The size that the exchanger would need for each heat has its turning points at the folds, so these are found
in terms of the exchanger itself. Without an exchanger Newton starts from several points.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.data import Chemistry
from reactorstage.train.closing import Closing, Solved
from reactorstage.train.closures import Exchange

if TYPE_CHECKING:
    from reactorstage.train.programme import Model

Array = NDArray[np.float64]

POINTS, CLOSER = 33, 41
"""Values of the exchanged heat at which the closures are looked at: in all, and where no stream crosses."""

REFINED = 1e-4
"""How exactly a turning point is found, as a share of the distance between its neighbours."""

FAR = 1e6
"""Size, over that which is there, from which on a crossing is as good as one."""

SAME = 1e-4
"""States nearer than this share of the ranges are one."""

STARTS = (0.1, 0.3, 0.5, 0.7, 0.9)


@dataclass(frozen=True)
class State:
    """One state: all numbers v (V,), whether the slope condition holds, and the heat exchanged, W.

    stable is false where a small disturbance grows by itself; true promises no more than that it does not
    grow without swinging.
    """

    v: Array
    stable: bool
    heat: float


@dataclass(frozen=True)
class Fold:
    """Where two states meet: heat of the exchanger, and the size there over the size that is there.

    v: all numbers (V,) there, every closure closed but that of the exchanger.
    """

    exchanger: str
    heat: float
    needed: float
    least: bool
    v: Array


@dataclass(frozen=True)
class Found:
    """States, hottest (most heat) first, and folds by rising heat; why says why there are none."""

    states: tuple[State, ...]
    folds: tuple[Fold, ...] = ()
    why: str = ""


@dataclass
class _Curve:
    """Residual and needed size of one exchanger over its heat, with the other closures solved.

    The heat is that of the unknown; what passes is less where a part of a stream goes round the exchanger.
    """

    model: Model
    exchange: Exchange
    v: Array
    row: int
    chemistry: Chemistry | None = None

    def __post_init__(self) -> None:
        inputs = self.model.inputs
        first = len(inputs.free) - inputs.unknowns
        self.index = int(inputs.free[first + self.row])
        self.whole = Closing(self.model, chemistry=self.chemistry)
        others = Closing(self.model, chemistry=self.chemistry, without=self.row)
        self.rest = others if inputs.unknowns > 1 else None
        self.seen: dict[float, tuple[float, float, Array]] = {}
        self.passed: dict[float, float] = {}

    @property
    def range(self) -> tuple[float, float]:
        number = self.model.inputs.numbers[self.index]
        return number.low, number.high

    def at(self, heat: float) -> tuple[float, float, Array]:
        """Residual and needed size at a heat, not a number where the train has no answer; v there."""
        if heat not in self.seen:
            self.seen[heat] = self._found(heat)
        return self.seen[heat]

    def _found(self, heat: float) -> tuple[float, float, Array]:
        v = self._near(heat).copy()
        v[self.index] = heat
        if self.rest is not None:
            solved = self.rest.solve(v)
            if solved.failure:
                return np.nan, np.nan, v
            v = solved.v
        trial = self.whole.at(v, slopes=False)
        if trial.base is None:
            return np.nan, np.nan, v
        self.passed[heat] = self.exchange.heat.value(trial.base[:, 0])
        return float(trial.residual[self.row]), self.exchange.needed(trial.base), v

    def _near(self, heat: float) -> Array:
        """The numbers at the nearest heat that could be looked at."""
        known = [
            (abs(q - heat), k) for k, (q, found) in enumerate(self.seen.items()) if np.isfinite(found[0])
        ]
        return list(self.seen.values())[min(known)[1]][2] if known else self.v


def states(model: Model, v: Array, chemistry: Chemistry | None = None) -> Found:
    """All states that can be found with the numbers v (V,); its unknowns are where Newton may begin.

    chemistry replaces that of the case.
    """
    exchanges = [(k, one) for k, one in enumerate(_rows(model)) if isinstance(one, Exchange) and leads(one)]
    if not exchanges:
        return _from_starts(Closing(model, chemistry=chemistry), v)
    row, exchange = exchanges[0]
    curve = _Curve(model, exchange, v, row, chemistry)
    grid = _looked_at(curve)
    folds = _folds(curve, grid)
    found = _roots(curve, sorted({*grid, *(heat for heat, _ in folds)}))
    return Found(tuple(found), tuple(fold for _, fold in folds), "" if found else _why(curve, grid))


def leads(one: object) -> bool:
    """Whether a closure is an exchanger whose heat can be taken through its range."""
    return isinstance(one, Exchange) and not one.sized


def with_state(model: Model, known: Found, solved: Solved) -> Found:
    """The states with one that was solved for, where it is none of them (two states that nearly meet)."""
    closing = Closing(model)
    apart = [np.abs((one.v - solved.v)[closing.unknown] / closing.span).max() for one in known.states]
    if solved.failure or min(apart, default=1.0) < SAME:
        return known
    trial = closing.at(solved.v, slopes=False)
    first = next((one for one in model.layout.closures if isinstance(one, Exchange) and leads(one)), None)
    heat = 0.0 if first is None or trial.base is None else first.heat.value(trial.base[:, 0])
    added = State(solved.v, solved.slope_sign >= 0, heat)
    return replace(known, states=tuple(sorted((*known.states, added), key=lambda one: -one.heat)))


def _looked_at(curve: _Curve) -> list[float]:
    """Heats at which the curve is known: over the whole range, closer where the exchanger could be real."""
    grid = {0.0, *(float(q) for q in np.linspace(*curve.range, POINTS))}
    for heat in sorted(grid, key=abs):
        curve.at(heat)
    ordered = sorted(grid)
    real = [k for k, heat in enumerate(ordered) if np.isfinite(curve.at(heat)[1]) and heat >= 0.0]
    if real:
        low, high = ordered[max(real[0] - 1, 0)], ordered[min(real[-1] + 1, len(ordered) - 1)]
        grid |= {float(q) for q in np.linspace(max(low, 0.0), high, CLOSER)}
    apart = _apart(grid, REFINED * (curve.range[1] - curve.range[0]))
    for heat in sorted(apart, key=abs):
        curve.at(heat)
    return apart


def _apart(heats: Iterable[float], least: float) -> list[float]:
    """Heats in order without those nearer than least to the one before, where rounding would make folds."""
    kept: list[float] = []
    for heat in sorted(heats):
        if not kept or heat - kept[-1] > least:
            kept.append(heat)
    return kept


def _rows(model: Model) -> list[object]:
    """The closure of each unknown, in order."""
    rows: list[object] = []
    for one in model.layout.closures:
        rows += [one] * len(getattr(one, "unknowns", (0,)))
    return rows


def _folds(curve: _Curve, grid: list[float]) -> list[tuple[float, Fold]]:
    """Turning points of the needed size, each with the unknown there."""
    from scipy.optimize import minimize_scalar

    found = []
    values = [curve.at(heat)[1] for heat in grid]
    for k in range(1, len(grid) - 1):
        left, here, right = values[k - 1 : k + 2]
        if np.isnan([left, here, right]).any() or not np.isfinite(here) or grid[k] <= 0.0:
            continue
        sign = 1.0 if here < min(left, right) else -1.0 if here > max(left, right) else 0.0
        if sign == 0.0:
            continue
        best = minimize_scalar(
            lambda heat, sign=sign: sign * min(curve.at(float(heat))[1], FAR),
            bounds=(grid[k - 1], grid[k + 1]),
            method="bounded",
            options={"xatol": REFINED * (grid[k + 1] - grid[k - 1])},
        )
        heat = float(best.x) if sign * curve.at(float(best.x))[1] < sign * here else grid[k]
        _, needed, v = curve.at(heat)
        found.append((heat, Fold(curve.exchange.name, curve.passed[heat], needed, sign > 0.0, v)))
    return found


def _roots(curve: _Curve, grid: list[float]) -> list[State]:
    """States between neighbours where the residual changes its sign."""
    from scipy.optimize import brentq

    low, high = curve.range
    found: dict[float, State] = {}
    for left, right in pairwise(grid):
        a, b = curve.at(left)[0], curve.at(right)[0]
        if not (np.isfinite([a, b]).all() and a * b <= 0.0) or (b == 0.0 and right != grid[-1]):
            continue
        heat = left if a == 0.0 else float(
            brentq(lambda q: curve.at(float(q))[0], left, right, xtol=1e-5 * (high - low), rtol=1e-6)
        )  # fmt: skip
        solved = curve.whole.solve(curve.at(heat)[2])
        if solved.failure:
            continue
        y = float(solved.v[curve.index])
        trial = curve.whole.at(solved.v, slopes=False)
        if trial.base is not None and all(abs(y - other) >= SAME * (high - low) for other in found):
            passed = curve.exchange.heat.value(trial.base[:, 0])
            found[y] = State(solved.v, solved.slope_sign >= 0, passed)
    return [found[y] for y in sorted(found, reverse=True)]


def _why(curve: _Curve, grid: list[float]) -> str:
    """Why there is no state: the nearest miss, or that the train has no answer at any heat."""
    known = [(heat, *curve.at(heat)[:2]) for heat in grid]
    there = [(heat, needed) for heat, residual, needed in known if np.isfinite(residual)]
    name = curve.exchange.name
    if not there:
        return f"exchanger {name}: the train has no answer at any heat that it could pass"
    heat, needed = min(there, key=lambda pair: abs(np.log(max(pair[1], 1e-12))))
    return (
        f"exchanger {name}: no heat between {curve.range[0] / 1e6:.3g} and {curve.range[1] / 1e6:.3g} MW "
        f"fits it; nearest at {heat / 1e6:.3g} MW, which needs {needed:.3g} times its size"
    )


def _from_starts(closing: Closing, v: Array) -> Found:
    """Newton from several points of the ranges."""
    found: list[Solved] = []
    why = ""
    for share in (None, *STARTS):
        start = v.copy()
        if share is not None:
            start[closing.unknown[-1]] = closing.low[-1] + share * closing.span[-1]
        solved = closing.solve(start)
        if solved.failure:
            why = why or solved.failure
            continue
        apart = [np.abs((solved.v - one.v)[closing.unknown] / closing.span).max() for one in found]
        if min(apart, default=1.0) > SAME:
            found.append(solved)
    listed = [State(one.v, one.slope_sign >= 0, float(one.v[closing.unknown[-1]])) for one in found]
    listed.sort(key=lambda one: -one.heat)
    return Found(tuple(listed), (), "" if listed else f"recycle: {why}")
