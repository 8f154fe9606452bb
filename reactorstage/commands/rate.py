"""`rate`: solve the train as it is set now."""

from __future__ import annotations

import time
from pathlib import Path
from typing import Any

import click

from reactorstage.commands.options import case_file, output_of, output_options
from reactorstage.commands.verbs import Verb, status_of


@click.command(cls=Verb, example='reactorstage rate plant.yaml --set "bed 1.inlet temperature=390 degC"')
@case_file
@output_options
def rate(case_file: Path, overrides: tuple[str, ...], **options: Any) -> int:
    """Rate the train of CASE at its present setting: profiles, limits, money.

    Ends with 0 inside all limits, with 5 when limits are broken, with 4 when there is no answer.
    """
    from reactorstage import face
    from reactorstage.case import load
    from reactorstage.commands.console import tell_of_compilation
    from reactorstage.commands.deliver import Result, deliver
    from reactorstage.commands.screens import rating_lines
    from reactorstage.report.result_json import rating_json

    output = output_of(case_file, overrides=overrides, **options)
    case = load(case_file, overrides)
    tell_of_compilation(case, output.quiet)
    started = time.perf_counter()
    rating = face.rate(case)
    seconds = time.perf_counter() - started
    content = rating_json(rating, overrides)
    status = f"rating, {rating.status}"
    deliver(
        Result(content, lambda width: rating_lines(rating, seconds, width), seconds, status, rating), output
    )
    return status_of(rating.status)
