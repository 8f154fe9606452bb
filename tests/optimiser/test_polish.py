"""Second-order check, saddles and the final tolerance."""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.optimiser.polish import answer_at, polished
from reactorstage.optimiser.programme import Array, Evaluation
from reactorstage.optimiser.solve import descend
from tests.optimiser.toy_train import Prices, ToyTrain
from tests.optimiser.toys import Toy, Values, box, corner, hs43, hs100, linear, row


def test_curvature_along_a_circle_in_closed_form() -> None:
    # least x1 on the unit disc: at (-1, 0) the Lagrangian x1 - m (1 - x1^2 - x2^2) with m = 1/2 has the
    # second derivative 2 m = 1 along x2, in ranges of 4: 16
    toy = Toy(box([0.0, 0.0], -2.0, 2.0), linear(0.0, 1.0, 0.0), [(row("disc"), disc)])
    answer = polished(toy, np.array([-1.0, 0.0]), 1.0)
    assert answer is not None and answer.curvature == pytest.approx(16.0, rel=1e-3)
    assert answer.multipliers == pytest.approx([0.5])


def disc(x: Array) -> Values:
    return 1 - float(x @ x), list(-2 * x)


def test_a_vertex_has_no_curvature() -> None:
    answer = polished(corner(), np.array([1.0, 1.0]), 1.0)
    assert answer is not None and answer.curvature is None


def test_a_flat_answer_says_so() -> None:
    toy = Toy(box([0.4, 0.2], 0.0, 1.0), lambda x: ((x[1] - 0.2) ** 2, [0.0, 2 * (x[1] - 0.2)]))
    answer = polished(toy, np.array([0.4, 0.2]), 1.0)
    assert answer is not None and answer.curvature == pytest.approx(0.0, abs=1e-9)


def saddle(x: Array) -> Values:
    return x[1] ** 2 - x[0] ** 2 + x[0] ** 4, [-2 * x[0] + 4 * x[0] ** 3, 2 * x[1]]


def test_a_saddle_is_left() -> None:
    # x2^2 - x1^2 + x1^4: saddle at the origin, minima -1/4 at x1 = +-1/sqrt 2
    toy = Toy(box([0.0, 0.0], -1.0, 1.0), saddle)
    assert descend(toy, np.zeros(2)).x == pytest.approx([0.0, 0.0])
    answer = polished(toy, np.zeros(2), 1.0)
    assert answer is not None
    assert answer.cost == pytest.approx(-0.25)
    assert answer.curvature > 0.0 and answer.residual < 1e-6


NEAR_HS100 = [2.33, 1.951, -0.477, 4.366, -0.6245, 1.038, 1.594]


@pytest.mark.parametrize(("make", "x"), [(hs43, [0.01, 0.99, 2.0, -1.0]), (hs100, NEAR_HS100)])
def test_a_solved_optimum_is_sharpened(make, x) -> None:
    toy = make()
    ending = descend(toy, np.array(x))
    answer = polished(toy, ending.x, 10.0)
    assert answer is not None
    assert answer.residual <= max(1e-8, 1e-2 * ending.residual)
    assert answer.violation <= 1e-9


@pytest.mark.parametrize("error", [1e-5, 1e-3])
def test_values_are_those_of_the_final_tolerance(error: float) -> None:
    """A search on faulty meshes ends, after correction, on the limits of the exact train."""
    exact, faulty = ToyTrain(), ToyTrain(Prices(mesh_error=error))
    start = np.array([number.now for number in exact.numbers])
    best = polished(exact, descend(exact, start).x, 0.05)
    found = polished(faulty, descend(faulty, start).x, 0.05)
    assert best is not None and found is not None
    assert found.cost == pytest.approx(best.cost, rel=1e-8)
    assert found.at_work == best.at_work
    assert found.residual < 1e-6 and found.violation <= 1e-9


class Noisy(Toy):
    """Its final evaluation has a margin that jumps by a ten-millionth from point to point."""

    def final(self, x: Array) -> Evaluation:
        evaluation = super().final(x)
        jump = 1e-7 * np.sin(1e9 * float(np.sum(x)))
        return Evaluation(**{**vars(evaluation), "margin": evaluation.margin + jump})


def test_a_noisy_final_tolerance_ends_inside_all_the_same() -> None:
    toy = Noisy(box([0.5, 0.5], 0.0, 1.0), linear(0.0, -1.0, -0.5), [(row("a"), linear(0.7, -1.0, -1.0))])
    for x in ([0.7, 0.0], [0.69999999, 1e-9], [0.7000001, 0.0]):
        answer = answer_at(toy, np.array(x), 1.0)
        assert answer is not None and answer.violation <= 1e-9
        assert answer.cost == pytest.approx(-0.7, abs=1e-6)


def test_an_answer_that_cannot_be_evaluated_is_none() -> None:
    toy = Toy(box([0.5], 0.0, 1.0), linear(0.0, 1.0), fails=lambda x: "fails")
    assert polished(toy, np.array([0.5]), 1.0) is None
