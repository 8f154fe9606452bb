"""How sure the answer is: starts, distinct answers in words, residual, curvature, discretisation."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from reactorstage.optimiser.programme import Array, Programme
from reactorstage.optimiser.result import Answer, Optimum
from reactorstage.optimiser.starts import allowed_range
from reactorstage.optimiser.words import loading, shares
from reactorstage.report.aim import MONEY, Aim
from reactorstage.report.display import counted, fixed, owners_text, with_unit
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Rating

COOL, HOT = 0.1, 0.5
SKIPPED = 0.01
UNLIT = " is practically unlit"
CORNER = "a corner: as many limits as numbers, no curvature is needed"


@dataclass(frozen=True)
class Certificate:
    """What speaks for the best answer, in numbers.

    reached of starts ended at it; residual is the scaled optimality residual; curvature the smallest second
    derivative along the limits at work (None at a corner), error what the discretisation does, both as
    differences of cost.
    """

    starts: int
    reached: int
    answers: int
    residual: float
    curvature: float | None
    error: float | None


def certificate(optimum: Optimum) -> Certificate:
    """The certificate of an optimum with at least one answer."""
    best = optimum.best
    return Certificate(
        starts=len(optimum.starts),
        reached=sum(start.answer == 0 for start in optimum.starts),
        answers=len(optimum.answers),
        residual=best.residual,
        curvature=best.curvature,
        error=optimum.discretisation_error,
    )


def certificate_text(found: Certificate, aim: Aim) -> str:
    """The certificate as one sentence."""
    share = f"{found.reached} of {counted(found.starts, 'start')} reached this answer"
    others = found.answers - 1
    rivals = f"{counted(others, 'other answer')} found" if others else "no other was found"
    error = (
        f"; solving the beds more finely moves it by {small(found.error, aim)}"
        if found.error is not None
        else ""
    )
    residual = f"optimality residual {found.residual:.0e}"
    return f"{share}, {rivals}; {residual}; {curvature_text(found.curvature, aim)}{error}."


def curvature_text(value: float | None, aim: Aim) -> str:
    """Whether the answer is a proper minimum along its limits, in words."""
    if value is None:
        return CORNER
    number = aim.number(abs(value))
    if float(number) == 0.0:
        return "in one direction along its limits the cost stays the same, to second order"
    size = with_unit(number, aim.unit)
    if value <= 0.0:
        return f"along its limits the cost does not rise (second derivative -{size} per range squared)"
    return f"along its limits the cost rises by at least {size} per range squared"


def small(cost: float | None, aim: Aim) -> str:
    """A difference of cost that is as a rule far below what is printed elsewhere."""
    size = aim.size(cost)
    return "-" if size is None else with_unit(f"{abs(size):.0e}" if size else "0", aim.unit)


def character(programme: Programme, x: Array, rating: Rating | None = None) -> str:
    """What an answer looks like: `front-loaded ethylene, inlet of bed 4 hot`."""
    words = [*loads(programme, x), *skips(programme, x), *inlets(programme, x)]
    if rating is not None:
        unlit = [note.partition(UNLIT)[0].lower() for note in rating.notes if UNLIT in note]
        words += [f"{owners_text(unlit)} unlit"] if unlit else []
    return ", ".join(words)


def loads(programme: Programme, x: Array) -> list[str]:
    """`front-loaded ethylene` for each split that leans."""
    found = []
    for group in programme.splits:
        entries = [programme.numbers[k] for k in group.indices]
        word = loading(shares(entries, group, x))
        found += (
            [f"{word} {group.feed}" if word != "evenly split" else f"{group.feed} evenly split"]
            if word
            else []
        )
    return found


def skips(programme: Programme, x: Array) -> list[str]:
    """`bed 2 gets no ethylene` for beds that a free split leaves out."""
    found = []
    for group in programme.splits:
        entries = [programme.numbers[k] for k in group.indices]
        beds = sorted([entry.bed for entry in entries] + ([group.rest_bed] if group.rest_bed else []))
        parts = shares(entries, group, x)
        none = [f"bed {bed}" for bed, part in zip(beds, parts, strict=True) if part < SKIPPED * group.total]
        found += [f"no {group.feed} to {owners_text(none)}"] if none else []
    return found


def inlets(programme: Programme, x: Array) -> list[str]:
    """`all inlets cool`, or which are cool and which are hot within what the limits allow."""
    places: dict[str, list[str]] = {"cool": [], "hot": []}
    count = 0
    for k, number in enumerate(programme.numbers):
        if number.role != "inlet temperature":
            continue
        count += 1
        low, high = allowed_range(number, tuple(programme.limits))
        part = (float(x[k]) - low) / max(high - low, 1e-300)
        for word, fits in (("cool", part <= COOL), ("hot", part >= HOT)):
            places[word] += [f"bed {number.bed}"] if fits else []
    for word, beds in places.items():
        if count > 1 and len(beds) == count:
            return [f"all inlets {word}"]
    return [
        f"inlet{'s' if len(beds) > 1 else ''} of {owners_text(beds)} {word}"
        for word, beds in places.items()
        if beds
    ]


def answers_table(programme: Programme, optimum: Optimum, rated: Sequence[Rating], aim: Aim) -> Table:
    """Every distinct answer: starts that reached it, what it costs more, its look, residual and curvature."""
    answers = optimum.answers
    more = [answer.cost - optimum.best.cost for answer in answers]
    looks = [
        character(programme, answer.x, rated[k] if k < len(rated) else None)
        for k, answer in enumerate(answers)
    ]
    dearer = ("costs", "more") if aim.kind == MONEY else ("worse", "by")
    return table(f"ANSWERS, {aim.heading}", [
        Column(("",), tuple(str(k + 1) for k in range(len(answers)))),
        Column(("starts",), tuple(str(answer.starts) for answer in answers)),
        Column(dearer, tuple(aim.number(value) for value in more)),
        Column(("in words",), tuple(looks), left=True),
        Column(("residual",), tuple(f"{answer.residual:.0e}" for answer in answers), rank=2),
        Column(("curvature",), tuple(_curvature(answer, aim) for answer in answers), rank=1),
    ])  # fmt: skip


def _curvature(answer: Answer, aim: Aim) -> str:
    return "corner" if answer.curvature is None else fixed(aim.size(answer.curvature), 0)
