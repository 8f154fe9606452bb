"""Which end points are one and the same optimum.

Two are distinct when money differs by more than 0.1 % or a user number by more than 1 % of its range.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from reactorstage.optimiser.programme import Array, FreeNumber
from reactorstage.optimiser.result import Answer

SAME_MONEY = 1e-3
SAME_NUMBER = 1e-2


@dataclass(frozen=True)
class Sameness:
    """What counts as equal: widths (D,) of the ranges (infinite for internal numbers) and a cost size."""

    widths: Array
    size: float

    def same(self, x: Array, cost: float, other_x: Array, other_cost: float) -> bool:
        """True when neither money nor a user number tells the two apart."""
        money = max(abs(cost), abs(other_cost), 1e-2 * self.size)
        apart = float(np.max(np.abs(x - other_x) / self.widths, initial=0.0))
        return abs(cost - other_cost) <= SAME_MONEY * money and apart <= SAME_NUMBER


def sameness(numbers: Sequence[FreeNumber], size: float) -> Sameness:
    """The rule for these numbers; size is a typical change of cost, for costs near zero."""
    widths = [np.inf if number.internal else max(number.high - number.low, 1e-300) for number in numbers]
    return Sameness(np.array(widths), size)


def grouped(points: Sequence[tuple[Array, float]], rule: Sameness) -> list[list[int]]:
    """Positions of the points (x, cost), gathered by optimum; groups by cost, the first of each the best.

    Equal costs keep the order of the points, so that nothing depends on which ended first.
    """
    groups: list[list[int]] = []
    for k in sorted(range(len(points)), key=lambda k: (points[k][1], k)):
        x, cost = points[k]
        for group in groups:
            if rule.same(x, cost, *points[group[0]]):
                group.append(k)
                break
        else:
            groups.append([k])
    return groups


def merged(answers: Sequence[Answer], rule: Sameness) -> tuple[list[Answer], list[int]]:
    """Distinct answers, best first, with their counts of starts; and for each given one where it went."""
    groups = grouped([(answer.x, answer.cost) for answer in answers], rule)
    went = [0] * len(answers)
    for place, group in enumerate(groups):
        for k in group:
            went[k] = place
    kept = [replace(answers[g[0]], starts=sum(answers[k].starts for k in g)) for g in groups]
    return kept, went
