"""`optimise`: the cheapest settings inside every limit."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from reactorstage.commands.options import Output, case_file, output_of, output_options
from reactorstage.commands.verbs import Verb, status_of

if TYPE_CHECKING:
    from reactorstage.face import Optimisation

EXAMPLE = "reactorstage optimise plant.yaml --starts 40 --out results"


starts_option = click.option(
    "--starts",
    metavar="N",
    type=click.IntRange(min=1),
    default=20,
    show_default=True,
    help="How many starting points are tried.",
)
seed_option = click.option(
    "--seed",
    metavar="N",
    type=click.IntRange(min=0),
    default=1,
    show_default=True,
    help="Seed of the random starting points.",
)
jobs_option = click.option(
    "--jobs",
    metavar="N",
    type=click.IntRange(min=1),
    help="Threads; by default one per processor. The result does not depend on it.",
)


@click.command(cls=Verb, example=EXAMPLE)
@case_file
@output_options
@starts_option
@seed_option
@jobs_option
@click.option("--explain", is_flag=True, help="Tables behind every line of the explanation as well.")
def optimise(
    case_file: Path,
    overrides: tuple[str, ...],
    starts: int,
    seed: int,
    jobs: int | None,
    explain: bool,
    **options: Any,
) -> int:
    """Find the cheapest setting of CASE inside all limits and say what each limit costs.

    Ends with 0 inside all limits, with 5 when they cannot all be met, with 4 when there is no answer, with
    130 when stopped by Ctrl-C (the best answer so far is then shown and written).
    """
    from reactorstage import face
    from reactorstage.case import load
    from reactorstage.commands.console import progress_line, tell_of_compilation

    output = output_of(case_file, overrides=overrides, **options)
    case = load(case_file, overrides)
    tell_of_compilation(case, output.quiet)
    progress = progress_line(case, output.quiet, output.units)
    try:
        outcome = face.optimise(case, starts=starts, seed=seed, jobs=jobs, progress=progress)
    finally:
        progress.end()
    _deliver(outcome, output, explain)
    return status_of(outcome.optimum.status)


def _deliver(outcome: Optimisation, output: Output, explain: bool) -> None:
    from reactorstage.commands.deliver import Result, deliver
    from reactorstage.commands.explained import explained_lines
    from reactorstage.commands.screens import optimum_lines
    from reactorstage.report.result_json import optimum_json

    content = optimum_json(
        outcome.programme,
        outcome.optimum,
        outcome.today,
        outcome.best,
        outcome.others,
        outcome.seed,
        output.overrides,
        outcome.influences,
    )
    status = f"best found, {outcome.optimum.status}"
    deliver(
        Result(
            content,
            lambda width: [
                *optimum_lines(outcome, width),
                *(explained_lines(outcome, width) if explain else []),
            ],
            outcome.seconds,
            status,
            outcome.best,
            outcome.today,
            outcome.optimum,
            outcome.influences,
        ),
        output,
    )


optimise_alias = Verb(
    "optimize",
    callback=optimise.callback,
    params=optimise.params,
    help=optimise.help,
    hidden=True,
    example=EXAMPLE.replace("optimise", "optimize"),
)
