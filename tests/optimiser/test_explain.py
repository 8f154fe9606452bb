"""Worths, keep-away cost, equal splits and conflicts, against closed forms."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.optimiser import optimise
from reactorstage.optimiser.programme import SplitGroup
from reactorstage.optimiser.resolve import Base, resolve
from reactorstage.optimiser.result import CANNOT, INSIDE
from reactorstage.optimiser.wrappers import Pinned, Shifted
from tests.optimiser.toy_train import ETHYLENE, ToyTrain
from tests.optimiser.toys import Toy, box, contradiction, corner, linear, number, row


def test_worths_of_a_linear_programme_in_closed_form() -> None:
    # least -3 x1 - x2 with x1 <= 0.4 and x1 + x2 <= 1: multipliers 2 and 1, steps 0.1 and 0.2
    limits = [
        (row("top", step=0.1), linear(0.4, -1.0, 0.0)),
        (row("sum", step=0.2), linear(1.0, -1.0, -1.0)),
    ]
    found = optimise(Toy(box([0.1, 0.1], 0.0, 2.0), linear(0.0, -3.0, -1.0), limits), starts=3, jobs=1)
    assert found.best.cost == pytest.approx(-1.8)
    assert found.best.multipliers == pytest.approx([2.0, 1.0])
    worths = {worth.label: worth for worth in found.worths}
    assert (worths["top"].saves, worths["top"].costs) == pytest.approx((0.2, 0.2), abs=1e-7)
    assert (worths["sum"].saves, worths["sum"].costs) == pytest.approx((0.2, 0.2), abs=1e-7)


def test_at_a_corner_of_too_many_limits_the_two_sides_differ() -> None:
    found = optimise(corner(), starts=3, jobs=1)
    assert found.best.at_work == (0, 1, 2)
    assert len(found.worths) == 3
    for worth in found.worths:
        assert worth.saves == pytest.approx(0.0, abs=1e-7)
        assert worth.costs == pytest.approx(0.1, rel=1e-5)


def test_owners_of_one_limit_are_moved_together_and_alone() -> None:
    limits = [(row("cap", "bed 1"), linear(0.5, -1.0, 0.0)), (row("cap", "bed 2"), linear(0.7, 0.0, -1.0))]
    found = optimise(Toy(box([0.1, 0.1], 0.0, 1.0), linear(0.0, -1.0, -2.0), limits), starts=3, jobs=1)
    assert [(worth.owners, worth.limits) for worth in found.worths] == [
        (("bed 1", "bed 2"), (0, 1)),
        (("bed 1",), (0,)),
        (("bed 2",), (1,)),
    ]
    assert [worth.saves for worth in found.worths] == pytest.approx([0.3, 0.1, 0.2], abs=1e-6)


def test_a_ratio_limit_is_worth_its_own_unit() -> None:
    # most x1 with 12 / x1 >= 4: 3; at least 3.9 gives 12 / 3.9, at least 4.1 gives 12 / 4.1
    toy = Toy(
        box([1.0], 0.0, 10.0),
        linear(0.0, -1.0),
        [(row("ratio", step=0.1, direction="at least", bound=4.0), linear(12.0, -4.0))],
        weights=lambda x: (np.array([x[0]]), np.array([[1.0]])),
    )
    (worth,) = optimise(toy, starts=3, jobs=1).worths
    assert worth.saves == pytest.approx(12 / 3.9 - 3, rel=1e-6)
    assert worth.costs == pytest.approx(3 - 12 / 4.1, rel=1e-6)


def test_tightening_beyond_what_is_possible_says_so() -> None:
    limits = [(row("low", step=0.2), linear(-0.5, 1.0)), (row("high", step=0.2), linear(0.6, -1.0))]
    (worth,) = optimise(Toy(box([0.55], 0.0, 1.0), linear(0.0, 1.0), limits), starts=2, jobs=1).worths
    assert worth.saves == pytest.approx(0.2, abs=1e-7)
    assert worth.costs is None
    assert worth.note == "tightening by the step leaves nothing inside all limits"


def test_relaxing_looks_into_the_other_basins_too() -> None:
    # basins at 0 and 1, both cost 0; one limit keeps 0.05 from the left one, another 0.2 from the right one
    def cost(x):
        return (x[0] - 1) ** 2 * x[0] ** 2, [2 * (x[0] - 1) * x[0] ** 2 + 2 * (x[0] - 1) ** 2 * x[0]]

    left = (row("left", step=0.05), lambda x: (x[0] - 0.05, [1.0]))
    right = (row("right", step=0.2), lambda x: (0.8 - x[0], [-1.0]))
    toy = Toy(box([0.3], -1.0, 2.0), cost, [left, right])
    found = optimise(toy, starts=12, jobs=1)
    assert [answer.x[0] for answer in found.answers] == pytest.approx([0.05, 0.8], abs=1e-6)
    (worth,) = found.worths
    assert worth.label == "left" and worth.saves == pytest.approx(found.best.cost, abs=1e-9)
    known = tuple(answer.x for answer in found.answers)
    base = Base(toy, known, found.best.cost, 1.0)
    freed = Shifted(toy, np.array([0.0, 0.2]))
    assert resolve(freed, known, base).x == pytest.approx([1.0], abs=1e-4)
    assert resolve(freed, known[:1], base).x == pytest.approx([0.05])


def test_bookkeeping_limits_have_no_worth() -> None:
    books = replace(row("ladder"), implied=True)
    cooler = replace(row("no heating"), implied=True)
    numbers = [number("x1", 0.5, 0.0, 1.0), number("heat above a level", 0.5, 0.0, 1.0, role="internal")]
    limits = [(books, linear(0.0, -1.0, 1.0)), (cooler, linear(-0.2, 1.0, 0.0))]
    found = optimise(Toy(numbers, linear(0.0, 1.0, 1.0), limits), starts=2, jobs=1)
    assert set(found.best.at_work) == {0, 1}
    assert [worth.label for worth in found.worths] == ["no heating"]


def test_keep_away_costs_what_leaving_it_out_saves() -> None:
    limits = [
        (row("a", keep_away=0.05), linear(0.4, -1.0, 0.0)),
        (row("b", keep_away=0.1), linear(0.3, 0.0, -1.0)),
        (row("idle", keep_away=0.1), linear(9.0, -1.0, 0.0)),
    ]
    found = optimise(Toy(box([0.1, 0.1], 0.0, 1.0), linear(0.0, -1.0, -2.0), limits), starts=2, jobs=1)
    assert found.keep_away_cost == pytest.approx(0.05 + 0.2, abs=1e-6)
    without = optimise(corner(), starts=2, jobs=1)
    assert without.keep_away_cost is None


def test_equal_split_that_meets_the_limits() -> None:
    train = ToyTrain(ratio=10.5)
    found = optimise(train, starts=4, jobs=2)
    (split,) = found.equal_splits
    assert split.feed == "ethylene" and split.relaxed == () and split.x is not None
    assert split.x[:3] == pytest.approx(ETHYLENE / 4, abs=1e-12)
    assert split.penalty == pytest.approx(split.cost - found.best.cost) and split.penalty > 0.0
    assert np.min(train.final(split.x).margin / np.array([limit.scale for limit in train.limits])) > -1e-7


def test_equal_split_that_needs_a_limit_relaxed() -> None:
    train = ToyTrain()
    (split,) = optimise(train, starts=4, jobs=2).equal_splits
    ((index, amount),) = split.relaxed
    assert train.limits[index].name == "coking, bed 4"
    assert amount == pytest.approx(0.5)
    # with a tenth less the equal split has no setting at all
    shifts = np.zeros(len(train.limits))
    shifts[index] = amount - 0.1
    pinned = Pinned(Shifted(train, shifts), dict.fromkeys((0, 1, 2), ETHYLENE / 4))
    base = Base(train, (), 0.2, 0.05)
    held = resolve(pinned, [np.full(4, T) for T in (640.0, 650.0, 657.0)], base)
    assert held.x is None and held.nearest is not None
    # and the penalty compares under the same relaxed limits
    shifts[index] = amount
    free = optimise(Shifted(train, shifts), starts=4, jobs=1, explain=False)
    assert split.penalty == pytest.approx(split.cost - free.best.cost, rel=1e-6)


def test_an_equal_split_that_costs_less_becomes_the_answer() -> None:
    # basins near 0.5 (lower) and near 0.95, where the only start stands
    def cost(x):
        a = x[0]
        value = 10 * (a - 0.5) ** 2 * (a - 0.95) ** 2 + 0.05 * a
        return value, [20 * (a - 0.5) * (a - 0.95) * (2 * a - 1.45) + 0.05]

    shares = [number("bed 1.injected feed", 0.95, 0.0, 1.0, role="split", feed="feed", bed=1, total=1.0)]
    toy = Toy(shares, cost, splits=[SplitGroup("feed", (0,), 1.0, 0.0, 2)])
    found = optimise(toy, starts=1, jobs=1)
    assert found.best.x == pytest.approx([0.5], abs=0.03)
    assert found.notes == ("the best answer was found while explaining, from none of the starts",)
    assert len(found.answers) == 2 and found.starts[0].answer == 1
    (split,) = found.equal_splits
    assert split.cost >= found.best.cost and split.penalty == pytest.approx(split.cost - found.best.cost)


def test_conflict_names_what_is_broken_and_what_holds_it() -> None:
    toy = contradiction()
    found = optimise(toy, starts=5, jobs=1)
    assert found.status == CANNOT
    assert found.best.x == pytest.approx([0.6, 0.5], abs=1e-6)
    assert found.conflict is not None
    ((broken, amount),) = found.conflict.broken
    assert toy.limits[broken].label == "enough" and amount == pytest.approx(0.4, abs=1e-6)
    assert {toy.limits[k].label for k in found.conflict.against} == {"top", "side"}
    assert np.all(found.best.multipliers == 0.0)
    assert all(start.cost is None and start.answer == -1 for start in found.starts)
    assert {start.ended for start in found.starts} == {"limits broken"}


def test_conflict_weighs_violations_in_own_units_over_scale() -> None:
    # both ways cost money alike; the limit with the larger scale gives way
    def status(scales: tuple[float, float]) -> str:
        limits = [
            (row("low", scale=scales[0]), linear(-0.6, 1.0)),
            (row("high", scale=scales[1]), linear(0.3, -1.0)),
        ]
        toy = Toy(box([0.5], 0.0, 1.0), linear(0.0, 1.0), limits)
        found = optimise(toy, starts=4, jobs=1)
        assert found.conflict is not None
        return ", ".join(toy.limits[k].label for k, _ in found.conflict.broken)

    assert status((10.0, 1.0)) == "low"
    assert status((1.0, 10.0)) == "high"


def test_what_the_conflict_leaves_open_is_made_cheap() -> None:
    limits = [(row("low"), linear(-0.6, 1.0, 0.0)), (row("high", scale=0.1), linear(0.3, -1.0, 0.0))]
    toy = Toy(box([0.5, 0.9], 0.0, 1.0), lambda x: ((x[1] - 0.25) ** 2, [0.0, 2 * (x[1] - 0.25)]), limits)
    found = optimise(toy, starts=3, jobs=1)
    assert found.status == CANNOT
    assert found.best.x == pytest.approx([0.3, 0.25], abs=1e-3)


def test_conflict_of_the_train() -> None:
    train = ToyTrain(slip=0.1, exit_limit=680.0)
    found = optimise(train, starts=6, jobs=2, explain=False)
    assert found.status == CANNOT and found.conflict is not None
    names = {train.limits[k].name for k, _ in found.conflict.broken}
    assert names == {"hot exit, bed 4", "slip, effluent"}
    assert found.conflict.against
    relief = np.zeros(len(train.limits))
    for k, amount in found.conflict.broken:
        relief[k] = amount + 1e-4 * train.limits[k].scale
    assert optimise(Shifted(train, relief), starts=6, jobs=1, explain=False).status == INSIDE


def test_shifted_adds_weight_times_shift() -> None:
    train = ToyTrain()
    x = np.array([number.now for number in train.numbers])
    shifts = np.linspace(0.1, 0.5, len(train.limits))
    plain, moved = train.final(x), Shifted(train, shifts).final(x)
    assert moved.margin == pytest.approx(plain.margin + plain.weight * shifts)
    bound = tuple(
        replace(limit, bound=limit.bound + shift * (1 if limit.direction == "at most" else -1))
        for limit, shift in zip(train.limits, shifts, strict=True)
    )
    same = ToyTrain()
    same.limits = bound
    assert moved.margin == pytest.approx(same.final(x).margin)
    assert moved.margin_dx == pytest.approx(same.final(x).margin_dx)


def test_pinned_numbers_leave_the_others_untouched() -> None:
    train = ToyTrain()
    x = np.array([number.now for number in train.numbers]) + np.arange(7)
    pinned = Pinned(train, {0: x[0], 4: x[4]})
    assert [number.name for number in pinned.numbers] == [train.numbers[k].name for k in (1, 2, 3, 5, 6)]
    assert pinned.splits == ()
    assert np.array_equal(pinned.full(pinned.free(x)), x)
    whole, part = train.final(x), pinned.final(pinned.free(x))
    assert part.cost == whole.cost
    assert np.array_equal(part.margin_dx, whole.margin_dx[:, [1, 2, 3, 5, 6]])
    assert Pinned(train, {5: 650.0}).splits == train.splits


@given(
    st.integers(2, 4),
    st.lists(st.floats(-1, 1), min_size=40, max_size=40),
    st.integers(0, 2),
    st.floats(0.01, 0.5),
)
def test_relaxing_never_raises_the_cost_of_a_convex_programme(size, values, which, amount) -> None:
    raw = np.array(values)
    root = raw[: size * size].reshape(size, size)
    Q = root @ root.T + 0.1 * np.eye(size)
    c = raw[16 : 16 + size]
    rows = raw[20 : 20 + 3 * size].reshape(3, size)

    def cost(x):
        return 0.5 * x @ Q @ x + c @ x, list(Q @ x + c)

    limits = [(row(f"g{k}"), linear(0.3, *rows[k])) for k in range(3)]
    toy = Toy(box([0.0] * size, -2.0, 2.0), cost, limits)
    shifts = np.zeros(3)
    shifts[which] = amount
    plain, freed = (optimise(t, starts=1, jobs=1, explain=False) for t in (toy, Shifted(toy, shifts)))
    assert plain.status == freed.status == INSIDE
    assert freed.best.cost <= plain.best.cost + 1e-7
    # and by no more than the multiplier says (convex: the worth falls with what is given)
    assert plain.best.cost - freed.best.cost <= plain.best.multipliers[which] * amount + 1e-6
