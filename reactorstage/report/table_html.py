"""A table as HTML: for the page, and for notebooks."""

from __future__ import annotations

from collections.abc import Sequence
from html import escape
from itertools import groupby

from reactorstage.report.table import AT_WORK, BROKEN, Column, Table

LONGEST = 48
MARKS = {AT_WORK: "a limit holds this", BROKEN: "this breaks a limit"}


def table_html(table: Table, caption: str = "") -> str:
    """A table with its caption (else its title), headings in scope, marks explained; everything escaped."""
    columns = table.columns
    rows = zip(*(column.cells for column in columns), strict=True)
    body = "".join(f"<tr>{_row(cells, columns)}</tr>" for cells in rows)
    words = escape(caption or table.title.capitalize())
    return f"<table><caption>{words}</caption>{_heads(columns)}<tbody>{body}</tbody></table>"


def _heads(columns: Sequence[Column]) -> str:
    """One row of headings; two where neighbours stand under a common one; none where no column has one."""
    if not any(heading_text(column) or column.group for column in columns):
        return ""
    if not any(column.group for column in columns):
        return f"<thead><tr>{''.join(_head(column) for column in columns)}</tr></thead>"
    upper, lower = [], []
    for group, run in groupby(enumerate(columns), key=lambda pair: pair[1].group or (f"\0{pair[0]}",)):
        members = [column for _, column in run]
        if members[0].group:
            name = escape(" ".join(group))
            upper.append(f'<th scope="colgroup" colspan="{len(members)}">{name}</th>')
            lower += [_head(column) for column in members]
        else:
            upper.append(_head(members[0], ' rowspan="2"'))
    return f"<thead><tr>{''.join(upper)}</tr><tr>{''.join(lower)}</tr></thead>"


def _head(column: Column, more: str = "") -> str:
    text = escape(heading_text(column))
    if not text:
        return f"<td{more}></td>"
    return f'<th scope="col"{more}{_side(column)}>{text}</th>'


def heading_text(column: Column) -> str:
    """The heading in one line; a word that was folded over two lines is put together again."""
    text = ""
    for line in column.heading:
        if text.endswith("-") and line[:1].islower():
            text = text[:-1] + line
        else:
            text = f"{text}{'' if text.endswith('/') else ' '}{line}".strip()
    return text


def _row(cells: Sequence[str], columns: Sequence[Column]) -> str:
    first, *others = cells
    head = f'<th scope="row"{_side(columns[0])}>{_cell(first)}</th>'
    rest = zip(others, columns[1:], strict=True)
    return head + "".join(f"<td{_side(column)}>{_cell(cell)}</td>" for cell, column in rest)


def _side(column: Column) -> str:
    """The class of cells: words stand left, long ones may wrap."""
    long = column.left and max(map(len, column.cells), default=0) > LONGEST
    names = [*(["left"] if column.left else []), *(["long"] if long else [])]
    return f' class="{" ".join(names)}"' if names else ""


def _cell(cell: str) -> str:
    """A cell; the mark at its end tells what it means."""
    if cell[-1:] in MARKS and cell[:-1].rstrip("0123456789.-") == "":
        mark = cell[-1]
        return f'{escape(cell[:-1])}<abbr title="{MARKS[mark]}">{mark}</abbr>'
    return escape(cell.rstrip())
