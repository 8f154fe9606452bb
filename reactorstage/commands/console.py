"""Standard output for results, standard error for talk; colour and progress on a terminal only."""

from __future__ import annotations

import os
import re
import sys
import time
from collections.abc import Callable
from typing import TYPE_CHECKING, TextIO

import click

if TYPE_CHECKING:
    from reactorstage.case.model import Case

BOLD_HEADS = re.compile(r"^([A-Z][A-Z ]{3,}[A-Z])(?= |$)")
GOOD = re.compile(r"\bINSIDE ALL LIMITS\b")
BAD = re.compile(r"\b(\d+ LIMITS? BROKEN|BROKEN !|CANNOT MEET ALL LIMITS|NO ANSWER|unpriced \(!\))")
REDRAW_SECONDS = 0.1


def say(text: str) -> None:
    """Result text; a reader that goes away early (as `head` does) is no error."""
    _write(painted(text) if coloured(sys.stdout) else text, sys.stdout)


def tell(text: str) -> None:
    """A message to the person who called."""
    _write(text, sys.stderr)


def _write(text: str, stream: TextIO) -> None:
    try:
        click.echo(text, file=stream)
        stream.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), stream.fileno())


def tell_of_compilation(case: Case, quiet: bool) -> None:
    """Say that the first use takes longer, unless an earlier process left the bed model's machine code."""
    from reactorstage.bed.compiled import cache_folder, is_compiled
    from reactorstage.case.written_fluid import IDEAL_GAS

    if quiet or is_compiled(ideal=case.fluid.density == IDEAL_GAS):
        return
    kept = f"kept in {cache_folder()}" if cache_folder() else "no folder for it can be written"
    tell(f"compiling the bed model, once, about twenty seconds ({kept})")


def coloured(stream: object) -> bool:
    """Colour only on a terminal and only when NO_COLOR is not set."""
    return not os.environ.get("NO_COLOR") and bool(getattr(stream, "isatty", lambda: False)())


def painted(text: str) -> str:
    """The same words with the status words and table titles in colour."""
    return "\n".join(_painted_line(line) for line in text.split("\n"))


def _painted_line(line: str) -> str:
    line = GOOD.sub(lambda found: click.style(found[0], fg="green", bold=True), line)
    line = BAD.sub(lambda found: click.style(found[0], fg="red", bold=True), line)
    return BOLD_HEADS.sub(lambda found: click.style(found[0], bold=True), line)


class ProgressLine:
    """One line on standard error that says how far the work is; nothing where it would be in the way.

    best writes the best cost so far with its unit; without it no number is shown.
    """

    def __init__(self, quiet: bool, best: Callable[[float], str] | None = None):
        self.active = not quiet and sys.stderr.isatty()
        self.best = best
        self.drawn = -1.0
        self.started = time.monotonic()

    def __call__(self, done: int, total: int, best: float | None, text: str) -> None:
        """done of total parts, best cost of the aim so far in SI, what has just ended."""
        now = time.monotonic()
        if not self.active or (now - self.drawn < REDRAW_SECONDS and done < total):
            return
        self.drawn = now
        found = f", best {self.best(best)}" if best is not None and self.best else ""
        self._write(f"{text}{found}, {now - self.started:.1f} s")

    def end(self) -> None:
        """Take the line away."""
        if self.active and self.drawn >= 0.0:
            self._write("")

    def _write(self, text: str) -> None:
        sys.stderr.write(f"\r\x1b[K{text[:100]}")
        sys.stderr.flush()


def progress_line(case: Case, quiet: bool, units: str = "trade") -> ProgressLine:
    """A line of progress for the search of a case; raises CaseProblems."""
    line = ProgressLine(quiet)
    if line.active:
        from reactorstage import face
        from reactorstage.report.aim import aim_in
        from reactorstage.report.display import in_units

        kind = face.compile(case).model.aim.kind

        def best(cost: float) -> str:
            with in_units(units):
                return aim_in(case, kind).told(cost)

        line.best = best
    return line
