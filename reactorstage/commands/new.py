"""`new`: a case to start from."""

from __future__ import annotations

from pathlib import Path

import click

from reactorstage.commands.console import tell
from reactorstage.commands.options import quiet_option
from reactorstage.commands.verbs import Verb
from reactorstage.errors import CallError


@click.command(cls=Verb, example="reactorstage new plant.yaml")
@click.argument("file", metavar="FILE", type=click.Path(path_type=Path))
@quiet_option
def new(file: Path, quiet: bool) -> None:
    """Write a small commented case to FILE; a file that exists is left alone."""
    from reactorstage.case import starter_case
    from reactorstage.report.files import check_folder, write_all

    if file.exists():
        raise CallError(f"{file} exists already; choose another name")
    check_folder(file.parent)
    write_all(file.parent, {file.name: starter_case().encode()})
    if not quiet:
        tell(f"written: {file}; next: reactorstage check {file}")
