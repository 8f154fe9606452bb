"""Rounded settings and the order of moves: each inside by itself, gains that add up."""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.optimiser import optimise
from reactorstage.optimiser.asked import Asked, Sizes
from reactorstage.optimiser.moves import NO_SETTING
from reactorstage.optimiser.reasons import Moves
from reactorstage.optimiser.result import Optimum
from tests.optimiser.toys import Toy, box, linear, number, row


def steps(*sizes: float, noise: float = 1e-6) -> Asked:
    return Asked(np.array(sizes), np.zeros(len(sizes)), lambda x, cost: Sizes(0.01, noise))


def made(found: Optimum) -> Moves:
    assert found.moves is not None
    return found.moves


def test_a_value_is_rounded_inside_its_limit() -> None:
    toy = Toy(box([0.2], 0.0, 1.0), linear(0.0, -1.0), [(row("top"), linear(0.47, -1.0))])
    moves = made(optimise(toy, starts=2, jobs=1, asked=steps(0.1)))
    assert moves.x == pytest.approx([0.4])
    (move,) = moves.moves
    assert (move.values, move.gain) == ((pytest.approx(0.4),), pytest.approx(0.2))


def test_the_others_make_up_for_a_rounded_value() -> None:
    # most x1 + 0.9 x2 with x1 + x2 <= 1 and x1 <= 0.47: with x1 at 0.4 the best x2 is 0.6
    limits = [(row("sum"), linear(1.0, -1.0, -1.0)), (row("top"), linear(0.47, -1.0, 0.0))]
    toy = Toy(box([0.1, 0.1], 0.0, 1.0), linear(0.0, -1.0, -0.9), limits)
    moves = made(optimise(toy, starts=2, jobs=1, asked=steps(0.1, 0.1)))
    assert moves.x == pytest.approx([0.4, 0.6])


def test_what_cannot_be_entered_stays_and_the_rest_is_best_for_it() -> None:
    # least (x1 - 0.5)^2 + (x2 - x1)^2 with x1 held at 0.2: x2 belongs at 0.2 too
    def cost(x):
        a, b = x
        return (a - 0.5) ** 2 + (b - a) ** 2, [2 * (a - 0.5) - 2 * (b - a), 2 * (b - a)]

    moves = made(optimise(Toy(box([0.2, 0.9], 0.0, 1.0), cost), starts=2, jobs=1, asked=steps(0.0, 0.1)))
    assert moves.x == pytest.approx([0.2, 0.2])
    assert moves.held == (0,)


def test_numbers_that_need_each_other_move_at_once() -> None:
    limits = [(row("ahead"), linear(0.05, -1.0, 1.0)), (row("behind"), linear(0.05, 1.0, -1.0))]
    toy = Toy(box([0.0, 0.0], 0.0, 0.5), linear(0.0, -1.0, -1.0), limits)
    (move,) = made(optimise(toy, starts=2, jobs=1, asked=steps(0.1, 0.1))).moves
    assert move.numbers == (0, 1) and move.values == pytest.approx((0.5, 0.5))


def test_the_first_move_brings_today_inside_and_may_cost() -> None:
    # today breaks x1 >= 0.3; x2 gains more but comes second
    limits = [(row("low"), linear(-0.3, 1.0, 0.0))]
    toy = Toy(box([0.0, 0.0], 0.0, 1.0), linear(0.0, 1.0, -5.0), limits)
    moves = made(optimise(toy, starts=2, jobs=1, asked=steps(0.1, 0.1)))
    first, second = moves.moves
    assert (first.numbers, first.mends) == ((0,), (0,))
    assert first.gain == pytest.approx(-0.3) and second.gain == pytest.approx(5.0)
    assert moves.broken == (0,)


def test_moves_worth_less_than_the_noise_are_dropped() -> None:
    toy = Toy(box([0.0, 0.0], 0.0, 1.0), linear(0.0, -1.0, -0.01))
    moves = made(optimise(toy, starts=2, jobs=1, asked=steps(0.1, 0.1, noise=0.02)))
    assert [move.numbers for move in moves.moves] == [(0,)] and moves.dropped == (1,)


def test_a_limit_between_two_values_leaves_no_setting() -> None:
    limits = [(row("low"), linear(-0.41, 1.0)), (row("high"), linear(0.44, -1.0))]
    moves = made(
        optimise(Toy(box([0.42], 0.0, 1.0), linear(0.0, 1.0), limits), starts=2, jobs=1, asked=steps(0.1))
    )
    assert moves.moves == () and moves.note == NO_SETTING


def test_moves_start_from_a_setting_that_has_an_answer() -> None:
    toy = Toy(
        [number("x1", 0.0, 0.0, 1.0)], linear(0.0, -1.0), fails=lambda x: "too cold" if x[0] < 0.05 else ""
    )
    moves = made(optimise(toy, starts=4, jobs=1, asked=steps(0.1)))
    assert moves.moves == () and "no answer" in moves.note
