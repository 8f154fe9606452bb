"""Laying tables and text out in fixed columns of a terminal."""

from __future__ import annotations

import os
import shutil
import sys
import textwrap
from collections.abc import Sequence
from itertools import groupby

from reactorstage.report.table import ALWAYS, Column, Table

NARROWEST, WIDEST, USUAL = 80, 160, 100
BETWEEN = 2
INDENT = 13
LEAST_WORDS = 12


def screen_width() -> int:
    """Columns to fill: the terminal's or COLUMNS, from 80 to 160; 100 where there is no terminal."""
    known = os.environ.get("COLUMNS", "").isdigit() or sys.stdout.isatty()
    width = shutil.get_terminal_size((USUAL, 40)).columns if known else USUAL
    return min(max(width, NARROWEST), WIDEST)


def table_lines(table: Table, width: int) -> list[str]:
    """The table with the columns that fit, its title in the first line; nothing for an empty one."""
    if not table.rows:
        return []
    columns = fitting(table.columns, width)
    widths = _narrowed(columns, _widths(columns), width)
    head = _with_title(table.title, _heading_lines(columns, widths))
    rows = zip(*(column.cells for column in columns), strict=True)
    return [*head, *(line for cells in rows for line in _row_lines(cells, columns, widths))]


def fitting(columns: Sequence[Column], width: int) -> list[Column]:
    """The columns that fit, the highest ranks left out first; equal ranks under one heading go together."""
    kept = list(columns)
    while _total(kept) > width and any(column.rank > ALWAYS for column in kept):
        last = max(kept, key=lambda column: column.rank)
        kept = [one for one in kept if one is not last and not _beside(one, last)]
    return kept


def _beside(one: Column, other: Column) -> bool:
    return bool(other.group) and one.group == other.group and one.rank == other.rank


def _total(columns: Sequence[Column]) -> int:
    return sum(_widths(columns)) + BETWEEN * (len(columns) - 1)


def _narrowed(columns: Sequence[Column], widths: list[int], width: int) -> list[int]:
    """Widths with the widest columns of words made narrower until the table fits; their cells then wrap."""
    words = [i for i, column in enumerate(columns) if column.left]
    excess = sum(widths) + BETWEEN * (len(widths) - 1) - width
    while excess > 0 and words and widths[widest := max(words, key=lambda i: widths[i])] > LEAST_WORDS:
        cut = min(excess, widths[widest] - LEAST_WORDS, 4)
        widths[widest] -= cut
        excess -= cut
    return widths


def _row_lines(cells: Sequence[str], columns: Sequence[Column], widths: Sequence[int]) -> list[str]:
    """One row of the table; cells of words that are too long go on in further lines."""
    parts = [
        textwrap.wrap(cell, width) or [""] if column.left else [cell]
        for cell, column, width in zip(cells, columns, widths, strict=True)
    ]
    height = max(map(len, parts))
    return [
        _join([part[k] if k < len(part) else "" for part in parts], columns, widths) for k in range(height)
    ]


def _widths(columns: Sequence[Column]) -> list[int]:
    widths = [max(map(len, (*column.heading, *column.cells))) for column in columns]
    for positions in _groups(columns):
        wanted = max((len(line) for line in columns[positions[0]].group), default=0)
        have = sum(widths[i] for i in positions) + BETWEEN * (len(positions) - 1)
        widths[positions[0]] += max(wanted - have, 0)
    return widths


def _groups(columns: Sequence[Column]) -> list[list[int]]:
    """Positions of neighbours under a common heading; a column without one stands alone."""
    keyed = [(column.group or (str(i),), i) for i, column in enumerate(columns)]
    return [[i for _, i in run] for _, run in groupby(keyed, key=lambda pair: pair[0])]


def _heading_lines(columns: Sequence[Column], widths: Sequence[int]) -> list[str]:
    height = max(len(column.group) + len(column.heading) for column in columns)
    blocks = [_block(columns, widths, positions, height) for positions in _groups(columns)]
    gap = " " * BETWEEN
    return [gap.join(block[line] for block in blocks).rstrip() for line in range(height)]


def _block(
    columns: Sequence[Column], widths: Sequence[int], positions: Sequence[int], height: int
) -> list[str]:
    """The heading of one group, `height` lines, filled up from below."""
    own = [
        _column_heading(columns[i], widths[i], max(len(columns[j].heading) for j in positions))
        for i in positions
    ]
    below = [(" " * BETWEEN).join(parts) for parts in zip(*own, strict=True)]
    total = sum(widths[i] for i in positions) + BETWEEN * (len(positions) - 1)
    above = [line.center(total).rstrip().ljust(total) for line in columns[positions[0]].group]
    return [" " * total] * (height - len(above) - len(below)) + above + below


def _column_heading(column: Column, width: int, height: int) -> list[str]:
    lines = [""] * (height - len(column.heading)) + list(column.heading)
    slot = 0 if column.left or not _has_marks(column) else 1
    return [line.ljust(width) if column.left else _right(line, width, slot) for line in lines]


def _right(text: str, width: int, slot: int) -> str:
    """Right-aligned over the numbers, beside the place of their marks when there is room."""
    return (text + " " * slot).rjust(width) if len(text) + slot <= width else text.rjust(width)


def _has_marks(column: Column) -> bool:
    return any(cell.endswith((" ", "*", "!")) for cell in column.cells)


def _with_title(title: str, head: list[str]) -> list[str]:
    room = len(title) + 1
    if head[0][:room].strip():
        return [title, *head]
    return [(title + head[0][len(title) :]).rstrip(), *head[1:]]


def _join(cells: Sequence[str], columns: Sequence[Column], widths: Sequence[int]) -> str:
    parts = [
        cell.ljust(width) if column.left else cell.rjust(width)
        for cell, column, width in zip(cells, columns, widths, strict=True)
    ]
    return (" " * BETWEEN).join(parts).rstrip()


def paragraph(text: str, width: int, indent: int = 2) -> list[str]:
    """Text over lines of the given width, the second and later ones indented."""
    return textwrap.wrap(text, width, subsequent_indent=" " * indent, break_on_hyphens=False)


def spread(parts: Sequence[str], width: int) -> list[str]:
    """Parts in one line with blanks between them, the last on a line of its own when they do not fit."""
    room = width - sum(map(len, parts))
    gaps = len(parts) - 1
    if gaps and room < 3 * gaps:
        return [*spread(parts[:-1], width), *paragraph(parts[-1], width)]
    return [(" " * min(room // gaps, 8)).join(parts)] if gaps else paragraph(parts[0], width)


def items(title: str, parts: Sequence[str], width: int, between: str = "   ") -> list[str]:
    """A title and its parts, as many in a line as fit, later lines set in."""
    lines, line = [], title
    for part in parts:
        joined = f"{line}{between}{part}"
        if len(joined) > width and line.strip():
            lines.append(line)
            joined = " " * INDENT + part
        line = joined
    return [*lines, line]
