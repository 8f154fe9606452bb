"""How flat the answer is: equal division, other answers, curvature, the orders of the reactions."""

from __future__ import annotations

from reactorstage.optimiser.programme import Programme
from reactorstage.optimiser.result import Answer, Optimum
from reactorstage.report import sentences
from reactorstage.report.aim import Aim, aim_of
from reactorstage.report.display import brief, counted, fixed, readable, shown, unit
from reactorstage.report.page.parts import Block, Grid, Listing, Section
from reactorstage.report.page.subject import Subject
from reactorstage.report.table import Column, Table, table
from reactorstage.report.understood import order_sentence


def flatness(subject: Subject) -> Section | None:
    """Nothing for a rating."""
    search = subject.search
    if search is None or not search.optimum.answers:
        return None
    optimum, aim = search.optimum, aim_of(subject.now)
    splits = [
        sentences.equal_split_text(split, subject.now).replace("EQUAL SPLIT  of", "An equal split of")
        for split in optimum.equal_splits
    ]
    texts = [*splits, order_sentence(subject.seen), curvature_text(optimum.best, aim)]
    texts += [
        f"At an end of its search range, where no limit holds it: {name}; widen the range."
        for name in optimum.best.at_range
    ]
    blocks: list[Block] = [Listing(tuple(text for text in texts if text))]
    caption = f"{counted(len(optimum.answers), 'distinct answer')} found, best first"
    blocks.append(Grid(answers_table(search.programme, optimum, aim), caption, NOTE))
    return Section("flatness", "How flat the answer is", tuple(blocks))


STEP = 0.1
NOTE = "Answers are local ends of a gradient search from many starts; no proof is given that none is better."


def curvature_text(best: Answer, aim: Aim) -> str:
    """The smallest curvature along the limits in words; a corner has none."""
    if best.curvature is None:
        return (
            "The answer is a corner: limits and ends of ranges hold every number, so there is no curvature."
        )
    size = f"{aim.number(0.5 * STEP**2 * best.curvature)} {aim.unit}".rstrip()
    return (
        "In the flattest direction that the limits leave open, moving by a tenth of a search range costs "
        f"{size} (from the curvature there)."
    )


def answers_table(programme: Programme, optimum: Optimum, aim: Aim) -> Table:
    """Free numbers of each answer, its aim and how many starts reached it."""
    answers = optimum.answers
    user = [(k, number) for k, number in enumerate(programme.numbers) if not number.internal]
    names = tuple(number.name for _, number in user)
    base = answers[0].cost
    heads = tuple(f"answer {n}" for n in range(1, len(answers) + 1))
    columns = [
        Column(
            ("",),
            (*names, f"aim, {aim.unit or 'its number'}", "against the best", "starts that ended there"),
            left=True,
        )
    ]
    for head, answer in zip(heads, answers, strict=True):
        values = [_number(shown(float(answer.x[k]), number.kind)) for k, number in user]
        aimed = (
            fixed(aim.value(answer.cost), 1) if aim.kind == "money rate" else readable(aim.value(answer.cost))
        )
        columns.append(Column((head,), (*values, aimed, aim.number(answer.cost - base), str(answer.starts))))
    columns.append(Column(("unit",), (*(unit(number.kind) for _, number in user), "", "", ""), left=True))
    return table("ANSWERS", columns)


def _number(value: float | None) -> str:
    return brief(None if value is None else round(value, 3), 4)
