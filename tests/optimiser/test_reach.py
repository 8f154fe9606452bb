"""How far worths hold and which limits pay only together, against closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.optimiser import optimise
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.resolve import Base, resolve
from reactorstage.optimiser.wrappers import Shifted
from tests.optimiser.toys import Toy, Values, box, corner, linear, number, row


def test_a_worth_holds_until_a_range_ends() -> None:
    # least -3 x1 - x2 with x1 <= 0.4 and x1 + x2 <= 1: x1 goes to 1, where x2 is at the start of its range
    limits = [
        (row("top", step=0.1), linear(0.4, -1.0, 0.0)),
        (row("sum", step=0.2), linear(1.0, -1.0, -1.0)),
    ]
    found = optimise(Toy(box([0.1, 0.1], 0.0, 2.0), linear(0.0, -3.0, -1.0), limits), starts=3, jobs=1)
    top = found.worths[0].reach
    assert top is not None
    assert (top.holds, top.saved) == pytest.approx((0.6, 1.2), abs=1e-6)
    assert (top.lets_go, top.saved_in_all) == pytest.approx((0.6, 1.2), abs=1e-6)
    assert (top.takes_over, top.takes_over_range) == ((), ("x2",))


def test_a_worth_breaks_where_another_limit_takes_over() -> None:
    # most y with x <= 0.3, y <= 2 x and y <= 0.8 + 0.4 x: from x = 0.5 on y grows by 0.4 instead of 2
    limits = [
        (row("feed", step=0.1), linear(0.3, -1.0, 0.0)),
        (row("steep"), linear(0.0, 2.0, -1.0)),
        (row("gentle"), linear(0.8, 0.4, -1.0)),
    ]
    numbers = [number("x", 0.1, 0.0, 2.0), number("y", 0.1, 0.0, 5.0)]
    found = optimise(Toy(numbers, linear(0.0, 0.0, -1.0), limits), starts=3, jobs=1)
    feed = found.worths[0].reach
    assert feed is not None
    assert (feed.holds, feed.saved) == pytest.approx((0.2, 0.4), abs=1e-6)
    assert [found.worths[0].label, *(limits[k][0].label for k in feed.takes_over)] == ["feed", "gentle"]
    assert (feed.lets_go, feed.saved_in_all) == pytest.approx((1.7, 1.0), abs=1e-6)


def test_two_limits_of_a_corner_pay_only_together() -> None:
    found = optimise(corner(), starts=3, jobs=1)
    pairs = {pair.limits: pair for pair in found.pairs}
    assert set(map(frozenset, pairs)) == {frozenset((0, 2)), frozenset((1, 2))}
    for pair in found.pairs:
        assert pair.together == pytest.approx(0.1, abs=1e-6)
        assert pair.alone == pytest.approx((0.0, 0.0), abs=1e-6)


def bowl(Q: Array, c: Array):
    def cost(x: Array) -> Values:
        return float(c @ x + 0.5 * x @ Q @ x), list(c + Q @ x)

    return cost


@given(seed=st.integers(0, 10_000))
def test_relaxing_any_limit_never_raises_the_cost(seed: int) -> None:
    """Random convex cases with random plane limits that hold at the middle of the ranges."""
    rng = np.random.default_rng(seed)
    root = rng.normal(size=(3, 3))
    cost = bowl(root @ root.T + 0.1 * np.eye(3), 3.0 * rng.normal(size=3))
    limits = [
        (row(f"plane {k}"), linear(rng.uniform(0.05, 0.5) + 0.5 * slopes.sum(), *-slopes))
        for k, slopes in enumerate(rng.normal(size=(4, 3)))
    ]
    toy = Toy(box([0.5] * 3, 0.0, 1.0), cost, limits)
    found = optimise(toy, starts=2, jobs=1, explain=False)
    base = Base(toy, (found.best.x,), found.best.cost, 1.0)
    for k in range(4):
        relaxed = resolve(Shifted(toy, 0.1 * np.eye(4)[k]), base.known, base)
        assert relaxed.x is not None and relaxed.cost <= base.cost + base.noise
