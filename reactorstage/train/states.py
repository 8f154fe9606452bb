"""All states of a train that is closed on itself, and the folds at which two of them meet and vanish.

With an exchanger the heat of the first one is taken through its whole range, the other closures solved at
each value: a state is where the exchanger passes just this heat (van Heerden 1953, the idea of the diagram).
The size that the exchanger would need for each heat has its turning points at the folds, so these are found
in terms of the exchanger itself. Without an exchanger Newton starts from several points.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import brentq, minimize_scalar

from reactorstage.train.closing import Closing, Solved
from reactorstage.train.closures import Exchange

if TYPE_CHECKING:
    from reactorstage.train.programme import Model

Array = NDArray[np.float64]

POINTS = 49
"""Values of the exchanged heat at which the closures are looked at."""

REFINED = 1e-4
"""How exactly a turning point is found, as a share of the range."""

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
    """Where two states meet: heat of the exchanger, and the size there over the size that is there."""

    exchanger: str
    heat: float
    needed: float
    least: bool


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

    def __post_init__(self) -> None:
        inputs = self.model.inputs
        first = len(inputs.free) - inputs.unknowns
        self.index = int(inputs.free[first + self.row])
        self.whole = Closing(self.model)
        self.rest = Closing(self.model, without=self.row) if inputs.unknowns > 1 else None
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


def states(model: Model, v: Array) -> Found:
    """All states that can be found with the numbers v (V,); its unknowns are where Newton may begin."""
    exchanges = [(k, one) for k, one in enumerate(_rows(model)) if isinstance(one, Exchange)]
    if not exchanges:
        return _from_starts(model, v)
    row, exchange = exchanges[0]
    curve = _Curve(model, exchange, v, row)
    low, high = curve.range
    grid = sorted({*(float(q) for q in np.linspace(low, high, POINTS)), 0.0})
    for heat in sorted(grid, key=abs):
        curve.at(heat)
    folds = _folds(curve, grid)
    found = _roots(curve, sorted({*grid, *(heat for heat, _ in folds)}))
    return Found(tuple(found), tuple(fold for _, fold in folds), "" if found else _why(curve, grid))


def _rows(model: Model) -> list[object]:
    """The closure of each unknown, in order."""
    rows: list[object] = []
    for one in model.layout.closures:
        rows += [one] * len(getattr(one, "unknowns", (0,)))
    return rows


def _folds(curve: _Curve, grid: list[float]) -> list[tuple[float, Fold]]:
    """Turning points of the needed size, each with the unknown there."""
    found = []
    values = [curve.at(heat)[1] for heat in grid]
    for k in range(1, len(grid) - 1):
        left, here, right = values[k - 1 : k + 2]
        if not np.isfinite([left, here, right]).all() or grid[k] <= 0.0:
            continue
        sign = 1.0 if here < min(left, right) else -1.0 if here > max(left, right) else 0.0
        if sign == 0.0:
            continue
        best = minimize_scalar(
            lambda heat, sign=sign: sign * curve.at(float(heat))[1],
            bracket=(grid[k - 1], grid[k], grid[k + 1]),
            tol=REFINED,
        )
        heat = float(best.x) if grid[k - 1] < best.x < grid[k + 1] else grid[k]
        needed = curve.at(heat)[1]
        found.append((heat, Fold(curve.exchange.name, curve.passed[heat], needed, sign > 0.0)))
    return found


def _roots(curve: _Curve, grid: list[float]) -> list[State]:
    """States between neighbours where the residual changes its sign."""
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


def _from_starts(model: Model, v: Array) -> Found:
    """Newton from several points of the ranges."""
    closing = Closing(model)
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
