"""`compare`: two cases, two results, or a proposed setting against the best one."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from reactorstage.commands.console import say
from reactorstage.commands.options import json_option, quiet_option, set_option, units_option
from reactorstage.commands.verbs import Verb, status_of
from reactorstage.errors import CallError

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.commands.console import ProgressLine
    from reactorstage.face import Optimisation
    from reactorstage.report.comparison import Comparison

Result = TypeVar("Result")

PROPOSED, BEST = "the setting proposed", "the best one"


@dataclass(frozen=True)
class Asked:
    """The options of one call."""

    overrides: tuple[str, ...]
    best: bool
    as_json: bool
    quiet: bool
    units: str


@click.command(cls=Verb, example='reactorstage compare plant.yaml --set "bed 1.inlet temperature=370 degC"')
@click.argument("first", metavar="FIRST", type=click.Path(path_type=Path))
@click.argument("second", metavar="[SECOND]", required=False, type=click.Path(path_type=Path))
@set_option
@click.option("--best", is_flag=True, help="Take each case at its best setting, not as it is set.")
@units_option
@json_option
@quiet_option
def compare(
    first: Path,
    second: Path | None,
    overrides: tuple[str, ...],
    best: bool,
    units: str,
    as_json: bool,
    quiet: bool,
) -> int:
    """Compare SECOND with FIRST, or the setting of one case with its best: why is it worse, and what changed.

    FIRST and SECOND are case files or result.json files; a case is rated as it is set, with --best it is
    optimised. With FIRST alone, a case, its setting (as --set proposes it) stands against the best one found,
    with the moves from one to the other. --set belongs to every case named. Ends with 0; with FIRST alone
    with the statuses of `optimise`.
    """
    paths = [path for path in (first, second) if path is not None]
    results = [is_result(path) for path in paths]
    asked = Asked(overrides, best, as_json, quiet, units)
    if overrides and all(results):
        raise CallError("--set changes a case; a result file stays as it is")
    if best and second is None:
        raise CallError("one case alone is compared with its best setting anyway; --best is for two")
    if best and all(results):
        raise CallError("--best optimises a case; a result file stays as it is")
    if second is None:
        return _against_best(first, asked)
    _two(first, second, asked)
    return 0


def is_result(path: Path) -> bool:
    """Whether a path names a result file rather than a case."""
    return path.suffix.lower() == ".json"


def _two(first: Path, second: Path, asked: Asked) -> None:
    """Two files side by side."""
    from reactorstage.report.comparison import compared

    one, other = (_content(path, asked) for path in (first, second))
    names = one["case"]["name"], other["case"]["name"]
    if names[0] == names[1]:
        names = (str(first), str(second)) if first != second else ("the first", "the second")
    _show(compared(one, other, names), other["train"].get("by-products", []), asked)


def _content(path: Path, asked: Asked) -> Any:
    """What a file gives: a result as it is written, a case rated or optimised."""
    from reactorstage import face
    from reactorstage.case import load
    from reactorstage.commands.console import tell_of_compilation
    from reactorstage.report.comparing import content_of

    if is_result(path):
        return content_of(path)
    case = load(path, asked.overrides)
    tell_of_compilation(case, asked.quiet)
    if not asked.best:
        return content_of(face.rate(case))
    return _watched(
        case, asked, lambda progress: content_of(face.optimise(case, progress=progress, explain=False))
    )


def _watched(case: Case, asked: Asked, work: Callable[[ProgressLine], Result]) -> Result:
    """What some work gives, with a line of progress while it lasts."""
    from reactorstage.commands.console import progress_line

    progress = progress_line(case, asked.quiet, asked.units)
    try:
        return work(progress)
    finally:
        progress.end()


def _against_best(path: Path, asked: Asked) -> int:
    """The setting of a case against the best one found for it; the exit status of the search."""
    from reactorstage import face
    from reactorstage.case import load
    from reactorstage.commands.console import tell_of_compilation
    from reactorstage.report.comparing import compare as side_by_side

    if is_result(path):
        raise CallError(f"{path} is a result; name a second one to compare it with, or a case alone")
    case = load(path, asked.overrides)
    tell_of_compilation(case, asked.quiet)
    outcome = _watched(case, asked, lambda progress: face.optimise(case, progress=progress))
    found = side_by_side(outcome, outcome.today, (BEST, PROPOSED))
    _show(found, outcome.today.by_products, asked, outcome)
    return status_of(outcome.status)


def _show(
    found: Comparison, by_products: Sequence[str], asked: Asked, outcome: Optimisation | None = None
) -> None:
    """The comparison as a screen in the chosen units or as JSON, with the moves where there are some."""
    from reactorstage.commands.layout import screen_width
    from reactorstage.report.compared import comparison_json
    from reactorstage.report.comparison_units import in_shown_units
    from reactorstage.report.display import in_units
    from reactorstage.report.result_json import as_text

    if asked.as_json:
        say(as_text({**comparison_json(found), **_moves_json(outcome)}).rstrip("\n"))
        return
    width = screen_width()
    with in_units(asked.units):
        shown = in_shown_units(found)
        say("\n".join([*comparison_lines(shown, by_products, width), *_moves_lines(outcome, width)]))


def comparison_lines(found: Comparison, by_products: Sequence[str], width: int) -> list[str]:
    """The screen of `compare`: what is compared, the verdict, tables of what differs."""
    from reactorstage.commands.layout import paragraph, table_lines
    from reactorstage.report.cautions import SHORT
    from reactorstage.report.compared import comparison_tables, limits_sentences, verdict

    said = [f"first:  {found.names[0]}", f"second: {found.names[1]}", *found.notes]
    said += [verdict(found), " ".join(limits_sentences(found))]
    blocks = [
        line for table in comparison_tables(found, by_products) for line in ["", *table_lines(table, width)]
    ]
    return [
        *(line for text in said for line in paragraph(text, width)),
        *blocks,
        "",
        *paragraph(SHORT, width),
    ]


def _moves_lines(outcome: Optimisation | None, width: int) -> list[str]:
    """The moves from the proposed setting to the best one."""
    if outcome is None or outcome.optimum.moves is None or outcome.best is None:
        return []
    from reactorstage.commands.layout import paragraph, table_lines
    from reactorstage.report.aim import aim_of
    from reactorstage.report.moves import moves_table

    moves = outcome.optimum.moves
    if moves.note:
        return ["", *paragraph(f"MOVES        none: {moves.note}.", width)]
    made = moves_table(moves, outcome.programme.numbers, outcome.today, aim_of(outcome.best))
    return ["", *table_lines(made, width)] if made.rows else []


def _moves_json(outcome: Optimisation | None) -> dict[str, Any]:
    """The moves as in the result of `optimise`; nothing for two files."""
    if outcome is None or outcome.best is None or outcome.optimum.moves is None:
        return {}
    from reactorstage.report.aim import aim_of
    from reactorstage.report.explained_json import moves_json

    return {"moves": moves_json(outcome.programme, outcome.optimum.moves, aim_of(outcome.best))}
