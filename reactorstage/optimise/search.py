"""The whole search: starts in threads, distinct optima, and the explanation of the best."""

from __future__ import annotations

import threading
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field, replace
from functools import partial

import numpy as np

from reactorstage.optimise.conflict import least_violating
from reactorstage.optimise.local import local_solve
from reactorstage.optimise.merge import Sameness, grouped, merged, sameness
from reactorstage.optimise.polish import polished
from reactorstage.optimise.pool import run
from reactorstage.optimise.programme import Array, Programme
from reactorstage.optimise.resolve import INSIDE_ENOUGH, Base
from reactorstage.optimise.result import (
    CANNOT,
    INSIDE,
    NO_ANSWER,
    STOPPED,
    Answer,
    EqualSplit,
    Optimum,
    StartRecord,
    Worth,
)
from reactorstage.optimise.scaling import typical_change
from reactorstage.optimise.solve import Ending
from reactorstage.optimise.split import equal_split
from reactorstage.optimise.starts import Start
from reactorstage.optimise.starts import starts as starting_points
from reactorstage.optimise.worth import keep_away_cost, moves, worth
from reactorstage.optimise.wrappers import Counted

Progress = Callable[[int, int, "float | None", str], None]
EXPLANATIONS = 2
PROVEN = 1e-2


@dataclass(frozen=True)
class _Run:
    """What every phase needs: the programme, threads, stop, a typical change of cost, and a listener."""

    programme: Counted
    jobs: int | None
    stop: threading.Event
    progress: Progress
    size: float = 1.0

    @property
    def rule(self) -> Sameness:
        return sameness(self.programme.numbers, self.size)


@dataclass(frozen=True)
class _Explanation:
    """Worths, equal splits and keep-away cost; better holds x that cost less than the best answer."""

    worths: tuple[Worth, ...] = ()
    equal_splits: tuple[EqualSplit, ...] = ()
    keep_away_cost: float | None = None
    better: tuple[Array, ...] = field(default=())


def optimise(
    programme: Programme,
    *,
    starts: int = 20,
    seed: int = 1,
    jobs: int | None = None,
    progress: Progress | None = None,
    explain: bool = True,
    stop: threading.Event | None = None,
) -> Optimum:
    """Cheapest setting inside all limits, the other distinct optima, and what the limits are worth.

    starts is the number of local solves, jobs the number of threads (all processors when None); the
    result does not depend on jobs. progress(done, total, best cost or None, text) is called from the
    calling thread. Ctrl-C, or a set `stop`, ends the search with what is found, status "stopped by you".
    Without explain there are no worths, equal splits and keep-away cost. Never raises for a failed
    evaluation: where nothing can be evaluated the status is "no answer".
    """
    counted = Counted(programme)
    job = _Run(counted, jobs, stop or threading.Event(), progress or (lambda *_: None))
    points = starting_points(counted, starts, seed)
    job = replace(job, size=cost_size(counted, points))
    endings = run_starts(job, points)
    answers, records = distinct_answers(job, points, endings)
    if not answers:
        return replace(without_answer(job, endings, records), evaluations=counted.evaluations)
    try:
        optimum = explained(job, answers, records, points, explain)
    except KeyboardInterrupt:
        job.stop.set()
        optimum = Optimum(STOPPED, tuple(answers), tuple(records))
    status = STOPPED if job.stop.is_set() else INSIDE
    return replace(optimum, status=status, evaluations=counted.evaluations)


def cost_size(programme: Programme, points: Sequence[Start]) -> float:
    """A typical change of cost over the ranges, from the first start that can be evaluated."""
    for point in points:
        evaluation, _ = programme.start_mesh(programme.complete(point.x))
        if evaluation.ok:
            return typical_change(programme, evaluation)
    return 1.0


def run_starts(job: _Run, points: Sequence[Start]) -> list[Ending]:
    """The endings of all starts, in their order; those that never began are stopped ones."""
    home = job.programme.complete(points[0].x) if points else np.zeros(0)
    best: list[float] = []
    done: list[int] = []

    def solve(start: Start) -> Ending:
        x = job.programme.complete(start.x)
        return local_solve(job.programme, x, job.size, home=home, stop=job.stop)

    def finished(index: int, ending: Ending) -> None:
        done.append(index)
        if ending.feasible and ending.cost is not None:
            best.append(ending.cost)
        text = f"start {len(done)} of {len(points)}: {points[index].name}"
        job.progress(len(done), len(points), min(best, default=None), text)

    results = run([partial(solve, start) for start in points], job.jobs, job.stop, finished)
    return [result or Ending("not begun", stopped=True) for result in results]


def distinct_answers(
    job: _Run, points: Sequence[Start], endings: Sequence[Ending]
) -> tuple[list[Answer], list[StartRecord]]:
    """Answers at final tolerance, best first, and the record of each start."""
    chosen = worth_keeping(endings)
    groups = grouped([(e.x, e.cost) for e in (endings[k] for k in chosen)], job.rule)  # type: ignore[misc]
    firsts = [endings[chosen[group[0]]] for group in groups]
    polishing = None if job.stop.is_set() else job.stop
    tasks = [partial(polished, job.programme, e.x, job.size, polishing) for e in firsts if e.x is not None]
    sharp = run(tasks, job.jobs, job.stop if polishing else threading.Event())
    kept = [
        (replace(answer, starts=len(group)), group)
        for answer, group in zip(sharp, groups, strict=True)
        if answer is not None and answer.violation <= INSIDE_ENOUGH
    ]
    answers, went = merged([answer for answer, _ in kept], job.rule)
    place = {chosen[k]: went[n] for n, (_, group) in enumerate(kept) for k in group}
    return answers, [
        record(start, ending, place.get(k, -1))
        for k, (start, ending) in enumerate(zip(points, endings, strict=True))
    ]


def worth_keeping(endings: Sequence[Ending]) -> list[int]:
    """Positions of the local optima, and of unfinished ends inside the limits that cost less than these."""
    optimal = [k for k, ending in enumerate(endings) if ending.optimal]
    least = min((endings[k].cost or 0.0 for k in optimal), default=np.finfo(float).max)
    others = [k for k, e in enumerate(endings) if e.feasible and not e.optimal and e.cost is not None]
    cheaper = [k for k in others if (endings[k].cost or 0.0) < least - 1e-6 * abs(least)]
    if not optimal and cheaper:
        return [min(cheaper, key=lambda k: (endings[k].cost, k))]
    return sorted(optimal + cheaper)


def record(start: Start, ending: Ending, answer: int) -> StartRecord:
    """How one start ended."""
    cost = ending.cost if ending.feasible else None
    return StartRecord(start.name, ending.ended, cost, answer, ending.iterations, ending.evaluations)


def without_answer(job: _Run, endings: Sequence[Ending], records: Sequence[StartRecord]) -> Optimum:
    """The least-violating answer and its conflict; "no answer" where nothing could be evaluated."""
    give, k = min(((ending.give, k) for k, ending in enumerate(endings)), default=(np.inf, 0))
    x = endings[k].x if np.isfinite(give) else None
    nearest = None if x is None else least_violating(job.programme, x, job.size, job.stop)
    stopped = job.stop.is_set()
    if nearest is None:
        return Optimum(STOPPED if stopped else NO_ANSWER, (), tuple(records))
    answer, held = nearest
    return Optimum(STOPPED if stopped else CANNOT, (answer,), tuple(records), conflict=held)


def explained(
    job: _Run,
    answers: list[Answer],
    records: list[StartRecord],
    points: Sequence[Start],
    explain: bool,
) -> Optimum:
    """The optimum with its explanation; a better answer met on the way is taken up, and explained."""
    found = _Explanation()
    notes: list[str] = []
    for _ in range(EXPLANATIONS if explain else 0):
        if job.stop.is_set():
            break
        found = explanation(job, answers, points)
        newer = [polished(job.programme, x, job.size, job.stop) for x in found.better]
        inside = [answer for answer in newer if answer and answer.violation <= INSIDE_ENOUGH]
        if not inside:
            break
        count = len(answers)
        answers, went = merged([*answers, *(replace(answer, starts=0) for answer in inside)], job.rule)
        records = [replace(r, answer=went[r.answer] if 0 <= r.answer < count else -1) for r in records]
        notes = ["the best answer was found while explaining, from none of the starts"]
    if answers[0].residual > PROVEN:
        notes.append("no start reached an optimum: the answer is the cheapest setting met inside all limits")
    return Optimum(
        INSIDE,
        tuple(answers),
        tuple(records),
        found.worths,
        found.equal_splits,
        found.keep_away_cost,
        discretisation_error=discretisation_error(job.programme, answers[0]),
        notes=tuple(notes),
    )


def discretisation_error(programme: Programme, answer: Answer) -> float | None:
    """Change of cost from the search's to the final tolerance at the answer, money per second."""
    evaluation, _ = programme.start_mesh(answer.x)
    return abs(answer.cost - evaluation.cost) if evaluation.ok else None


def explanation(job: _Run, answers: Sequence[Answer], points: Sequence[Start]) -> _Explanation:
    """Worths of the limits at work, equal splits and keep-away cost of the best answer, in threads."""
    known = tuple(answer.x for answer in answers)
    base = Base(job.programme, known, answers[0].cost, job.size, job.stop)
    today = job.programme.complete(points[0].x)
    moved = moves(job.programme.limits, answers[0].at_work)
    groups = job.programme.splits
    tasks: list[Callable[[], object]] = [
        *(partial(worth, base, move) for move in moved),
        *(partial(equal_split, base, group, [known[0], today, *known[1:]]) for group in groups),
        partial(keep_away_cost, base),
    ]
    texts = [f"worth of {move.label}" for move in moved] + [f"equal split of {g.feed}" for g in groups]
    texts.append("keep away")
    done: list[int] = []

    def finished(index: int, result: object) -> None:
        done.append(index)
        job.progress(len(done), len(tasks), answers[0].cost, texts[index])

    results = run(tasks, job.jobs, job.stop, finished)
    return sorted_out(results)


def sorted_out(results: Sequence[object]) -> _Explanation:
    """The explanation from the results of its tasks; what never began is left out."""
    pairs = [result for result in results if isinstance(result, tuple)]
    money = [result for result in results if isinstance(result, float)]
    return _Explanation(
        tuple(found for found, _ in pairs),
        tuple(result for result in results if isinstance(result, EqualSplit)),
        money[0] if money else None,
        tuple(x for _, x in pairs if x is not None),
    )
