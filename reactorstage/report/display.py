"""Values as engineers read them: display units and sensible digits."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from contextvars import ContextVar

from reactorstage.case import units
from reactorstage.errors import CallError
from reactorstage.report.unit_sets import RATE, RATE_SCALE, TRADE, UNIT_SETS, Scale, UnitSet

DIFFERENCE = {"temperature": "temperature difference", "pressure": "pressure difference"}
DECIMALS = {"temperature": 1, "temperature difference": 1}
ABSENT = "-"


_chosen: ContextVar[UnitSet] = ContextVar("unit set", default=UNIT_SETS[TRADE])


@contextmanager
def in_units(name: str) -> Iterator[UnitSet]:
    """Everything that is shown inside is shown in this set of units. Raises CallError for an unknown one."""
    if name not in UNIT_SETS:
        raise CallError(f"there is no set of units called {name!r}; there are {', '.join(UNIT_SETS)}")
    token = _chosen.set(UNIT_SETS[name])
    try:
        yield UNIT_SETS[name]
    finally:
        _chosen.reset(token)


def unit_set() -> UnitSet:
    """The set of units in which things are shown now."""
    return _chosen.get()


def _scale(kind: str) -> Scale | None:
    """How the chosen set shows a kind; None where it is shown as `reactorstage.case.units` says."""
    return _chosen.get().scales.get(kind, RATE_SCALE if kind == RATE else None)


TRACE = 1e-3
"""Shares below this are told in parts per million."""


def shown(value: float | None, kind: str) -> float | None:
    """An SI value in its display unit; None stays None."""
    if value is None:
        return None
    scale = _scale(kind)
    return float(units.to_display(value, kind) if scale is None else value / scale.scale - scale.offset)


def unit(kind: str, currency: str = "") -> str:
    """The display unit of a kind; a difference of temperature or pressure has a kind of its own."""
    scale = _scale(kind)
    return units.display_unit(kind, currency) if scale is None else scale.unit


def places(kind: str, wanted: int) -> int:
    """Decimals in the chosen unit that are as fine as `wanted` decimals in the trade unit."""
    scale = _scale(kind)
    return wanted if scale is None else max(wanted + scale.digits, 0)


def difference_kind(kind: str) -> str:
    """The kind of the difference of two values of a kind: margins, steps and rises."""
    return DIFFERENCE.get(kind, kind)


def difference(value: float | None, kind: str) -> float | None:
    """A margin or step of an SI value of a kind, in the display unit of the difference."""
    return shown(value, difference_kind(kind))


def money(value: float | None) -> float | None:
    """Currency per second to currency per hour."""
    return shown(value, "money rate")


def fixed(value: float | None, decimals: int) -> str:
    """A number with given decimals, never -0; a dash where there is none."""
    if value is None:
        return ABSENT
    return f"{round(value, decimals) + 0.0:.{decimals}f}"


def brief(value: float | None, figures: int = 4) -> str:
    """A number in at most so many figures without trailing zeros: 424, 11.6, 0.35."""
    if value is None:
        return ABSENT
    if value == 0.0:
        return "0"
    if 1.0 <= abs(value) < 1e6:
        figures = max(figures, len(f"{abs(value):.0f}"))
    return f"{value:.{figures}g}"


def readable(value: float | None) -> str:
    """Two decimals, small numbers in two figures: 12.30, 0.27, 0.029."""
    small = value is not None and 0.0 < abs(value) < 0.1
    return brief(value, 2) if small else fixed(value, 2)


def same_decimals(values: Iterable[float | None], decimals: int) -> list[str]:
    """Numbers of one column with as many decimals as the column needs, at most `decimals`."""
    kept = list(values)
    present = [value for value in kept if value is not None]
    needed = next(
        (n for n in range(decimals) if all(abs(v - round(v, n)) < 0.5 * 10.0**-decimals for v in present)),
        decimals,
    )
    return [fixed(value, needed) for value in kept]


def with_unit(text: str, unit_text: str) -> str:
    """`424` and `degC` to `424 degC`; % stays close to its number as the case format writes it."""
    return f"{text} {unit_text}".rstrip()


def told(value: float | None, kind: str, currency: str = "") -> str:
    """A value with its unit for a sentence: `424.3 degC`."""
    if value is not None and is_trace(value, kind):
        return in_ppm(value)
    number = shown(value, kind)
    text = fixed(number, DECIMALS[kind]) if kind in DECIMALS else brief(number)
    return text if number is None else with_unit(text, unit(kind, currency))


def allowed(bound: float, kind: str, currency: str = "") -> str:
    """A bound with its unit as its owner wrote it: `424 degC`, `11.6 mol/mol`."""
    if is_trace(bound, kind):
        return in_ppm(bound)
    number = shown(bound, kind)
    assert number is not None
    return with_unit(brief(round(number, 9), 6), unit(kind, currency))


def is_trace(value: float, kind: str) -> bool:
    """Whether a share is better told in parts per million."""
    return kind == "fraction" and 0.0 < abs(value) < TRACE


def in_ppm(value: float) -> str:
    """`0.81 ppm` of the share 8.1e-7."""
    return f"{brief(1e6 * value, 3)} ppm"


def and_list(words: Sequence[str]) -> str:
    """`a`, `a and b`, `a, b and c`."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"


def counted(count: int, word: str) -> str:
    """`1 start`, `2 starts`."""
    return f"{count} {word}{'' if count == 1 else 's'}"


def owners_text(owners: Sequence[str]) -> str:
    """`bed 1`, `beds 1-3`, `beds 2 and 4`, `gaps 1 and 2`; other owners as they are."""
    groups: dict[str, list[int]] = {}
    for owner in owners:
        word, _, number = owner.rpartition(" ")
        key = word if number.isdigit() else owner
        groups.setdefault(key, []).extend([int(number)] if number.isdigit() else [])
    return and_list([_group_text(word, sorted(set(numbers))) for word, numbers in groups.items()])


def _group_text(word: str, numbers: list[int]) -> str:
    if not numbers:
        return word
    if len(numbers) == 1:
        return f"{word} {numbers[0]}"
    unbroken = numbers[-1] - numbers[0] == len(numbers) - 1
    if unbroken and len(numbers) > 2:
        return f"{word}s {numbers[0]}-{numbers[-1]}"
    return f"{word}s {and_list([str(number) for number in numbers])}"
