"""Exchangers and recycles of a rated train: a table, one line on how well they close, and JSON."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reactorstage.report.display import brief, fixed, places, same_decimals, shown, unit
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Closed, ExchangeState, Rating, TrainState, TurningPoint

Json = dict[str, Any]
STABLE, UNSTABLE = "stable by its slope", "UNSTABLE, a disturbance grows"


def exchanger_table(rating: Rating) -> Table:
    """One row per exchanger or area: heat, temperatures of both streams, ends, size."""
    rows = rating.closed.exchanges
    degrees, kelvin = unit("temperature"), unit("temperature difference")
    return table("EXCHANGERS", [
        Column(("",), tuple(row.name for row in rows), left=True),
        Column(("heat", unit("power")), tuple(_power(row.heat) for row in rows)),
        Column(("from",), tuple(row.from_ for row in rows), left=True),
        *_ends(rows, "hot", (f"hot {degrees}",)),
        Column(("to",), tuple(row.to for row in rows), left=True),
        *_ends(rows, "cold", (f"cold {degrees}",)),
        Column(("hot", f"end {kelvin}"), _differences(rows, 0), rank=2),
        Column(("cold", f"end {kelvin}"), _differences(rows, 1), rank=2),
        Column(("effec-", "tiveness"), tuple(_percent(row.effectiveness) for row in rows), rank=1),
    ])  # fmt: skip


def _ends(rows: Sequence[ExchangeState], side: str, group: tuple[str, ...]) -> list[Column]:
    ends = [getattr(row, side) for row in rows]
    columns = []
    for k, word in enumerate(("in", "out")):
        cells = same_decimals([shown(pair[k], "temperature") for pair in ends], 1)
        columns.append(Column((word,), tuple(cells), group=group))
    return columns


def _differences(rows: Sequence[ExchangeState], end: int) -> tuple[str, ...]:
    return tuple(fixed(shown(row.differences[end], "temperature difference"), 1) for row in rows)


def _power(heat: float | None) -> str:
    return fixed(shown(heat, "power"), places("power", 3))


def recycle_table(rating: Rating) -> Table:
    """One row per recycle: how much goes round, at which temperature, and what it is."""
    word = ".mole fraction of "
    names = [
        name.removeprefix("recycle ").removesuffix(".flow")
        for name in rating.quantities
        if name.startswith("recycle ") and name.endswith(".flow")
    ]
    degrees, flow = unit("temperature"), unit("molar flow")
    shares = [
        ", ".join(
            f"{name.partition(word)[2]} {brief(100.0 * value.value, 4)}"
            for name, value in rating.quantities.items()
            if name.startswith(f"recycle {one}{word}") and value.value
        )
        for one in names
    ]
    return table("RECYCLES", [
        Column(("",), tuple(names), left=True),
        Column((flow,), _shown_of(rating, names, "flow", 1)),
        Column((degrees,), _shown_of(rating, names, "temperature", 1)),
        Column(("mol %",), tuple(shares), rank=1, left=True),
    ])  # fmt: skip


def _shown_of(rating: Rating, names: Sequence[str], word: str, decimals: int) -> tuple[str, ...]:
    found = [rating.quantities.get(f"recycle {one}.{word}") for one in names]
    return tuple(
        "-" if one is None else fixed(shown(one.value, one.kind), places(one.kind, decimals)) for one in found
    )


def states_table(closed: Closed) -> Table:
    """Every state that was found at this setting, the hottest first; empty where there is only one."""
    rows = closed.states if len(closed.states) > 1 else ()
    degrees = unit("temperature")
    return table("STATES AT THIS SETTING", [
        Column(("",), tuple(str(k) for k in range(1, len(rows) + 1))),
        Column(("inlet of", "bed 1", degrees), _degrees(rows, "T_first")),
        Column(("hottest", "exit", degrees), _degrees(rows, "T_hottest")),
        Column(("exchanged", unit("power")), tuple(_power(one.heat) for one in rows)),
        Column(("",), tuple(STABLE if one.stable else UNSTABLE for one in rows), left=True),
        Column(("",), tuple("shown here" if one.shown else "" for one in rows), left=True),
    ])  # fmt: skip


def _degrees(rows: Sequence[TrainState], word: str) -> tuple[str, ...]:
    return tuple(fixed(shown(getattr(one, word), "temperature"), 1) for one in rows)


def folds_table(closed: Closed) -> Table:
    """Where two states meet and vanish, as a share of the size that the exchanger has."""
    rows = closed.folds
    return table("FOLDS", [
        Column(("exchanger",), tuple(one.exchanger for one in rows), left=True),
        Column(("exchanged there,", unit("power")), tuple(_power(one.heat) for one in rows)),
        Column(("size there,", "% of its size"), tuple(fixed(100.0 * one.needed, 1) for one in rows)),
        Column(("",), tuple(_vanishing(one) for one in rows), left=True),
    ])  # fmt: skip


def _vanishing(fold: TurningPoint) -> str:
    return "hotter states vanish below this size" if fold.least else "colder states vanish above this size"


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
                "meaning": _vanishing(one),
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
