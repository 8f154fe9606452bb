"""Giving a result: lines or JSON on standard output, then files."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from reactorstage.commands.console import say, tell
from reactorstage.commands.options import Output

if TYPE_CHECKING:
    from reactorstage.optimiser.result import Optimum
    from reactorstage.train.influence import Influence
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
    optimum: Optimum | None = None
    influences: Sequence[Influence] = ()


def deliver(result: Result, output: Output) -> None:
    """Show the result, then write its files and say where they are."""
    from reactorstage.commands.layout import screen_width
    from reactorstage.report.display import in_units
    from reactorstage.report.result_json import as_text

    text = as_text(result.content, result.seconds)
    with in_units(output.units):
        say(text.rstrip("\n") if output.as_json else "\n".join(result.lines(screen_width())))
        if output.folder is not None:
            _write(result, text, output)


def _write(result: Result, text: str, output: Output) -> None:
    """Numbers first, pictures after them: an interruption then leaves whole files."""
    from reactorstage.report.files import write_all

    assert output.folder is not None
    paths = write_all(output.folder, {"result.json": text.encode(), **_profiles(result.drawn)})
    if output.figures and result.drawn is not None:
        from reactorstage.report.figures import figure_files

        paths += write_all(
            output.folder,
            figure_files(result.drawn, result.behind, result.status, result.optimum, result.influences),
        )
    if not output.quiet:
        tell(_written_text(output.folder, paths))


def _profiles(rating: Rating | None) -> dict[str, bytes]:
    if rating is None or not rating.profiles:
        return {}
    from reactorstage.report.profiles_csv import profiles_csv

    return {"profiles.csv": profiles_csv(rating)}


def _written_text(folder: Path, paths: Sequence[Path]) -> str:
    pictures = {path.stem for path in paths if path.suffix == ".png"}
    names = [path.name for path in paths if path.suffix == ".png" or path.stem not in pictures]
    also = " (pictures also as .svg, their numbers as .csv)" if pictures else ""
    return f"written to {folder}/: {', '.join(names)}{also}"
