"""Two settings of like trains side by side: limits broken, the cost in its terms, what changed where.

Works on the content of result files, so that a rating made now and one read from a file are the same.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from reactorstage.errors import CallError
from reactorstage.report.accounts import HEAT_OF, SUBTOTALS, TOTAL
from reactorstage.report.display import and_list

Json = Mapping[str, Any]

MUST_AGREE = ("beds", "species", "feeds", "currency", "aim")
SMALL = 1e-9
INPUTS = ("inlet temperature", "catalyst", "catalyst activity", "pressure drop factor")
OWNERS = ("entry", "bed ", "gap ", "effluent")


@dataclass(frozen=True)
class Difference:
    """One quantity in both: values in display units, None where it does not exist."""

    name: str
    unit: str
    first: float | None
    second: float | None

    @property
    def change(self) -> float | None:
        """second minus first."""
        return None if self.first is None or self.second is None else self.second - self.first


@dataclass(frozen=True)
class LimitDifference:
    """One limit in both: allowed values, values and state words (`broken`, `at work`, `inside`)."""

    name: str
    unit: str
    direction: str
    allowed: tuple[float | None, float | None]
    values: tuple[float | None, float | None]
    states: tuple[str, str]


@dataclass(frozen=True)
class Comparison:
    """names of what is compared; differences as second minus first.

    decisions are the free numbers (or, without them, inputs) that differ, money each label, quantities
    everything that differs by more than rounding, limits those that are broken or at work in either, or
    that allow something else; broken holds how many limits each breaks. aim is the quantity aimed at and
    notes say what else is unlike.
    """

    names: tuple[str, str]
    statuses: tuple[str, str]
    broken: tuple[int, int]
    aim: Difference
    direction: str
    money_unit: str
    money: tuple[Difference, ...]
    decisions: tuple[Difference, ...]
    quantities: tuple[Difference, ...]
    limits: tuple[LimitDifference, ...]
    notes: tuple[str, ...] = ()

    @property
    def worse(self) -> float | None:
        """How much worse the second is than the first in what is aimed at; negative: better."""
        change = self.aim.change
        return change if change is None or self.direction == "least" else -change


def compared(first: Json, second: Json, names: tuple[str, str]) -> Comparison:
    """Compare two results; raises CallError where the trains are unlike, with what differs."""
    refuse_unlike(first, second, names)
    direction, _, aim = str(first["train"]["aim"]).partition(" ")
    quantities = differences(first["quantities"], second["quantities"])
    return Comparison(
        names=names,
        statuses=(first["status"], second["status"]),
        broken=(count_broken(first), count_broken(second)),
        aim=difference_of(first["quantities"], second["quantities"], aim),
        direction=direction,
        money_unit=first["money"]["unit"],
        money=money_differences(first["money"], second["money"]),
        decisions=decisions(first, second, quantities),
        quantities=quantities,
        limits=limit_differences(first["limits"], second["limits"]),
        notes=tuple(unlike_notes(first, second)),
    )


def refuse_unlike(first: Json, second: Json, names: tuple[str, str]) -> None:
    """Raise CallError when the trains cannot be compared."""
    unlike = [text for key in MUST_AGREE if (text := unlike_text(first["train"], second["train"], key))]
    if unlike:
        raise CallError(
            f"{names[0]} and {names[1]} cannot be compared, for these are unlike trains: {'; '.join(unlike)}"
        )


def unlike_text(first: Json, second: Json, key: str) -> str:
    """`beds: 4 against 2`, `species: ethane only in the first`; empty when they agree."""
    one, other = first.get(key), second.get(key)
    if key == "beds" and isinstance(one, list) and isinstance(other, list) and len(one) != len(other):
        return f"{len(one)} beds against {len(other)}"
    if isinstance(one, list) and isinstance(other, list):
        if sorted(map(str, one)) == sorted(map(str, other)):
            return ""
        parts = [
            f"{and_list([str(name) for name in mine if name not in theirs])} only in the {which}"
            for mine, theirs, which in ((one, other, "first"), (other, one, "second"))
            if any(name not in theirs for name in mine)
        ]
        return f"{key}: {', '.join(parts)}"
    return "" if one == other else f"{key}: {one} against {other}"


def unlike_notes(first: Json, second: Json) -> list[str]:
    """What may differ between comparable trains: reactions and the steps of entry, gaps and effluent."""
    notes = []
    text = unlike_text(first["train"], second["train"], "reactions")
    if text:
        notes.append(f"The networks differ in {text}.")
    ones, others = first["train"].get("steps", {}), second["train"].get("steps", {})
    for place in dict.fromkeys([*ones, *others]):
        if ones.get(place) != others.get(place):
            notes.append(
                f"{place.capitalize()} is {_steps(ones.get(place))} in the first, "
                f"{_steps(others.get(place))} in the second."
            )
    return notes


def _steps(steps: Sequence[str] | None) -> str:
    return ", ".join(steps) if steps else "empty"


def count_broken(content: Json) -> int:
    """Limits that a result breaks."""
    return sum(limit["state"] == "broken" for limit in content["limits"])


def difference_of(first: Json, second: Json, name: str) -> Difference:
    """One quantity of both by its name."""
    one, other = first.get(name, {}), second.get(name, {})
    return Difference(name, str(one.get("unit", other.get("unit", ""))), one.get("value"), other.get("value"))


def differences(first: Json, second: Json) -> tuple[Difference, ...]:
    """Every quantity whose values differ by more than rounding, in the order of the first."""
    names = dict.fromkeys([*first, *second])
    return tuple(one for one in (difference_of(first, second, name) for name in names) if differs(one))


def differs(one: Difference) -> bool:
    """Whether two values differ by more than rounding."""
    if one.first is None or one.second is None:
        return one.first is not one.second
    return abs(one.second - one.first) > SMALL * max(abs(one.first), abs(one.second), 1e-6)


def money_differences(first: Json, second: Json) -> tuple[Difference, ...]:
    """Each label with the heat of each place, the total last; labels of only one count as nothing there."""
    ones, others = first["per label"], second["per label"]
    labels = [label for label in dict.fromkeys([*ones, *others]) if label not in SUBTOTALS]
    rows = [
        Difference(_account(label), first["unit"], ones.get(label, 0.0), others.get(label, 0.0))
        for label in labels
    ]
    return tuple(sorted(rows, key=lambda row: row.name == TOTAL))


def _account(label: str) -> str:
    place = label.removeprefix(HEAT_OF)
    return label if place == label else f"{place} heat"


def decisions(first: Json, second: Json, changed: Sequence[Difference]) -> tuple[Difference, ...]:
    """Free numbers of either result and other inputs whose values differ."""
    free = {*first.get("decisions", {}), *second.get("decisions", {})}
    return tuple(one for one in changed if one.name in free or is_input(one.name))


def is_input(name: str) -> bool:
    """Whether a quantity is one that somebody sets, as a rule."""
    owner, _, word = name.partition(".")
    if owner.startswith("bed "):
        return word.startswith("injected ") or word in INPUTS
    return owner.startswith("feed ")


def limit_differences(first: Sequence[Json], second: Sequence[Json]) -> tuple[LimitDifference, ...]:
    """Limits that are not simply inside in both, broken ones first."""
    ones, others = ({_key(limit): limit for limit in limits} for limits in (first, second))
    rows = []
    for key in dict.fromkeys([*ones, *others]):
        one, other = ones.get(key), others.get(key)
        row = LimitDifference(
            name=f"{key[0]}, {str(key[1]).partition('.')[0]}",
            unit=str((one or other or {})["unit"]),
            direction=str(key[2]),
            allowed=(_of(one, "allowed"), _of(other, "allowed")),
            values=(_of(one, "value"), _of(other, "value")),
            states=(one["state"] if one else "no limit", other["state"] if other else "no limit"),
        )
        listed = (one or other or {}).get("of") not in ("", None) and key[0] != "heat ladder"
        if listed and (set(row.states) != {"inside"} or row.allowed[0] != row.allowed[1]):
            rows.append(row)
    return tuple(sorted(rows, key=lambda row: "broken" not in row.states))


def _key(limit: Json) -> tuple[str, str, str]:
    return limit["limit"], limit["of"], limit["direction"]


def _of(limit: Json | None, key: str) -> float | None:
    return None if limit is None else limit[key]


def of_owner(one: Difference) -> str:
    """The bed, gap, entry or effluent of a quantity; empty for others."""
    owner = one.name.partition(".")[0]
    return owner if owner.startswith(OWNERS) else ""
