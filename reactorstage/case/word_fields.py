"""How the words of the case file are declared: names, choices, shares, ranges, orders, coefficients."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any, get_args

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, core_schema

from reactorstage.case import units
from reactorstage.case.fields import (
    NUMBER_PATTERN,
    Activities,
    Declared,
    Finding,
    Free,
    In,
    Number,
    Raw,
    problem,
    quantity_schema,
    raise_all,
    text_of,
)
from reactorstage.case.marks import UNREADABLE
from reactorstage.case.units import UnitProblem, shown

REST = "rest"
AS_WRITTEN = "as written"
EVERY_REACTION = "every reaction"


@dataclass(frozen=True)
class Aim:
    """What optimising makes least or most."""

    direction: str
    quantity: str


class TextOf(Declared):
    """Any text that is not empty, or one that fits a pattern."""

    def __init__(self, pattern: str = "", advice: str = "write a word or two"):
        self.pattern, self.advice = pattern, advice

    def read(self, raw: Any) -> str:
        if raw is UNREADABLE:
            return ""
        text = text_of(raw, "text")
        if not text.strip():
            raise UnitProblem("the text is empty", self.advice)
        if self.pattern and not re.fullmatch(self.pattern, text):
            raise UnitProblem(f"{shown(text)} cannot stand here", self.advice)
        return text

    def schema(self) -> dict[str, Any]:
        return {"type": "string", **({"pattern": f"^{self.pattern}$"} if self.pattern else {"minLength": 1})}


class AimText(TextOf):
    """`least NAME` or `most NAME`."""

    def __init__(self) -> None:
        super().__init__(r"(least|most) +\S.*", "write `least NAME` or `most NAME`, as in least money.total")

    def read(self, raw: Any) -> Aim:  # type: ignore[override]
        direction, _, quantity = super().read(raw).partition(" ")
        return Aim(direction, quantity.strip())


class Version(Declared):
    """The number of the file format."""

    def __init__(self, known: int):
        self.known = known

    def read(self, raw: Any) -> int:
        if raw is not UNREADABLE and text_of(raw, "the number of the format").strip() != str(self.known):
            raise UnitProblem(
                f"format {shown(raw)} is not known to this version", f"write format: {self.known}"
            )
        return self.known

    def schema(self) -> dict[str, Any]:
        return {"const": self.known}


def each(items: Any, read: Callable[[Any, Any], Any]) -> list[Any]:
    """`read(key, item)` of every (key, item); all problems together, each with its key."""
    values, findings = [], []
    for key, item in items:
        try:
            values.append(read(key, item))
        except UnitProblem as found:
            findings.append(Finding((key,), found.message, found.hint))
    raise_all(findings)
    return values


class InUnit(In):
    """A number in SI units whose unit must measure the same as `unit`, within bounds."""

    def __init__(self, unit: str, **bounds: float):
        super().__init__("number", **bounds)
        self.unit = unit

    def value(self, raw: Any) -> tuple[float, str]:
        text = text_of(raw, f"a number in {self.unit}")
        value = units.in_unit(text, self.unit)
        self.bounds.check(value, "number", text)
        return value, "number"

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "pattern": NUMBER_PATTERN, "examples": [f"1.0 {self.unit}"]}


class Powers(Declared):
    """Coefficients of 1, x, x^2 ... in SI; `unit_of` gives the unit of the n-th, empty for a plain number."""

    def __init__(self, unit_of: Callable[[int], str], example: str):
        self.unit_of, self.example = unit_of, example

    def read(self, raw: Any) -> tuple[float, ...]:
        if raw is UNREADABLE:
            return ()
        if not isinstance(raw, list) or not raw:
            raise UnitProblem("a list of coefficients is expected", f"write {self.example}")
        return tuple(each(enumerate(raw), self.coefficient))

    def coefficient(self, n: int, raw: Any) -> float:
        unit = self.unit_of(n)
        if raw is UNREADABLE:
            return math.nan
        return units.in_unit(text_of(raw, f"a number in {unit}" if unit else "a plain number"), unit)

    def schema(self) -> dict[str, Any]:
        item = {"type": "string" if self.unit_of(0) else ["string", "number"], "pattern": NUMBER_PATTERN}
        return {"type": "array", "minItems": 1, "items": item, "examples": [self.example]}


class Orders(Declared):
    """Orders by species, or None for `as written` where that has a meaning."""

    number = In("number", least=-9.0, most=9.0)

    def __init__(self, as_written: bool = True):
        self.as_written = as_written

    def read(self, raw: Any) -> dict[str, float] | None:
        if raw is UNREADABLE:
            return None if self.as_written else {}
        if self.as_written and raw == AS_WRITTEN:
            return None
        if not isinstance(raw, dict) or not raw:
            words = "`as written` or " if self.as_written else ""
            raise UnitProblem(
                f"orders are {words}a number for each species",
                f"write {f'{AS_WRITTEN}, or ' if self.as_written else ''}{{name: 1, name: 0.5}}",
            )
        return dict(each(raw.items(), lambda name, order: (name, self.number.read(order))))

    def schema(self) -> dict[str, Any]:
        orders = {"type": "object", "minProperties": 1, "additionalProperties": self.number.schema()}
        return {"oneOf": [{"const": AS_WRITTEN}, orders]} if self.as_written else orders


class TextOr:
    """What is written as a mapping (a model), or shorter as a text; `read` makes of the text what follows.

    What `read` gives is handed to the model when it is a mapping, and stands for itself otherwise. In a union
    the model comes first.
    """

    def __init__(self, read: Callable[[str], Any], text: Declared):
        self.read, self.text = read, text

    @classmethod
    def key(cls, key: str, text: Declared) -> TextOr:
        """The text is the value of one of the model's keys."""
        return cls(lambda raw: {key: raw}, text)

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        model = source if isinstance(source, type) else (get_args(source) or (source,))[0]
        return core_schema.no_info_wrap_validator_function(self._validate, handler.generate_schema(model))

    def _validate(self, raw: Any, handler: Callable[[Any], Any]) -> Any:
        if not isinstance(raw, str):
            return handler(raw)
        try:
            made = self.read(raw)
        except UnitProblem as found:
            raise problem(found.message, found.hint) from None
        return handler(made) if isinstance(made, dict) else made

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"oneOf": [self.text.schema(), handler(schema)]}


class Entry(Free):
    """An entry of a split: a `Number`, or None for the word `rest`."""

    def read(self, raw: Any) -> Number | None:  # type: ignore[override]
        return None if raw == REST else super().read(raw)

    def schema(self) -> dict[str, Any]:
        return {"oneOf": [{"const": REST}, *(s for s in super().schema()["oneOf"])]}


class ByReaction(Free):
    """A `Number`, or `Activities` from a mapping by reaction; `every reaction` stands for the others."""

    def __init__(self, default: float, *kinds: str, **bounds: float):
        super().__init__(*kinds, **bounds)
        self.default = default

    def read(self, raw: Any) -> Number:  # type: ignore[override]
        if not isinstance(raw, dict) or {"now", "from", "to"} & set(raw):
            return super().read(raw)
        if not raw:
            raise UnitProblem("nothing stands here", "write {every reaction: 1.0, NAME: 0.8}")
        each_one = dict(each(raw.items(), lambda name, one: (name, super(ByReaction, self).read(one))))
        others = each_one.pop(EVERY_REACTION, Number(self.default, kind=self.kinds[0]))
        return Activities(others.now, others.low, others.high, others.kind, each_one)

    def schema(self) -> dict[str, Any]:
        one = super().schema()
        ranged = {"not": {"anyOf": [{"required": [key]} for key in ("now", "from", "to")]}}
        listed = {"type": "object", "minProperties": 1, "additionalProperties": one, **ranged}
        return {"oneOf": [*one["oneOf"], listed]}


class RawText(Declared):
    """A `Raw`: a number with any unit, never negative when `positive`."""

    def __init__(
        self, positive: bool = False, example: str = "424 degC", unsigned: str = "write it above zero"
    ):
        self.positive, self.example, self.unsigned = positive, example, unsigned

    def read(self, raw: Any) -> Raw:
        if raw is UNREADABLE:
            return Raw("")
        text = text_of(raw, f"a number such as {self.example}")
        number, _ = units.split_number(text)
        if self.positive and number < 0.0:
            raise UnitProblem(f"{shown(text)} is negative", self.unsigned)
        return Raw(text.strip())

    def schema(self) -> dict[str, Any]:
        return {"type": ["string", "number"], "pattern": NUMBER_PATTERN, "examples": [self.example]}


class Between(RawText):
    """Two bounds in one text; they are taken apart before reading, so what arrives here is malformed."""

    def read(self, raw: Any) -> Raw:
        if raw is UNREADABLE:
            return Raw("")
        raise UnitProblem(
            "two bounds are expected here", "write `between: A and B`, without at most or at least"
        )

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "pattern": "^.+ and .+$", "examples": ["30 kmol/h and 82 kmol/h"]}


class Span(Declared):
    """A pair of SI values read from "350 degC to 440 degC"."""

    def __init__(self, kind: str, example: str):
        self.kind, self.example = kind, example

    def read(self, raw: Any) -> tuple[float, float]:
        if raw is UNREADABLE:
            return math.nan, math.nan
        parts = text_of(raw, f"a range such as {self.example}").split(" to ")
        if len(parts) != 2:
            raise UnitProblem(f"{shown(raw)} is not a range", f"write it like {self.example}")
        low, high = (units.to_si(part, self.kind) for part in parts)
        if low >= high:
            raise UnitProblem(f"{shown(raw)} does not run upwards", f"write it like {self.example}")
        return low, high

    def schema(self) -> dict[str, Any]:
        return {"type": "string", "pattern": "^.+ to .+$", "examples": [self.example]}


class Share(Declared):
    """A fraction, or None for the word `rest`."""

    def read(self, raw: Any) -> float | None:
        if raw is UNREADABLE:
            return math.nan
        if raw == REST:
            return None
        return In("fraction", least=0.0, most=1.0).value(raw)[0]

    def schema(self) -> dict[str, Any]:
        return {"oneOf": [{"const": REST}, quantity_schema(("fraction",))]}


class Choice(Declared):
    """One of several words; anything else is answered with the nearest of them."""

    def __init__(self, *words: str):
        self.words = words

    def read(self, raw: Any) -> str:
        if raw is UNREADABLE:
            return ""
        text = text_of(raw, f"one of {', '.join(self.words)}")
        if text not in self.words:
            raise UnitProblem(f"{shown(text)} is not a choice here", one_of(text, self.words))
        return text

    def schema(self) -> dict[str, Any]:
        return {"enum": list(self.words)}


class Names(Declared):
    """A tuple of names from one name or a list of names; the `special` words stay text."""

    def __init__(self, *special: str):
        self.special = special

    def read(self, raw: Any) -> tuple[str, ...] | str:
        if raw is UNREADABLE:
            return ()
        if isinstance(raw, str):
            return raw if raw in self.special else (raw,)
        if isinstance(raw, list) and raw and all(isinstance(name, str) for name in raw):
            return tuple(raw)
        raise UnitProblem("a name or a list of names is expected here", "write a name, or [name, name]")

    def schema(self) -> dict[str, Any]:
        names = {"type": "array", "items": {"type": "string"}, "minItems": 1}
        return {"oneOf": [{"type": "string", "examples": list(self.special)}, names]}


def one_of(text: str, words: Sequence[str]) -> str:
    """Advice: the nearest right word first, then all of them (when they are few)."""
    words = list(dict.fromkeys(words))
    near = get_close_matches(text, words, 1, 0.6)
    listed = (
        "write " + (", ".join(words[:-1]) + " or " + words[-1] if len(words) > 1 else words[0])
        if words
        else ""
    )
    if near:
        return f"did you mean {near[0]}?" + (f" ({listed})" if len(words) <= 4 else "")
    return listed if len(words) <= 12 else ""
