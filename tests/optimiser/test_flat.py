"""Spans of numbers within a band of cost, against closed forms and root finding."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.optimize import brentq

from reactorstage.optimiser import optimise
from reactorstage.optimiser.asked import Asked, Sizes
from reactorstage.optimiser.flat import beyond_reach, handles
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.resolve import Base
from tests.optimiser.toys import Toy, Values, box, hump, linear, row


def within(band: float) -> Asked:
    return Asked(sizes=lambda x, cost: Sizes(band, 0.1 * band))


def chained(x: Array) -> Values:
    """(x1 - 0.3)^2 + (x2 - x1)^2: x2 pulls x1 along."""
    a, b = x
    return (a - 0.3) ** 2 + (b - a) ** 2, [2 * (a - 0.3) - 2 * (b - a), 2 * (b - a)]


def test_spans_are_those_with_the_others_re_optimised() -> None:
    # with the other number at its best the cost is (x1 - 0.3)^2, or (x2 - 0.3)^2 / 2
    found = optimise(Toy(box([0.9, 0.9], -1.0, 1.0), chained), starts=2, jobs=1, asked=within(0.04))
    assert found.flatness is not None
    first, second = found.flatness.numbers
    assert first.spans == (pytest.approx((0.1, 0.5), abs=1e-5),)
    wide = np.sqrt(0.08)
    assert second.spans == (pytest.approx((0.3 - wide, 0.3 + wide), abs=1e-5),)
    assert first.staying == pytest.approx(0.36, abs=1e-6)
    assert second.staying == pytest.approx(0.18, abs=1e-6)
    assert not first.holds_today and found.flatness.left_alone == ()


def test_a_limit_ends_a_span() -> None:
    limited = Toy(box([0.2, 0.2], -1.0, 1.0), chained, [(row("top"), linear(0.4, -1.0, 0.0))])
    found = optimise(limited, starts=2, jobs=1, asked=within(0.04))
    assert found.flatness is not None
    assert found.flatness.numbers[0].spans == (pytest.approx((0.1, 0.4), abs=1e-5),)
    assert set(found.flatness.left_alone) == {"x1", "x2"}
    assert found.flatness.left_costs == pytest.approx(0.01, abs=1e-6)  # both at 0.2: (0.2 - 0.3)^2


def test_two_basins_give_two_spans_with_the_gap_between_them() -> None:
    found = optimise(Toy(box([0.2, 0.5], 0.0, 1.0), hump), starts=12, jobs=1, asked=within(0.05))
    assert found.flatness is not None and len(found.answers) == 2
    budget = found.best.cost + 0.05

    def over(a: float) -> float:
        return hump(np.array([a, 0.5]))[0] - budget

    ends = [brentq(over, *bracket) for bracket in ((0.0, 0.195), (0.195, 0.55), (0.55, 0.895), (0.895, 1.0))]
    near, far = found.flatness.numbers[0].spans
    assert near == pytest.approx(tuple(ends[:2]), abs=1e-3)
    assert far == pytest.approx(tuple(ends[2:]), abs=1e-3)


def test_a_value_that_the_limits_keep_out_of_reach_cannot_stay() -> None:
    # x1 is at most 0.4; with x2 held at 0.2 the best x1 is 0.25: 0.05^2 + 0.05^2
    limited = Toy(box([0.9, 0.2], -1.0, 1.0), chained, [(row("top"), linear(0.4, -1.0, 0.0))])
    found = optimise(limited, starts=2, jobs=1, asked=within(0.04))
    assert found.flatness is not None
    first, second = found.flatness.numbers
    assert first.staying is None
    assert second.staying == pytest.approx(0.005, abs=1e-6)
    (handle, _) = handles(limited)
    base = Base(limited, (found.best.x,), found.best.cost, 1.0)
    assert beyond_reach(base, handle, 0.9) and beyond_reach(base, handle, 0.41)
    assert not beyond_reach(base, handle, 0.39) and not beyond_reach(base, handle, -0.9)
