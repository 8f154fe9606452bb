"""Constants of rate laws in SI: which unit each must have, and the message when it has another."""

from __future__ import annotations

from reactorstage.case.unit_text import ONE, UnitProblem, parse_unit
from reactorstage.case.units import DRIVER_UNIT, in_unit, rate_constant_to_si, rate_constant_unit, shown
from reactorstage.case.written_rates import Constant, EquilibriumConstant, TemperatureForm, TermConstant


def rate_constant(given: Constant, per: str, driver: str, order_sum: float) -> float:
    """SI value of a rate constant (`is`), or factor to SI of the unit of its `exp of`. Raises UnitProblem."""
    unit = rate_constant_unit(per, driver, order_sum)
    if given.exp_of is None:
        value = rate_constant_to_si(_text(given), per, driver, order_sum)
        return _positive(value, _text(given), "rate constant")
    hint = f"rate per {per}, driven by {driver}, orders that sum to {order_sum:g}"
    return unit_factor(given.in_, unit, hint)


def term_unit(driver: str, order_sum: float) -> str:
    """Unit of a term's constant, which undoes that of its orders: "1/bar^2"; empty for a plain number."""
    word = DRIVER_UNIT[driver]
    if not word or order_sum == 0.0:
        return ""
    power = f"^{abs(order_sum):g}" if abs(order_sum) != 1.0 else ""
    return f"1/{word}{power}" if order_sum > 0.0 else f"{word}{power}"


def term_constant(given: TermConstant, driver: str, order_sum: float) -> float:
    """SI value of a term's constant (`is`), or factor to SI of the unit of `exp of`. Raises UnitProblem."""
    unit = term_unit(driver, order_sum)
    hint = f"driven by {driver}, the orders of this term sum to {order_sum:g}"
    if given.exp_of is not None:
        return unit_factor(given.in_, unit, hint)
    try:
        value = in_unit(_text(given), unit)
    except UnitProblem as found:
        raise UnitProblem(found.message, found.hint or hint) from None
    return _positive(value, _text(given), "constant")


def equilibrium_constant(given: EquilibriumConstant, change: float) -> tuple[float, str]:
    """SI value of an equilibrium constant (`is`), or factor to SI of the unit of `exp of`, and its driver.

    change is the sum of nu: K is in Pa^change ("partial pressure") or (mol/m3)^change ("concentration"), and
    a plain number ("") without a change. Raises UnitProblem.
    """
    text = given.in_ if given.exp_of is not None else _text(given)
    hint = f"the equation changes the number of moles by {change:g}"
    drivers = {power_unit(driver, change): driver for driver in ("partial pressure", "concentration")}
    problems = []
    for unit, driver in drivers.items() if change else (("", ""),):
        try:
            if given.exp_of is not None:
                return unit_factor(text, unit, hint), driver
            return _positive(in_unit(text or "", unit), text or "", "equilibrium constant"), driver
        except UnitProblem as found:
            problems.append(found)
    message = problems[0].message
    if change:
        message = message.replace(power_unit("partial pressure", change), " or ".join(drivers))
    raise UnitProblem(message, problems[0].hint or hint)


def power_unit(driver: str, n: float) -> str:
    """Unit of a driver to a power: "bar^-0.5"."""
    return DRIVER_UNIT[driver] + ("" if n == 1.0 else f"^{n:g}")


def unit_factor(text: str | None, wanted: str, hint: str = "") -> float:
    """Factor to SI of a unit that must measure the same as `wanted` (empty: a plain number)."""
    if not text:
        if wanted:
            raise UnitProblem(f"the unit is missing: {wanted} is expected", f"add `in: {wanted}`")
        return 1.0
    unit = ONE if text == "1" else parse_unit(text)
    if not unit.measures_the_same_as(parse_unit(wanted) if wanted else ONE):
        raise UnitProblem(f"{shown(text)} is the wrong unit: {wanted or 'none'} is expected", hint)
    return unit.factor


def _text(given: TemperatureForm) -> str:
    return given.is_.text if given.is_ else ""


def _positive(value: float, text: str, what: str) -> float:
    if not value > 0.0:
        raise UnitProblem(f"the {what} {text} must be above zero")
    return value
