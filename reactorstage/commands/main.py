"""The group of all verbs."""

from __future__ import annotations

import click

from reactorstage import __version__
from reactorstage.commands import check, compare, new, optimise, rate, report, schema
from reactorstage.commands.verbs import Group


@click.group(
    cls=Group,
    example="reactorstage optimise cases/selkemouth-ethylation.yaml",
    context_settings={"help_option_names": ["-h", "--help"]},
)
@click.version_option(__version__, message="reactorstage %(version)s")
def main() -> None:
    """Rates a train of adiabatic catalyst beds and finds its cheapest settings inside every limit.

    A case file in YAML says what flows, what reacts, where, inside which limits and for what money.
    `reactorstage new` writes one to start from.
    """


for verb in (
    check.check,
    rate.rate,
    optimise.optimise,
    report.report,
    compare.compare,
    schema.schema,
    new.new,
):
    main.add_command(verb)
main.add_command(optimise.optimise_alias)
