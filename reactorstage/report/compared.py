"""A comparison as tables, sentences and JSON."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reactorstage.report.accounts import TOTAL, signed
from reactorstage.report.changes import spoken
from reactorstage.report.comparison import Comparison, Difference, LimitDifference, of_owner
from reactorstage.report.display import and_list, brief, fixed, with_unit
from reactorstage.report.result_json import SCHEMA_VERSION, versions
from reactorstage.report.table import Column, Table, table

PER_BED = ("inlet temperature", "exit temperature", "rise", "pressure drop")
Heads = tuple[str, str]
HEADS: Heads = ("first", "second")
MONEY_SHOWN = 0.05
NOTHING = 1e-9


def verdict(found: Comparison) -> str:
    """How the second differs from the first in what is aimed at, and in what terms."""
    second, first = found.names[1], found.names[0]
    worse = found.worse
    if worse is None:
        return f"{found.aim.name} has no value in one of them."
    if found.aim.name != "money.total":
        size = with_unit(brief(abs(worse)), found.aim.unit)
        word = (
            "the same in both"
            if worse == 0.0
            else f"{'worse' if worse > 0.0 else 'better'} by {size} in {second}"
        )
        return f"{found.aim.name} is {word}."
    if abs(worse) < MONEY_SHOWN:
        return _capital(f"{second} costs the same as {first}{_terms(found)}.")
    more = "more" if worse > 0.0 else "less"
    size = f"{fixed(abs(worse), 1)} {found.money_unit}"
    return _capital(f"{second} costs {size} {more} than {first}{_terms(found)}.")


def _terms(found: Comparison) -> str:
    """`: by-product +53.3, entry heat -29.7`, largest first."""
    moved = [row for row in found.money if row.name != TOTAL and abs(row.change or 0.0) >= MONEY_SHOWN]
    parts = [
        f"{row.name} {signed(row.change or 0.0)}"
        for row in sorted(moved, key=lambda row: -abs(row.change or 0.0))
    ]
    return f": {', '.join(parts)}" if parts else ""


def limits_sentences(found: Comparison) -> list[str]:
    """Which limits each breaks."""
    texts = []
    for k, name in enumerate(found.names):
        rows = [row for row in found.limits if row.states[k] == "broken"]
        listed = and_list([_broken_text(row, k) for row in rows])
        texts.append(_capital(f"{name} breaks {listed}." if rows else f"{name} is inside all limits."))
    return texts


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _broken_text(row: LimitDifference, k: int) -> str:
    value = with_unit(brief(row.values[k]), row.unit)
    return f"{row.name} ({value}, {row.direction} {with_unit(brief(row.allowed[k], 6), row.unit)})"


def comparison_tables(found: Comparison, by_products: Sequence[str], heads: Heads = HEADS) -> list[Table]:
    """Settings, limits, beds, gaps and money; heads are what the two are called over the columns."""
    per_bed = [*PER_BED, *(f"made {name}" for name in by_products)]
    made = [
        _differences("SETTINGS", found.decisions, heads),
        _limits(found.limits, heads),
        _per_owner("BEDS", found, "bed ", per_bed, heads),
        _per_owner("HEAT REMOVED", found, ("entry", "gap ", "effluent"), ["heat removed"], heads),
        _money(found, heads),
    ]
    return [one for one in made if one.rows]


def _differences(title: str, rows: Sequence[Difference], heads: Heads) -> Table:
    return table(title, [
        Column(("",), tuple(spoken(row.name) for row in rows), left=True),
        Column((heads[0],), tuple(_number(row.first) for row in rows)),
        Column((heads[1],), tuple(_number(row.second) for row in rows)),
        Column(("change",), tuple(_change(row) for row in rows)),
        Column(("",), tuple(row.unit for row in rows), left=True),
    ])  # fmt: skip


def _number(value: float | None) -> str:
    if value is None:
        return "-"
    if abs(value) < NOTHING:
        return "0"
    return fixed(value, 1) if abs(value) >= 10.0 else brief(value, 3)


def _change(row: Difference) -> str:
    change = row.change
    if change is None:
        return "-"
    text = fixed(abs(change), 1) if abs(change) >= 10.0 else brief(abs(change), 2)
    return f"{'+' if change > 0.0 else '-' if change < 0.0 else ''}{text}"


def _limits(rows: Sequence[LimitDifference], heads: Heads) -> Table:
    shown = [row for row in rows if row.unit or row.values != (None, None)]
    return table("LIMITS", [
        Column(("",), tuple(row.name for row in shown), left=True),
        Column(("allowed",), tuple(_allowed(row) for row in shown), left=True),
        Column((heads[0],), tuple(_number(row.values[0]) for row in shown), group=("value",)),
        Column((heads[1],), tuple(_number(row.values[1]) for row in shown), group=("value",)),
        Column((heads[0],), tuple(_state(row.states[0]) for row in shown), left=True, group=("state",)),
        Column((heads[1],), tuple(_state(row.states[1]) for row in shown), left=True, group=("state",)),
    ])  # fmt: skip


def _allowed(row: LimitDifference) -> str:
    bounds = list(dict.fromkeys(brief(value, 6) for value in row.allowed if value is not None))
    return f"{row.direction} {with_unit(' / '.join(bounds), row.unit)}"


def _state(word: str) -> str:
    return "BROKEN !" if word == "broken" else "at work *" if word == "at work" else word


def _per_owner(
    title: str, found: Comparison, owners: str | tuple[str, ...], words: Sequence[str], heads: Heads
) -> Table:
    """One row for each owner that differs, first and second of each quantity beside each other."""
    rows = {row.name: row for row in found.quantities if of_owner(row).startswith(owners)}
    places = list(dict.fromkeys(of_owner(row) for row in rows.values()))
    columns: list[Column | None] = [
        Column(("",), tuple(place.removeprefix("bed ") for place in places), left=True)
    ]
    for rank, word in enumerate(words):
        cells = [rows.get(f"{place}.{word}") for place in places]
        unit = next((one.unit for one in cells if one), "")
        head = (f"{word.removesuffix(' temperature')}, {unit}",)
        for which, named in zip(("first", "second"), heads, strict=True):
            columns.append(
                Column(
                    (named,),
                    tuple("-" if one is None else _number(getattr(one, which)) for one in cells),
                    rank,
                    head,
                )
            )
    return (
        table(title, columns) if any(len(column.cells) for column in columns if column) else Table(title, ())
    )


def _money(found: Comparison, heads: Heads) -> Table:
    rows = [row for row in found.money if row.first or row.second]
    return table(f"MONEY {found.money_unit}", [
        Column(("",), tuple(row.name for row in rows), left=True),
        Column((heads[0],), tuple(fixed(row.first, 1) for row in rows)),
        Column((heads[1],), tuple(fixed(row.second, 1) for row in rows)),
        Column(("change",), tuple(signed(row.change or 0.0) for row in rows)),
    ])  # fmt: skip


def comparison_json(found: Comparison) -> dict[str, Any]:
    """The content of the JSON of `compare`: values in display units, change is second minus first."""
    return {
        "schema version": SCHEMA_VERSION,
        "result": "comparison",
        "first": {"name": found.names[0], "status": found.statuses[0], "limits broken": found.broken[0]},
        "second": {"name": found.names[1], "status": found.statuses[1], "limits broken": found.broken[1]},
        "aim": {
            "direction": found.direction,
            "of": found.aim.name,
            **_row(found.aim),
            "worse by": found.worse,
        },
        "settings": {row.name: _row(row) for row in found.decisions},
        "money": {row.name: _row(row) for row in found.money},
        "limits": [
            {
                "limit": row.name,
                "direction": row.direction,
                "unit": row.unit,
                "allowed": list(row.allowed),
                "values": list(row.values),
                "states": list(row.states),
            }
            for row in found.limits
        ],
        "quantities": {row.name: _row(row) for row in found.quantities},
        "notes": list(found.notes),
        "versions": versions(),
    }


def _row(row: Difference) -> dict[str, Any]:
    return {"first": row.first, "second": row.second, "change": row.change, "unit": row.unit}
