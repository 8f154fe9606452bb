"""Equations that close a train on itself: exchangers between two places, recycles, heat through an area.

Each has internal numbers in x (heat exchanged, composition and enthalpy of what is recycled) and as many
residuals, zero where the numbers agree with the pass that they lead to. Residuals are written so that they
rise with their number: stated less what the train would make of it.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.mixture import Mixture
from reactorstage.train.forms import Linear

Array = NDArray[np.float64]

AREA_OF = "area of "
"""How the closure of a heater or cooler given by its area is called, before the name of its place."""

ROUNDED = 1e-4
"""Share of their temperature changes within which two streams of nearly equal heat capacity are rounded."""

NO_HEAT = 1e-9
"""Heat, as a share of area times coefficient times 1 K, below which an exchanger is taken to pass none."""


def row_of(form: Linear, base: Array) -> Array:
    """Value and derivatives (1 + D,) of a linear form of the base vector (size, 1 + D)."""
    row = np.zeros(base.shape[1])
    row[0] = form.const
    for index, coefficient in form.terms.items():
        row += coefficient * base[index]
    return row


def times(a: Array, b: Array) -> Array:
    """Product of two rows of value and derivatives."""
    row = a[0] * b + b[0] * a
    row[0] = a[0] * b[0]
    return np.asarray(row)


def applied(value: float, slope: float, inner: Array) -> Array:
    """f(inner) as a row, from its value and slope."""
    row = slope * inner
    row[0] = value
    return np.asarray(row)


@dataclass(frozen=True)
class Size:
    """What an exchanger passes: by effectiveness, or by area, clean coefficient, fouling resistance.

    The bypasses are the shares of its streams that go round it.
    """

    effectiveness: Linear | None = None
    area: Linear | None = None
    coefficient: Linear | None = None
    fouling: Linear | None = None
    cold_bypass: Linear | None = None
    hot_bypass: Linear | None = None

    def conductance(self, base: Array) -> Array:
        """Area times coefficient in W/K as a row: A / (1/k + R)."""
        assert self.area is not None and self.coefficient is not None
        k = row_of(self.coefficient, base)
        resistance = applied(1.0 / k[0], -1.0 / k[0] ** 2, k)
        if self.fouling is not None:
            resistance = resistance + row_of(self.fouling, base)
        overall = applied(1.0 / resistance[0], -1.0 / resistance[0] ** 2, resistance)
        return times(row_of(self.area, base), overall)


@dataclass(frozen=True)
class Exchange:
    """Heat between a hot and a cold stream, in temperatures at the ends of both and the heat that passes.

    unknown is the position in x of its internal number: the heat or, where something else fixes the heat
    (sized), the size that this takes. from_ and to name where heat comes from and goes.
    """

    name: str
    from_: str
    to: str
    hot: tuple[Linear, Linear]
    cold: tuple[Linear, Linear]
    heat: Linear
    size: Size
    parallel: bool
    approach: float
    unknown: int
    sized: bool = False

    @property
    def ends(self) -> tuple[Linear, Linear]:
        """Temperature differences at the end where the hot stream enters, and at the other end."""
        if self.parallel:
            return self.hot[0] - self.cold[0], self.hot[1] - self.cold[1]
        return self.hot[0] - self.cold[1], self.hot[1] - self.cold[0]

    def residuals(self, base: Array) -> Array:
        """(1, 1 + D), in K or W."""
        by_area = self.size.effectiveness is None
        row = self._by_area(base) if by_area else self._by_effectiveness(base)
        return (-row if self.sized else row)[None, :]

    def _changes(self, base: Array) -> tuple[Array, Array]:
        """Fall of the hot and rise of the cold temperature."""
        return row_of(self.hot[0] - self.hot[1], base), row_of(self.cold[1] - self.cold[0], base)

    def _greater_change(self, base: Array) -> Array:
        """Change of the stream of smaller heat capacity, rounded where both are nearly equal."""
        fall, rise = self._changes(base)
        mean, half = 0.5 * (fall + rise), 0.5 * (rise - fall)
        side = -1.0 if mean[0] < 0.0 else 1.0
        width = ROUNDED * side * mean
        if width[0] <= 0.0:
            return mean
        if abs(half[0]) >= width[0]:
            return np.asarray(mean + side * np.sign(half[0]) * half)
        y, w = half[0], width[0]
        rounded = (y / w) * half + (1.0 - (y / w) ** 2) / 2.0 * width
        rounded[0] = (y * y + w * w) / (2.0 * w)
        return np.asarray(mean + side * rounded)

    def _by_effectiveness(self, base: Array) -> Array:
        """Greater of both temperature changes less effectiveness times the difference of the inlets, K.

        Kays & London, Compact Heat Exchangers (definition of the effectiveness, from memory).
        """
        assert self.size.effectiveness is not None
        between = row_of(self.hot[0] - self.cold[0], base)
        return np.asarray(self._greater_change(base) - times(row_of(self.size.effectiveness, base), between))

    def _by_area(self, base: Array) -> Array:
        """The equation Q = k A LMTD in a form without its singularities.

        Countercurrent, W: Q z / (1 - exp(-z)) - k A (T_hot,out - T_cold,in), z = k A (rise - fall) / Q.
        Parallel flow, K: (T_hot,in - T_cold,in) exp(-z) - (T_hot,out - T_cold,out), z = k A (rise + fall) / Q
        """
        conductance, Q = self.size.conductance(base), row_of(self.heat, base)
        fall, rise = self._changes(base)
        change = rise + fall if self.parallel else rise - fall
        if abs(Q[0]) <= NO_HEAT * conductance[0]:
            z = np.zeros_like(Q)
        else:
            z = times(times(conductance, change), applied(1.0 / Q[0], -1.0 / Q[0] ** 2, Q))
        first, last = (row_of(end, base) for end in self.ends)
        if self.parallel:
            left = float(np.exp(-min(z[0], 700.0)))
            return np.asarray(times(first, applied(left, -left, z)) - last)
        value, slope = bernoulli(float(z[0]))
        return np.asarray(times(Q, applied(value, slope, z)) - times(conductance, last))

    def needed(self, base: Array) -> float:
        """The size that would pass the stated heat, over the size that is there; infinite at a cross."""
        if self.size.effectiveness is not None:
            between = (self.hot[0] - self.cold[0]).value(base[:, 0])
            size = self.size.effectiveness.value(base[:, 0])
            return float(self._greater_change(base)[0]) / (between * size) if between > 0.0 else np.inf
        first, last = (end.value(base[:, 0]) for end in self.ends)
        if first <= 0.0 or last <= 0.0:
            return np.inf
        mean = log_mean(first, last)
        return float(self.heat.value(base[:, 0]) / (self.size.conductance(base)[0] * mean))

    def effectiveness(self, base: Array) -> float | None:
        """Greater temperature change over the difference of the inlets, None where these are equal."""
        between = (self.hot[0] - self.cold[0]).value(base[:, 0])
        return float(self._greater_change(base)[0]) / between if abs(between) > 1e-9 else None


def bernoulli(z: float) -> tuple[float, float]:
    """z / (1 - exp(-z)) and its slope."""
    if abs(z) < 1e-3:
        return 1.0 + z / 2.0 + z * z / 12.0, 0.5 + z / 6.0
    if z < -500.0:
        return 0.0, 0.0
    gone = float(np.exp(-z))
    value = z / (1.0 - gone)
    return value, (1.0 - value * gone) / (1.0 - gone)


def log_mean(a: float, b: float) -> float:
    """(a - b) / ln(a / b) for a, b > 0."""
    ratio = (a - b) / b
    return a if ratio == 0.0 else (a - b) / float(np.log1p(ratio))


@dataclass(frozen=True)
class FeedHeat:
    """A feed that is one stream of an exchanger: its heat is flow times h(after) - h(before).

    unknown is the position in x of the temperature behind it; sign is -1 for a feed that is cooled.
    """

    name: str
    flow: Linear
    fractions: Array
    before: Linear
    after: Linear
    heat: Linear
    sign: float
    mixture: Mixture
    pressure: float
    phase: str | None
    unknown: int

    def residuals(self, base: Array) -> Array:
        """(1, 1 + D): heat that the feed takes up at the stated temperature less the stated heat, W."""
        flow, before, after = (row_of(one, base) for one in (self.flow, self.before, self.after))
        low, high = (
            applied(*self.mixture.molar(self.fractions, float(T[0]), self.pressure, self.phase), T)
            for T in (before, after)
        )
        return (times(flow, high - low) - self.sign * row_of(self.heat, base))[None, :]


@dataclass(frozen=True)
class HeldHeat:
    """Heat of an exchanger that one of its streams fixes: stated less taken up (or given off) there, W."""

    name: str
    heat: Linear
    taken: Linear
    unknown: int

    def residuals(self, base: Array) -> Array:
        """(1, 1 + D)."""
        return row_of(self.heat - self.taken, base)[None, :]


@dataclass(frozen=True)
class Return:
    """A recycle: mole fractions (S,) and molar enthalpy as stated, against those where it is drawn off.

    fractions and enthalpy are inputs; record is the position of the stream's flows, its enthalpy behind them;
    unknowns are the positions in x.
    """

    name: str
    fractions: tuple[Linear, ...]
    enthalpy: Linear
    record: int
    unknowns: tuple[int, ...]

    def residuals(self, base: Array) -> Array:
        """(S + 1, 1 + D): fractions, then molar enthalpy in J/mol."""
        S = len(self.fractions)
        total = base[self.record : self.record + S].sum(axis=0)
        inverse = applied(1.0 / total[0], -1.0 / total[0] ** 2, total)
        stated = [row_of(one, base) for one in (*self.fractions, self.enthalpy)]
        return np.array([one - times(base[self.record + s], inverse) for s, one in enumerate(stated)])


Closure = Exchange | FeedHeat | HeldHeat | Return


def residuals(closures: Sequence[Closure], base: Array) -> Array:
    """All residuals (E, 1 + D) of the base vector (size, 1 + D)."""
    if not closures:
        return np.zeros((0, base.shape[1]))
    return np.concatenate([one.residuals(base) for one in closures])


def unknowns(closures: Sequence[Closure]) -> list[int]:
    """Positions in x of the internal numbers, in the order of the residuals."""
    found: list[int] = []
    for one in closures:
        found += one.unknowns if isinstance(one, Return) else [one.unknown]
    return found
