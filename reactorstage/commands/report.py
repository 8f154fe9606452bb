"""`report`: one HTML file for the review of a change."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click

from reactorstage.commands.optimise import jobs_option, seed_option, starts_option
from reactorstage.commands.options import (
    case_file,
    folder_of,
    out_option,
    quiet_option,
    set_option,
    units_option,
)
from reactorstage.commands.verbs import Verb, status_of

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.commands.console import ProgressLine
    from reactorstage.face import Optimisation
    from reactorstage.report.page.subject import Reference, Subject

NAME = "report.html"


@click.command(cls=Verb, example="reactorstage report plant.yaml --against last-year.yaml --units gauge")
@case_file
@set_option
@click.option("--as-set", is_flag=True, help="Report the setting that stands in the case; do not optimise.")
@click.option(
    "--against",
    metavar="CASE",
    type=click.Path(path_type=Path),
    help="A reference case; the report says what differs from it. It is treated like CASE.",
)
@units_option
@out_option
@starts_option
@seed_option
@jobs_option
@quiet_option
def report(
    case_file: Path,
    overrides: tuple[str, ...],
    as_set: bool,
    against: Path | None,
    units: str,
    folder: Path | None,
    starts: int,
    seed: int,
    jobs: int | None,
    quiet: bool,
) -> int:
    """Write a report on CASE as one HTML file that needs nothing else: open, print and archive it.

    The best setting is found first, as by `optimise`. Ends with the exit statuses of `optimise`, with
    --as-set with those of `rate`.
    """
    from reactorstage.case import load
    from reactorstage.commands.console import progress_line, say, tell, tell_of_compilation
    from reactorstage.report.files import write_all
    from reactorstage.report.page.render import page_html

    place = folder_of(case_file, folder)
    case = load(case_file, overrides)
    other = load(against) if against is not None else None
    tell_of_compilation(case, quiet)
    work = Work(as_set, starts, seed, jobs, progress_line(case, quiet, units))
    subject = work.subject(case, other, overrides)
    paths = write_all(place, {NAME: page_html(subject, units)})
    say("\n".join(summary_lines(subject, units)))
    if not quiet:
        tell(f"written: {paths[0]}")
    return status_of(subject.status)


class Work:
    """How the settings of a report are found."""

    def __init__(self, as_set: bool, starts: int, seed: int, jobs: int | None, progress: ProgressLine):
        self.as_set, self.starts, self.seed, self.jobs, self.progress = as_set, starts, seed, jobs, progress

    def subject(self, case: Case, other: Case | None, overrides: Sequence[str]) -> Subject:
        """What the report is about, with its reference where there is one."""
        from reactorstage import face
        from reactorstage.report.page.subject import of_optimum, of_rating

        try:
            reference = self.reference(other) if other is not None else None
            if self.as_set:
                programme = face.compile(case)
                return of_rating(programme, programme.rate(), reference, overrides)
            return of_optimum(self.optimum(case), reference, overrides)
        finally:
            self.progress.end()

    def reference(self, case: Case) -> Reference:
        """The reference case, rated or optimised like the case itself."""
        from reactorstage import face
        from reactorstage.report.page.subject import Reference

        if self.as_set:
            return Reference(case.name, face.rate(case))
        found = self.optimum(case, explain=False)
        return Reference(case.name, found.best if found.best is not None else found.today)

    def optimum(self, case: Case, explain: bool = True) -> Optimisation:
        """The optimum of a case with the options of the call."""
        from reactorstage import face

        return face.optimise(
            case, starts=self.starts, seed=self.seed, jobs=self.jobs, progress=self.progress, explain=explain
        )


def summary_lines(subject: Subject, units: str) -> list[str]:
    """The summary of the report for the terminal."""
    from reactorstage.commands.layout import paragraph, screen_width
    from reactorstage.report.display import in_units
    from reactorstage.report.page.sections.summary import summary_facts

    width = screen_width()
    with in_units(units):
        lines = [subject.now.case.name]
        for question, answers in summary_facts(subject):
            lines += [question, *(line for text in answers for line in paragraph(f"  {text}", width, 4))]
    return lines
