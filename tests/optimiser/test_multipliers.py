"""Multipliers and corrections against closed forms."""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.optimiser.correct import correction, least_distance, least_norm
from reactorstage.optimiser.multipliers import Multipliers, multipliers, non_negative, own_units
from reactorstage.optimiser.polish import answer_at, polished
from reactorstage.optimiser.scaling import Point, scale_at, scaled
from tests.optimiser.toys import Toy, box, corner, hs43, hs71, linear, number, row


def point(u, cost_du, margin, margin_du, residual=(), residual_du=()) -> Point:
    size = len(u)
    return Point(
        np.array(u, dtype=float),
        0.0,
        np.array(cost_du, dtype=float),
        np.array(margin, dtype=float),
        np.array(margin_du, dtype=float).reshape(-1, size),
        np.array(residual, dtype=float),
        np.array(residual_du, dtype=float).reshape(-1, size),
    )


def test_multipliers_of_limits_ends_and_equations_in_closed_form() -> None:
    # gradient (2, -3, 5) = 2 * e1 (limit) - 3 * (-e2 turned: upper end) + 5 * e3 (equation)
    at = point([0.5, 1.0, 0.5], [2, -3, 5], [0.0, 0.4], [[1, 0, 0], [0, 1, 0]], [0.0], [[0, 0, 1]])
    found = multipliers(at, np.ones(3))
    assert found.limit == pytest.approx([2.0, 0.0])
    assert found.high == pytest.approx([0.0, 3.0, 0.0])
    assert found.low == pytest.approx([0.0, 0.0, 0.0])
    assert found.equation == pytest.approx([5.0])
    assert found.residual == pytest.approx(0.0, abs=1e-14)


def test_an_equation_has_a_multiplier_of_either_sign() -> None:
    for slope in (4.0, -4.0):
        at = point([0.5], [slope], [], [], [0.0], [[2.0]])
        found = multipliers(at, np.ones(1))
        assert found.equation == pytest.approx([slope / 2])


def test_a_wrong_sign_is_left_over_as_residual() -> None:
    at = point([0.5, 0.5], [-1.5, 0.0], [0.0], [[1.0, 0.0]])
    found = multipliers(at, np.ones(2))
    assert found.limit == pytest.approx([0.0])
    assert found.residual == pytest.approx(1.5)


def test_a_limit_with_margin_has_none() -> None:
    at = point([0.5], [1.0], [0.01], [[1.0]])
    assert multipliers(at, np.ones(1)).residual == pytest.approx(1.0)
    assert multipliers(at, np.ones(1), near=0.1).limit == pytest.approx([1.0])


def test_more_limits_than_numbers_still_balance_the_gradient() -> None:
    at = point([0.5, 0.5], [1, 1], [0, 0, 0], [[1, 0], [0, 1], [1, 1]])
    found = multipliers(at, np.ones(2))
    assert found.residual == pytest.approx(0.0, abs=1e-12)
    assert np.all(found.limit >= 0.0)


def test_non_negative_least_squares_without_columns() -> None:
    assert non_negative(np.zeros((3, 0)), np.ones(3)).size == 0


def test_multipliers_of_a_published_problem() -> None:
    # Hock and Schittkowski 1981, problem 43: multipliers 1, 0, 2 (from memory; checked by hand:
    # the gradient (-5, -3, -13, 5) is -1 (1, 1, 5, -1) - 2 (2, 1, 4, -2 + ...) at (0, 1, 2, -1))
    answer = polished(hs43(), np.array([0.0, 1.0, 2.0, -1.0]), 10.0)
    assert answer is not None
    assert answer.multipliers == pytest.approx([1.0, 0.0, 2.0], abs=1e-8)
    assert answer.at_work == (0, 2)
    assert answer.residual < 1e-9


def test_multiplier_in_the_own_unit_of_a_ratio_limit() -> None:
    # least x1 (denominator) under 12 - b x1 >= 0 turned round: most x1, so x1 = 12 / b with b = 4;
    # relaxing the bound by d gives x1 = 12 / (4 - d): d(cost)/dd = -12 / 16
    toy = Toy(
        box([1.0], 0.0, 10.0),
        linear(0.0, -1.0),
        [(row("ratio", direction="at least", bound=4.0), linear(12.0, -4.0))],
        weights=lambda x: (np.array([x[0]]), np.array([[1.0]])),
    )
    answer = polished(toy, np.array([3.0]), 1.0)
    assert answer is not None and answer.multipliers == pytest.approx([12 / 16])


def test_own_units_do_not_depend_on_scales() -> None:
    for scale in (0.01, 1.0, 100.0):
        toy = Toy(box([0.5], 0.0, 4.0), linear(0.0, 3.0), [(row("a", scale=scale), linear(-1.0, 2.0))])
        evaluation, _ = toy.start_mesh(np.array([0.5]))
        sizes = scale_at(toy, evaluation, 1.0)
        found = multipliers(scaled(evaluation, np.array([0.5]), sizes), sizes.upper)
        assert own_units(found, evaluation, sizes) == pytest.approx([1.5])


def test_numbers_at_the_end_of_their_range_are_named() -> None:
    numbers = [number("bed 1.catalyst", 0.5, 0.0, 1.0), number("heat", 0.5, 0.0, 1.0, role="internal")]
    answer = answer_at(Toy(numbers, linear(0.0, 1.0, 1.0)), np.zeros(2), 1.0)
    assert answer is not None and answer.at_range == ("bed 1.catalyst",)


def test_least_norm_takes_out_dependent_rows() -> None:
    step, free = least_norm(np.array([[1.0, 1.0, 0.0], [2.0, 2.0, 0.0]]), np.array([1.0, 2.0]))
    assert step == pytest.approx([0.5, 0.5, 0.0])
    assert free.shape == (3, 2)


def test_least_distance_in_closed_form() -> None:
    # nearest point to the origin with x + 2 y >= 5 is (1, 2)
    assert least_distance(np.array([[1.0, 2.0]]), np.array([5.0])) == pytest.approx([1.0, 2.0])
    assert least_distance(np.array([[1.0], [-1.0]]), np.array([1.0, 1.0])) is None
    assert least_distance(np.array([[1.0], [-1.0]]), np.array([-1.0, -1.0])) == pytest.approx([0.0])


def test_correction_puts_what_has_a_multiplier_at_zero_and_breaks_nothing() -> None:
    # the limit at work is broken by 0.1; going straight back would break the second one
    at = point([0.5, 0.5], [1, 0.2], [-0.1, 0.02], [[1.0, 0.0], [-1.0, 1.0]])
    found = multipliers(at, np.ones(2))
    step = correction(at, found, np.ones(2))
    assert step is not None
    assert at.margin + at.margin_du @ step == pytest.approx([0.0, 0.0], abs=1e-12)
    aimed = correction(at, found, np.ones(2), target=1e-3)
    assert aimed is not None and np.min(at.margin + at.margin_du @ aimed) == pytest.approx(1e-3)


def test_correction_swaps_a_limit_that_another_one_replaces() -> None:
    # at (1, 1) x1 <= 1 and x2 <= 1 are held with multipliers 1 and 2; x1 + x2 <= 2 has moved in by 1e-5
    # and takes the place of the first, whose multiplier it drives to zero first
    at = point([0.5, 0.5], [-1, -2], [0.0, 0.0, -1e-5], [[-1, 0], [0, -1], [-1, -1]])
    found = Multipliers(np.array([1.0, 2.0, 0.0]), np.zeros(2), np.zeros(2), np.zeros(0), 0.0)
    assert correction(at, found, np.ones(2)) == pytest.approx([-1e-5, 0.0])
    # nothing can take the place where the limits exclude each other
    apart = point([0.5], [-1], [0.0, -1e-3], [[-1.0], [1.0]])
    held = Multipliers(np.array([1.0, 0.0]), np.zeros(1), np.zeros(1), np.zeros(0), 0.0)
    assert correction(apart, held, np.ones(1)) is None


def test_correction_stays_within_the_ranges() -> None:
    at = point([0.99, 0.5], [1, 1], [-0.1], [[1.0, 1.0]])
    step = correction(at, multipliers(at, np.ones(2)), np.ones(2))
    assert step is not None and step == pytest.approx([0.01, 0.09])


def test_correction_at_a_vertex_of_too_many_limits() -> None:
    toy = corner()
    x = np.array([1.0 + 1e-5, 1.0 + 2e-5])
    answer = answer_at(toy, x, 1.0)
    assert answer is not None
    assert answer.violation <= 1e-9
    assert answer.x == pytest.approx([1.0, 1.0], abs=1e-9)
    assert answer.at_work == (0, 1, 2)


def test_an_equation_is_met_after_correction() -> None:
    answer = answer_at(hs71(), np.array([1.0, 4.743, 3.8211, 1.3794]), 10.0)
    assert answer is not None and answer.violation <= 1e-9
    assert answer.x @ answer.x == pytest.approx(40.0, abs=1e-7)
