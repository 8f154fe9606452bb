"""The plain sentences under the tables: what a plant engineer would say first."""

from __future__ import annotations

import re
from collections.abc import Sequence

from reactorstage.optimiser.programme import Programme
from reactorstage.optimiser.result import Conflict, EqualSplit, Optimum
from reactorstage.optimiser.words import told_apart
from reactorstage.report import bounds
from reactorstage.report.aim import MONEY, aim_of, cost_difference
from reactorstage.report.beds import selectivity
from reactorstage.report.cautions import SHORT
from reactorstage.report.changes import changes, moves_text
from reactorstage.report.display import (
    and_list,
    brief,
    difference,
    difference_kind,
    fixed,
    places,
    readable,
    shown,
    told,
    unit,
    with_unit,
)
from reactorstage.train.closed_result import closure_notes
from reactorstage.train.result import LimitState, Rating

PHRASES = 2
UNLIT = "is practically unlit"
KELVINS = re.compile(r"([0-9.]+) K\b")


def out_line(now: Rating, was: Rating | None = None) -> str:
    """What leaves the train: slip, by-products, selectivity with its basis."""
    parts = [_leaving(now, was, species) for species in dict.fromkeys((now.main_reactant, *now.by_products))]
    kept = [part for part in (*parts, _selectivity(now)) if part]
    return f"out: {', '.join(kept)}" if kept else ""


def _leaving(now: Rating, was: Rating | None, species: str) -> str:
    name = f"effluent.flow of {species}"
    flow, before = (_number(rating, name) if rating else None for rating in (now, was))
    if flow is None:
        return ""
    text = f"{species} {_flow_text(flow)} {unit('molar flow')}"
    return text if before is None else f"{text} (was {_flow_text(before)})"


def _flow_text(flow: float) -> str:
    return readable(shown(flow, "molar flow"))


def _selectivity(rating: Rating) -> str:
    value = selectivity(rating, "train")
    if value is None:
        return ""
    return f"{fixed(value, 1)} mol {rating.product} per 100 mol {rating.main_reactant} converted"


def first_change(programme: Programme, now: Rating, was: Rating) -> str:
    """The biggest moves of free numbers and what all moves together do for money."""
    found = changes(programme.numbers, was.x, now.x)
    if not found:
        return "Today's setting is already the best one found."
    return f"Change first: {moves_text(found, 2)}{_effect(now, was, len(found))}."


def _effect(now: Rating, was: Rating, count: int) -> str:
    """`all changes together: 89.6 EUR/h less than today`; empty where today has no answer."""
    aim, more = aim_of(now), cost_difference(now, was)
    if more is None:
        return ""
    who = "all changes together" if count > 1 else "this"
    if aim.same(more):
        return f"; {who}: the same money as today"
    size = f"{aim.number(abs(more))} {aim.unit}".rstrip()
    if aim.kind == MONEY:
        return f"; {who}: {size} {'less' if more < 0 else 'more'} than today"
    return f"; {who}: {aim.quantity} {'better' if more < 0 else 'worse'} by {size} than today"


def second_answer(programme: Programme, optimum: Optimum, best: Rating, others: Sequence[Rating]) -> str:
    """How the next distinct answer differs and what it costs, or that there is only one."""
    ended = sum(start.answer >= 0 for start in optimum.starts)
    if not others:
        return f"All {ended} starts that ended agree on this answer." if ended > 1 else ""
    other = others[0]
    apart = told_apart(programme, best.x, other.x, number_shown, unit)[:PHRASES]
    more = cost_difference(other, best)
    where = f" ({'; '.join(apart)})" if apart else ""
    cost = "has no value" if more is None else aim_of(best).worse(more)
    rest = f"; {len(others) - 1} more in result.json" if len(others) > 1 else ""
    reached = sum(start.answer == 0 for start in optimum.starts)
    share = f"; {reached} of {len(optimum.starts)} starts reached the best" if optimum.starts else ""
    return f"A second answer{where} {cost}{rest}{share}."


def number_shown(value: float, kind: str) -> float:
    """A number that is there in its display unit."""
    number = shown(value, kind)
    assert number is not None
    return number


def today_text(was: Rating) -> str:
    """Which limits today's setting breaks."""
    states = bounds.broken(was)
    if was.failure:
        return f"Today's setting has no answer: {was.failure}."
    if not states:
        return "Today's setting keeps all limits."
    return f"Today breaks {and_list(bounds.together(states))}."


def give_way(conflict: Conflict, best: Rating) -> str:
    """By how much limits would have to give way for the least-violating answer to be allowed."""
    texts = [_relaxed(best, index, amount).replace("relaxed by", "by") for index, amount in conflict.broken]
    return f"Limits that would have to give way: {and_list(texts)}." if texts else ""


def margin_text(optimum: Optimum, best: Rating) -> str:
    """What the margins of the case cost, or that limits at work carry none."""
    carried = [state for state in best.limits if state.keep_away > 0.0]
    if carried and optimum.keep_away_cost is not None:
        labels = and_list(list(dict.fromkeys(f"{_keep_away(state)} on {state.label}" for state in carried)))
        aim = aim_of(best)
        return f"KEEP AWAY    {labels}: this costs {aim.number(optimum.keep_away_cost)} {aim.unit}."
    bare = list(dict.fromkeys(s.label for s in bounds.at_work(best) if not s.implied and s.keep_away == 0.0))
    if not bare:
        return ""
    further = _step_away(optimum, best)
    return f"KEEP AWAY    none on {and_list(bare)}: instrument error can cross {_it(bare)}{further}."


def _step_away(optimum: Optimum, best: Rating) -> str:
    """What it costs to stay one step further inside every limit; empty where that is not known."""
    aim = aim_of(best)
    if optimum.step_away_cost is None:
        return ""
    steps = list(dict.fromkeys(bounds.step_text(worth) for worth in optimum.worths))
    size = with_unit(aim.number(optimum.step_away_cost), aim.unit)
    return f"; one step ({', '.join(steps)}) away from every limit costs {size}"


def _it(words: Sequence[str]) -> str:
    return "it" if len(words) == 1 else "them"


def _keep_away(state: LimitState) -> str:
    return with_unit(brief(difference(state.keep_away, state.kind)), unit(difference_kind(state.kind)))


def equal_split_text(split: EqualSplit, best: Rating) -> str:
    """What equal shares would cost with everything else re-optimised."""
    head = f"EQUAL SPLIT  of {split.feed}, all else re-optimised"
    if split.penalty is None:
        return f"{head}: {split.note or 'none was found'}."
    aim = aim_of(best)
    base = None if split.cost is None else split.cost - split.penalty
    percent = f" ({100 * abs(split.penalty / base):.1f} %)" if base and not aim.same(split.penalty) else ""
    gives = [_relaxed(best, index, amount) for index, amount in split.relaxed]
    condition = f" even with {and_list(gives)}" if gives else ""
    note = f"; {split.note}" if split.note else ""
    return f"{head}, {aim.worse(split.penalty)}{percent}{condition}{note}."


def _relaxed(best: Rating, index: int, amount: float) -> str:
    state = best.limits[index]
    size = with_unit(brief(difference(amount, state.kind), 3), unit(difference_kind(state.kind)))
    return f"{state.label} ({state.owner}) relaxed by {size}"


def warnings(rating: Rating) -> list[str]:
    """The notes of the rating, but for unpriced heat: the first line and GAPS say that."""
    return [note for note in notes(rating) if "carries no price" not in note]


def notes(rating: Rating) -> list[str]:
    """The notes of the rating in the units that are shown; the train floor writes them in trade units."""
    states = dict(zip(closure_notes(rating.closed), closure_notes(rating.closed, _plainly), strict=True))
    return [_in_shown_unit(rating, states.get(note, note)) for note in rating.notes]


def _plainly(value: float, kind: str) -> str:
    decimals = 0 if kind == "temperature" else places(kind, 2)
    return f"{fixed(shown(value, kind), decimals)} {unit(kind)}"


def _in_shown_unit(rating: Rating, note: str) -> str:
    """A note about an unlit bed tells its rise; the train floor writes it in K."""
    head, found, tail = note.partition(UNLIT)
    kind = "temperature difference"
    if not found or unit(kind) == "K":
        return note
    return head + found + KELVINS.sub(lambda size: told(float(size[1]), kind), tail)


def _number(rating: Rating, name: str) -> float | None:
    value = rating.quantities.get(name)
    return None if value is None else value.value


def caution() -> str:
    """The caution of every output that carries temperatures."""
    return SHORT
