"""What `check` shows of a case: tables, sentences and JSON of an Understanding."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from reactorstage.optimiser.programme import FreeNumber, LimitRow
from reactorstage.report.display import (
    allowed,
    brief,
    counted,
    difference,
    difference_kind,
    fixed,
    in_units,
    owners_text,
    same_decimals,
    shown,
    unit,
    with_unit,
)
from reactorstage.report.result_json import SCHEMA_VERSION, case_json, versions
from reactorstage.report.table import Column, Table, table
from reactorstage.report.understood_laws import law_json, law_tables
from reactorstage.report.unit_sets import TRADE

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.train.understanding import ReactionRow, StreamRow, Understanding

CLOSED = 1e-9


def understood_tables(seen: Understanding) -> list[Table]:
    """Feeds, reactions, free numbers, what fixes what, limits, prices."""
    tables = [
        _feeds(seen.streams),
        _fluid(seen),
        _reactions(seen),
        *law_tables(seen.reactions),
        _equilibria(seen.reactions),
    ]
    tables += [_numbers(seen.numbers), _degrees(seen), _limits(seen.limits), _prices(seen)]
    return [made for made in tables if made.rows]


def _feeds(rows: Sequence[StreamRow]) -> Table:
    flows = [shown(row.flow, "molar flow") for row in rows]
    masses = [shown(row.mass_flow, "mass flow") for row in rows]
    degrees = [shown(row.T, "temperature") for row in rows]
    return table("FEEDS", [
        Column(("",), tuple(row.name for row in rows), left=True),
        Column((unit("molar flow"),), tuple(brief(flow, 5) for flow in flows)),
        Column((unit("mass flow"),), tuple(same_decimals(masses, 2)), rank=3),
        Column((unit("temperature"),), tuple(same_decimals(degrees, 1))),
        Column(("mol %",), tuple(_shares(row) for row in rows), left=True),
        Column((f"enters, {unit('molar flow')}",), tuple(_entries(row) for row in rows), rank=2, left=True),
    ])  # fmt: skip


def _fluid(seen: Understanding) -> Table:
    """Critical constants or densities behind the equation of state; empty for an ideal gas."""
    rows = seen.fluid
    columns = [Column(("",), tuple(row.name for row in rows), left=True)]
    known = [row.critical for row in rows if row.critical]
    if known:
        kinds = (("critical", "temperature"), ("critical", "pressure"))
        values = ([one.temperature for one in known], [one.pressure for one in known])
        for (word, kind), numbers in zip(kinds, values, strict=True):
            cells = same_decimals([shown(one, kind) for one in numbers], 2)
            columns.append(Column((word, unit(kind)), tuple(cells)))
        factors = same_decimals([one.acentric_factor for one in known], 4)
        columns.append(Column(("acentric", "factor"), tuple(factors)))
        columns.append(Column(("source",), tuple(one.source for one in known), rank=2, left=True))
    else:
        densities = [shown(row.density or 0.0, "density") for row in rows]
        columns.append(Column(("density", unit("density")), tuple(same_decimals(densities, 1))))
    return table(f"FLUID {seen.fluid_words}", columns)


def _shares(row: StreamRow) -> str:
    return ", ".join(f"{name} {brief(100.0 * share, 5)}" for name, share in row.composition.items())


def _entries(row: StreamRow) -> str:
    return ", ".join(f"{place} {brief(shown(flow, 'molar flow'))}" for place, flow in row.enters)


def _reactions(seen: Understanding) -> Table:
    rows = seen.reactions
    columns = [
        Column(("",), tuple(row.name for row in rows), left=True),
        Column(("equation",), tuple(row.equation for row in rows), left=True),
        Column(("orders",), tuple(_orders(row) for row in rows), rank=5, left=True),
        Column(
            ("rate per, driven by",), tuple(f"{r.rate_per}, {r.driven_by}" for r in rows), rank=6, left=True
        ),
    ]
    if seen.split_reactant:
        cells = tuple(brief(row.order_in_split) for row in rows)
        columns.insert(2, Column((f"order in {seen.split_reactant}",), cells))
    return table("REACTIONS", columns)


def _equilibria(rows: Sequence[ReactionRow]) -> Table:
    return table("HEAT AND EQUILIBRIUM", [
        Column(("",), tuple(row.name for row in rows), left=True),
        *_at_temperature(rows, 0),
        *_at_temperature(rows, 1),
        Column(("atoms",), tuple(_atoms(row) for row in rows), left=True),
    ])  # fmt: skip


def _at_temperature(rows: Sequence[ReactionRow], index: int) -> list[Column]:
    """Heat and equilibrium constant at one of the two temperatures; all reactions share it as a rule."""
    degrees = sorted({fixed(shown(row.T[index], "temperature"), 0) for row in rows})
    group = (f"at {'/'.join(degrees)} {unit('temperature')}",)
    heats = [fixed(shown(row.heat[index], "molar energy"), 1) for row in rows]
    K = [f"{row.K[index]:.3g}" if row.reversible else "-" for row in rows]
    return [
        Column((unit("molar energy"),), tuple(heats), group=group),
        Column(("K (1 bar)",), tuple(K), group=group),
    ]


def _atoms(row: ReactionRow) -> str:
    return "closed" if row.imbalance < CLOSED else f"off by {brief(row.imbalance)}"


def _orders(row: ReactionRow) -> str:
    return ", ".join(f"{name} {brief(order)}" for name, order in row.orders.items())


def _numbers(numbers: Sequence[FreeNumber]) -> Table:
    def cells(values: Sequence[float]) -> tuple[str, ...]:
        return tuple(brief(shown(v, n.kind), 5) for v, n in zip(values, numbers, strict=True))

    return table("FREE NUMBERS", [
        Column(("",), tuple(number.name for number in numbers), left=True),
        Column(("now",), cells([number.now for number in numbers])),
        Column(("from",), cells([number.low for number in numbers])),
        Column(("to",), cells([number.high for number in numbers])),
        Column(("",), tuple(unit(number.kind) for number in numbers), left=True),
    ])  # fmt: skip


def _degrees(seen: Understanding) -> Table:
    return table("WHAT FIXES WHAT", [
        Column(("",), tuple(what for what, _ in seen.degrees), left=True),
        Column(("",), tuple(by for _, by in seen.degrees), left=True),
    ])  # fmt: skip


def _limits(rows: Sequence[LimitRow]) -> Table:
    """Rows that differ in their owner alone are drawn together."""
    groups: dict[tuple[Any, ...], list[LimitRow]] = {}
    for row in rows:
        word = row.quantity.partition(".")[2]
        groups.setdefault((row.label, word, row.direction, row.bound, row.keep_away), []).append(row)
    firsts = [group[0] for group in groups.values()]
    return table("LIMITS", [
        Column(("",), tuple(row.label for row in firsts), left=True),
        Column(("of",), tuple(_of(group) for group in groups.values()), left=True),
        Column(("allowed",), tuple(_allowed(row) for row in firsts), left=True),
        Column(("kept away",), tuple(_kept(row) for row in firsts), rank=2),
        Column(("why",), tuple(_why(row) for row in firsts), rank=3, left=True),
    ])  # fmt: skip


def _allowed(row: LimitRow) -> str:
    return f"{row.direction} {allowed(row.bound, row.kind)}"


def _of(group: Sequence[LimitRow]) -> str:
    if len(group) == 1:
        return group[0].quantity
    return f"{group[0].quantity.partition('.')[2]} of {owners_text([row.owner for row in group])}"


def _kept(row: LimitRow) -> str:
    size = brief(difference(row.keep_away, row.kind))
    return "-" if row.keep_away == 0.0 else with_unit(size, unit(difference_kind(row.kind)))


def _why(row: LimitRow) -> str:
    softly = "soft; " if row.soft_price is not None else ""
    return f"{softly}{'always' if row.implied else row.why}"


def _prices(seen: Understanding) -> Table:
    return table("PRICES", [
        Column(("",), tuple(row.label for row in seen.prices), left=True),
        Column(("of",), tuple(row.of for row in seen.prices), left=True),
        Column(("",), tuple(f"{row.way} {row.amount}" for row in seen.prices), left=True),
    ])  # fmt: skip


def order_sentence(seen: Understanding) -> str:
    """Whether dividing the split reactant acts on selectivity by itself; empty without a split."""
    orders = {row.order_in_split for row in seen.reactions if row.order_in_split is not None}
    name = seen.split_reactant
    if not name or not orders:
        return ""
    if len(orders) == 1:
        order = brief(orders.pop())
        return (
            f"Every reaction of {name} is of order {order} in it: how {name} is divided acts on by-products "
            "only through temperatures and limits."
        )
    return (
        f"Reactions of {name} differ in their order in it: how it is divided changes selectivity by itself."
    )


def summary(case: Case, seen: Understanding) -> str:
    """Counts in one line."""
    beds = sum(section.kind == "bed" for section in case.train)
    given = sum(not row.implied for row in seen.limits)
    return " | ".join([
        counted(beds, "bed"), f"{len(case.species)} species", counted(len(seen.reactions), "reaction"),
        counted(len(seen.numbers), "free number"), counted(given, "limit"),
        f"aim: {case.aim.direction} {case.aim.quantity}",
    ])  # fmt: skip


@in_units(TRADE)
def understood_json(case: Case, seen: Understanding, overrides: Sequence[str] = ()) -> dict[str, Any]:
    """The same for programs, in display units, limits one by one."""
    return {
        "schema version": SCHEMA_VERSION,
        "result": "check",
        "case": case_json(case, overrides),
        "versions": versions(),
        "aim": {"direction": case.aim.direction, "of": case.aim.quantity},
        "feeds": {row.name: _feed_json(row) for row in seen.streams},
        "split reactant": seen.split_reactant or None,
        "reactions": {row.name: _reaction_json(row) for row in seen.reactions},
        "free numbers": {number.name: _number_json(number) for number in seen.numbers},
        "fixed by": dict(seen.degrees),
        "limits": [_limit_json(row, case.currency) for row in seen.limits],
        "prices": [{"price": p.label, "of": p.of, p.way: p.amount} for p in seen.prices],
        "warnings": list(seen.warnings),
    }


def _feed_json(row: StreamRow) -> dict[str, Any]:
    return {
        "flow": {"value": shown(row.flow, "molar flow"), "unit": unit("molar flow")},
        "mass flow": {"value": shown(row.mass_flow, "mass flow"), "unit": unit("mass flow")},
        "temperature": {"value": shown(row.T, "temperature"), "unit": unit("temperature")},
        "mole fractions": dict(row.composition),
        "enters": {place: shown(flow, "molar flow") for place, flow in row.enters},
    }


def _reaction_json(row: ReactionRow) -> dict[str, Any]:
    at = [
        {
            "temperature": shown(T, "temperature"),
            "heat of reaction": shown(heat, "molar energy"),
            "K": K if row.reversible else None,
        }
        for T, heat, K in zip(row.T, row.heat, row.K, strict=True)
    ]
    return {
        "equation": row.equation,
        "atom imbalance": row.imbalance,
        "at": at,
        "units": {
            "temperature": unit("temperature"),
            "heat of reaction": unit("molar energy"),
            "K": "(1 bar)",
        },
        "orders": dict(row.orders),
        "order in split reactant": row.order_in_split,
        "rate per": row.rate_per,
        "driven by": row.driven_by,
        "source": row.source,
        **law_json(row),
    }


def _number_json(number: FreeNumber) -> dict[str, Any]:
    return {
        "now": shown(number.now, number.kind),
        "from": shown(number.low, number.kind),
        "to": shown(number.high, number.kind),
        "unit": unit(number.kind),
    }


def _limit_json(row: LimitRow, currency: str) -> dict[str, Any]:
    return {
        "limit": row.label,
        "of": row.quantity,
        "direction": row.direction,
        "allowed": shown(row.bound, row.kind),
        "unit": unit(row.kind, currency),
        "keep away": difference(row.keep_away, row.kind),
        "soft": row.soft_price is not None,
        "implied": row.implied,
        "why": row.why,
    }


def order_table(seen: Understanding) -> Table:
    """The order of every reaction in the split reactant; empty without a split."""
    rows = [row for row in seen.reactions if row.order_in_split is not None] if seen.split_reactant else []
    return table(f"ORDER IN {seen.split_reactant.upper()}", [
        Column(("",), tuple(row.name for row in rows), left=True),
        Column(("equation",), tuple(row.equation for row in rows), left=True),
        Column(("order",), tuple(brief(row.order_in_split) for row in rows)),
    ])  # fmt: skip
