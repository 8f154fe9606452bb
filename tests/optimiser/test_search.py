"""The whole search: distinct answers, the same digits for any jobs, interruption, failures."""

from __future__ import annotations

import signal
import threading
import time
from collections.abc import Callable

import numpy as np
import pytest

from reactorstage.optimiser import optimise
from reactorstage.optimiser.merge import grouped, merged, sameness
from reactorstage.optimiser.pool import run, usable_jobs
from reactorstage.optimiser.result import INSIDE, NO_ANSWER, STOPPED, Answer, Optimum
from tests.optimiser.toy_train import Prices, ToyTrain
from tests.optimiser.toys import Toy, box, corner, hs71, hump, linear, number, row


def test_both_basins_are_found_and_ranked() -> None:
    found = optimise(Toy(box([0.9, 0.5], 0.0, 1.0), hump), starts=12, jobs=1)
    assert found.status == INSIDE
    assert [round(float(answer.x[0]), 3) for answer in found.answers] == [0.195, 0.895]
    assert found.best.cost < found.answers[1].cost
    assert sum(answer.starts for answer in found.answers) == 12
    for start in found.starts:
        assert start.cost == pytest.approx(found.answers[start.answer].cost, abs=1e-6)


def test_the_train_in_one_answer_with_bounded_work() -> None:
    train = ToyTrain()
    found = optimise(train, starts=20, jobs=1, explain=False)
    assert found.status == INSIDE and len(found.answers) == 1
    assert found.best.starts == 20 and found.best.residual < 1e-8 and found.best.violation <= 1e-9
    assert found.evaluations <= 20 * 15
    explained = optimise(train, starts=20, jobs=1)
    assert explained.evaluations - found.evaluations <= 2000


def test_the_same_digits_for_any_jobs() -> None:
    for make in (lambda: ToyTrain(Prices(mesh_error=1e-4)), hs71):
        first, second = (optimise(make(), starts=10, seed=3, jobs=jobs) for jobs in (1, 2))
        assert digits(first) == digits(second)


def digits(found: Optimum) -> str:
    with np.printoptions(precision=17, floatmode="unique"):
        return repr(found)


def test_another_seed_makes_other_starts() -> None:
    one, two = (optimise(ToyTrain(), starts=8, seed=seed, jobs=1, explain=False) for seed in (1, 2))
    assert [s.evaluations for s in one.starts] != [s.evaluations for s in two.starts]
    assert one.best.cost == pytest.approx(two.best.cost, rel=1e-9)


def test_progress_is_told_from_the_calling_thread() -> None:
    told: list[tuple[int, int, float | None, str]] = []
    threads: set[int] = set()

    def listen(done: int, total: int, best: float | None, text: str) -> None:
        threads.add(threading.get_ident())
        told.append((done, total, best, text))

    found = optimise(corner(), starts=4, jobs=2, progress=listen)
    assert threads == {threading.get_ident()}
    first = told[:4]
    assert [done for done, *_ in first] == [1, 2, 3, 4] and {total for _, total, *_ in first} == {4}
    assert first[-1][2] == pytest.approx(found.best.cost)
    assert told[-1][0] == told[-1][1]
    assert sum(total for done, total, *_ in told[4:] if done == total) == len(told) - 4


def test_nothing_can_be_evaluated() -> None:
    toy = Toy(box([0.5], 0.0, 1.0), linear(0.0, 1.0), fails=lambda x: "bed 1 runs out of pressure")
    found = optimise(toy, starts=3, jobs=1)
    assert found.status == NO_ANSWER and found.answers == () and found.conflict is None
    assert {start.ended for start in found.starts} == {"bed 1 runs out of pressure"}
    assert {start.answer for start in found.starts} == {-1}


def test_an_answer_beside_a_failure_is_given_with_a_note() -> None:
    toy = Toy(box([0.1], 0.0, 1.0), linear(0.0, -1.0), fails=lambda x: "burns through" if x[0] > 0.5 else "")
    found = optimise(toy, starts=4, jobs=1)
    assert found.status == INSIDE and len(found.answers) == 1
    assert 0.4 < found.best.x[0] <= 0.5
    assert found.notes and "no start reached an optimum" in found.notes[0]


def test_a_set_stop_ends_the_search_with_what_is_there() -> None:
    stop = threading.Event()
    train = ToyTrain()
    told: list[int] = []

    def listen(done: int, total: int, best: float | None, text: str) -> None:
        told.append(done)
        if done == 3:
            stop.set()

    found = optimise(train, starts=20, jobs=1, progress=listen, stop=stop)
    assert found.status == STOPPED and found.answers
    assert found.worths == () and found.equal_splits == ()
    assert sum(start.answer >= 0 for start in found.starts) in (3, 4)
    assert {start.ended for start in found.starts} <= {"local optimum", "stopped", "not begun"}
    assert found.best.residual < 1e-6


@pytest.mark.parametrize("jobs", [1, 2])
@pytest.mark.parametrize("after", [30, 260])
def test_interrupt_keeps_the_best_answer(jobs: int, after: int) -> None:
    """An interrupt from the keyboard during the starts, and during the explanation."""
    count = 0
    lock = threading.Lock()

    def interrupt() -> None:
        nonlocal count
        with lock:
            count += 1
            now = count
        if now == after:
            signal.raise_signal(signal.SIGINT)
        if now >= after:
            time.sleep(0.001)

    found = optimise(ToyTrain(delay=interrupt), starts=20, jobs=jobs)
    assert found.status == STOPPED
    assert found.best.cost == pytest.approx(optimise(ToyTrain(), starts=1, jobs=1, explain=False).best.cost)
    assert count < after + 80


def test_a_stop_before_anything_is_found() -> None:
    stop = threading.Event()
    stop.set()
    found = optimise(ToyTrain(), starts=3, jobs=1, stop=stop)
    assert found.status == STOPPED and found.answers == ()


def test_internal_numbers_do_not_make_answers_distinct() -> None:
    numbers = [number("x1", 0.5, 0.0, 1.0), number("slack", 0.5, 0.0, 1.0, role="internal")]
    toy = Toy(numbers, lambda x: ((x[0] - 0.3) ** 2 + 1.0, [2 * (x[0] - 0.3), 0.0]))
    assert len(optimise(toy, starts=6, jobs=1, explain=False).answers) == 1
    plain = Toy(box([0.5, 0.5], 0.0, 1.0), toy._cost)
    assert len(optimise(plain, starts=6, jobs=1, explain=False).answers) > 1


def test_starts_are_completed() -> None:
    def complete(x):
        return np.array([x[0], 2 * x[0]])

    toy = Toy(
        [number("x1", 0.2, 0.0, 1.0), number("heat", 0.0, 0.0, 2.0, role="internal")],
        lambda x: ((x[0] - 0.3) ** 2, [2 * (x[0] - 0.3), 0.0]),
        equations=[linear(0.0, 2.0, -1.0)],
        complete=complete,
        fails=lambda x: "" if abs(2 * x[0] - x[1]) < 0.5 else "heat does not close",
    )
    found = optimise(toy, starts=6, jobs=1)
    assert found.status == INSIDE and found.best.x == pytest.approx([0.3, 0.6], abs=1e-6)
    assert all(start.answer == 0 for start in found.starts)


def answer(x: list[float], cost: float) -> Answer:
    return Answer(np.array(x), cost, 0.0, 0.0, (), np.zeros(0), (), np.zeros(0))


def test_distinct_by_money_or_by_a_number() -> None:
    rule = sameness((number("a", 0.0, 0.0, 10.0), number("b", 0.0, 0.0, 1.0)), 1.0)
    given = [
        answer([1.00, 0.5], 100.00),
        answer([1.09, 0.5], 100.05),
        answer([1.00, 0.5], 100.20),
        answer([1.20, 0.5], 100.01),
        answer([1.00, 0.505], 99.99),
    ]
    kept, went = merged(given, rule)
    assert [a.cost for a in kept] == [99.99, 100.01, 100.20]
    assert went == [0, 0, 2, 1, 0]
    assert [a.starts for a in kept] == [3, 1, 1]


def test_of_equal_answers_the_first_start_is_kept() -> None:
    rule = sameness((number("a", 0.0, 0.0, 1.0),), 1.0)
    points = [(np.array([0.5 + 1e-4 * k]), 1.0) for k in range(4)]
    assert grouped(points, rule) == [[0, 1, 2, 3]]


def test_results_come_in_the_order_of_the_tasks() -> None:
    def task(k: int) -> Callable[[], int]:
        def work() -> int:
            time.sleep(0.02 if k == 0 else 0.0)
            return k

        return work

    ended: list[int] = []
    found = run([task(k) for k in range(5)], 3, threading.Event(), lambda index, result: ended.append(index))
    assert found == [0, 1, 2, 3, 4] and sorted(ended) == [0, 1, 2, 3, 4]


def test_a_defect_in_a_task_is_not_swallowed() -> None:
    def broken() -> int:
        raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        run([broken], 1, threading.Event())


def test_jobs() -> None:
    assert usable_jobs(3) == 3 and usable_jobs(0) == 1 and usable_jobs(None) >= 1


def test_a_better_answer_met_while_explaining_is_taken_up() -> None:
    # the basin on the right is reached from no start; tightening the limit pushes the re-solve into it
    def cost(x):
        a = x[0]
        value = np.minimum(a, 0.0) + 10 * (a - 0.5) ** 2 if a < 0.52 else 10 * 0.02**2 - 5 * (a - 0.52)
        slope = 20 * (a - 0.5) if a < 0.52 else 0.4 - 5.4 * min(1.0, (a - 0.52) / 0.01)
        return float(value), [float(slope)]

    toy = Toy(box([0.5], 0.0, 1.0), cost, [(row("push", step=0.1), linear(-0.5, 1.0))])
    found = optimise(toy, starts=1, jobs=1)
    assert found.status == INSIDE
    assert found.best.x == pytest.approx([1.0])
    assert found.notes == ("the best answer was found while explaining, from none of the starts",)
    assert found.starts[0].answer == 1
