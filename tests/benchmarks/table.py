"""What was measured as rows, for a terminal and as Markdown."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from tests.benchmarks.timing import Timing


@dataclass(frozen=True)
class Row:
    """what was measured, its value in `unit`, the least of its samples, the target, and what to know of it.

    target is (at most or at least, bound); None where a row is there for comparison only.
    """

    what: str
    value: float | None
    unit: str
    least: float | None = None
    target: tuple[str, float] | None = None
    note: str = ""

    @property
    def met(self) -> str:
        if self.target is None or self.value is None:
            return ""
        kind, bound = self.target
        return "yes" if (self.value <= bound if kind == "at most" else self.value >= bound) else "no"

    @property
    def cells(self) -> tuple[str, str, str, str, str, str]:
        """What, value, least, target, met, note."""
        target = f"{self.target[0]} {shown(self.target[1], self.unit)}" if self.target else ""
        least = shown(self.least, self.unit) if self.least is not None else ""
        return self.what, shown(self.value, self.unit), least, target, self.met, self.note


HEAD = ("what", "median", "least", "target", "met", "note")


def shown(value: float | None, unit: str) -> str:
    """Three figures with the unit; a dash for what was not measured."""
    if value is None:
        return "-"
    digits = f"{value:.0f}" if value >= 100 else f"{value:.3g}"
    return f"{digits} {unit}".strip()


def timed(what: str, timing: Timing, unit: str = "ms", at_most: float | None = None, note: str = "") -> Row:
    """A row of a timing."""
    factor = {"s": 1.0, "ms": 1e3}[unit]
    target = ("at most", at_most) if at_most is not None else None
    return Row(what, factor * timing.median, unit, factor * timing.least, target, note)


def ratio(
    what: str, slow: Timing, fast: Timing, at_least: float | None = None, at_most: float | None = None
) -> Row:
    """How many times longer one takes than the other: median of the ratios round by round."""
    pairs = sorted(a / b for a, b in zip(slow.samples, fast.samples, strict=True))
    kind, bound = ("at least", at_least) if at_least is not None else ("at most", at_most)
    return Row(what, Timing(tuple(pairs)).median, "x", target=(kind, bound) if bound is not None else None)


def plain(rows: Sequence[Row]) -> list[str]:
    """Columns for a terminal."""
    table = [HEAD, *(row.cells for row in rows)]
    widths = [max(len(line[k]) for line in table) for k in range(len(HEAD))]
    padded = [[cell.ljust(width) for cell, width in zip(line, widths, strict=True)] for line in table]
    return ["  ".join(line).rstrip() for line in padded]


def markdown(rows: Sequence[Row]) -> list[str]:
    """A table for README: what, median, target, note."""
    lines = ["| what | median | target | |", "|---|---|---|---|"]
    for row in rows:
        what, value, _, target, _, note = row.cells
        lines.append(f"| {what} | {value} | {target} | {note} |")
    return lines
