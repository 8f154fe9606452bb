"""Reading the text of a unit: products, quotients and powers of unit words.

Words in common use stand in a table, so that a case can be read without Pint; every other word is asked of
one Pint registry, made on first use. A test holds the table against Pint and against published factors.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cache
from typing import Any

Powers = tuple[float, ...]
DIMENSIONS = ("[length]", "[mass]", "[time]", "[temperature]", "[substance]", "[money]")
LONGEST = 60  # characters of a unit: no sensible one is longer
NO_DIMENSION: Powers = (0.0,) * len(DIMENSIONS)


class UnitProblem(ValueError):
    """A number or a unit that cannot be used where it stands.

    `message` says what was found and what was expected, `hint` (may be empty) what to write.
    """

    def __init__(self, message: str, hint: str = ""):
        self.message, self.hint = message, hint
        super().__init__(message)


@dataclass(frozen=True)
class Unit:
    """A unit as factor to SI and powers of length, mass, time, temperature, substance and money.

    `words` keeps the unit words it was made of, `text` how it was written.
    """

    factor: float
    powers: Powers
    text: str = ""
    words: tuple[str, ...] = ()

    def times(self, other: Unit, sign: float = 1.0) -> Unit:
        powers = tuple(a + sign * b for a, b in zip(self.powers, other.powers, strict=True))
        return Unit(self.factor * other.factor**sign, powers, words=self.words + other.words)

    def to_power(self, exponent: float) -> Unit:
        return Unit(self.factor**exponent, tuple(exponent * p for p in self.powers), words=self.words)

    def measures_the_same_as(self, other: Unit) -> bool:
        return all(abs(a - b) < 1e-9 for a, b in zip(self.powers, other.powers, strict=True))


ONE = Unit(1.0, NO_DIMENSION)

_ENERGY, _POWER, _PRESSURE, _FORCE = (2, 1, -2), (2, 1, -3), (-1, 1, -2), (1, 1, -2)
_TABLE: dict[tuple[float, ...], dict[str, float]] = {
    (0,): {"%": 1e-2, "ppm": 1e-6},
    (1,): {"m": 1.0, "cm": 1e-2, "mm": 1e-3, "um": 1e-6, "km": 1e3, "ft": 0.3048, "inch": 0.0254},
    (3,): {"L": 1e-3, "l": 1e-3},
    (0, 1): {"kg": 1.0, "g": 1e-3, "mg": 1e-6, "t": 1e3, "lb": 0.45359237},
    (0, 0, 1): {"s": 1.0, "min": 60.0, "h": 3600.0, "day": 86400.0, "d": 86400.0},
    (0, 0, 0, 1): {"K": 1.0},
    (0, 0, 0, 0, 1): {"mol": 1.0, "kmol": 1e3, "mmol": 1e-3},
    _FORCE: {"N": 1.0},
    _PRESSURE: {"Pa": 1.0, "hPa": 1e2, "kPa": 1e3, "MPa": 1e6, "bar": 1e5, "mbar": 1e2, "atm": 101325.0,
                "psi": 6894.757293168361},
    _ENERGY: {"J": 1.0, "kJ": 1e3, "MJ": 1e6, "GJ": 1e9, "cal": 4.184, "kcal": 4184.0,
              "Wh": 3.6e3, "kWh": 3.6e6, "MWh": 3.6e9, "GWh": 3.6e12},
    _POWER: {"W": 1.0, "kW": 1e3, "MW": 1e6, "GW": 1e9},
}  # fmt: skip
COMMON: dict[str, Unit] = {
    word: Unit(factor, tuple(float(p) for p in powers) + NO_DIMENSION[len(powers) :], words=(word,))
    for powers, words in _TABLE.items()
    for word, factor in words.items()
}
MONEY = Unit(1.0, (0.0, 0.0, 0.0, 0.0, 0.0, 1.0))

_OFFSET_WORDS = {"degC", "degF", "celsius", "fahrenheit", "degree_Celsius", "degree_Fahrenheit", "delta_degC"}
_TWO_MEANINGS = {
    "ton": "a ton has several sizes: write t (1000 kg)",
    "tons": "a ton has several sizes: write t (1000 kg)",
    "barg": "write bar(g)",
    "bara": "write bar(a)",
    "psig": "write psi(g)",
    "psia": "write psi(a)",
}
_NORMAL_VOLUME = re.compile(r"(^|[^A-Za-z])((N|n|S|s)m(\^|\*\*)?3|[Mm]*[sS][cC][fF][A-Za-z]*)\b")
_TOKEN = re.compile(r"\s*(\*\*|[*/^()]|[^\W\d_]+(?:_[^\W\d_]+)*|%|[0-9]+(?:\.[0-9]+)?|-)")
_PLAIN_SIGNS = str.maketrans({"·": "*", "×": "*", "⋅": "*", "−": "-", "²": "^2", "³": "^3", "\u00a0": " "})


def parse_unit(text: str, currency: str = "", hours_per_year: float | None = None) -> Unit:
    """The unit written as `text`, such as "kmol/(kg h bar^2)", "J/(mol K)" or "EUR/MWh".

    A space or * multiplies, / or the word "per" divides. What stands after a division is put in brackets
    when it is a product: "J/mol K" could be read in two ways and is refused.

    currency: three capital letters that stand for money; hours_per_year [h]: what a "year" means in a price.
    Raises UnitProblem.
    """
    plain = _plain_signs(text)
    if _NORMAL_VOLUME.search(plain):
        raise UnitProblem(
            f"'{text}' is a normal or standard volume: it depends on a reference state and is not supported",
            "write the flow in kmol/h (or t/h)",
        )
    reader = _Reader(plain, text, currency, hours_per_year)
    try:
        unit = reader.whole()
    except (OverflowError, ZeroDivisionError):
        raise reader.unreadable() from None
    if not 0.0 < unit.factor < float("inf"):
        raise reader.unreadable()
    return Unit(unit.factor, unit.powers, text, unit.words)


def _plain_signs(text: str) -> str:
    plain = text.translate(_PLAIN_SIGNS).replace("°C", "degC").replace("°F", "degF")
    plain = plain.replace("µ", "u").replace("μ", "u")
    return re.sub(r"\bper\b", "/", plain).strip()


class _Reader:
    """Reads one unit text from left to right; one instance per text."""

    def __init__(self, plain: str, shown: str, currency: str, hours_per_year: float | None):
        self.shown = shown if len(shown) <= LONGEST else shown[:LONGEST] + "..."
        self.currency, self.hours_per_year = currency, hours_per_year
        if len(plain) > LONGEST:
            raise self.unreadable()
        self.tokens = list(self._tokens(plain))
        self.at = 0

    def _tokens(self, plain: str) -> Iterable[tuple[str, bool]]:
        """Each token with whether it touches the one before."""
        position = 0
        while position < len(plain):
            match = _TOKEN.match(plain, position)
            if match is None:
                raise self.unreadable()
            yield match[1], match.start(1) == position and position > 0
            position = match.end()

    def unreadable(self) -> UnitProblem:
        return UnitProblem(
            f"'{self.shown}' is not a unit that can be read", "write it like kmol/(kg h bar^2)"
        )

    def peek(self) -> str:
        return self.tokens[self.at][0] if self.at < len(self.tokens) else ""

    def take(self) -> str:
        token = self.peek()
        self.at += 1
        return token

    def whole(self) -> Unit:
        unit = self.product()
        if self.at < len(self.tokens):
            raise self.unreadable()
        return unit

    def product(self) -> Unit:
        unit, divided = self.factor(), False
        while self.peek() not in ("", ")"):
            divides = self.peek() == "/"
            if divided and not divides:
                raise UnitProblem(
                    f"'{self.shown}' can be read in two ways",
                    "put all that divides in brackets, as in J/(mol K)",
                )
            if self.peek() in ("*", "/"):
                self.take()
            elif self.peek() == "(" and self.tokens[self.at][1]:
                raise self.unreadable()
            unit, divided = unit.times(self.factor(), -1.0 if divides else 1.0), divides or divided
        return unit

    def factor(self) -> Unit:
        token = self.take()
        if token == "(":
            unit = self.product()
            if self.take() != ")":
                raise self.unreadable()
        elif token == "1":
            unit = ONE
        elif token and (token == "%" or token[0].isalpha()):
            unit = self.word(token)
        else:
            raise self.unreadable()
        return unit.to_power(self.exponent())

    def exponent(self) -> float:
        glued = self.peek()[:1].isdigit() and self.tokens[self.at][1]
        if not glued and self.peek() not in ("^", "**"):
            return 1.0
        if not glued:
            self.take()
        sign = -1.0 if self.peek() == "-" else 1.0
        if sign < 0:
            self.take()
        number = self.take()
        if not number[:1].isdigit() or float(number) > 9:
            raise self.unreadable()
        return sign * float(number)

    def word(self, word: str) -> Unit:
        if word in COMMON:
            return COMMON[word]
        if self.currency and word == self.currency:
            return Unit(1.0, MONEY.powers, words=(word,))
        if word in ("year", "years", "yr"):
            return self.year()
        if word in _OFFSET_WORDS:
            raise UnitProblem(
                f"'{word}' cannot stand inside '{self.shown}'", "write K for a difference or inside a unit"
            )
        if word in _TWO_MEANINGS:
            raise UnitProblem(f"'{word}' is not a unit here", _TWO_MEANINGS[word])
        return from_pint(word) or self.money(word)

    def year(self) -> Unit:
        if self.hours_per_year is None:
            raise UnitProblem(
                f"'{self.shown}' speaks of a year, but the case does not say how many hours it runs in one",
                "add `hours per year: 8300` to the case, or write the unit with h",
            )
        return Unit(3600.0 * self.hours_per_year, COMMON["s"].powers, words=("year",))

    def money(self, word: str) -> Unit:
        if not re.fullmatch("[A-Z]{3}", word):
            near = get_close_matches(word, COMMON, 1)
            raise UnitProblem(f"'{word}' is not a known unit", f"did you mean {near[0]}?" if near else "")
        if self.currency:
            raise UnitProblem(f"'{word}' is not the currency of the case", f"write {self.currency}")
        return Unit(1.0, MONEY.powers, words=(word,))


@cache
def registry() -> Any:
    """The one Pint registry, made when a unit outside the table of common ones is first met."""
    import pint

    return pint.UnitRegistry(cache_folder=None)


@cache
def from_pint(word: str) -> Unit | None:
    """What Pint knows about one unit word; None when it is unknown, has an offset or another dimension."""
    try:
        quantity = registry().Quantity(1.0, word)
        base = quantity.to_base_units()
        one_and_two = registry().Quantity(2.0, word).to_base_units().magnitude / base.magnitude
    except Exception:  # Pint raises many kinds, tokenizer errors among them
        return None
    dimensions = dict(base.dimensionality)
    if abs(one_and_two - 2.0) > 1e-12 or not set(dimensions) <= set(DIMENSIONS):
        return None
    return Unit(float(base.magnitude), tuple(float(dimensions.get(d, 0)) for d in DIMENSIONS), words=(word,))
