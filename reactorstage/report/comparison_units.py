"""A comparison in the units that are shown: result files are in trade units, whatever the screen shows."""

from __future__ import annotations

from dataclasses import replace
from functools import cache

from reactorstage.case import units
from reactorstage.report.comparison import Comparison, Difference, LimitDifference
from reactorstage.report.display import shown, unit


def in_shown_units(found: Comparison) -> Comparison:
    """The same comparison with every value in the chosen set of units; money stays per hour."""
    return replace(
        found,
        aim=difference_shown(found.aim),
        decisions=tuple(map(difference_shown, found.decisions)),
        quantities=tuple(map(difference_shown, found.quantities)),
        limits=tuple(map(limit_shown, found.limits)),
    )


@cache
def kinds_by_unit() -> dict[str, str]:
    """The kind that a trade unit belongs to; kinds that share a unit share its scale too."""
    found: dict[str, str] = {}
    for kind in units.KINDS.values():
        if kind.display_unit and units.CURRENCY_MARK not in kind.display_unit:
            found.setdefault(kind.display_unit, kind.name)
    return found


def value_shown(value: float | None, unit_text: str) -> float | None:
    """A value in a trade unit as the chosen set shows it; other units stay."""
    kind = kinds_by_unit().get(unit_text)
    if value is None or kind is None:
        return value
    known = units.KINDS[kind]
    return shown((value + known.offset) * known.scale, kind)


def unit_shown(unit_text: str) -> str:
    """The unit of the chosen set that stands for a trade unit."""
    kind = kinds_by_unit().get(unit_text)
    return unit_text if kind is None else unit(kind)


def difference_shown(row: Difference) -> Difference:
    """One quantity of both in the chosen set."""
    first, second = (value_shown(value, row.unit) for value in (row.first, row.second))
    return replace(row, unit=unit_shown(row.unit), first=first, second=second)


def limit_shown(row: LimitDifference) -> LimitDifference:
    """One limit of both in the chosen set."""
    allowed = value_shown(row.allowed[0], row.unit), value_shown(row.allowed[1], row.unit)
    values = value_shown(row.values[0], row.unit), value_shown(row.values[1], row.unit)
    return replace(row, unit=unit_shown(row.unit), allowed=allowed, values=values)
