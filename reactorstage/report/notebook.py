"""Results as tables and figures for notebooks and scripts."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from reactorstage.report import bounds
from reactorstage.report.accounts import accounts
from reactorstage.report.beds import bed_table
from reactorstage.report.display import in_units
from reactorstage.report.gaps import gap_table
from reactorstage.report.table import Column, Table
from reactorstage.report.unit_sets import TRADE
from reactorstage.train.result import Rating

if TYPE_CHECKING:
    from reactorstage.face import Optimisation
    from reactorstage.train.influence import Influence

EVERY = 10_000


@dataclass(frozen=True)
class Tables(Mapping[str, Table]):
    """The tables of a result by name: beds, gaps, limits, money and, of an optimum, worths.

    A notebook shows them all; each can be taken out, printed as HTML or, with pandas, as a data frame.
    """

    name: str
    status: str
    tables: dict[str, Table]

    def __getitem__(self, name: str) -> Table:
        return self.tables[name]

    def __iter__(self) -> Iterator[str]:
        return iter(self.tables)

    def __len__(self) -> int:
        return len(self.tables)

    def _repr_html_(self) -> str:
        from html import escape

        head = f"<p><b>{escape(self.name)}</b>: {escape(self.status)}</p>"
        return head + "".join(table._repr_html_() for table in self.tables.values())


def tables(result: Rating | Optimisation, units: str = TRADE) -> Tables:
    """Tables of a rating or of an optimisation in a set of units; raises CallError for an unknown one."""
    now, today = (result, None) if isinstance(result, Rating) else (result.best or result.today, result.today)
    before = today if today is not None and today is not now and not today.failure else None
    with in_units(units):
        found = {
            "beds": bed_table(now, before),
            "gaps": gap_table(now, before),
            "limits": bounds.rating_table(now, EVERY),
            "money": money(now, before),
        }
        if not isinstance(result, Rating) and result.best is not None:
            found["worths"] = bounds.worth_table(result.optimum, now)
    return Tables(now.case.name, result.status, {name: one for name, one in found.items() if one.rows})


def money(now: Rating, before: Rating | None) -> Table:
    """Money per hour by label, cost positive, with today's beside it."""
    from reactorstage.report.page.sections.train import money_table

    return money_table(accounts(now, before), now.case.currency)


def figures(result: Rating | Optimisation, units: str = TRADE) -> dict[str, Any]:
    """Matplotlib figures by name, as the command line writes them; raises CallError for unknown units."""
    from reactorstage.report import look
    from reactorstage.report.figures import pictures

    if isinstance(result, Rating):
        now, today, optimum, status = result, None, None, f"rating, {result.status}"
        influences: tuple[Influence, ...] = ()
    else:
        now, today, optimum = result.best or result.today, result.today, result.optimum
        status, influences = f"best found, {result.status}", result.influences
    with in_units(units), look.drawing():
        return {one.name: one.figure for one in pictures(now, today, status, optimum, influences)}


def page(result: Rating | Optimisation, units: str = TRADE) -> str:
    """The report as the text of one HTML file; raises CallError for unknown units."""
    from reactorstage import face
    from reactorstage.report.page.render import page_html
    from reactorstage.report.page.subject import of_optimum, of_rating

    with in_units(units):
        if isinstance(result, Rating):
            subject = of_rating(face.compile(result.case), result)
        else:
            subject = of_optimum(result)
    return page_html(subject, units).decode()


def frame(made: Table) -> Any:
    """A pandas data frame of a table; raises CallError where pandas is not installed."""
    from importlib import import_module

    from reactorstage.errors import CallError
    from reactorstage.report.table_html import heading_text

    try:
        pandas = import_module("pandas")
    except ImportError:
        raise CallError(
            "pandas is not installed; install it, or `pip install 'reactorstage[notebook]'`"
        ) from None
    names = [" ".join((*column.group, heading_text(column))).strip() for column in made.columns]
    columns = [_values(column) for column in made.columns]
    return pandas.DataFrame(dict(zip(_unlike(names), columns, strict=True)))


def _unlike(names: list[str]) -> list[str]:
    """Names made different by a number where they are equal or empty."""
    found: list[str] = []
    for k, name in enumerate(names):
        own = name or ("name" if k == 0 else "unit")
        found.append(own if own not in found else f"{own} {k}")
    return found


def _values(column: Column) -> list[Any]:
    """Numbers where the whole column holds numbers, marks taken off; else texts."""
    bare = [cell.rstrip(" *!") for cell in column.cells]
    try:
        return [None if cell in ("-", "") else float(cell) for cell in bare]
    except ValueError:
        return list(bare)
