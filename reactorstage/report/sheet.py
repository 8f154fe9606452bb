"""Numbers behind a picture as CSV: headings with units, one row per point."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Sequence
from dataclasses import dataclass

from reactorstage.report.cautions import SHORT

SIGNIFICANT = 10
Cell = str | float | None


@dataclass(frozen=True)
class Sheet:
    """Headings and rows of equal length; None and what is not finite stand for no value."""

    headings: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]

    def csv(self) -> bytes:
        """The rows as CSV; a last column `note` holds the caution in the first row and nothing below."""
        stream = io.StringIO(newline="")
        writer = csv.writer(stream, lineterminator="\n")
        writer.writerow([*self.headings, "note"])
        for number, row in enumerate(self.rows):
            writer.writerow([*map(cell_text, row), "" if number else SHORT])
        return stream.getvalue().encode()


def sheet(headings: Sequence[str], rows: Sequence[Sequence[Cell]]) -> Sheet:
    """A sheet of any sequences."""
    return Sheet(tuple(headings), tuple(tuple(row) for row in rows))


def cell_text(value: Cell) -> str:
    """A cell with 10 significant digits, never -0; empty where there is no value."""
    if isinstance(value, str):
        return value
    if value is None or not math.isfinite(value):
        return ""
    return f"{value + 0.0:.{SIGNIFICANT}g}"
