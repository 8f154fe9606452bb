"""The whole search: starts in threads, distinct optima, and the explanation of the best."""

from __future__ import annotations

import threading
from collections.abc import Sequence
from dataclasses import replace
from functools import partial

import numpy as np

from reactorstage.optimiser.asked import Asked
from reactorstage.optimiser.conflict import least_violating
from reactorstage.optimiser.explain import explained
from reactorstage.optimiser.job import Job, Progress
from reactorstage.optimiser.local import local_solve
from reactorstage.optimiser.merge import grouped, merged
from reactorstage.optimiser.polish import polished
from reactorstage.optimiser.pool import run
from reactorstage.optimiser.programme import Programme
from reactorstage.optimiser.resolve import INSIDE_ENOUGH
from reactorstage.optimiser.result import (
    CANNOT,
    INSIDE,
    NO_ANSWER,
    STOPPED,
    Answer,
    Conflict,
    Optimum,
    StartRecord,
)
from reactorstage.optimiser.scaling import needed, typical_change
from reactorstage.optimiser.smallest_conflict import smallest_conflict
from reactorstage.optimiser.solve import Ending
from reactorstage.optimiser.starts import Start
from reactorstage.optimiser.starts import starts as starting_points
from reactorstage.optimiser.wrappers import Counted

PROVEN = 1e-2


def optimise(
    programme: Programme,
    *,
    starts: int = 20,
    seed: int = 1,
    jobs: int | None = None,
    progress: Progress | None = None,
    explain: bool = True,
    stop: threading.Event | None = None,
    asked: Asked | None = None,
) -> Optimum:
    """Cheapest setting inside all limits, the other distinct optima, and what the limits are worth.

    starts is the number of local solves, jobs the number of threads (all processors when None); the
    result does not depend on jobs. progress(done, total, best cost or None, text) is called from the
    calling thread. Ctrl-C, or a set `stop`, ends the search with what is found, status "stopped by you".
    asked tells how settings are entered and which money says nothing, for moves and flatness. Without
    explain there are no worths, equal splits, flatness, moves and conflict sets. Never raises for a failed
    evaluation: where nothing can be evaluated the status is "no answer".
    """
    counted = Counted(programme)
    job = Job(counted, jobs, stop or threading.Event(), progress or (lambda *_: None))
    points = starting_points(counted, starts, seed)
    job = replace(job, size=cost_size(counted, points))
    endings = run_starts(job, points)
    answers, records = distinct_answers(job, points, endings)
    if not answers:
        found = without_answer(job, endings, records)
        if explain and found.conflict is not None and not job.stop.is_set():
            found = with_conflict_set(job, found, found.conflict, seed)
        return replace(found, evaluations=counted.evaluations)
    found = Optimum(INSIDE, tuple(answers), tuple(records), notes=remarks(answers[0]))
    if explain and not job.stop.is_set():
        found = explained_or_stopped(job, found, points[0], asked or Asked())
    error = discretisation_error(counted, found.best)
    status = STOPPED if job.stop.is_set() else INSIDE
    return replace(found, status=status, discretisation_error=error, evaluations=counted.evaluations)


def explained_or_stopped(job: Job, found: Optimum, today: Start, asked: Asked) -> Optimum:
    """The optimum with its explanation, or as it is when the user stops between two tasks."""
    try:
        return explained(job, found, job.programme.complete(today.x), asked)
    except KeyboardInterrupt:
        job.stop.set()
        return found


def with_conflict_set(job: Job, found: Optimum, conflict: Conflict, seed: int) -> Optimum:
    """The optimum with its smallest conflict, or as it is when the user stops on the way."""
    held = None
    try:
        held = smallest_conflict(job, found.best.x, conflict, seed)
    except KeyboardInterrupt:
        job.stop.set()
    return replace(found, conflict_set=held, status=STOPPED if job.stop.is_set() else found.status)


def remarks(best: Answer) -> tuple[str, ...]:
    """What must be said about a best answer that is no proven optimum."""
    if best.residual <= PROVEN:
        return ()
    return ("no start reached an optimum: the answer is the cheapest setting met inside all limits",)


def cost_size(programme: Programme, points: Sequence[Start]) -> float:
    """A typical change of cost over the ranges, from the first start that can be evaluated."""
    for point in points:
        evaluation, _ = programme.start_mesh(programme.complete(point.x))
        if evaluation.ok:
            return typical_change(programme, evaluation)
    return 1.0


def run_starts(job: Job, points: Sequence[Start]) -> list[Ending]:
    """The endings of all starts, in their order; those that never began are stopped ones."""
    home = job.programme.complete(points[0].x) if points else np.zeros(0)
    best: list[float] = []
    done: list[int] = []

    def solve(start: Start) -> Ending:
        x = job.programme.begin(start.x)
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
    job: Job, points: Sequence[Start], endings: Sequence[Ending]
) -> tuple[list[Answer], list[StartRecord]]:
    """Answers at final tolerance, best first, and the record of each start."""
    chosen = worth_keeping(endings)
    ends = [(e.x, e.cost) for e in (endings[k] for k in chosen) if e.x is not None and e.cost is not None]
    groups = grouped(ends, job.rule)
    stop = threading.Event() if job.stop.is_set() else job.stop
    tasks = [partial(polished, job.programme, ends[group[0]][0], job.size, stop) for group in groups]
    sharp = run(tasks, job.jobs, stop)
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


def without_answer(job: Job, endings: Sequence[Ending], records: Sequence[StartRecord]) -> Optimum:
    """The least-violating answer and its conflict; "no answer" where nothing could be evaluated."""
    give, k = min(((ending.give, k) for k, ending in enumerate(endings)), default=(np.inf, 0))
    x = endings[k].x if np.isfinite(give) else None
    nearest = None if x is None else least_violating(job.programme, x, job.size, job.stop)
    stopped = job.stop.is_set()
    if nearest is None:
        return Optimum(STOPPED if stopped else NO_ANSWER, (), tuple(records))
    answer, held = nearest
    return Optimum(STOPPED if stopped else CANNOT, (answer,), tuple(records), conflict=held)


def discretisation_error(programme: Programme, answer: Answer) -> float | None:
    """What the search's tolerance does to the answer, money per second: to its cost and, at their worth, to
    the limits at work."""
    evaluation, _ = programme.start_mesh(answer.x)
    if not evaluation.ok:
        return None
    off = (needed(evaluation.margin) - answer.margin) / needed(evaluation.weight)
    return abs(answer.cost - evaluation.cost) + float(np.abs(answer.multipliers * off).sum())
