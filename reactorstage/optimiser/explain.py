"""What the best answer is explained with: worths, equal splits, the cost of keeping away."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial

from reactorstage.optimiser.job import Job
from reactorstage.optimiser.merge import merged
from reactorstage.optimiser.polish import polished
from reactorstage.optimiser.pool import run
from reactorstage.optimiser.programme import Array
from reactorstage.optimiser.resolve import INSIDE_ENOUGH, Base
from reactorstage.optimiser.result import Answer, EqualSplit, Optimum, Worth
from reactorstage.optimiser.split import equal_split
from reactorstage.optimiser.worth import asked_for, keep_away_cost, moves, worth


@dataclass(frozen=True)
class Explanation:
    """Worths, equal splits and keep-away cost; better holds x that cost less than the best answer."""

    worths: tuple[Worth, ...] = ()
    equal_splits: tuple[EqualSplit, ...] = ()
    keep_away_cost: float | None = None
    better: tuple[Array, ...] = ()


def explained(job: Job, found: Optimum, today: Array) -> Optimum:
    """The optimum with its explanation; a better answer met on the way is taken up first, once.

    today is the x of today's setting.
    """
    told = explanation(job, found.answers, today)
    better = better_answers(job, told)
    if better and not job.stop.is_set():
        found = taken_up(job, found, better)
        told = explanation(job, found.answers, today)
    return replace(
        found, worths=told.worths, equal_splits=told.equal_splits, keep_away_cost=told.keep_away_cost
    )


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


def explanation(job: Job, answers: Sequence[Answer], today: Array) -> Explanation:
    """Worths of the limits at work, equal splits and keep-away cost of the best answer, in threads."""
    known = tuple(answer.x for answer in answers)
    base = Base(job.programme, known, answers[0].cost, job.size, job.stop)
    moved = moves(job.programme.limits, asked_for(job.programme, answers[0]))
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

    return sorted_out(run(tasks, job.jobs, job.stop, finished), base)


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
