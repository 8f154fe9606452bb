"""How a number of the case file is declared: its kinds, bounds, and what is made of its text.

An annotation of this module on a model's field gives the check, the SI value and the JSON Schema at once.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationError
from pydantic_core import CoreSchema, InitErrorDetails, PydanticCustomError, core_schema

from reactorstage.case import units
from reactorstage.case.marks import UNREADABLE
from reactorstage.case.units import KINDS, UnitProblem, shown

OWN_ERROR = "case"


@dataclass(frozen=True)
class Number:
    """A number in SI units of `kind`; free within low..high when both are given."""

    now: float
    low: float | None = None
    high: float | None = None
    kind: str = "number"

    @property
    def free(self) -> bool:
        return self.low is not None and self.high is not None


@dataclass(frozen=True)
class Activities(Number):
    """A number that holds for every reaction but those in `each`, which have their own."""

    each: Mapping[str, Number] = field(default_factory=dict)


@dataclass(frozen=True)
class Raw:
    """A number with unit whose kind is known only later; see `units.to_si`."""

    text: str


@dataclass(frozen=True)
class Finding:
    """Something wrong at a path below the value that is being read."""

    path: tuple[str | int, ...]
    message: str
    hint: str = ""
    on_key: bool = False


def problem(message: str, hint: str = "", on_key: bool = False) -> PydanticCustomError:
    """An error of ours in the form that pydantic carries to the top."""
    return PydanticCustomError(OWN_ERROR, "{message}", {"message": message, "hint": hint, "on_key": on_key})


def raise_all(findings: Sequence[Finding]) -> None:
    """Raise one error that carries every finding with its path; nothing when there is none."""
    if findings:
        raise ValidationError.from_exception_data(
            "value",
            [
                InitErrorDetails(type=problem(f.message, f.hint, f.on_key), loc=f.path, input=None)
                for f in findings
            ],
        )


def text_of(raw: object, what: str) -> str:
    """The text of a scalar; an error when a list or a mapping stands there."""
    if isinstance(raw, str):
        return raw
    found = "a mapping" if isinstance(raw, Mapping) else "a list" if isinstance(raw, Sequence) else "nothing"
    raise UnitProblem(f"{what} is expected here, not {found}")


class Declared:
    """Base of the annotations: `read` makes the value, `schema` describes the text for editors."""

    def read(self, raw: Any) -> Any:
        raise NotImplementedError

    def schema(self) -> dict[str, Any]:
        raise NotImplementedError

    def _read(self, raw: Any) -> Any:
        try:
            return self.read(raw)
        except UnitProblem as found:
            raise problem(found.message, found.hint) from None

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self._read)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return self.schema()


@dataclass(frozen=True)
class Bounds:
    """Bounds in SI units on a value; `above` and `below` exclude the bound itself."""

    least: float | None = None
    above: float | None = None
    most: float | None = None
    below: float | None = None

    def check(self, value: float, kind: str, text: str) -> None:
        tests: tuple[tuple[float | None, Callable[[float, float], bool], str], ...] = (
            (self.least, lambda v, b: v < b, "is below"),
            (self.above, lambda v, b: v <= b, "is not above"),
            (self.most, lambda v, b: v > b, "is above"),
            (self.below, lambda v, b: v >= b, "is not below"),
        )
        for bound, broken, words in tests:
            if bound is not None and broken(value, bound):
                unit = units.display_unit(kind)
                raise UnitProblem(f"{shown(text)} {words} {units.to_display(bound, kind):g} {unit}".rstrip())


class In(Declared):
    """A number in SI units, read from text with a unit of one of `kinds`, within bounds."""

    def __init__(self, *kinds: str, **bounds: float):
        self.kinds, self.bounds = kinds, Bounds(**bounds)

    def read(self, raw: Any) -> float:
        return math.nan if raw is UNREADABLE else self.value(raw)[0]

    def value(self, raw: Any) -> tuple[float, str]:
        text = text_of(raw, self.words())
        value, kind = units.to_si_of(text, self.kinds)
        self.bounds.check(value, kind, text)
        return value, kind

    def words(self) -> str:
        return " or ".join(units.named(KINDS[kind]) for kind in self.kinds)

    def schema(self) -> dict[str, Any]:
        return quantity_schema(self.kinds)


class Free(In):
    """A `Number`: text like `In`, or the mapping now, from, to that makes it a free number."""

    def read(self, raw: Any) -> Number:  # type: ignore[override]
        if raw is UNREADABLE:
            return Number(math.nan, kind=self.kinds[0])
        if isinstance(raw, Mapping):
            return self.range(raw)
        value, kind = self.value(raw)
        return Number(value, kind=kind)

    def range(self, raw: Mapping[str, Any]) -> Number:
        values, kinds, findings = {}, set(), range_keys(raw)
        for key in ("now", "from", "to"):
            try:
                if key in raw and raw[key] is not UNREADABLE:
                    values[key], kind = self.value(raw[key])
                    kinds.add(kind)
            except UnitProblem as found:
                findings.append(Finding((key,), found.message, found.hint))
        if len(kinds) > 1:
            findings.append(
                Finding((), "now, from and to are not all of one kind", f"write a {self.kinds[0]} each")
            )
        raise_all(findings or range_order(raw, values))
        low, high = values.get("from", math.nan), values.get("to", math.nan)
        return Number(values.get("now", math.nan), low, high, (*kinds, *self.kinds)[0])

    def schema(self) -> dict[str, Any]:
        value = quantity_schema(self.kinds)
        keys = {
            "now": "value of today, where rating stands",
            "from": "start of the search range",
            "to": "end of it",
        }
        ranged = {
            "type": "object",
            "properties": {key: {**value, "description": words} for key, words in keys.items()},
            "required": list(keys),
            "additionalProperties": False,
        }
        return {"oneOf": [value, ranged]}


def range_keys(raw: Mapping[str, Any]) -> list[Finding]:
    """Missing and unknown keys of a {now, from, to}."""
    wanted, advice = ("now", "from", "to"), "a free number is written {now: ..., from: ..., to: ...}"
    unknown = [
        Finding((key,), f"{shown(key)} is not a key of a free number", advice, True)
        for key in raw
        if key not in wanted
    ]
    missing = [Finding((), f"{key} is missing", advice) for key in wanted if key not in raw]
    return unknown + missing


def range_order(raw: Mapping[str, Any], values: Mapping[str, float]) -> list[Finding]:
    """What is wrong with the order of now, from and to."""
    if len(values) < 3:
        return []
    low, now, high = values["from"], values["now"], values["to"]
    if low >= high:
        return [
            Finding(
                ("from",), f"from ({raw['from']}) is not below to ({raw['to']})", "swap or widen the range"
            )
        ]
    if not low <= now <= high:
        wide = f"outside its range {raw['from']} to {raw['to']}"
        return [Finding(("now",), f"{shown(raw['now'])} lies {wide}", "move now, or widen the range")]
    return []


NUMBER_PATTERN = r"^\s*[+-]?([0-9]+\.?[0-9]*|\.[0-9]+)([eE][+-]?[0-9]+)?"


def quantity_schema(kinds: Sequence[str]) -> dict[str, Any]:
    """JSON Schema of a number with unit."""
    plain = any(KINDS[kind].plain for kind in kinds)
    pattern = NUMBER_PATTERN + (r"\s*(\S.*)?$" if plain else r"(?![eE][+-]?[0-9]+\s*$)\s*[^\s0-9.,].*$")
    examples = [KINDS[kind].example for kind in kinds]
    return {"type": ["string", "number"] if plain else "string", "pattern": pattern, "examples": examples}
