"""What `check` shows of rate laws that go beyond a power law, and of equilibrium constants of their own."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from reactorstage.report.display import brief, fixed, shown, unit, with_unit
from reactorstage.report.table import Column, Table, table

if TYPE_CHECKING:
    from reactorstage.train.understanding import ReactionRow


def law_tables(rows: Sequence[ReactionRow]) -> list[Table]:
    """Rate laws that are more than a power law, and K of laws beside that of the Gibbs energies."""
    return [
        _laws([row for row in rows if not row.law.plain]),
        _own_K([row for row in rows if row.law.agreement]),
    ]


def _laws(rows: Sequence[ReactionRow]) -> Table:
    if not rows:
        return Table("RATE LAWS", ())
    return table("RATE LAWS", [
        Column(("",), tuple(row.name for row in rows), left=True),
        *(_constants(rows, i) for i in (0, 1)),
        Column(("below the line",), tuple(row.law.below or "-" for row in rows), left=True),
        Column(("floor",), tuple(row.law.floors or "-" for row in rows), left=True),
        Column(("effectiveness",), tuple(row.law.effectiveness or "-" for row in rows), left=True),
        Column(("power", "of K"), tuple(_power(row) for row in rows), rank=6),
    ])  # fmt: skip


def _constants(rows: Sequence[ReactionRow], index: int) -> Column:
    """Rate constants at one of the two temperatures; all reactions share it as a rule."""
    degrees = sorted({fixed(shown(row.T[index], "temperature"), 0) for row in rows})
    group = (f"k at {'/'.join(degrees)} {unit('temperature')}",)
    return Column(("",), tuple(row.law.k[index] for row in rows), 5, group, True)


def _power(row: ReactionRow) -> str:
    return brief(row.law.power_of_K) if row.law.power_of_K != 1.0 else "-"


def _own_K(rows: Sequence[ReactionRow]) -> Table:
    found = [(row, row.law.agreement) for row in rows if row.law.agreement]
    if not found:
        return Table("K OF LAWS AGAINST GIBBS ENERGIES", ())
    kJ = unit("molar energy")
    window = [one.window for _, one in found]
    return table("K OF LAWS AGAINST GIBBS ENERGIES", [
        Column(("",), tuple(row.name for row, _ in found), left=True),
        Column(("window", unit("temperature")), tuple(_span(ends) for ends in window), left=True),
        Column(("K off", "%"), tuple(f"{100.0 * one.off:+.1f}" for _, one in found)),
        Column(("allowed", "%"), tuple(brief(100.0 * row.law.allowed[0]) for row, _ in found), rank=4),
        Column(("heat of law", kJ), tuple(_energy(one.heat.own) for _, one in found)),
        Column(("of data", kJ), tuple(_energy(one.heat.gibbs) for _, one in found)),
        Column(("allowed", kJ), tuple(_energy(row.law.allowed[1]) for row, _ in found), rank=4),
    ])  # fmt: skip


def _span(ends: tuple[float, float]) -> str:
    low, high = (fixed(shown(one, "temperature"), 0) for one in ends)
    return f"{low} to {high}"


def _energy(value: float) -> str:
    return fixed(shown(value, "molar energy"), 1)


def law_json(row: ReactionRow) -> dict[str, Any]:
    """Keys of a reaction's JSON for what its law has beyond a power law."""
    law = row.law
    texts = {"below the line": law.below, "floor": law.floors, "effectiveness": law.effectiveness}
    made: dict[str, Any] = {"k": list(law.k), "power of K": law.power_of_K}
    made |= {key: text for key, text in texts.items() if text}
    if law.agreement is not None:
        made["K against Gibbs energies"] = {
            "off": law.agreement.off,
            "at": with_unit(fixed(shown(law.agreement.ln_K.T, "temperature"), 1), unit("temperature")),
            "heat of law": shown(law.agreement.heat.own, "molar energy"),
            "heat of data": shown(law.agreement.heat.gibbs, "molar energy"),
            "unit of heats": unit("molar energy"),
        }
    return made
