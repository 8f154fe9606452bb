"""Half a page: inside the limits or not, what costs money, what to change first, what to worry about."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

from reactorstage.optimiser.result import CANNOT, INSIDE, NO_ANSWER
from reactorstage.report import bounds, sentences
from reactorstage.report.accounts import accounts
from reactorstage.report.aim import MONEY, aim_of, cost_difference
from reactorstage.report.cautions import SHORT
from reactorstage.report.changes import spoken
from reactorstage.report.display import and_list, counted, difference_kind, fixed, readable, shown, told, unit
from reactorstage.report.moves import first_move_text
from reactorstage.report.page.parts import Facts, Section
from reactorstage.report.page.said import said
from reactorstage.report.page.subject import Search, Subject
from reactorstage.report.phase import near_a_boundary
from reactorstage.report.reach import conflict_text
from reactorstage.report.worths import WorthBar, worth_bars
from reactorstage.train.result import LimitState, Rating

MOST_WORTHS = 3
MOST_BROKEN = 6


def summary(subject: Subject) -> Section:
    """The answers to what a reader asks first."""
    return Section("summary", "Summary", (Facts(tuple(summary_facts(subject)), loud=True),))


def summary_facts(subject: Subject) -> list[tuple[str, tuple[str, ...]]]:
    """Questions with their answers, those without one left out."""
    money = aim_of(subject.now).kind == MONEY
    facts = (
        ("Inside its limits?", tuple(inside(subject))),
        ("What does it cost?" if money else "What does it achieve?", tuple(cost(subject))),
        ("Which limits cost money?" if money else "Which limits hold it back?", tuple(dear_limits(subject))),
        ("What to change first?", tuple(first(subject))),
        ("What to worry about?", tuple(worries(subject))),
    )
    return [fact for fact in facts if fact[1]]


def inside(subject: Subject) -> list[str]:
    """Yes or no, and by which limits."""
    now = subject.now
    if now.failure:
        return [f"There is no answer: {now.failure}."]
    broken, held = bounds.broken(now), bounds.at_work(now)
    texts = []
    if broken:
        texts += broken_limits(subject, broken)
    else:
        count = sum(not state.implied for state in now.limits)
        texts.append(f"Yes, all {counted(count, 'limit')} hold." if count else "The case states no limits.")
    if held:
        texts.append(f"It stands right on {and_list(bounds.together(held))}.")
    softly = [state for state in now.limits if state.soft and not state.met]
    if softly:
        texts.append(f"Beyond a soft limit, at its price: {and_list(bounds.together(softly))}.")
    near = [bounds.sentence(state, subject.currency) for state in bounds.next_ones(now)]
    return [*texts, *([f"Nearest of the others: {'; '.join(near)}."] if near else [])]


def broken_limits(subject: Subject, broken: Sequence[LimitState]) -> list[str]:
    """How many limits are broken, then each in a line of its own."""
    cannot = subject.search is not None and subject.search.optimum.status == CANNOT
    head = "No, and no setting found meets them all. This one breaks least" if cannot else "No. Broken"
    lines = [f"{bounds.sentence(state, subject.currency)}." for state in broken[:MOST_BROKEN]]
    rest = len(broken) - MOST_BROKEN
    return [
        f"{head}: {counted(len(broken), 'limit')}.",
        *lines,
        *([f"And {rest} more below."] if rest > 0 else []),
    ]


def cost(subject: Subject) -> list[str]:
    """The aim in money or in its own unit, against today."""
    now, aim = subject.now, aim_of(subject.now)
    value = now.quantities.get(aim.quantity)
    if value is None or value.value is None:
        return []
    direction = now.case.aim.direction
    if aim.kind == MONEY:
        size = f"{fixed(shown(value.value, value.kind), 1)} {unit(value.kind, subject.currency)}"
        text = f"{size} in all (cost positive)"
    else:
        text = f"{aim.quantity} is {told(value.value, value.kind, subject.currency)} (the aim: {direction})"
    more = None if subject.behind is None else cost_difference(now, subject.behind)
    if more is not None and not aim.same(more):
        size = f"{aim.number(abs(more))} {aim.unit}".rstrip()
        better, worse = ("less", "more") if aim.kind == MONEY else ("better", "worse")
        text += f": {size} {better if more < 0 else worse} than today"
    parts = [row.text for row in accounts(now, subject.behind)][:-1]
    brackets = " (in brackets: change against today)" if subject.behind is not None else ""
    return [f"{text}.", *([f"Made of: {', '.join(parts)}{brackets}."] if len(parts) > 1 else [])]


def dear_limits(subject: Subject) -> list[str]:
    """The limits at work that matter most, with their worth in words."""
    if subject.search is None:
        return ["A rating cannot tell; optimising the case finds what each limit is worth."]
    aim = aim_of(subject.now)
    bars = worth_bars(subject.search.optimum, subject.now)
    if not bars:
        return ["None that could be found."] if subject.search.optimum.status == INSIDE else []
    return [worth_sentence(bar, aim.unit, aim.kind == MONEY) for bar in bars[:MOST_WORTHS]]


def worth_sentence(bar: WorthBar, money: str, in_money: bool) -> str:
    """`light-off, beds 1-4: 1 K more freedom saves 3.7 EUR/h, 1 K less costs 4.7 EUR/h.`"""
    number = partial(fixed, decimals=1) if in_money else readable
    verb = "saves" if in_money else "brings"
    saves = "could not be solved" if bar.saves is None else f"{verb} {number(bar.saves)} {money}"
    saves += f" and goes on paying for {bar.pays_for}" if bar.pays_for else ""
    costs = (
        "leaves no setting inside the limits" if bar.costs is None else f"costs {number(bar.costs)} {money}"
    )
    return f"{bar.name}: {bar.step} more freedom {saves}, {bar.step} less {costs}."


def first(subject: Subject) -> list[str]:
    """The first move from today with what the others bring, what would have to give, what a rating breaks."""
    search = subject.search
    if search is None:
        broken = bounds.broken(subject.now)
        return [f"Bring back inside: {and_list(bounds.together(broken))}."] if broken else []
    if search.optimum.conflict is not None:
        enough = [said(text) for text in conflict_text(search.optimum, subject.now)]
        return enough or [sentences.give_way(search.optimum.conflict, subject.now)]
    if subject.today is None:
        return (
            ["No setting was found; see how the starts ended."] if search.optimum.status == NO_ANSWER else []
        )
    return [*moves_texts(subject, search, subject.today), sentences.today_text(subject.today)]


def moves_texts(subject: Subject, search: Search, today: Rating) -> list[str]:
    """What to enter first, else the largest changes from today."""
    moves, numbers = search.optimum.moves, search.programme.numbers
    text = ""
    if moves is not None:
        text = first_move_text(moves, numbers, today, aim_of(subject.now), "listed below")
    if text:
        return [text]
    why = (
        [f"There are no moves that can be entered: {moves.note}."] if moves is not None and moves.note else []
    )
    change = sentences.first_change(search.programme, subject.now, today).removeprefix("Change first: ")
    return [change[:1].upper() + change[1:], *why]


def worries(subject: Subject) -> list[str]:
    """States, unlit beds, validity, second phases, range ends, other answers, margins, heat, the caution."""
    warned = subject.seen.warnings
    notes = [one for one in sentences.notes(subject.now) if not _said_by(one, warned)]
    texts = [*notes, near_a_boundary(subject.now)]
    if subject.search is not None:
        texts += search_worries(subject, subject.search)
    texts += [hottest(subject.now), *warned, SHORT]
    return [text for text in texts if text]


def _said_by(note: str, others: Sequence[str]) -> bool:
    """Whether another text begins with what a note says."""
    return any(other.startswith(note.rstrip(".")) for other in others)


def search_worries(subject: Subject, search: Search) -> list[str]:
    """What the search leaves open."""
    texts = [f"{note[:1].upper()}{note[1:].rstrip('.')}." for note in search.optimum.notes]
    if search.optimum.conflict is None and search.optimum.answers:
        texts += [range_end(name) for name in search.optimum.best.at_range]
        texts.append(said(sentences.margin_text(search.optimum, subject.now)))
    if search.others:
        texts.append(
            sentences.second_answer(search.programme, search.optimum, subject.now, search.others).replace(
                "more in result.json", "more below"
            )
        )
    ended = sum(start.answer >= 0 for start in search.optimum.starts)
    if ended < len(search.optimum.starts) and ended:
        texts.append(f"{ended} of {counted(len(search.optimum.starts), 'start')} ended at an answer.")
    return texts


def range_end(name: str) -> str:
    """That a number is held by its search range alone."""
    return f"At an end of its search range, where no limit holds it: {spoken(name)}; widen the range."


def hottest(rating: Rating) -> str:
    """The hottest place against the design temperature, where the case gives one."""
    design = {s.owner: s.bed.design_temperature for s in rating.case.train if s.bed is not None}
    rated = [profile for profile in rating.profiles if design.get(profile.owner) is not None]
    if not rated:
        return ""
    hot = min(rated, key=lambda profile: (design[profile.owner] or 0.0) - profile.T_peak)
    limit = design[hot.owner] or 0.0
    kind = difference_kind("temperature")
    room = f"{fixed(shown(limit - hot.T_peak, kind), 0)} {unit(kind)}"
    return (
        f"Nearest to its design temperature in steady state: {hot.owner}, {told(hot.T_peak, 'temperature')}, "
        f"{room} below {told(limit, 'temperature')}; upsets are not in this."
    )
