"""The way from today's setting to the answer: what to enter, in which order, and what each move brings."""

from __future__ import annotations

from collections.abc import Sequence

from reactorstage.optimiser.programme import FreeNumber
from reactorstage.optimiser.reasons import Move, Moves
from reactorstage.report import bounds
from reactorstage.report.aim import MONEY, Aim
from reactorstage.report.changes import spoken
from reactorstage.report.display import and_list, brief, counted, shown, unit, with_unit
from reactorstage.report.table import Column, Table, table
from reactorstage.train.result import Array, Rating


def first_move_text(
    moves: Moves, numbers: Sequence[FreeNumber], today: Rating, aim: Aim, where: str = "see --explain"
) -> str:
    """The first move with its gain, and what the others bring; empty without moves.

    where says where the others stand.
    """
    if not moves.moves:
        return ""
    first, others = moves.moves[0], len(moves.moves) - 1
    what = settings_text(first, numbers, today.x)
    why = _why(first, today)
    joint = " and " if first.mends and first.gain >= 0.0 else ", " if why else ""
    text = f"First set {what}: {gain_text(first.gain, aim)}{joint}{why}"
    if not others:
        return f"{text}; there is no other move that is worth it."
    rest = gain_text(moves.gain - first.gain, aim, several=others > 1)
    return f"{text}. Then {counted(others, 'more move')}, each inside all limits, {rest} ({where})."


def gain_text(gain: float, aim: Aim, several: bool = False) -> str:
    """`saves 15.9 EUR/h`, `costs 1.2 EUR/h`, and of several `save`."""
    size = with_unit(aim.number(abs(gain)), aim.unit)
    word = ("save" if gain >= 0.0 else "cost") if aim.kind == MONEY else "bring"
    verb = word if several else f"{word}s"
    if aim.kind == MONEY:
        return f"{verb} {size}"
    return f"{verb} {aim.quantity} {'forward' if gain >= 0.0 else 'back'} by {size}"


def settings_text(move: Move, numbers: Sequence[FreeNumber], before: Array) -> str:
    """`ethylene to bed 1 from 67 to 78 kmol/h with inlet of bed 1 from 384 to 364 degC`."""
    parts = [
        f"{spoken(numbers[k].name)} from {value_text(float(before[k]), numbers[k])} to "
        f"{with_unit(value_text(value, numbers[k]), unit(numbers[k].kind))}"
        for k, value in zip(move.numbers, move.values, strict=True)
    ]
    return " with ".join(parts)


def value_text(value: float, number: FreeNumber) -> str:
    """A setting in its display unit, with the digits that it is entered with."""
    return brief(round(shown(value, number.kind) or 0.0, 6), 6)


def _why(move: Move, today: Rating) -> str:
    """What a move is for, where its gain does not say it."""
    if move.mends:
        mended = and_list(bounds.together(today.limits[k] for k in move.mends))
        if move.gain >= 0.0:
            return f"brings {mended} back inside"
        return f"the price of bringing {mended} back inside"
    return "makes room for what follows" if move.gain < 0.0 else ""


def dropped_text(moves: Moves, numbers: Sequence[FreeNumber]) -> str:
    """Numbers that stay as today because moving them is not worth it, or because nobody can enter them."""
    groups = (("Not worth moving", moves.dropped), ("Not set on a panel, stays as today", moves.held))
    texts = [f"{head}: {and_list([spoken(numbers[k].name) for k in rows])}." for head, rows in groups if rows]
    return " ".join(texts)


def moves_table(moves: Moves, numbers: Sequence[FreeNumber], today: Rating, aim: Aim) -> Table:
    """One row for each number entered; gain and cost stand at the last one of a move."""
    rows: list[tuple[str, ...]] = []
    before = today.x
    for count, move in enumerate(moves.moves, 1):
        for place, (k, value) in enumerate(zip(move.numbers, move.values, strict=True), 1):
            last = place == len(move.numbers)
            rows.append((
                str(count) if place == 1 else "with",
                spoken(numbers[k].name),
                value_text(float(before[k]), numbers[k]),
                value_text(value, numbers[k]),
                unit(numbers[k].kind),
                aim.number(move.gain) if last else "",
                aim.number(aim.sign * move.cost) if last else "",
                _why(move, today) if last else "",
            ))  # fmt: skip
        before = move.x
    columns = list(zip(*rows, strict=True)) if rows else [()] * 8
    heads = [("",), ("enter",), ("from",), ("to",), ("",), ("gain",), (aim.unit or "aim", "then"), ("",)]
    left = (True, True, False, False, True, False, False, True)
    return table("MOVES", [
        Column(head, tuple(cells), left=side) for head, cells, side in zip(heads, columns, left, strict=True)
    ])  # fmt: skip
