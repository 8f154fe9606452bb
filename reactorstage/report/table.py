"""A table as data: what the terminal and the report both lay out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from reactorstage.report.display import fixed, same_decimals
from reactorstage.train.result import Rating

AT_WORK = "*"
BROKEN = "!"
ALWAYS = 0


@dataclass(frozen=True)
class Column:
    """Words over each other as heading, one text per row.

    Neighbours with the same group stand under that common heading. When room is short the columns of the
    highest rank are left out first; rank 0 stays.
    """

    heading: tuple[str, ...]
    cells: tuple[str, ...]
    rank: int = ALWAYS
    group: tuple[str, ...] = ()
    left: bool = False

    @property
    def empty(self) -> bool:
        return all(cell in ("", "-") for cell in self.cells)


@dataclass(frozen=True)
class Table:
    """A title in capitals and columns of equal length; empty columns are not kept."""

    title: str
    columns: tuple[Column, ...]

    @property
    def rows(self) -> int:
        return len(self.columns[0].cells) if self.columns else 0

    def to_pandas(self) -> Any:
        """A pandas data frame: numbers as numbers, their units in the headings.

        Raises CallError where pandas is not installed.
        """
        from reactorstage.report.notebook import frame

        return frame(self)

    def _repr_html_(self) -> str:
        from reactorstage.report.table_html import table_html

        return table_html(self)


def table(title: str, columns: Sequence[Column | None]) -> Table:
    """A table of the columns that exist and say something."""
    return Table(title, tuple(column for column in columns if column is not None and not column.empty))


def marks(rating: Rating) -> dict[str, str]:
    """Quantity names that a limit holds (`*`) or that break one (`!`)."""
    found = {state.quantity: AT_WORK for state in rating.limits if state.at_work}
    return found | {state.quantity: BROKEN for state in rating.limits if not (state.met or state.soft)}


def marked(values: Sequence[float | None], decimals: int, signs: Sequence[str]) -> tuple[str, ...]:
    """Numbers of a column, each followed by its mark or by a blank when any row of the column has one."""
    blank = " " if any(signs) else ""
    numbers = [fixed(value, decimals) for value in values]
    return tuple(number + (sign or blank) for number, sign in zip(numbers, signs, strict=True))


def plain(values: Sequence[float | None], decimals: int) -> tuple[str, ...]:
    """Numbers of a column without marks, with no more decimals than they need."""
    return tuple(same_decimals(values, decimals))


def folded(name: str, width: int = 10) -> tuple[str, ...]:
    """A long species name over two lines: at a blank or hyphen, else before a syllable near its middle."""
    if len(name) <= width:
        return (name,)
    middle = len(name) / 2
    breaks = [i + 1 for i, letter in enumerate(name) if letter in " -" and 1 < i < len(name) - 2]
    if breaks:
        cut = min(breaks, key=lambda i: abs(i - middle))
        return (name[:cut].rstrip(), name[cut:])
    syllables = [
        i for i in range(3, len(name) - 2) if name[i] not in "aeiouy" and name[i + 1] in "aeiouy"
    ] or [int(middle)]
    cut = min(syllables, key=lambda i: abs(i - middle))
    return (f"{name[:cut]}-", name[cut:])
