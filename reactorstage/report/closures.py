"""Exchangers and recycles of a rated train: a table, one line on how well they close, and JSON."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reactorstage.report.display import fixed, same_decimals, shown, unit
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Closed, ExchangeState, Rating

Json = dict[str, Any]


def exchanger_table(rating: Rating) -> Table:
    """One row per exchanger or area: heat, temperatures of both streams, ends, size."""
    rows = rating.closed.exchanges
    degrees, kelvin = unit("temperature"), unit("temperature difference")
    return table("EXCHANGERS", [
        Column(("",), tuple(row.name for row in rows), left=True),
        Column(("heat", unit("power")), tuple(fixed(shown(row.heat, "power"), 3) for row in rows)),
        Column(("from",), tuple(row.from_ for row in rows), left=True),
        *_ends(rows, "hot", (f"hot {degrees}",)),
        Column(("to",), tuple(row.to for row in rows), left=True),
        *_ends(rows, "cold", (f"cold {degrees}",)),
        Column(("hot", f"end {kelvin}"), tuple(fixed(row.differences[0], 1) for row in rows), rank=2),
        Column(("cold", f"end {kelvin}"), tuple(fixed(row.differences[1], 1) for row in rows), rank=2),
        Column(("effec-", "tiveness"), tuple(_percent(row.effectiveness) for row in rows), rank=1),
    ])  # fmt: skip


def _ends(rows: Sequence[ExchangeState], side: str, group: tuple[str, ...]) -> list[Column]:
    ends = [getattr(row, side) for row in rows]
    columns = []
    for k, word in enumerate(("in", "out")):
        cells = same_decimals([shown(pair[k], "temperature") for pair in ends], 1)
        columns.append(Column((word,), tuple(cells), group=group))
    return columns


def _percent(share: float | None) -> str:
    return "-" if share is None else f"{100.0 * share:.1f} %"


def residual_text(closed: Closed) -> str:
    """`closures 3e-12`: the largest of the relative residuals; empty without closures."""
    worst = max(closed.residuals.values(), default=None)
    return "" if worst is None else f"closures {worst:.0e}" if worst else "closures 0"


def closures_json(closed: Closed) -> Json:
    """Residuals, exchangers, states and folds, in display units."""
    return {
        "residuals": dict(closed.residuals),
        "exchangers": [_exchange_json(one) for one in closed.exchanges],
        "states": [
            {
                "bed 1 inlet": shown(one.T_first, "temperature"),
                "hottest exit": shown(one.T_hottest, "temperature"),
                "unit": unit("temperature"),
                "exchanged": shown(one.heat, "power"),
                "exchanged unit": unit("power"),
                "stable by its slope": one.stable,
                "shown": one.shown,
            }
            for one in closed.states
        ],
        "folds": [
            {
                "exchanger": one.exchanger,
                "heat": shown(one.heat, "power"),
                "unit": unit("power"),
                "size there over size": one.needed,
                "meaning": f"{'hotter' if one.least else 'colder'} states vanish "
                f"{'below' if one.least else 'above'} this size",
            }
            for one in closed.folds
        ],
    }


def _exchange_json(one: ExchangeState) -> Json:
    return {
        "exchanger": one.name,
        "from": one.from_,
        "to": one.to,
        "heat": shown(one.heat, "power"),
        "unit": unit("power"),
        "hot": [shown(T, "temperature") for T in one.hot],
        "cold": [shown(T, "temperature") for T in one.cold],
        "temperature unit": unit("temperature"),
        "differences at the ends": list(one.differences),
        "difference unit": unit("temperature difference"),
        "effectiveness": one.effectiveness,
        "conductance": one.conductance,
        "conductance unit": "W/K",
    }
