"""Quantities as ratios of linear forms in the base results of one pass, so that derivatives are one product.

The base vector holds every record of the pass (flows, enthalpy flow, pressure, temperature after each
operation), what was found inside the beds, the inputs and the numbers x.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Linear:
    """const + sum of coefficient * base[index]."""

    terms: Mapping[int, float] = field(default_factory=dict)
    const: float = 0.0

    def __add__(self, other: Linear | float) -> Linear:
        if not isinstance(other, Linear):
            return Linear(self.terms, self.const + other)
        terms = dict(self.terms)
        for index, coefficient in other.terms.items():
            terms[index] = terms.get(index, 0.0) + coefficient
        return Linear({i: c for i, c in terms.items() if c != 0.0}, self.const + other.const)

    def __mul__(self, factor: float) -> Linear:
        return Linear({i: factor * c for i, c in self.terms.items()}, factor * self.const)

    def __sub__(self, other: Linear | float) -> Linear:
        return self + (other * -1.0 if isinstance(other, Linear) else -other)

    def value(self, base: Array) -> float:
        return self.const + sum(c * float(base[i]) for i, c in self.terms.items())

    def row(self, size: int) -> Array:
        """Coefficients as a dense row (size,)."""
        row = np.zeros(size)
        for index, coefficient in self.terms.items():
            row[index] = coefficient
        return row


def at(index: int) -> Linear:
    """The base result at an index."""
    return Linear({index: 1.0})


def total(forms: Sequence[Linear]) -> Linear:
    """Sum of linear forms."""
    out = Linear()
    for form in forms:
        out = out + form
    return out


MEANINGLESS = 1e-10
"""Denominators below this part of their numerators are rounding errors of nothing."""


@dataclass(frozen=True)
class Form:
    """A quantity: kind of unit, numerator and, for ratios, denominator with the reason when it is zero.

    absent is set for a quantity that cannot exist in this train (a temperature after an injection
    that is not there); reason is then what to print.
    """

    kind: str
    top: Linear
    bottom: Linear | None = None
    reason: str = ""
    absent: bool = False

    def value(self, base: Array, nothing: float = 1e-12) -> float | None:
        """The value, or None where the quantity does not exist."""
        if self.absent:
            return None
        if self.bottom is None:
            found = self.top.value(base)
            return found if np.isfinite(found) else None
        under = self.bottom.value(base)
        top = self.top.value(base)
        return top / under if under > max(nothing, MEANINGLESS * abs(top)) else None


@dataclass(frozen=True)
class Rows:
    """Several linear forms at once: values = matrix @ base[used] + const."""

    used: NDArray[np.intp]
    matrix: Array
    const: Array

    @classmethod
    def of(cls, forms: Sequence[Linear]) -> Rows:
        used = np.array(sorted({index for form in forms for index in form.terms}), dtype=np.intp)
        place = {int(index): k for k, index in enumerate(used)}
        matrix = np.zeros((len(forms), len(used)))
        for row, form in enumerate(forms):
            for index, coefficient in form.terms.items():
                matrix[row, place[index]] = coefficient
        return cls(used, matrix, np.array([form.const for form in forms]))

    def of_base(self, base: Array) -> Array:
        """Values and derivatives (M, 1 + D) from base (size, 1 + D); not a number where a part is missing."""
        used = base[self.used]
        missing = ~np.isfinite(used[:, 0])
        if missing.any():
            used = np.where(missing[:, None], 0.0, used)
        out = self.matrix @ used
        out[:, 0] += self.const
        if missing.any():
            out[(self.matrix[:, missing] != 0.0).any(axis=1)] = np.nan
        return out
