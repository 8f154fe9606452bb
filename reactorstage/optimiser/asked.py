"""What an explanation is told from outside: how settings are entered, and which money says nothing."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.programme import Array

FLAT_SHARE, NOISE_SHARE = 0.01, 0.001


@dataclass(frozen=True)
class Sizes:
    """Differences of cost: band, within which an answer counts as flat, and noise, which is worth no move."""

    band: float
    noise: float


def shares_of_cost(x: Array, cost: float) -> Sizes:
    """1 % and 0.1 % of the cost itself, where the sum of the money terms is not known."""
    return Sizes(FLAT_SHARE * abs(cost), NOISE_SHARE * abs(cost))


@dataclass(frozen=True)
class Asked:
    """steps and origins (D,) of what can be entered: origin + n * step; a number with the step 0 cannot be.

    Without steps no moves are made. sizes(x, cost) gives the differences of cost that say little there.
    """

    steps: Array | None = None
    origins: Array | None = None
    sizes: Callable[[Array, float], Sizes] = shares_of_cost

    def grid(self, index: int, value: float) -> tuple[float, float]:
        """The nearest values below and above that can be entered; twice the same where value is one."""
        assert self.steps is not None and self.origins is not None
        step, origin = float(self.steps[index]), float(self.origins[index])
        count = (value - origin) / step
        near = round(count)
        if abs(count - near) < 1e-6:
            return (origin + near * step,) * 2
        return origin + float(np.floor(count)) * step, origin + float(np.ceil(count)) * step
