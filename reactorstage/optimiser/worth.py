"""What each limit at work is worth, by re-solving with it moved by a real step either way."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from reactorstage.optimiser.programme import Array, LimitRow, Programme
from reactorstage.optimiser.resolve import Base, Resolved, resolve
from reactorstage.optimiser.result import Answer, Worth
from reactorstage.optimiser.scaling import needed
from reactorstage.optimiser.wrappers import Shifted

KNOWN_ANSWERS = 3


@dataclass(frozen=True)
class Move:
    """Limits that are moved together, each by its own step."""

    label: str
    owners: tuple[str, ...]
    limits: tuple[int, ...]
    step: float
    kind: str


def moves(limits: Sequence[LimitRow], at_work: Sequence[int]) -> list[Move]:
    """For each label and direction at work: all its owners at work together, then each alone."""
    groups: dict[tuple[str, str], list[int]] = {}
    for k in at_work:
        groups.setdefault((limits[k].label, limits[k].direction), []).append(k)
    found: list[Move] = []
    for rows in groups.values():
        found.append(move(limits, rows))
        if len(rows) > 1:
            found.extend(move(limits, [row]) for row in rows)
    return found


def asked_for(programme: Programme, answer: Answer) -> list[int]:
    """Limits at work whose worth means something.

    Left out are implied limits that move with numbers that keep books: they keep books too, nobody can relax
    them.
    """
    evaluation = programme.final(answer.x)
    if not evaluation.ok:
        return []
    internal = np.array([number.book for number in programme.numbers], dtype=bool)
    books = np.any(needed(evaluation.margin_dx)[:, internal] != 0.0, axis=1)
    return [k for k in answer.at_work if not (programme.limits[k].implied and books[k])]


def move(limits: Sequence[LimitRow], rows: Sequence[int]) -> Move:
    """The move of some rows of one label."""
    first = limits[rows[0]]
    return Move(first.label, tuple(limits[k].owner for k in rows), tuple(rows), first.step, first.kind)


def shifts(limits: Sequence[LimitRow], rows: Sequence[int], sign: float) -> Array:
    """(M,) own-unit shifts: sign times the step for the rows, zero for the others."""
    moved = np.zeros(len(limits))
    moved[list(rows)] = [sign * limits[k].step for k in rows]
    return moved


def worth(base: Base, moved: Move) -> tuple[Worth, Array | None]:
    """Saving and cost of one move.

    Also the x of the tightened programme where it costs less than the best answer: the search then has
    missed something.
    """
    points = base.known[:KNOWN_ANSWERS]
    limits = base.programme.limits
    relaxed = resolve(Shifted(base.programme, shifts(limits, moved.limits, 1.0)), points, base)
    tightened = resolve(Shifted(base.programme, shifts(limits, moved.limits, -1.0)), points, base)
    saves, relax_note = gain(base.cost - relaxed.cost, relaxed, base, "relaxing")
    costs, tighten_note = gain(tightened.cost - base.cost, tightened, base, "tightening")
    note = "; ".join(text for text in (relax_note, tighten_note) if text)
    better = tightened.x is not None and tightened.cost < base.cost - base.noise
    found = Worth(moved.label, moved.owners, moved.limits, moved.step, moved.kind, saves, costs, note)
    return found, tightened.x if better else None


def gain(difference: float, resolved: Resolved, base: Base, what: str) -> tuple[float | None, str]:
    """A difference of cost that cannot be negative, None with a reason where it is not known."""
    if resolved.x is None:
        if resolved.nearest is not None:
            return None, f"{what} by the step leaves nothing inside all limits"
        return None, f"the re-solve for {what} did not end"
    if difference < -base.noise:
        return None, f"the re-solve for {what} ended at a worse answer"
    return (difference if difference > base.noise else 0.0), ""


def keep_away_cost(base: Base) -> float | None:
    """Money per second that the keep-away amounts cost together; None when there are none, or unknown."""
    amounts = np.array([limit.keep_away for limit in base.programme.limits], dtype=float)
    if not np.any(amounts > 0.0):
        return None
    freed = resolve(Shifted(base.programme, amounts), base.known[:KNOWN_ANSWERS], base)
    return gain(base.cost - freed.cost, freed, base, "leaving out keep away")[0]


def step_away_cost(base: Base) -> float | None:
    """Money per second that it costs to keep a step further away from every hard limit of the case.

    None when that leaves nothing inside all limits, or did not end.
    """
    limits = base.programme.limits
    amounts = np.array([0.0 if one.implied or one.soft_price is not None else -one.step for one in limits])
    kept = resolve(Shifted(base.programme, amounts), base.known[:KNOWN_ANSWERS], base)
    return gain(kept.cost - base.cost, kept, base, "keeping away")[0]
