"""From values to places on a chart, and round ticks between."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from reactorstage.report.display import brief
from reactorstage.train.result import Array

MOST_TICKS = 7


@dataclass(frozen=True)
class Scale:
    """low and high of an axis are drawn at pixels start and end, evenly or by their logarithm."""

    low: float
    high: float
    start: float
    end: float
    logarithmic: bool = False

    def place(self, values: Array) -> Array:
        """Pixels (N,) of values (N,); a logarithmic axis draws what is not above zero at its low end."""
        low, high, at = self.low, self.high, np.asarray(values, dtype=float)
        if self.logarithmic:
            low, high = math.log10(low), math.log10(high)
            at = np.log10(np.where(at > 0.0, at, self.low))
        return self.start + (at - low) / (high - low) * (self.end - self.start)

    @property
    def ticks(self) -> list[float]:
        """Round values inside the axis."""
        return log_ticks(self.low, self.high) if self.logarithmic else even_ticks(self.low, self.high)


def even_ticks(low: float, high: float, most: int = MOST_TICKS) -> list[float]:
    """Multiples of 1, 2 or 5 times a power of ten from low to high, at most so many."""
    span = high - low
    power = 10.0 ** math.floor(math.log10(span / most))
    step = next(power * part for part in (1.0, 2.0, 5.0, 10.0, 20.0) if span / (power * part) <= most - 1)
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return [step * k + 0.0 for k in range(first, last + 1)]


def log_ticks(low: float, high: float) -> list[float]:
    """Powers of ten; with 2 and 5 between where the axis holds few decades."""
    parts = (1.0, 2.0, 5.0) if high / low < 300.0 else (1.0,)
    decades = range(math.floor(math.log10(low)), math.ceil(math.log10(high)) + 1)
    return [part * 10.0**d for d in decades for part in parts if low <= part * 10.0**d <= high]


def tick_text(value: float) -> str:
    """A tick as a short number."""
    return brief(round(value, 12), 6)
