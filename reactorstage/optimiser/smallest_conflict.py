"""A smallest set of limits that cannot be met together, and what one limit alone would have to give.

Deletion filter (Chinneck and Dravnieks 1991, from memory): limits are left out one after another as long as
the others still cannot be met. "Cannot be met" is the verdict of local searches from many starts, no proof.
What the tool adds by itself (a cooler may not heat) and the search ranges always hold.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, replace
from functools import partial

import numpy as np

from reactorstage.optimiser.elastic import elastic_at
from reactorstage.optimiser.job import Job
from reactorstage.optimiser.pool import run
from reactorstage.optimiser.programme import (
    Array,
    Evaluation,
    FreeNumber,
    LimitRow,
    Programme,
)
from reactorstage.optimiser.reasons import ConflictSet, Suffices
from reactorstage.optimiser.resolve import INSIDE_ENOUGH
from reactorstage.optimiser.result import Conflict
from reactorstage.optimiser.scaling import needed
from reactorstage.optimiser.solve import descend
from reactorstage.optimiser.starts import starts
from reactorstage.optimiser.wrappers import Shifted, Wrapped

FAR = 1e3
TRIED = 10
MOST_STEPS = 1e3
NEAREST = 3


@dataclass
class Prober:
    """Tells whether a set of limits can be met, remembering every setting met on the way."""

    job: Job
    points: list[Array]
    seen: list[tuple[Array, Array]] = field(default_factory=list)

    @property
    def programme(self) -> Programme:
        return self.job.programme

    def meets(self, members: Iterable[int]) -> Array | None:
        """An x that meets the members (and what always holds); None when no start finds one."""
        wanted = sorted({*members, *fixed_rows(self.programme.limits)})
        for x, margin in self.seen:
            if np.all(margin[wanted] >= -INSIDE_ENOUGH):
                return x
        freed = without_others(self.programme, wanted)
        nearest = [x for x, _ in sorted(self.seen, key=lambda pair: _short(pair[1][wanted]))[:NEAREST]]
        tasks = [partial(self._try, freed, x) for x in (*nearest, *self.points)]
        for first in range(0, len(tasks), 2):
            for end in run(tasks[first : first + 2], self.job.jobs, self.job.stop):
                found = None if end is None else self.note(end)
                if end is not None and found is not None and np.all(found[wanted] >= -INSIDE_ENOUGH):
                    return end
        return None

    def _try(self, freed: Programme, x: Array) -> Array | None:
        evaluation, _ = freed.start_mesh(x)
        if not evaluation.ok:
            return None
        elastic, start = elastic_at(freed, evaluation, x)
        found = descend(elastic, start, 1.0, stop=self.job.stop)
        return None if found.x is None else np.asarray(found.x[: elastic.count])

    def note(self, x: Array) -> Array | None:
        """(M,) margins at x, at the final tolerance and in scales; remembered."""
        there = self.programme.final(x)
        if not there.ok:
            return None
        scales = np.array([limit.scale for limit in self.programme.limits])
        sizes = np.maximum(np.abs(needed(there.weight)) * scales, 1e-300)
        margin: Array = needed(there.margin) / sizes
        self.seen.append((x, margin))
        return margin


def _short(margin: Array) -> float:
    return float(np.maximum(-margin, 0.0).sum())


def fixed_rows(limits: Sequence[LimitRow]) -> set[int]:
    """Limits that nobody can give up (the tool adds them), and soft ones, which never stand in the way."""
    return {k for k, limit in enumerate(limits) if limit.implied or limit.soft_price is not None}


def without_others(programme: Programme, members: Sequence[int]) -> Shifted:
    """The programme with every limit but the members relaxed so far that it holds nothing."""
    amounts = np.array([FAR * limit.scale for limit in programme.limits])
    amounts[list(members)] = 0.0
    return Shifted(programme, amounts)


def smallest_conflict(job: Job, x: Array, conflict: Conflict, seed: int) -> ConflictSet | None:
    """A set of limits that cannot all be met, found from a least-violating x, none of which can be spared.

    None when the user stops, or when a setting inside everything is met on the way.
    """
    points = [x, *(job.programme.begin(start.x) for start in starts(job.programme, TRIED, seed))]
    prober = Prober(job, points)
    prober.note(x)
    limits = job.programme.limits
    fixed = fixed_rows(limits)
    named = [k for k, _ in conflict.broken] + list(conflict.against)
    members = sorted(set(named) - fixed)
    if prober.meets(members) is not None:
        members = [k for k in range(len(limits)) if k not in fixed]
        if prober.meets(members) is not None:
            return None
    without: dict[int, Array] = {}
    for k in list(members):
        job.progress(0, 1, None, f"conflict: without {limits[k].name}")
        found = prober.meets([one for one in members if one != k])
        if job.stop.is_set():
            return None
        if found is None:
            members.remove(k)
        else:
            without[k] = found
    spared = tuple(without[k] for k in members)
    return ConflictSet(tuple(members), spared, len(points), sufficient(prober, members, spared))


def sufficient(prober: Prober, members: Sequence[int], without: Sequence[Array]) -> tuple[Suffices, ...]:
    """What each member of the set, and each label of them in all its places, would have to give alone."""
    limits = prober.programme.limits
    groups: list[tuple[int, ...]] = [(k,) for k in members]
    for k in members:
        every = tuple(
            i
            for i, limit in enumerate(limits)
            if (limit.label, limit.direction) == (limits[k].label, limits[k].direction)
            and limit.soft_price is None
        )
        if len(every) > 1 and every not in groups:
            groups.append(every)
    tasks = [partial(_suffices, prober, rows, _starts_for(prober, rows, members, without)) for rows in groups]
    return tuple(found for found in run(tasks, prober.job.jobs, prober.job.stop) if found is not None)


def _starts_for(
    prober: Prober, rows: Sequence[int], members: Sequence[int], without: Sequence[Array]
) -> list[Array]:
    """Where to look first: settings that break least but for these rows."""
    spared = [x for k, x in zip(members, without, strict=True) if k in rows]
    others = [k for k in range(len(prober.programme.limits)) if k not in rows]
    nearest = sorted(prober.seen, key=lambda pair: _short(pair[1][others]))[:NEAREST]
    return [*spared, *(x for x, _ in nearest), *prober.points[:NEAREST]]


def _suffices(prober: Prober, rows: tuple[int, ...], points: Sequence[Array]) -> Suffices:
    """The least relaxation of these rows, the same in their own unit, at which everything is met."""
    loosened = Loosened(prober.programme, rows)
    best = Suffices(rows, None)
    for x in points:
        there = prober.programme.final(x)
        if not there.ok:
            continue
        own = -needed(there.margin) / np.maximum(np.abs(needed(there.weight)), 1e-300)
        start = max(float(np.max(own[list(rows)], initial=0.0)) / loosened.step, 0.0)
        found = descend(loosened, np.append(x, min(start, MOST_STEPS)), stop=prober.job.stop)
        if found.x is None or not found.feasible:
            continue
        amount = float(found.x[-1]) * loosened.step
        if amount > 0.0 and (best.amount is None or amount < best.amount):
            best = replace(best, amount=amount, x=found.x[:-1])
    return best


@dataclass(frozen=True)
class Loosened(Wrapped):
    """A programme with some limits relaxed by one further number, in their step, which is its cost."""

    rows: tuple[int, ...]

    @property
    def step(self) -> float:
        return max(self.programme.limits[k].step for k in self.rows)

    @property
    def numbers(self) -> tuple[FreeNumber, ...]:
        return (*self.programme.numbers, FreeNumber("relaxation", 0.0, 0.0, np.inf, "number"))

    def changed(self, evaluation: Evaluation, x: Array) -> Evaluation:
        rows = np.zeros(len(self.limits))
        rows[list(self.rows)] = self.step
        weight, weight_dx = needed(evaluation.weight), needed(evaluation.weight_dx)
        give = float(x[-1])
        by_x = needed(evaluation.margin_dx) + give * rows[:, None] * weight_dx
        by_give = (rows * weight)[:, None]
        residual_dx = needed(evaluation.residual_dx)
        return replace(
            evaluation,
            cost=give,
            cost_dx=np.append(np.zeros(x.size - 1), 1.0),
            margin=needed(evaluation.margin) + give * rows * weight,
            margin_dx=np.hstack([by_x, by_give]),
            weight_dx=np.hstack([weight_dx, np.zeros((len(self.limits), 1))]),
            residual_dx=np.hstack([residual_dx, np.zeros((residual_dx.shape[0], 1))]),
        )
