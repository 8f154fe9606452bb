"""Numbers with units: kinds of quantity, their SI values and display units, prices, rate constants.

Gauge pressures are counted from one standard atmosphere, 1.01325 bar.
"""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass

from reactorstage.case.unit_text import MONEY, ONE, Unit, UnitProblem, parse_unit

__all__ = [
    "DRIVER_UNIT",
    "KINDS",
    "Kind",
    "UnitProblem",
    "check_unit",
    "display_unit",
    "in_unit",
    "named",
    "penalty_to_si",
    "price_to_si",
    "rate_constant_to_si",
    "rate_constant_unit",
    "split_number",
    "to_display",
    "to_si",
    "to_si_of",
]

ATMOSPHERE = 101325.0
ICE_POINT = 273.15
CURRENCY_MARK = "CUR"


@dataclass(frozen=True)
class Kind:
    """One kind of quantity.

    si_unit and display_unit are texts (CUR stands for the currency of the case); a value in display units
    is value_SI / scale - offset. `example` is what a user could write.
    """

    name: str
    si_unit: str
    display_unit: str
    example: str
    scale: float = 1.0
    offset: float = 0.0

    @property
    def unit(self) -> Unit:
        return parse_unit(self.si_unit, CURRENCY_MARK) if self.si_unit else ONE

    @property
    def plain(self) -> bool:
        """True when a bare number is accepted."""
        return self.name in ("fraction", "ratio", "number", "count")


KINDS: dict[str, Kind] = {
    kind.name: kind
    for kind in (
        Kind("temperature", "K", "degC", "384 degC", 1.0, ICE_POINT),
        Kind("temperature difference", "K", "K", "15 K"),
        Kind("pressure", "Pa", "bar(a)", "19.4 bar(a)", 1e5),
        Kind("pressure difference", "Pa", "bar", "0.3 bar", 1e5),
        Kind("molar flow", "mol/s", "kmol/h", "965 kmol/h", 1e3 / 3600.0),
        Kind("mass flow", "kg/s", "t/h", "75 t/h", 1e3 / 3600.0),
        Kind("mass", "kg", "t", "2.6 t", 1e3),
        Kind("volume", "m^3", "m^3", "4.1 m^3"),
        Kind("length", "m", "m", "1.8 m"),
        Kind("area", "m^2", "m^2", "280 m^2"),
        Kind("heat transfer coefficient", "W/(m^2 K)", "W/(m^2 K)", "540 W/(m^2 K)"),
        Kind("fouling resistance", "m^2 K/W", "m^2 K/W", "2e-4 m^2 K/W"),
        Kind("density", "kg/m^3", "kg/m^3", "640 kg/m^3"),
        Kind("viscosity", "Pa s", "Pa s", "1.7e-5 Pa s"),
        Kind("fraction", "", "%", "85 %", 0.01),
        Kind("ratio", "", "mol/mol", "11.6 mol/mol"),
        Kind("power", "W", "MW", "2.0 MW", 1e6),
        Kind("money rate", "CUR/s", "CUR/h", "40 CUR/h", 1.0 / 3600.0),
        Kind("count", "", "", "4"),
        Kind("number", "", "", "1.0"),
        Kind("molar energy", "J/mol", "kJ/mol", "66 kJ/mol", 1e3),
        Kind("molar entropy", "J/(mol K)", "J/(mol K)", "435 J/(mol K)"),
        Kind("time", "s", "h", "8 h", 3600.0),
    )
}
_PRICE_UNITS = {
    "molar flow": "CUR/kmol",
    "mass flow": "CUR/t",
    "power": "CUR/MWh",
    "mass": "CUR/(t h)",
    "volume": "CUR/(m^3 h)",
    "length": "CUR/(m h)",
    "area": "CUR/(m^2 h)",
    "temperature": "CUR/(K h)",
    "temperature difference": "CUR/(K h)",
    "pressure": "CUR/(bar h)",
    "pressure difference": "CUR/(bar h)",
}
_NUMBER = re.compile(r"([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)(.*)", re.DOTALL)
_NOT_FINITE = re.compile(r"[+-]?\.?(nan|inf|infinity)\b", re.IGNORECASE)
_REFERENCE = re.compile(r"(.*\S)\s*\((a|g|abs|gauge)\)")


def split_number(text: str) -> tuple[float, str]:
    """The number and the unit text (may be empty) of "965 kmol/h". Raises UnitProblem."""
    plain = text.strip().replace("−", "-")
    if _NOT_FINITE.match(plain):
        raise UnitProblem(f"{shown(text)} is not a finite number", "write a finite number")
    match = _NUMBER.fullmatch(plain)
    if match is None:
        raise UnitProblem(f"{shown(text)} is not a number")
    number, unit = float(match[1]), match[2].strip()
    if not math.isfinite(number):
        raise UnitProblem(f"{shown(text)} is not a finite number", "write a finite number")
    _refuse_odd_separators(text, match[1], match[2])
    return number, unit


def _refuse_odd_separators(text: str, number: str, rest: str) -> None:
    if re.match(r"[,_' ]+(?!1\s*/)[0-9]", rest):
        advice = "write the decimals after a point" if rest.startswith(",") else "write the digits together"
        raise UnitProblem(
            f"{shown(text)} has something between the digits of a number", f"{advice}, as in 1234.5"
        )
    if re.match(r"[.:][0-9]", rest):
        raise UnitProblem(f"{shown(text)} is not a number")


def shown(text: str) -> str:
    """Text as it is quoted in a message: short, without control characters."""
    clean = "".join(c if c.isprintable() else "?" for c in text)
    return f"'{clean}'" if len(clean) <= 60 else f"'{clean[:57]}...'"


def to_si(text: str, kind: str, currency: str = "", hours_per_year: float | None = None) -> float:
    """The SI value of a number with unit, read as `kind` (a key of KINDS). Raises UnitProblem."""
    number, unit = split_number(text)
    wanted = KINDS[kind]
    if not unit and not wanted.plain:
        raise UnitProblem(f"{shown(text)} has no unit: {expected(wanted, currency)}")
    if kind == "temperature":
        return _temperature(text, number, unit)
    if kind == "pressure":
        return _pressure(text, number, unit)
    return scaled(number, _factor(text, unit, wanted, currency, hours_per_year)) if unit else number


def scaled(number: float, factor: float) -> float:
    """number times factor; by division where that is exact (99.85 % gives 0.9985, not 0.99849...)."""
    inverse = round(1.0 / factor) if factor < 1.0 else 0
    return number / inverse if inverse and abs(inverse * factor - 1.0) < 1e-15 else number * factor


def check_unit(text: str, currency: str = "", hours_per_year: float | None = None) -> Unit | None:
    """The unit of a number whose kind is not known yet; None when it has none or one with an offset.

    Raises UnitProblem when the unit cannot be read.
    """
    _, unit = split_number(text)
    if not unit or _degree(unit):
        return None
    match = _REFERENCE.fullmatch(unit)
    parsed = parse_unit(match[1] if match else unit, currency, hours_per_year)
    return None if match else parsed


def to_si_of(text: str, kinds: Sequence[str]) -> tuple[float, str]:
    """The SI value and the kind, out of several possible kinds, that fits the unit. Raises UnitProblem."""
    problems = []
    for kind in kinds:
        try:
            return to_si(text, kind), kind
        except UnitProblem as problem:
            problems.append(problem)
    if len(kinds) == 1 or "expected" not in problems[0].message:
        raise problems[0]
    what = problems[0].message.split(": ")[0]
    raise UnitProblem(f"{what}: {' or '.join(named(KINDS[kind]) for kind in kinds)} is expected")


def expected(kind: Kind, currency: str = "") -> str:
    """Words for what should have been written."""
    return f"{named(kind, currency)} is expected"


def named(kind: Kind, currency: str = "") -> str:
    example = kind.example.replace(CURRENCY_MARK, currency or "EUR")
    name = "plain number" if kind.name in ("number", "count") else kind.name
    return f"a {name} such as {example}"


def _wrong_dimension(text: str, kind: Kind, currency: str = "") -> UnitProblem:
    return UnitProblem(f"{shown(text)} has the wrong unit: {expected(kind, currency)}")


def _factor(text: str, unit: str, kind: Kind, currency: str, hours_per_year: float | None) -> float:
    if kind.name == "temperature difference" and _degree(unit):
        raise UnitProblem(f"{shown(text)} is a difference of temperatures", "write it in K")
    if kind.name == "pressure difference" and _REFERENCE.fullmatch(unit):
        raise UnitProblem(
            f"{shown(text)} is a difference of pressures", "write it in bar, without (a) or (g)"
        )
    if _degree(unit) or _REFERENCE.fullmatch(unit):
        raise _wrong_dimension(text, kind, currency)
    parsed = parse_unit(unit, currency, hours_per_year)
    if not parsed.measures_the_same_as(kind.unit) or not _fits_plain(parsed, unit, kind):
        raise _wrong_dimension(text, kind, currency)
    return parsed.factor


def _fits_plain(parsed: Unit, unit: str, kind: Kind) -> bool:
    """Dimensionless kinds take %, ppm and mol/mol (a ratio) but not, say, kg/kg."""
    if not kind.plain or unit == "%":
        return True
    if kind.name == "fraction":
        return set(parsed.words) <= {"%", "ppm"}
    return kind.name == "ratio" and set(parsed.words) <= {"mol", "kmol"}


def _degree(unit: str) -> str:
    """ "C" or "F" when the unit is a degree with an offset, else empty."""
    match = re.fullmatch(r"(?:deg|°)\s?(C|F)", unit)
    return match[1] if match else ""


def _temperature(text: str, number: float, unit: str) -> float:
    scale = _degree(unit)
    if scale == "C":
        value = number + ICE_POINT
    elif scale == "F":
        value = (number + 459.67) * 5.0 / 9.0
    elif unit == "K":
        value = number
    else:
        _refuse_unknown(unit)
        raise _wrong_dimension(text, KINDS["temperature"])
    if value < 0.0:
        raise UnitProblem(f"{shown(text)} lies below absolute zero")
    return value


def _pressure(text: str, number: float, unit: str) -> float:
    match = _REFERENCE.fullmatch(unit)
    if _degree(unit):
        raise _wrong_dimension(text, KINDS["pressure"])
    parsed = parse_unit(match[1] if match else unit)
    if not parsed.measures_the_same_as(KINDS["pressure"].unit):
        raise _wrong_dimension(text, KINDS["pressure"])
    if match is None and unit not in ("Pa", "atm"):
        raise UnitProblem(
            f"{shown(text)} does not say whether it is absolute or gauge", f"write {unit}(a) or {unit}(g)"
        )
    gauge = match is not None and match[2].startswith("g")
    value = number * parsed.factor + (ATMOSPHERE if gauge else 0.0)
    if value < 0.0:
        raise UnitProblem(f"{shown(text)} lies below vacuum")
    return value


def _refuse_unknown(unit: str) -> None:
    if not _REFERENCE.fullmatch(unit):
        parse_unit(unit)


def to_display(value: float, kind: str) -> float:
    """An SI value in the display unit of its kind."""
    return value / KINDS[kind].scale - KINDS[kind].offset


def display_unit(kind: str, currency: str = "") -> str:
    """The unit in which values of a kind are shown; empty for plain numbers."""
    return KINDS[kind].display_unit.replace(CURRENCY_MARK, currency or CURRENCY_MARK)


def in_unit(text: str, unit: str) -> float:
    """The SI value of a number whose unit must measure the same as `unit`, for instance "J/(mol K^2)".

    unit is empty for a plain number.
    """
    number, found = split_number(text)
    if not unit:
        if found and not parse_unit(found).measures_the_same_as(ONE):
            raise UnitProblem(f"{shown(text)} has a unit: a plain number is expected")
        return scaled(number, parse_unit(found).factor) if found else number
    if not found:
        raise UnitProblem(f"{shown(text)} has no unit: {unit} is expected")
    parsed = parse_unit(found)
    if not parsed.measures_the_same_as(parse_unit(unit)):
        raise UnitProblem(f"{shown(text)} has the wrong unit: {unit} is expected")
    return number * parsed.factor


def price_to_si(
    text: str, kind_of_quantity: str, currency: str, hours_per_year: float | None = None
) -> float:
    """A price in currency per second for each SI unit of the quantity that it is on.

    What flows is priced per amount (EUR/kmol on a molar flow, EUR/MWh on a power), what stands is priced per
    amount and time (EUR/(t h) or, with hours_per_year [h], EUR/(t year) on a mass; EUR/h on a count).
    Raises UnitProblem, for a negative price too.
    """
    unit = _PRICE_UNITS.get(kind_of_quantity, "CUR/h").replace(CURRENCY_MARK, currency)
    value = _money_per(
        text, kind_of_quantity, currency, hours_per_year, unit, f"a price on a {kind_of_quantity}"
    )
    if value < 0.0:
        raise UnitProblem(
            f"{shown(text)} is a negative price", "say `costs` or `earns` and give a positive number"
        )
    return value


def penalty_to_si(
    text: str, kind_of_quantity: str, currency: str, hours_per_year: float | None = None
) -> float:
    """The price of breaking a soft limit, "5 EUR/h per K", in currency per second for each SI unit.

    Raises UnitProblem, also when it is not positive.
    """
    display = KINDS[kind_of_quantity].display_unit
    display = "" if display in ("%", "mol/mol") else {"degC": "K", "bar(a)": "bar"}.get(display, display)
    unit = f"{currency}/h per {display}" if display else f"{currency}/h"
    value = _money_per(text, kind_of_quantity, currency, hours_per_year, unit, "the price of a soft limit")
    if value <= 0.0:
        raise UnitProblem(f"{shown(text)} is not above zero, so it would not hold the limit at all")
    return value


def _money_per(
    text: str, kind: str, currency: str, hours_per_year: float | None, unit: str, what: str
) -> float:
    number, found = split_number(text)
    if not found:
        raise UnitProblem(f"{shown(text)} has no unit: {what} is written in {unit}")
    parsed = parse_unit(found, currency, hours_per_year)
    per_second = MONEY.times(parse_unit("s"), -1.0)
    if kind == "money rate" or not parsed.measures_the_same_as(per_second.times(KINDS[kind].unit, -1.0)):
        raise UnitProblem(f"{shown(text)} has the wrong unit: {what} is written in {unit}")
    return number * parsed.factor


_RATE_PER = {"catalyst mass": "kg", "bed volume": "m^3", "void volume": "m^3"}
DRIVER_UNIT = {
    "partial pressure": "bar",
    "concentration": "(kmol/m^3)",
    "mole fraction": "",
    "fugacity": "bar",
}
"""Unit of what rates are driven by -> as it is written in units; empty for plain numbers."""


def rate_constant_unit(per: str, driver: str, order_sum: float) -> str:
    """The unit expected of a rate constant, for instance "kmol/(kg h bar^2)"."""
    word, exponent = DRIVER_UNIT[driver], f"^{order_sum:g}" if order_sum != 1.0 else ""
    return f"kmol/({_RATE_PER[per]} h{f' {word}{exponent}' if word and order_sum else ''})"


def rate_constant_to_si(text: str, per: str, driver: str, order_sum: float) -> float:
    """A rate constant in mol/(kg s X^n) or mol/(m3 s X^n), with X in Pa or mol/m3 and n the sum of orders.

    per: "catalyst mass", "bed volume" or "void volume"; driver: "partial pressure", "concentration" or
    "mole fraction". Raises UnitProblem naming the expected unit.
    """
    unit = rate_constant_unit(per, driver, order_sum)
    try:
        value = in_unit(text, unit)
    except UnitProblem as problem:
        hint = problem.hint or f"rate per {per}, driven by {driver}, orders that sum to {order_sum:g}"
        raise UnitProblem(problem.message, hint) from None
    if value < 0.0:
        raise UnitProblem(f"{shown(text)} is a negative rate constant")
    return value
