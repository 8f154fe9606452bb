"""What the best answer is explained with: worths and their reach, splits, flatness, moves, keeping away."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import TypeVar

from reactorstage.optimiser.asked import Asked
from reactorstage.optimiser.flat import flat_number, handles, left_alone
from reactorstage.optimiser.job import Job
from reactorstage.optimiser.merge import merged
from reactorstage.optimiser.moves import moves_to
from reactorstage.optimiser.polish import polished
from reactorstage.optimiser.pool import run
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.reach import pair_tasks, reach
from reactorstage.optimiser.reasons import Flatness, FlatNumber, Moves, Pair, Reach
from reactorstage.optimiser.resolve import INSIDE_ENOUGH, Base
from reactorstage.optimiser.result import Answer, EqualSplit, Optimum, Worth
from reactorstage.optimiser.split import equal_split
from reactorstage.optimiser.worth import asked_for, keep_away_cost, moves, step_away_cost, worth

Task = tuple[str, Callable[[], object]]
Result = TypeVar("Result")


@dataclass(frozen=True)
class Explanation:
    """Worths, equal splits and keep-away cost; better holds x that cost less than the best answer."""

    worths: tuple[Worth, ...] = ()
    equal_splits: tuple[EqualSplit, ...] = ()
    keep_away_cost: float | None = None
    better: tuple[Array, ...] = ()


def explained(job: Job, found: Optimum, today: Array, asked: Asked) -> Optimum:
    """The optimum with its explanation; a better answer met on the way is taken up first, once.

    today is the x of today's setting.
    """
    told = explanation(job, found.answers, today)
    better = better_answers(job, told)
    if better and not job.stop.is_set():
        found = taken_up(job, found, better)
        told = explanation(job, found.answers, today)
    found = replace(
        found, worths=told.worths, equal_splits=told.equal_splits, keep_away_cost=told.keep_away_cost
    )
    return found if job.stop.is_set() else deepened(job, found, today, asked)


def better_answers(job: Job, told: Explanation) -> list[Answer]:
    """The answers at what cost less than the best answer."""
    newer = [polished(job.programme, x, job.size, job.stop) for x in told.better]
    return [answer for answer in newer if answer and answer.violation <= INSIDE_ENOUGH]


def taken_up(job: Job, found: Optimum, better: Sequence[Answer]) -> Optimum:
    """The optimum with better answers, reached from none of the starts, among its answers."""
    answers, went = merged([*found.answers, *(replace(answer, starts=0) for answer in better)], job.rule)
    starts = (replace(one, answer=went[one.answer] if one.answer >= 0 else -1) for one in found.starts)
    note = "the best answer was found while explaining, from none of the starts"
    return replace(found, answers=tuple(answers), starts=tuple(starts), notes=(*found.notes, note))


def base_of(job: Job, answers: Sequence[Answer]) -> Base:
    """The base of every re-solve of these answers."""
    return Base(job.programme, tuple(answer.x for answer in answers), answers[0].cost, job.size, job.stop)


def explanation(job: Job, answers: Sequence[Answer], today: Array) -> Explanation:
    """Worths of the limits at work, equal splits and keep-away cost of the best answer, in threads."""
    base = base_of(job, answers)
    known = base.known
    tasks: list[Task] = [
        (f"equal split of {g.feed}", partial(equal_split, base, g, [known[0], today, *known[1:]]))
        for g in job.programme.splits
        if not g.carries
    ]
    tasks += [
        (f"worth of {one.label}", partial(worth, base, one))
        for one in moves(job.programme.limits, asked_for(job.programme, answers[0]))
    ]
    tasks.append(("keep away", partial(keep_away_cost, base)))
    return sorted_out(done(job, base.cost, tasks), base)


def done(job: Job, cost: float, tasks: Sequence[Task]) -> list[object]:
    """Results of named tasks, run in threads, with progress told."""
    ended: list[int] = []

    def finished(index: int, result: object) -> None:
        ended.append(index)
        job.progress(len(ended), len(tasks), cost, tasks[index][0])

    return run([task for _, task in tasks], job.jobs, job.stop, finished)


def sorted_out(results: Sequence[object], base: Base) -> Explanation:
    """The explanation from the results of its tasks; what never began is left out."""
    pairs = [result for result in results if isinstance(result, tuple)]
    splits = tuple(result for result in results if isinstance(result, EqualSplit))
    money = [result for result in results if isinstance(result, float)]
    better = [x for _, x in pairs if x is not None]
    better += [split.x for split in splits if split.x is not None and cheaper_split(split, base)]
    return Explanation(tuple(found for found, _ in pairs), splits, money[0] if money else None, tuple(better))


def cheaper_split(split: EqualSplit, base: Base) -> bool:
    """True when equal shares, under the limits as they stand, cost less than the best answer."""
    return not split.relaxed and split.cost is not None and split.cost < base.cost - base.noise


def deepened(job: Job, found: Optimum, today: Array, asked: Asked) -> Optimum:
    """The optimum with reach and pairs of the worths, flatness, moves and what a step further away costs."""
    base = base_of(job, found.answers)
    sizes = asked.sizes(base.known[0], base.cost)
    band = sizes.band
    tasks: list[Task] = []
    if asked.steps is not None:
        tasks.append(("moves from today", partial(moves_to, base, asked, sizes.noise, today)))
    tasks += [(f"reach of {one.label}", partial(reach, base, one)) for one in found.worths]
    tasks += [
        (f"flatness of {h.name}", partial(flat_number, base, h, band, today)) for h in handles(base.programme)
    ]
    tasks += [("pairs of limits", task) for task in pair_tasks(base, found.worths)]
    tasks.append(("one step further away", partial(step_away_cost, base)))
    results = done(job, base.cost, tasks)
    flat = tuple(of(FlatNumber, results))
    names, left_costs = ((), 0.0) if job.stop.is_set() else left_alone(base, flat, band, today)
    return replace(
        found,
        worths=reaching(found.worths, tasks, results),
        pairs=tuple(of(Pair, results)),
        flatness=Flatness(band, flat, names, left_costs),
        moves=next(iter(of(Moves, results)), None),
        step_away_cost=next(iter(of(float, results)), None),
    )


def of(kind: type[Result], results: Sequence[object]) -> list[Result]:
    """The results of one kind, in their order."""
    return [result for result in results if isinstance(result, kind)]


def reaching(worths: Sequence[Worth], tasks: Sequence[Task], results: Sequence[object]) -> tuple[Worth, ...]:
    """The worths with their reaches, whose tasks stand in the same order."""
    ends = [result for (text, _), result in zip(tasks, results, strict=True) if text.startswith("reach of ")]
    return tuple(
        replace(one, reach=end if isinstance(end, Reach) else None)
        for one, end in zip(worths, ends, strict=True)
    )
