"""What to change, in which order: settings that can be entered, each with what it brings."""

from __future__ import annotations

from reactorstage.optimiser.reasons import Moves
from reactorstage.report.aim import MONEY, Aim, aim_of
from reactorstage.report.display import counted, with_unit
from reactorstage.report.moves import dropped_text, gain_text, moves_table
from reactorstage.report.page.parts import Block, Grid, Section, Words
from reactorstage.report.page.subject import Search, Subject

NOTE = (
    "Values are those that can be entered; a line that begins with the word with is entered at once with the "
    "line above. Each move by itself ends inside all limits, so that one can stop after any of them; where "
    "today breaks limits, the first brings them back."
)


def moves(subject: Subject) -> Section | None:
    """The way from today's setting to the best one; nothing for a rating and where no way was asked for."""
    search = subject.search
    found = None if search is None else search.optimum.moves
    if search is None or found is None or subject.today is None:
        return None
    return Section("moves", "What to change, in order", tuple(_blocks(subject, search, found)))


def _blocks(subject: Subject, search: Search, found: Moves) -> list[Block]:
    aim, today = aim_of(subject.now), subject.today
    if found.note or today is None:
        return [Words(f"There are no moves: {found.note}.")]
    made = moves_table(found, search.programme.numbers, today, aim)
    left = dropped_text(found, search.programme.numbers)
    if not made.rows:
        return [Words(f"No move from today's setting is worth it. {left}".strip())]
    best = search.optimum.best.cost
    return [
        Words(in_all_text(found, best, aim)),
        Grid(made, f"Moves from today's setting, gain in {aim.unit or 'its number'}", NOTE),
        *([Words(left)] if left else []),
    ]


def in_all_text(found: Moves, best: float, aim: Aim) -> str:
    """What all moves bring, beside what the best setting without rounding would."""
    count = len(found.moves)
    several = count > 1
    text = f"{counted(count, 'move')} {gain_text(found.gain, aim, several)}"
    whole = found.start - best
    if aim.kind != MONEY or found.gain <= 0.0 or whole <= 0.0:
        return f"{text} in all."
    of = with_unit(aim.number(whole), aim.unit)
    return f"{text} in all, of {of} between today and the best setting as it was found."
