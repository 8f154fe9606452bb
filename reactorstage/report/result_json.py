"""result.json: everything a run found, in display units, never NaN, byte-equal for equal input.

What depends on the clock stands apart under `times`. Numbers carry 12 significant digits.
"""

from __future__ import annotations

import json
import math
import platform
from collections.abc import Mapping, Sequence
from importlib import metadata
from typing import TYPE_CHECKING, Any

from reactorstage import __version__
from reactorstage.optimiser.programme import FreeNumber, Programme
from reactorstage.optimiser.result import Answer, EqualSplit, Optimum, StartRecord, Worth
from reactorstage.report.aim import Aim, aim_of
from reactorstage.report.cautions import FULL
from reactorstage.report.closures import closures_json
from reactorstage.report.display import difference, difference_kind, in_units, money, shown, unit
from reactorstage.report.explained_json import explanation_json, reach_json
from reactorstage.report.unit_sets import TRADE
from reactorstage.train.influence import Influence
from reactorstage.train.result import HeatSale, LimitState, Rating, Value

if TYPE_CHECKING:
    from reactorstage.case.model import Case

SCHEMA_VERSION = 2
LIBRARIES = ("numpy", "scipy", "numba", "cantera")
SIGNIFICANT = 12
LINE = 120

Json = dict[str, Any]


@in_units(TRADE)
def rating_json(rating: Rating, overrides: Sequence[str] = ()) -> Json:
    """The content of result.json for `rate`."""
    return {
        **_head("rating", rating, overrides),
        "status": rating.status,
        "failure": rating.failure or None,
        **_setting(rating),
        "solver": _rating_work(rating),
        "notes": list(rating.notes),
        "cautions": list(FULL),
    }


@in_units(TRADE)
def optimum_json(
    programme: Programme,
    optimum: Optimum,
    today: Rating,
    best: Rating | None,
    others: Sequence[Rating],
    seed: int,
    overrides: Sequence[str] = (),
    influences: Sequence[Influence] = (),
) -> Json:
    """The content of result.json for `optimise`: the best answer first, today's setting beside it."""
    main = best if best is not None else today
    aim = aim_of(main)
    return {
        **_head("optimum", main, overrides),
        "seed": seed,
        "status": optimum.status,
        "failure": main.failure or None,
        "decisions": _decisions(programme.numbers, today, best),
        **(_setting(best) if best is not None else {}),
        "worths": [_worth(programme, worth, aim, main.case.currency) for worth in optimum.worths],
        "equal splits": [_equal_split(programme, split, aim) for split in optimum.equal_splits],
        "aim": {"direction": main.case.aim.direction, "of": aim.quantity, "unit of differences": aim.unit},
        "keep away costs": aim.size(optimum.keep_away_cost),
        "conflict": _conflict(programme, optimum),
        **explanation_json(programme, optimum, influences, aim, main.case.currency),
        "answers": [_answer(programme, answer, aim) for answer in optimum.answers],
        "other answers": [_setting(rating) for rating in others],
        "today": {"status": today.status, "failure": today.failure or None, **_setting(today)},
        "starts": [_start(start, aim) for start in optimum.starts],
        "solver": {
            "evaluations": optimum.evaluations,
            "discretisation error": aim.size(optimum.discretisation_error),
            **_rating_work(main),
        },
        "notes": [*optimum.notes, *main.notes],
        "cautions": list(FULL),
    }


def as_text(content: Mapping[str, Any], seconds: float | None = None) -> str:
    """JSON text with rounded numbers; `times` comes last and alone depends on the clock."""
    times = {} if seconds is None else {"times": {"calculation": {"value": round(seconds, 4), "unit": "s"}}}
    return _text(_clean({**content, **times})) + "\n"


def plain_content(content: Mapping[str, Any]) -> Json:
    """The content as its file would give it back: rounded, without what is not finite."""
    return {str(key): _clean(value) for key, value in content.items()}


def _text(item: Any, indent: str = "") -> str:
    """JSON with small groups on one line, so that people can read and compare it."""
    flat = json.dumps(item, ensure_ascii=False, allow_nan=False)
    if not isinstance(item, (dict, list)) or not item or (len(indent) + len(flat) <= LINE and _small(item)):
        return flat
    inner = indent + "  "
    if isinstance(item, dict):
        rows = [
            f"{inner}{json.dumps(key, ensure_ascii=False)}: {_text(value, inner)}"
            for key, value in item.items()
        ]
        return "{\n" + ",\n".join(rows) + f"\n{indent}}}"
    return "[\n" + ",\n".join(inner + _text(value, inner) for value in item) + f"\n{indent}]"


def _small(item: dict[str, Any] | list[Any]) -> bool:
    values = item.values() if isinstance(item, dict) else item
    return not any(isinstance(value, (dict, list)) and value for value in values)


def _clean(item: Any) -> Any:
    if isinstance(item, Mapping):
        return {str(key): _clean(value) for key, value in item.items()}
    if isinstance(item, (list, tuple)):
        return [_clean(value) for value in item]
    if isinstance(item, float):
        return rounded(item)
    return item


def rounded(value: float) -> float | None:
    """12 significant digits; None for what is not finite."""
    return float(f"{value:.{SIGNIFICANT}g}") + 0.0 if math.isfinite(value) else None


def _head(what: str, rating: Rating, overrides: Sequence[str]) -> Json:
    return {
        "schema version": SCHEMA_VERSION,
        "result": what,
        "case": case_json(rating.case, overrides),
        "train": train_json(rating),
        "versions": versions(),
    }


def train_json(rating: Rating) -> Json:
    """What a train is: beds, steps, species, reactions, feeds, aim, currency; like ones can be compared."""
    steps: dict[str, list[str]] = {}
    for section in rating.case.train:
        if section.bed is None:
            steps[section.owner] = [" ".join(filter(None, (one.kind, one.feed))) for one in section.steps]
    return {
        "beds": [section.owner for section in rating.case.train if section.bed is not None],
        "steps": steps,
        "species": list(rating.species),
        "reactions": list(rating.reactions),
        "by-products": list(rating.by_products),
        "feeds": list(rating.case.feeds),
        "aim": f"{rating.case.aim.direction} {rating.case.aim.quantity}",
        "currency": rating.case.currency,
    }


def case_json(case: Case, overrides: Sequence[str]) -> Json:
    """Which case, as resolved, with what was set on the command line."""
    return {"name": case.name, "hash": case.hash, "set": list(overrides)}


def versions() -> dict[str, str]:
    """Versions of this package, Python and the libraries that numbers come from."""
    own = {"reactorstage": __version__, "python": platform.python_version()}
    return own | {name: _version(name) for name in LIBRARIES}


def _version(name: str) -> str:
    try:
        return metadata.version(name)
    except metadata.PackageNotFoundError:
        return "not installed"


def _setting(rating: Rating) -> Json:
    currency = rating.case.currency
    return {
        "quantities": {name: _value(value, currency) for name, value in rating.quantities.items()},
        "limits": [_limit(state, currency) for state in rating.limits],
        "money": {
            "unit": unit("money rate", currency),
            "per label": {label: money(value) for label, value in rating.money.items()},
        },
        "heat": [_sale(sale, currency) for sale in rating.heat],
        "unpriced heat": list(rating.unpriced),
        "closure": {"atoms": rating.atoms, "energy": rating.energy},
        **({"closures": closures_json(rating.closed)} if rating.closed else {}),
    }


def _value(value: Value, currency: str) -> Json:
    number = shown(value.value, value.kind)
    finite = number is not None and math.isfinite(number)
    reason = {} if finite else {"reason": value.reason or "not a finite number"}
    return {"value": number if finite else None, "unit": unit(value.kind, currency), **reason}


def _limit(state: LimitState, currency: str) -> Json:
    return {
        "limit": state.label,
        "of": state.quantity,
        "direction": state.direction,
        "allowed": shown(state.bound, state.kind),
        "value": shown(state.value, state.kind),
        "unit": unit(state.kind, currency),
        "margin": difference(state.margin, state.kind),
        "keep away": difference(state.keep_away, state.kind),
        "margin unit": unit(difference_kind(state.kind), currency),
        "state": _state_word(state),
        "soft": state.soft,
        "implied": state.implied,
        "why": state.why,
        **({"reason": state.reason} if state.reason else {}),
    }


def _state_word(state: LimitState) -> str:
    if not state.met:
        return "beyond at its price" if state.soft else "broken"
    return "at work" if state.at_work else "inside"


def _sale(sale: HeatSale, currency: str) -> Json:
    return {
        "place": sale.owner,
        "level": sale.level,
        "direction": "from level" if sale.heating else "to level",
        "heat": shown(sale.heat, "power"),
        "unit": unit("power"),
        "money": money(sale.money),
        "money unit": unit("money rate", currency),
    }


def _rating_work(rating: Rating) -> Json:
    return {"integration steps": rating.integration_steps, "right-hand sides": rating.right_hand_sides}


def _decisions(numbers: Sequence[FreeNumber], today: Rating, best: Rating | None) -> Json:
    return {
        number.name: {
            "now": None if best is None else shown(float(best.x[index]), number.kind),
            "was": shown(float(today.x[index]), number.kind),
            "unit": unit(number.kind),
            "from": shown(number.low, number.kind),
            "to": shown(number.high, number.kind),
        }
        for index, number in enumerate(numbers)
        if not number.internal
    }


def _worth(programme: Programme, worth: Worth, aim: Aim, currency: str) -> Json:
    return {
        "limit": worth.label,
        "owners": list(worth.owners),
        "step": difference(worth.step, worth.kind),
        "unit": unit(difference_kind(worth.kind), currency),
        "relaxing saves": aim.size(worth.saves),
        "tightening costs": aim.size(worth.costs),
        "saving unit": aim.unit,
        "moves": [programme.limits[index].name for index in worth.limits],
        "reach": None if worth.reach is None else reach_json(programme, worth.reach, worth.kind, aim),
        **({"note": worth.note} if worth.note else {}),
    }


def _equal_split(programme: Programme, split: EqualSplit, aim: Aim) -> Json:
    return {
        "feed": split.feed,
        "costs more": aim.size(split.penalty),
        "unit": aim.unit,
        "relaxed": [_moved(programme, index, amount) for index, amount in split.relaxed],
        **({"note": split.note} if split.note else {}),
    }


def _moved(programme: Programme, index: int, amount: float) -> Json:
    row = programme.limits[index]
    kind = difference_kind(row.kind)
    return {"limit": row.name, "by": shown(amount, kind), "unit": unit(kind)}


def _conflict(programme: Programme, optimum: Optimum) -> Json | None:
    if optimum.conflict is None:
        return None
    return {
        "broken": [_moved(programme, index, amount) for index, amount in optimum.conflict.broken],
        "held by": [programme.limits[index].name for index in optimum.conflict.against],
    }


def _answer(programme: Programme, answer: Answer, aim: Aim) -> Json:
    return {
        "aim": aim.value(answer.cost),
        "violation": answer.violation,
        "optimality residual": answer.residual,
        "starts": answer.starts,
        "numbers": {
            number.name: {"value": shown(float(answer.x[index]), number.kind), "unit": unit(number.kind)}
            for index, number in enumerate(programme.numbers)
            if not number.internal
        },
        "smallest curvature": aim.size(answer.curvature),
        "limits at work": [programme.limits[index].name for index in answer.at_work],
        "at an end of its range": list(answer.at_range),
    }


def _start(start: StartRecord, aim: Aim) -> Json:
    return {
        "start": start.name,
        "ended": start.ended,
        "aim": aim.value(start.cost),
        "answer": start.answer if start.answer >= 0 else None,
        "iterations": start.iterations,
        "evaluations": start.evaluations,
    }
