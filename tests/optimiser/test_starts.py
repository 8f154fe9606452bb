"""Starts: names, sums, ranges, and the same for equal seed."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.optimiser.programme import SplitGroup
from reactorstage.optimiser.starts import allowed_range, divided, falling_shares, starts, summing_to
from tests.optimiser.toy_train import ETHYLENE, ToyTrain
from tests.optimiser.toys import Toy, box, linear, number, row


def by_name(train: ToyTrain, count: int = 20, seed: int = 1) -> dict[str, np.ndarray]:
    return {start.name: start.x for start in starts(train, count, seed)}


def test_names_and_order() -> None:
    train = ToyTrain()
    train.numbers = tuple(
        number(n.name, n.now + k, n.low, n.high, role=n.role, feed=n.feed, bed=n.bed, total=n.total)
        for k, n in enumerate(train.numbers)
    )
    names = [start.name for start in starts(train, 9, 1)]
    assert names[:4] == ["today", "equal split", "front-loaded", "back-loaded"]
    assert names[4:] == ["all cool", "all hot", "random 1", "random 2", "random 3"]


def test_a_start_that_repeats_another_is_left_out() -> None:
    assert "equal split" not in by_name(ToyTrain())
    assert len(starts(ToyTrain(), 20, 1)) == 20


def test_few_starts_are_the_first_ones() -> None:
    assert [start.name for start in starts(ToyTrain(), 2, 1)] == ["today", "front-loaded"]
    assert [start.name for start in starts(ToyTrain(), 1, 1)] == ["today"]


def test_loaded_splits_in_closed_form() -> None:
    found = by_name(ToyTrain())
    assert found["front-loaded"][:3] == pytest.approx(ETHYLENE * np.array([0.4, 0.3, 0.2]))
    assert found["back-loaded"][:3] == pytest.approx(ETHYLENE * np.array([0.1, 0.2, 0.3]))


def test_cool_and_hot_respect_plain_limits_on_inlets() -> None:
    found = by_name(ToyTrain())
    assert found["all cool"][3:] == pytest.approx(637.0)
    assert found["all hot"][3:] == pytest.approx(693.0)
    assert found["all hot"][:3] == pytest.approx(ETHYLENE / 4)


def test_random_starts_lie_in_ranges_and_split_the_whole_feed() -> None:
    train = ToyTrain()
    low = np.array([number.low for number in train.numbers])
    high = np.array([number.high for number in train.numbers])
    for start in starts(train, 40, 5):
        assert np.all(start.x >= low - 1e-9) and np.all(start.x <= high + 1e-9)
        assert start.x[:3].sum() <= ETHYLENE + 1e-9
        assert start.name == "today" or np.all(start.x[3:] >= 637.0)


def test_equal_seed_equal_starts() -> None:
    first, second, other = (
        by_name(ToyTrain(), seed=7),
        by_name(ToyTrain(), seed=7),
        by_name(ToyTrain(), seed=8),
    )
    assert all(np.array_equal(first[name], second[name]) for name in first)
    assert not np.array_equal(first["random 1"], other["random 1"])


def test_a_split_with_a_fixed_entry_and_ranges() -> None:
    # 100 in all, 10 fixed elsewhere; bed 2 takes at most 20: 90 = 20 + 35 + 35 when equal
    numbers = [
        number("bed 1", 0.0, 0.0, 100.0, role="split", bed=1),
        number("bed 2", 0.0, 0.0, 20.0, role="split", bed=2),
    ]
    group = SplitGroup("cold shot", (0, 1), 100.0, 10.0, 4)
    toy = Toy(numbers, linear(0.0, 0.0, 0.0), splits=[group])
    assert divided(toy, group, np.full(3, 1 / 3)) == pytest.approx([35.0, 20.0])


def test_the_rest_takes_its_place_in_bed_order() -> None:
    numbers = [number(f"bed {bed}", 0.0, 0.0, 60.0, role="split", bed=bed) for bed in (2, 3)]
    group = SplitGroup("hydrogen", (0, 1), 60.0, 0.0, 1)
    toy = Toy(numbers, linear(0.0, 0.0, 0.0), splits=[group])
    assert divided(toy, group, falling_shares(3)) == pytest.approx([20.0, 10.0])


@given(
    st.lists(st.tuples(st.floats(0, 10), st.floats(0, 10), st.floats(0, 10)), min_size=1, max_size=6),
    st.floats(0, 1),
)
def test_summing_to_meets_the_total_inside_the_ranges(rows, part) -> None:
    values, one, other = np.array(rows).T
    low, high = np.minimum(one, other), np.maximum(one, other)
    total = low.sum() + part * (high.sum() - low.sum())
    found = summing_to(values, low, high, total)
    assert found.sum() == pytest.approx(total, abs=1e-9)
    assert np.all(found >= low) and np.all(found <= high)


def test_contradictory_plain_limits_leave_the_range() -> None:
    inlet = number("bed 1.inlet temperature", 650.0, 620.0, 690.0)
    low = row("low", quantity=inlet.name, direction="at least", bound=670.0)
    high = row("high", quantity=inlet.name, direction="at most", bound=660.0)
    soft = row("soft", quantity=inlet.name, direction="at most", bound=640.0, soft_price=1.0)
    assert allowed_range(inlet, (low, high)) == (620.0, 690.0)
    assert allowed_range(inlet, (low, soft)) == (670.0, 690.0)


def test_a_programme_without_splits_and_inlets() -> None:
    toy = Toy(box([0.3, 0.3], 0.0, 1.0), linear(0.0, 1.0, 1.0))
    assert [start.name for start in starts(toy, 3, 1)] == ["today", "random 1", "random 2"]
