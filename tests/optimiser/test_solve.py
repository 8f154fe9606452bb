"""Local solves against published optima and against what the search must survive."""

from __future__ import annotations

import threading
from dataclasses import replace

import numpy as np
import pytest

from reactorstage.optimiser.local import local_solve
from reactorstage.optimiser.programme import Array, Evaluation
from reactorstage.optimiser.solve import descend
from tests.optimiser.toy_train import Prices, ToyTrain
from tests.optimiser.toys import (
    Toy,
    box,
    contradiction,
    corner,
    hs35,
    hs43,
    hs71,
    hs76,
    hs100,
    linear,
    rosenbrock,
    row,
)

# optima of W. Hock and K. Schittkowski, Test Examples for Nonlinear Programming Codes, 1981; from memory
PUBLISHED = [
    (hs35, 1 / 9, [4 / 3, 7 / 9, 4 / 9]),
    (hs43, -44.0, [0.0, 1.0, 2.0, -1.0]),
    (hs71, 17.0140173, [1.0, 4.7429994, 3.8211503, 1.3794082]),
    (hs76, -4.681818181, [0.2727273, 2.090909, 0.0, 0.5454545]),
    (hs100, 680.6300573, [2.330499, 1.951372, -0.4775414, 4.365726, -0.6244870, 1.038131, 1.594227]),
]


def spread(toy: Toy | ToyTrain, count: int, seed: int) -> list[Array]:
    rng = np.random.default_rng(seed)
    low = np.array([number.low for number in toy.numbers])
    high = np.array([number.high for number in toy.numbers])
    return [low + (high - low) * rng.random(low.size) for _ in range(count)]


@pytest.mark.parametrize(("make", "cost", "x"), PUBLISHED, ids=lambda value: getattr(value, "__name__", ""))
def test_published_optimum_from_the_published_start(make, cost, x) -> None:
    toy = make()
    ending = descend(toy, np.array([number.now for number in toy.numbers]))
    assert ending.optimal and ending.ended == "local optimum"
    assert ending.cost == pytest.approx(cost, rel=1e-7)
    assert ending.x == pytest.approx(x, abs=1e-4)
    assert ending.violation <= 1e-8 and ending.residual <= 1e-3
    assert toy.total_calls == ending.evaluations <= 25


@pytest.mark.parametrize(("make", "cost", "x"), PUBLISHED, ids=lambda value: getattr(value, "__name__", ""))
def test_random_starts_end_at_stationary_points_inside_the_limits(make, cost, x) -> None:
    toy = make()
    endings = [local_solve(toy, start, 1.0) for start in spread(toy, 12, 3)]
    assert all(ending.optimal and ending.violation <= 1e-8 for ending in endings)
    assert min(ending.cost for ending in endings) == pytest.approx(cost, rel=1e-6)


def test_forty_random_starts_of_the_train_end_in_few_evaluations() -> None:
    train = ToyTrain()
    endings = [local_solve(train, x, 0.05) for x in spread(train, 40, 1)]
    assert all(ending.optimal for ending in endings)
    assert np.ptp([ending.cost for ending in endings]) < 1e-6 * endings[0].cost
    assert np.median([ending.evaluations for ending in endings]) <= 25
    assert max(ending.evaluations for ending in endings) <= 80


def test_rosenbrock_on_a_disc_holds_its_limit_exactly() -> None:
    # Rosenbrock's function on the unit disc; minimum 0.045674808 at (0.786415, 0.617698), from memory
    toy = Toy(box([-1.2, 1.0], -2.0, 2.0), rosenbrock, [(row("disc"), lambda x: (1 - x @ x, list(-2 * x)))])
    ending = descend(toy, np.array([-1.2, 1.0]))
    assert ending.cost == pytest.approx(0.045674808, rel=1e-7)
    assert abs(1 - ending.x @ ending.x) <= 1e-9


@pytest.mark.parametrize("error", [1e-6, 1e-5, 1e-3])
def test_new_meshes_until_the_cost_stands_still(error: float) -> None:
    exact = descend(ToyTrain(), np.array([n.now for n in ToyTrain().numbers]))
    train = ToyTrain(Prices(mesh_error=error))
    ending = descend(train, np.array([n.now for n in train.numbers]))
    assert ending.optimal
    assert ending.evaluations <= 20
    again = train.start_mesh(ending.x)[0]
    assert again.cost == pytest.approx(ending.cost, rel=1e-6)
    assert ending.cost == pytest.approx(exact.cost, rel=10 * error)


def wrong_far_away(x: Array, mesh: Array) -> tuple[float, list[float]]:
    apart = float(x[0] - mesh[0])
    return 0.03 * np.sin(apart) ** 2, [0.03 * np.sin(2 * apart)]


def test_a_mesh_made_far_away_is_not_believed() -> None:
    # on a mesh made at m the cost is off by 0.03 sin(x1 - m)^2: its first optimum is wrong
    toy = Toy(
        box([0.9], 0.0, 1.0),
        lambda x: ((x[0] - 0.4) ** 2, [2 * (x[0] - 0.4)]),
        mesh_error=wrong_far_away,
    )
    ending = descend(toy, np.array([0.9]))
    assert ending.optimal
    assert ending.x == pytest.approx([0.4], abs=1e-3)


def bowl(x: Array) -> tuple[float, list[float]]:
    return 4 * (x[0] - 0.6) ** 2 + (x[1] - 0.3) ** 2, [8 * (x[0] - 0.6), 2 * (x[1] - 0.3)]


def test_failures_beside_the_way_turn_the_search_back() -> None:
    toy = Toy(box([0.1, 0.9], 0.0, 1.0), bowl, fails=lambda x: "bed 1 cannot be done" if x[0] > 0.65 else "")
    for x in ([0.1, 0.9], [0.0, 0.0], [0.64, 1.0]):
        ending = descend(toy, np.array(x))
        assert ending.optimal
        assert ending.x == pytest.approx([0.6, 0.3], abs=1e-5)


def test_a_trial_point_that_the_mesh_cannot_do_gets_its_own_mesh() -> None:
    far = lambda x, mesh: "step cannot be done" if abs(x[0] - mesh[0]) > 0.2 else ""  # noqa: E731
    toy = Toy(box([0.0, 0.9], 0.0, 1.0), bowl, frozen_fails=far)
    ending = descend(toy, np.array([0.0, 0.9]))
    assert ending.optimal and ending.x == pytest.approx([0.6, 0.3], abs=1e-5)


def test_an_optimum_behind_a_failure_ends_beside_it() -> None:
    toy = Toy(box([0.1], 0.0, 1.0), linear(0.0, -1.0), fails=lambda x: "burns through" if x[0] > 0.5 else "")
    ending = descend(toy, np.array([0.1]))
    assert ending.feasible and not ending.optimal
    assert ending.ended in ("no further progress", "too many evaluations")
    assert 0.3 < ending.x[0] <= 0.5


def test_values_that_are_not_finite_are_failures() -> None:
    toy = Toy(box([0.1], 0.0, 1.0), lambda x: (np.nan, [1.0]))
    ending = descend(toy, np.array([0.1]))
    assert ending.x is None and "not finite" in ending.ended


def test_a_start_that_fails_is_drawn_towards_home() -> None:
    toy = Toy(box([0.2, 0.2], 0.0, 1.0), bowl, fails=lambda x: "fails" if x[0] > 0.65 else "")
    ending = local_solve(toy, np.array([1.0, 1.0]), 1.0, home=np.array([0.2, 0.2]))
    assert ending.optimal and ending.x == pytest.approx([0.6, 0.3], abs=1e-5)
    assert ending.evaluations == toy.total_calls
    lost = local_solve(toy, np.array([1.0, 1.0]), 1.0)
    assert lost.x is None and lost.ended == "fails"


def test_a_cap_bounds_the_work_and_keeps_the_best_point() -> None:
    toy = Toy(box([-1.2, 1.0], -2.0, 2.0), rosenbrock)
    ending = descend(toy, np.array([-1.2, 1.0]), cap=12)
    assert toy.total_calls == ending.evaluations == 12
    assert ending.ended == "too many evaluations"
    assert ending.feasible and not ending.optimal


def test_a_stop_ends_at_once_with_what_is_there() -> None:
    stop = threading.Event()
    seen: list[int] = []

    def after_five() -> None:
        seen.append(1)
        if len(seen) == 5:
            stop.set()

    toy = Toy(box([-1.2, 1.0], -2.0, 2.0), rosenbrock, delay=after_five)
    ending = descend(toy, np.array([-1.2, 1.0]), stop=stop)
    assert ending.stopped and ending.ended == "stopped"
    assert toy.total_calls == 5


def test_limits_that_exclude_each_other_end_at_the_least_violation() -> None:
    ending = local_solve(contradiction(), np.array([0.2, 0.2]), 1.0)
    assert not ending.feasible and ending.ended == "limits broken"
    assert ending.give == pytest.approx(0.4, abs=1e-9)
    assert ending.x == pytest.approx([0.6, 0.5], abs=1e-9)


def test_nothing_left_to_optimise_is_an_evaluation() -> None:
    from reactorstage.optimiser.wrappers import Pinned

    ending = descend(Pinned(corner(), {0: 0.5, 1: 0.25}), np.zeros(0))
    assert ending.optimal and ending.cost == pytest.approx(-0.75)


def test_a_number_without_width_stays() -> None:
    from tests.optimiser.toys import number

    toy = Toy([number("x1", 0.3, 0.3, 0.3), number("x2", 0.1, 0.0, 1.0)], bowl)
    ending = descend(toy, np.array([0.3, 0.1]))
    assert ending.optimal and ending.x == pytest.approx([0.3, 0.3], abs=1e-6)


def test_scale_of_money_and_of_limits_does_not_matter() -> None:
    def train(factor: float) -> Toy:
        scaled = lambda x: tuple(factor * np.array(part) for part in rosenbrock(x))  # noqa: E731
        disc = lambda x: (factor * (1 - x @ x), list(-2 * factor * x))  # noqa: E731
        return Toy(box([-1.2, 1.0], -2.0, 2.0), scaled, [(row("disc", scale=factor), disc)])

    ends = [descend(train(factor), np.array([-1.2, 1.0])) for factor in (1e-6, 1.0, 1e6)]
    assert {end.evaluations for end in ends} == {ends[0].evaluations}
    assert ends[0].x == pytest.approx(ends[2].x, abs=1e-9)


class Uneven(Toy):
    """A toy whose first margin differs from mesh to mesh by up to `unevenness`; what is near is far less."""

    unevenness = 1e-3

    def _values(self, x: Array, mesh: Array) -> Evaluation:
        found = super()._values(x, mesh)
        assert found.margin is not None
        off = self.unevenness * np.sin(1e7 * mesh[0])
        return replace(found, margin=found.margin + np.eye(found.margin.size)[0] * off)


@pytest.mark.parametrize("unevenness", [1e-7, 1e-6, 5e-6])
def test_a_limit_at_work_is_found_again_on_a_mesh_that_leaves_it_slack(unevenness: float) -> None:
    """Closed form: x1 + x2 >= 1 at least (x1 - 2 x2)^2 + x1 + 2 x2 gives x1 - 2 x2 = 1/6, the cost 1.3055...

    With y = x1 - 2 x2 and x1 + x2 = s the cost is y^2 - y/3 + 4 s/3, least at y = 1/6 and s = 1.
    """

    def cost(x: Array) -> tuple[float, list[float]]:
        y = x[0] - 2.0 * x[1]
        return float(y**2 + x[0] + 2.0 * x[1]), [2.0 * y + 1.0, 2.0 - 4.0 * y]

    toy = Uneven(box([3.0, 2.0], -5.0, 5.0), cost, [(row("sum", scale=1e-3), linear(-1.0, 1.0, 1.0))])
    toy.unevenness = unevenness
    for start in spread(toy, 6, 1):
        ending = descend(toy, start)
        assert ending.ended == "local optimum"
        assert ending.cost == pytest.approx(4.0 / 3.0 - 1.0 / 36.0, abs=2.0 * unevenness)
