"""The explanation of an answer as JSON: reach, pairs, flatness, moves, conflict sets, influences."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from reactorstage.optimiser.programme import FreeNumber, Programme
from reactorstage.optimiser.reasons import ConflictSet, Flatness, FlatNumber, Moves, Pair, Reach, Suffices
from reactorstage.optimiser.result import Optimum
from reactorstage.report.aim import Aim
from reactorstage.report.certificate import certificate
from reactorstage.report.display import difference, difference_kind, shown, unit
from reactorstage.train.influence import Influence

Json = dict[str, Any]


def explanation_json(
    programme: Programme, optimum: Optimum, influences: Sequence[Influence], aim: Aim, currency: str
) -> Json:
    """All parts of the explanation that a result holds beyond its worths and equal splits."""
    return {
        "certificate": _certificate(optimum, aim) if optimum.answers else None,
        "step away costs": aim.size(optimum.step_away_cost),
        "pairs": [_pair(programme, pair, aim) for pair in optimum.pairs],
        "flatness": None if optimum.flatness is None else _flatness(optimum.flatness, aim),
        "moves": None if optimum.moves is None else moves_json(programme, optimum.moves, aim),
        "smallest conflict": None
        if optimum.conflict_set is None
        else _conflict_set(programme, optimum.conflict_set),
        "influences": [_influence(one, aim, currency) for one in influences],
    }


def _certificate(optimum: Optimum, aim: Aim) -> Json:
    found = certificate(optimum)
    return {
        "starts": found.starts,
        "reached the best": found.reached,
        "distinct answers": found.answers,
        "optimality residual": found.residual,
        "smallest curvature": aim.size(found.curvature),
        "corner": found.curvature is None,
        "discretisation error": aim.size(found.error),
    }


def reach_json(programme: Programme, reach: Reach, kind: str, aim: Aim) -> Json:
    """How far a worth holds; amounts in the unit of the worth."""
    return {
        "holds for": difference(reach.holds, kind),
        "saving there": aim.size(reach.saved),
        "then hold": [programme.limits[k].name for k in reach.takes_over],
        "then at an end of its range": list(reach.takes_over_range),
        "lets go after": difference(reach.lets_go, kind),
        "saving in all": aim.size(reach.saved_in_all),
    }


def _pair(programme: Programme, pair: Pair, aim: Aim) -> Json:
    return {
        "limits": [programme.limits[k].name for k in pair.limits],
        "together": aim.size(pair.together),
        "alone": [aim.size(cost) for cost in pair.alone],
        "unit": aim.unit,
    }


def _flatness(flat: Flatness, aim: Aim) -> Json:
    return {
        "within": aim.size(flat.band),
        "unit": aim.unit,
        "numbers": {row.name: _flat_number(row, aim) for row in flat.numbers},
        "left alone": list(flat.left_alone),
        "left alone costs": aim.size(flat.left_costs),
    }


def _flat_number(row: FlatNumber, aim: Aim) -> Json:
    return {
        "best": shown(row.best, row.kind),
        "today": shown(row.today, row.kind),
        "spans": [[shown(end, row.kind) for end in span] for span in row.spans],
        "unit": unit(row.kind),
        "staying as today costs": aim.size(row.staying),
    }


def moves_json(programme: Programme, moves: Moves, aim: Aim) -> Json:
    """The moves from today's setting with what to enter and what each gains."""
    return {
        "aim today": aim.value(moves.start),
        "aim at the end": aim.value(moves.cost),
        "gain": aim.size(moves.gain),
        "unit": aim.unit,
        "moves": [
            {
                "enter": _values(programme.numbers, move.numbers, move.values),
                "gain": aim.size(move.gain),
                "aim then": aim.value(move.cost),
                "brings inside": [programme.limits[k].name for k in move.mends],
            }
            for move in moves.moves
        ],
        "not worth moving": [programme.numbers[k].name for k in moves.dropped],
        "broken today": [programme.limits[k].name for k in moves.broken],
        **({"note": moves.note} if moves.note else {}),
    }


def _values(numbers: Sequence[FreeNumber], places: Sequence[int], values: Sequence[float]) -> Json:
    return {
        numbers[k].name: {"value": shown(value, numbers[k].kind), "unit": unit(numbers[k].kind)}
        for k, value in zip(places, values, strict=True)
    }


def _conflict_set(programme: Programme, held: ConflictSet) -> Json:
    return {
        "limits": [programme.limits[k].name for k in held.limits],
        "searches": held.starts,
        "enough alone": [_suffices(programme, one) for one in held.suffices],
    }


def _suffices(programme: Programme, one: Suffices) -> Json:
    kind = difference_kind(programme.limits[one.limits[0]].kind)
    return {
        "limits": [programme.limits[k].name for k in one.limits],
        "by": shown(one.amount, kind),
        "unit": unit(kind),
        **(
            {} if one.amount is not None else {"reason": "no relaxation of this alone was found to be enough"}
        ),
    }


def _influence(one: Influence, aim: Aim, currency: str) -> Json:
    kind = difference_kind(one.kind)
    step = (
        {"part": one.step if one.kind == "fraction" else 0.01}
        if one.relative
        else {
            "step": shown(one.step, kind),
            "unit": unit(kind, currency),
        }
    )
    return {"parameter": one.name, **step, "best changes by": aim.size(one.change)}
