"""`check`: what was understood of a case."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from reactorstage.commands.console import say
from reactorstage.commands.options import case_file, json_option, set_option, units_option
from reactorstage.commands.verbs import Verb

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.train.understanding import Understanding


@click.command(cls=Verb, example='reactorstage check plant.yaml --set "bed 4.catalyst=4.6 t"')
@case_file
@set_option
@units_option
@json_option
def check(case_file: Path, overrides: tuple[str, ...], as_json: bool, units: str) -> None:
    """Print what was understood of CASE, then warnings; nothing is calculated and nothing written.

    Ends with 3 when the case is wrong, after naming every mistake with its place.
    """
    from reactorstage import face
    from reactorstage.case import load
    from reactorstage.commands.layout import screen_width
    from reactorstage.report.display import in_units, told
    from reactorstage.report.result_json import as_text
    from reactorstage.report.understood import understood_json
    from reactorstage.report.unit_sets import TRADE

    case = load(case_file, overrides)
    with in_units(TRADE if as_json else units):
        seen = face.compile(case).understanding(told)
        if as_json:
            say(as_text(understood_json(case, seen, overrides)).rstrip("\n"))
        else:
            say("\n".join(check_lines(case, seen, screen_width())))


def check_lines(case: Case, seen: Understanding, width: int) -> list[str]:
    """The screen of `check`."""
    from reactorstage.commands.layout import paragraph, spread, table_lines
    from reactorstage.report.display import counted
    from reactorstage.report.understood import order_sentence, summary, understood_tables

    status = (
        f"understood, {counted(len(seen.warnings), 'warning')}"
        if seen.warnings
        else "understood, no warnings"
    )
    blocks = [line for table in understood_tables(seen) for line in ["", *table_lines(table, width)]]
    said = [line for text in [order_sentence(seen)] if text for line in ["", *paragraph(text, width)]]
    warned = [line for text in seen.warnings for line in paragraph(f"warning: {text}", width)]
    head = [*spread([case.name, status], width), *paragraph(summary(case, seen), width)]
    return [*head, *blocks, *said, *([""] if warned else []), *warned]
