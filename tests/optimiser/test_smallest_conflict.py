"""Smallest sets of limits that cannot be met together, against closed forms."""

from __future__ import annotations

import pytest

from reactorstage.optimiser import optimise
from reactorstage.optimiser.result import CANNOT
from tests.optimiser.toys import Toy, box, contradiction, linear, row


def test_three_limits_that_hold_each_other_and_not_the_idle_one() -> None:
    found = optimise(contradiction(), starts=3, jobs=1)
    held = found.conflict_set
    assert found.status == CANNOT and held is not None
    assert held.limits == (0, 1, 2)
    # x1 + x2 >= 1.5 against 0.6 and 0.5: each alone would have to give 0.4
    assert {one.limits: one.amount for one in held.suffices} == {
        (k,): pytest.approx(0.4, abs=1e-6) for k in (0, 1, 2)
    }


def test_a_range_that_ends_makes_one_limit_insufficient() -> None:
    limits = [(row("enough"), linear(-1.5, 1.0, 1.0)), (row("top", "bed 1"), linear(0.2, -1.0, 0.0)),
              (row("top", "bed 2"), linear(0.2, 0.0, -1.0))]  # fmt: skip
    held = optimise(
        Toy(box([0.1, 0.1], 0.0, 1.0), linear(0.0, 1.0, 1.0), limits), starts=3, jobs=1
    ).conflict_set
    assert held is not None
    amounts = {one.limits: one.amount for one in held.suffices}
    # one alone reaches x = 1, which gives 1.2 with the other at 0.2; both together need 0.55 each
    assert amounts[held.limits[-1],] is None
    assert amounts[0,] == pytest.approx(1.1, abs=1e-6)
    assert amounts[1, 2] == pytest.approx(0.55, abs=1e-6)
    assert all(len(one) < 3 for one in amounts)


def test_a_limit_that_cannot_be_met_by_itself() -> None:
    limits = [(row("enough"), linear(-1.5, 1.0)), (row("idle"), linear(2.0, -1.0))]
    held = optimise(Toy(box([0.1], 0.0, 1.0), linear(0.0, 1.0), limits), starts=2, jobs=1).conflict_set
    assert held is not None and held.limits == (0,)
    assert held.suffices[0].amount == pytest.approx(0.5, abs=1e-6)
