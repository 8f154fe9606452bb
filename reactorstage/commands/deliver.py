"""Giving a result: lines or JSON on standard output, then files."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from reactorstage.commands.console import say, tell
from reactorstage.commands.options import Output

if TYPE_CHECKING:
    from reactorstage.train.result import Rating


@dataclass(frozen=True)
class Result:
    """What a verb found: JSON content, terminal lines for a width, and the settings to draw."""

    content: Mapping[str, Any]
    lines: Callable[[int], Sequence[str]]
    seconds: float
    status: str
    drawn: Rating | None
    behind: Rating | None = None


def deliver(result: Result, output: Output) -> None:
    """Show the result, then write its files and say where they are."""
    from reactorstage.commands.layout import screen_width
    from reactorstage.report.result_json import as_text

    text = as_text(result.content, result.seconds)
    say(text.rstrip("\n") if output.as_json else "\n".join(result.lines(screen_width())))
    if output.folder is not None:
        _write(result, text, output)


def _write(result: Result, text: str, output: Output) -> None:
    from reactorstage.report.files import write_all

    assert output.folder is not None
    paths = write_all(output.folder, {"result.json": text.encode(), **_drawn_files(result, output.figures)})
    if not output.quiet:
        tell(
            f"written to {output.folder}/: {', '.join(path.name for path in paths if path.suffix != '.svg')}"
            f"{' (and .svg)' if any(path.suffix == '.svg' for path in paths) else ''}"
        )


def _drawn_files(result: Result, figures: bool) -> dict[str, bytes]:
    if result.drawn is None or not result.drawn.profiles:
        return {}
    from reactorstage.report.profiles_csv import profiles_csv

    files = {"profiles.csv": profiles_csv(result.drawn)}
    if figures:
        from reactorstage.report.figures import figure_files

        files |= figure_files(result.drawn, result.behind, result.status)
    return files
