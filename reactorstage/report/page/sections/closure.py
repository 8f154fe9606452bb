"""Closure and the record of the solver: what a checker asks for."""

from __future__ import annotations

from reactorstage.report.display import brief, unit_set
from reactorstage.report.page.parts import Facts, Section
from reactorstage.report.page.subject import Subject
from reactorstage.report.result_json import versions
from reactorstage.train.result import Closed, Rating


def closure(subject: Subject) -> Section:
    """Balances, closures, work, versions and the hash of the case."""
    facts = (*balances(subject.now), *closures(subject.now.closed), *origin(subject))
    return Section("closure", "Closure and solver record", (Facts(facts),))


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


def closures(closed: Closed) -> list[Fact]:
    """How well exchangers and recycles agree with the rest of the train."""
    return [
        (f"Closure of {name}", (f"residual {brief(residual, 2)}, relative",))
        for name, residual in closed.residuals.items()
    ]


def origin(subject: Subject) -> list[Fact]:
    """Versions, hash, overrides, units."""
    case = subject.now.case
    return [
        ("Case", (case.name, f"SHA-256 of the case as resolved: {case.hash}")),
        ("Set for this run", subject.overrides or ("nothing",)),
        ("Units shown", (f"{unit_set().name}: {unit_set().words}",)),
        ("Versions", (", ".join(f"{name} {version}" for name, version in versions().items()),)),
    ]
