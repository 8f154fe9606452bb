"""Options that several verbs share, and what follows from them."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

import click

from reactorstage.report.unit_sets import TRADE, UNIT_SETS

Function = TypeVar("Function", bound=Callable[..., Any])

FIGURES = Path("figures")


def _name_and_value(
    context: click.Context, option: click.Parameter, values: Sequence[str]
) -> tuple[str, ...]:
    for value in values:
        if "=" not in value.strip("="):
            raise click.BadParameter(
                f"'{value}' is not NAME=VALUE, such as \"bed 1.inlet temperature=390 degC\""
            )
    return tuple(values)


case_file = click.argument("case_file", metavar="CASE", type=click.Path(path_type=Path))
set_option = click.option(
    "--set",
    "overrides",
    metavar="NAME=VALUE",
    multiple=True,
    callback=_name_and_value,
    help="Another value for one number of the case, with its unit; may be given several times.",
)
json_option = click.option("--json", "as_json", is_flag=True, help="The result as JSON on standard output.")
quiet_option = click.option("--quiet", is_flag=True, help="No progress and no messages.")
out_option = click.option(
    "--out",
    "folder",
    metavar="FOLDER",
    type=click.Path(path_type=Path),
    help="Where files are written; by default figures/ and the name of the case file.",
)
units_option = click.option(
    "--units",
    metavar="SET",
    type=click.Choice(list(UNIT_SETS)),
    default=TRADE,
    show_default=True,
    help="Units of everything shown but JSON: "
    + "; ".join(f"{one.name} ({one.words})" for one in UNIT_SETS.values())
    + ".",
)
no_figures_option = click.option("--no-figures", is_flag=True, help="Write no pictures.")
no_files_option = click.option("--no-files", is_flag=True, help="Write nothing at all.")


def output_options(function: Function) -> Function:
    """--set, --out, --json, --quiet, --units, --no-figures and --no-files of verbs that write results."""
    files = (no_files_option, no_figures_option, quiet_option, json_option, out_option)
    for option in (*files, units_option, set_option):
        function = option(function)
    return function


@dataclass(frozen=True)
class Output:
    """Where a result goes and in which units: folder None writes no files."""

    folder: Path | None
    as_json: bool
    quiet: bool
    figures: bool
    overrides: tuple[str, ...]
    units: str = TRADE


def output_of(
    case_file: Path,
    folder: Path | None,
    as_json: bool,
    quiet: bool,
    no_figures: bool,
    no_files: bool,
    overrides: tuple[str, ...],
    units: str = TRADE,
) -> Output:
    """What the shared options ask for. Raises CallError when the folder cannot be one."""
    chosen = None if no_files else folder_of(case_file, folder)
    return Output(chosen, as_json, quiet, not no_figures, overrides, units)


def folder_of(case_file: Path, folder: Path | None) -> Path:
    """The folder asked for, else `figures/` and the name of the case file.

    Raises CallError when it cannot be a folder.
    """
    from reactorstage.report.files import check_folder

    chosen = folder or FIGURES / case_file.stem
    check_folder(chosen)
    return chosen
