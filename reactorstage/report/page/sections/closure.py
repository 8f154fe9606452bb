"""Closure and the record of the solver: what a checker asks for."""

from __future__ import annotations

from reactorstage.report.aim import aim_of
from reactorstage.report.display import brief, unit_set
from reactorstage.report.page.parts import Block, Facts, Folded, Grid, Section
from reactorstage.report.page.subject import Search, Subject
from reactorstage.report.result_json import versions
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Rating


def closure(subject: Subject) -> Section:
    """Balances, work, the search and its starts, versions and the hash of the case."""
    blocks: list[Block] = [Facts(tuple(balances(subject.now)))]
    if subject.search is not None:
        blocks.append(Facts(tuple(search_facts(subject, subject.search))))
        starts = Grid(starts_table(subject, subject.search), "How each start ended")
        blocks.append(Folded("How each start ended", (starts,)))
    blocks.append(Facts(tuple(origin(subject))))
    return Section("closure", "Closure and solver record", tuple(blocks))


Fact = tuple[str, tuple[str, ...]]


def balances(rating: Rating) -> list[Fact]:
    """Relative errors over the whole train."""
    if rating.failure:
        return [("Balances", (f"not closed: {rating.failure}",))]
    return [
        ("Atoms over the whole train", (f"closed to {brief(rating.atoms, 2)} of what enters",)),
        ("Energy over the whole train", (f"closed to {brief(rating.energy, 2)} of the heat turned over",)),
        (
            "Integration",
            (
                f"Radau IIA of order 5, {rating.integration_steps} steps, "
                f"{rating.right_hand_sides} evaluations of the rates",
            ),
        ),
    ]


def search_facts(subject: Subject, search: Search) -> list[Fact]:
    """How the answer was found and how exact it is."""
    optimum, aim = search.optimum, aim_of(subject.now)
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
    if optimum.answers:
        best = optimum.best
        facts.append(("Largest violation of a limit", (f"{brief(best.violation, 2)} of its scale",)))
        facts.append(("Optimality residual (Karush-Kuhn-Tucker)", (brief(best.residual, 2),)))
    if optimum.discretisation_error is not None:
        size = f"{brief(aim.size(optimum.discretisation_error), 2)} {aim.unit}".rstrip()
        facts.append(("Change of the aim from the tolerance of the search to the final one", (size,)))
    return facts


def starts_table(subject: Subject, search: Search) -> Table:
    """One row per start."""
    starts, aim = search.optimum.starts, aim_of(subject.now)
    return table("STARTS", [
        Column(("start",), tuple(start.name for start in starts), left=True),
        Column(("ended",), tuple(start.ended for start in starts), left=True),
        Column((f"aim, {aim.unit or 'its number'}",), tuple(brief(aim.value(s.cost), 6) for s in starts)),
        Column(("answer",), tuple(str(start.answer + 1) if start.answer >= 0 else "-" for start in starts)),
        Column(("iterations",), tuple(str(start.iterations) for start in starts)),
        Column(("evaluations",), tuple(str(start.evaluations) for start in starts)),
    ])  # fmt: skip


def origin(subject: Subject) -> list[Fact]:
    """Versions, hash, overrides, units."""
    case = subject.now.case
    return [
        ("Case", (case.name, f"SHA-256 of the case as resolved: {case.hash}")),
        ("Set for this run", subject.overrides or ("nothing",)),
        ("Units shown", (f"{unit_set().name}: {unit_set().words}",)),
        ("Versions", (", ".join(f"{name} {version}" for name, version in versions().items()),)),
    ]
