"""How sure the answer is: what speaks for it, other answers, how every start ended."""

from __future__ import annotations

from reactorstage.optimiser.programme import Programme
from reactorstage.optimiser.result import CANNOT, Optimum
from reactorstage.report.aim import Aim, aim_of
from reactorstage.report.certificate import answers_table, certificate, curvature_text, small
from reactorstage.report.changes import spoken
from reactorstage.report.display import brief, counted, fixed, readable, shown, unit
from reactorstage.report.page.parts import Block, Facts, Folded, Grid, Section
from reactorstage.report.page.subject import Search, Subject
from reactorstage.report.table import Column, Table, table

Fact = tuple[str, tuple[str, ...]]

NOTE = (
    "Answers are local ends of a gradient search from many starts; no proof is given that none is better. "
    "Residual: what is left of the optimality conditions, scaled. Curvature: the least second derivative "
    "along the limits at work, for one search range squared; a corner, held by as many limits as there are "
    "numbers, needs none."
)


def certified(subject: Subject) -> Section | None:
    """Nothing for a rating."""
    search = subject.search
    if search is None:
        return None
    aim, optimum = aim_of(subject.now), search.optimum
    blocks: list[Block] = [Facts(tuple(search_facts(search, aim)))]
    if optimum.answers and optimum.status != CANNOT:
        rated = (subject.now, *search.others)
        caption = f"{counted(len(optimum.answers), 'distinct answer')}, best first, {aim.heading}"
        blocks.append(Grid(answers_table(search.programme, optimum, rated, aim), caption, NOTE))
        blocks.append(Grid(settings_table(search.programme, optimum, aim), "Settings of every answer"))
    if optimum.starts:
        starts = Grid(starts_table(search, aim), "How each start ended")
        blocks.append(Folded("How each start ended", (starts,)))
    return Section("certificate", "How sure the answer is", tuple(blocks))


def search_facts(search: Search, aim: Aim) -> list[Fact]:
    """How the answer was found and what speaks for it, in numbers."""
    optimum = search.optimum
    ended = sum(start.answer >= 0 for start in optimum.starts)
    facts: list[Fact] = [
        (
            "Search",
            (
                f"{ended} of {len(optimum.starts)} starts ended at an answer, seed {search.seed}, "
                f"{optimum.evaluations} evaluations with exact derivatives",
            ),
        )
    ]
    if not optimum.answers:
        return facts
    found = certificate(optimum)
    facts.append(("Largest violation of a limit", (f"{brief(optimum.best.violation, 2)} of its scale",)))
    if optimum.status == CANNOT:
        return facts
    reached = f"{found.reached} of {counted(found.starts, 'start')}"
    curved = curvature_text(found.curvature, aim)
    facts.append(("Reached this answer", (reached,)))
    facts.append(("Optimality residual (Karush-Kuhn-Tucker)", (brief(found.residual, 2),)))
    facts.append(("Curvature", (curved[:1].upper() + curved[1:],)))
    if found.error is not None:
        facts.append(("Solving the beds more finely moves the aim by", (small(found.error, aim),)))
    return facts


def settings_table(programme: Programme, optimum: Optimum, aim: Aim) -> Table:
    """Free numbers of each answer and its aim."""
    user = [(k, number) for k, number in enumerate(programme.numbers) if not number.internal]
    last = f"aim, {aim.unit or 'its number'}"
    columns = [Column(("",), (*(spoken(number.name) for _, number in user), last), left=True)]
    for n, answer in enumerate(optimum.answers, 1):
        values = [_number(shown(float(answer.x[k]), number.kind)) for k, number in user]
        value = aim.value(answer.cost)
        aimed = fixed(value, 1) if aim.kind == "money rate" else readable(value)
        columns.append(Column((f"answer {n}",), (*values, aimed)))
    columns.append(Column(("",), (*(unit(number.kind) for _, number in user), ""), left=True))
    return table("SETTINGS OF EVERY ANSWER", columns)


def _number(value: float | None) -> str:
    return brief(None if value is None else round(value, 3), 4)


def starts_table(search: Search, aim: Aim) -> Table:
    """One row per start."""
    starts = search.optimum.starts
    return table("STARTS", [
        Column(("start",), tuple(start.name for start in starts), left=True),
        Column(("ended",), tuple(start.ended for start in starts), left=True),
        Column((f"aim, {aim.unit or 'its number'}",), tuple(brief(aim.value(s.cost), 6) for s in starts)),
        Column(("answer",), tuple(str(start.answer + 1) if start.answer >= 0 else "-" for start in starts)),
        Column(("iterations",), tuple(str(start.iterations) for start in starts)),
        Column(("evaluations",), tuple(str(start.evaluations) for start in starts)),
    ])  # fmt: skip
