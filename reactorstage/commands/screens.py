"""What `rate` and `optimise` say on the terminal: one screen of plain lines."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from reactorstage.commands.explained import explanation_texts
from reactorstage.commands.layout import INDENT, items, paragraph, spread, table_lines
from reactorstage.optimiser import result as words
from reactorstage.report import bounds, sentences
from reactorstage.report.accounts import accounts, heat_words
from reactorstage.report.aim import aim_of
from reactorstage.report.beds import bed_table
from reactorstage.report.closures import exchanger_table, recycle_table, residual_text
from reactorstage.report.display import counted, unit
from reactorstage.report.gaps import gap_table
from reactorstage.report.moves import first_move_text
from reactorstage.report.phase import margin_table
from reactorstage.report.reach import conflict_text, pairs_text, reach_text
from reactorstage.train.result import Rating

if TYPE_CHECKING:
    from reactorstage.face import Optimisation


def rating_lines(rating: Rating, seconds: float, width: int) -> list[str]:
    """The screen of `rate`."""
    steps = f"{rating.integration_steps} integration steps"
    return [
        *spread([rating.case.name, f"rating, {_status(rating)}", heat_words(rating)], width),
        " | ".join([_closure(rating), steps, f"{seconds:.2f} s"]),
        *_failure(rating, width),
        *_block(table_lines(bed_table(rating), width), paragraph(sentences.out_line(rating), width, 5)),
        *_block(table_lines(gap_table(rating), width)),
        *_closed(rating, width),
        *_block(table_lines(margin_table(rating), width)),
        *_block(table_lines(bounds.rating_table(rating), width), _more_limits(rating)),
        *_block(_money(rating, None, width)),
        *_numbered(sentences.warnings(rating), width),
        *paragraph(sentences.caution(), width),
    ]


def optimum_lines(outcome: Optimisation, width: int) -> list[str]:
    """The screen of `optimise`: the best answer with today's setting beside it."""
    best, optimum = outcome.best, outcome.optimum
    today = outcome.today if not outcome.today.failure else None
    if best is None:
        return _no_answer(outcome, width)
    return [
        *spread([best.case.name, optimum_status(optimum, best), heat_words(best)], width),
        *paragraph(" | ".join([_closure(best), *_search(outcome)]), width),
        *_block(
            table_lines(bed_table(best, today), width), paragraph(sentences.out_line(best, today), width, 5)
        ),
        *_block(table_lines(gap_table(best, today), width)),
        *_closed(best, width),
        *_block(table_lines(margin_table(best), width)),
        *_block(_held(outcome, best, width)),
        *_money(best, today, width),
        *_after_money(outcome, best, width),
        *_numbered(_three(outcome, best), width),
    ]


def optimum_status(optimum: words.Optimum, best: Rating) -> str:
    """The status word in capitals with what it is about."""
    count = len(bounds.broken(best))
    return {
        words.INSIDE: "best found, INSIDE ALL LIMITS",
        words.BROKEN: f"best found, {_limits(count)} BROKEN",
        words.CANNOT: f"CANNOT MEET ALL LIMITS, least violation breaks {count}",
        words.STOPPED: "STOPPED BY YOU, best so far",
    }.get(optimum.status, optimum.status.upper())


def _status(rating: Rating) -> str:
    count = len(bounds.broken(rating))
    return f"{_limits(count)} BROKEN" if count and not rating.failure else rating.status.upper()


def _limits(count: int) -> str:
    return f"{count} LIMIT{'' if count == 1 else 'S'}"


def _closure(rating: Rating) -> str:
    if rating.failure:
        return f"{counted(len(rating.profiles), 'bed')} rated before the failure"
    parts = [f"atoms {_small(rating.atoms)}", f"energy {_small(rating.energy)}", residual_text(rating.closed)]
    return ", ".join(part for part in parts if part)


def _small(error: float) -> str:
    return f"{error:.0e}" if error else "0"


def _search(outcome: Optimisation) -> list[str]:
    optimum = outcome.optimum
    ended = sum(start.answer >= 0 for start in optimum.starts)
    free = sum(not number.internal for number in outcome.programme.numbers)
    tried = len(optimum.starts)
    starts = f"{ended if ended == tried else f'{ended} of {tried}'} starts ended"
    if not ended:
        starts = f"{counted(tried, 'start')}, none ended inside all limits"
    return [
        f"{starts}, {counted(len(optimum.answers), 'distinct answer')}",
        counted(free, "free number"),
        f"{outcome.seconds:.1f} s",
        f"seed {outcome.seed}",
    ]


def _failure(rating: Rating, width: int) -> list[str]:
    return paragraph(f"NO ANSWER: {rating.failure}", width) if rating.failure else []


def _block(*parts: Sequence[str]) -> list[str]:
    lines = [line for part in parts for line in part]
    return ["", *lines] if lines else []


def _closed(rating: Rating, width: int) -> list[str]:
    """Exchangers and recycles, where there are any."""
    made = (exchanger_table(rating), recycle_table(rating))
    return [line for one in made for line in _block(table_lines(one, width))]


def _more_limits(rating: Rating) -> list[str]:
    total = sum(not state.implied for state in rating.limits)
    count = len(bounds.broken(rating))
    return (
        [f"{total} limits in all, {count} broken; of the others the nearest one per label is shown."]
        if total
        else []
    )


def _money(now: Rating, was: Rating | None, width: int) -> list[str]:
    rows = accounts(now, was)
    if len(rows) < 2 and not any(row.now for row in rows):
        return []
    compared = "" if was is None else " (against today)"
    title = f"MONEY {unit('money rate', now.case.currency)}{compared}"
    return items(title, [row.text for row in rows], width)


def _held(outcome: Optimisation, best: Rating, width: int) -> list[str]:
    optimum = outcome.optimum
    if optimum.conflict is not None:
        return _conflict(optimum, optimum.conflict, best, width)
    held = bounds.at_work(best)
    free = sum(not number.internal for number in outcome.programme.numbers)
    lines = table_lines(bounds.worth_table(optimum, best), width)
    if not lines and held:
        lines = items("LIMITS AT WORK (*)", bounds.together(held), width)
    tail = f"{bounds.count_text(held, free)} {bounds.next_text(best)}" if held else bounds.next_text(best)
    aim = aim_of(best)
    further = [reach_text(optimum, best, aim), pairs_text(optimum.pairs, best, aim, 1)]
    return [
        *lines,
        *paragraph(tail.strip(), width),
        *[line for text in further if text for line in paragraph(text, width, INDENT)],
    ]


def _conflict(optimum: words.Optimum, conflict: words.Conflict, best: Rating, width: int) -> list[str]:
    lines = [f"  {bounds.sentence(best.limits[index], best.case.currency)}" for index, _ in conflict.broken]
    against = bounds.together(best.limits[index] for index in conflict.against)
    held = paragraph(f"  held by: {', '.join(against)}", width, 4) if against else []
    why = [line for text in conflict_text(optimum, best) for line in paragraph(text, width, INDENT)]
    return ["LIMITS THAT CANNOT ALL BE MET", *lines, *held, *why]


def _after_money(outcome: Optimisation, best: Rating, width: int) -> list[str]:
    texts = [sentences.equal_split_text(split, best) for split in outcome.optimum.equal_splits]
    if outcome.optimum.conflict is None:
        texts.append(sentences.margin_text(outcome.optimum, best))
    texts.append(_range_ends(outcome))
    texts += explanation_texts(outcome, best)
    return [line for text in texts if text for line in paragraph(text, width, INDENT)]


def _range_ends(outcome: Optimisation) -> str:
    names = outcome.optimum.best.at_range
    return (
        f"RANGE ENDS   {', '.join(names)}: the search range holds {'this' if len(names) == 1 else 'these'}, "
        "no limit does; widen it."
        if names
        else ""
    )


def _three(outcome: Optimisation, best: Rating) -> list[str]:
    today, optimum = outcome.today, outcome.optimum
    first = _first(outcome, best) if optimum.conflict is None else sentences.give_way(optimum.conflict, best)
    return [
        first,
        sentences.second_answer(outcome.programme, optimum, best, outcome.others),
        *optimum.notes,
        *sentences.warnings(best),
        f"{sentences.today_text(today)} {sentences.caution()}",
    ]


def _first(outcome: Optimisation, best: Rating) -> str:
    """What to change first: the first move where there are moves, else the largest changes."""
    changes = sentences.first_change(outcome.programme, best, outcome.today)
    if outcome.optimum.moves is None:
        return changes
    numbers, aim = outcome.programme.numbers, aim_of(best)
    return first_move_text(outcome.optimum.moves, numbers, outcome.today, aim) or changes


def _numbered(texts: Sequence[str], width: int) -> list[str]:
    present = [text for text in texts if text]
    return [line for number, text in enumerate(present, 1) for line in paragraph(f"{number} {text}", width)]


def _no_answer(outcome: Optimisation, width: int) -> list[str]:
    """Nothing was found: why, and how each start ended."""
    optimum, today = outcome.optimum, outcome.today
    endings: dict[str, list[str]] = {}
    for start in optimum.starts:
        endings.setdefault(start.ended, []).append(start.name)
    rows = [f"  {', '.join(names)}: {ended}" for ended, names in endings.items()]
    return [
        *spread([today.case.name, optimum.status.upper()], width),
        *_failure(today, width),
        *[line for note in optimum.notes for line in paragraph(note, width)],
        *_block(
            [
                f"HOW {len(optimum.starts)} STARTS ENDED",
                *[line for row in rows for line in paragraph(row, width, 4)],
            ]
        ),
    ]
