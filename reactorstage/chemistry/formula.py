"""Chemical formulas: atoms and molar masses."""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Mapping
from functools import cache

_TOKEN = re.compile(r"(?P<element>[A-Z][a-z]?)|(?P<open>[(\[])|(?P<close>[)\]])")
_COUNT = re.compile(r"\d*")
_PAIRS = {")": "(", "]": "["}


def parse_formula(text: str) -> dict[str, float]:
    """Atoms of a formula such as "C10H14" or "Ca(OH)2": element symbol -> count.

    Round and square brackets may be nested; counts are whole numbers. Whether a symbol is an
    element is known to `molar_mass` only.

    Raises ValueError with the place of the first thing that is not a formula.
    """
    formula = text.strip()
    if not formula:
        raise ValueError("the formula is empty; write one such as C2H4")
    open_groups: list[tuple[str, Counter[str]]] = [("", Counter())]
    position = 0
    while position < len(formula):
        position = _read_token(formula, position, open_groups)
    if len(open_groups) > 1:
        raise ValueError(f"formula {formula!r}: bracket '{open_groups[-1][0]}' is not closed")
    return {element: float(count) for element, count in open_groups[0][1].items()}


def _read_token(formula: str, position: int, open_groups: list[tuple[str, Counter[str]]]) -> int:
    token = _TOKEN.match(formula, position)
    if token is None:
        found = formula[position]
        raise ValueError(
            f"formula {formula!r}: {found!r} at character {position + 1} is neither an element symbol, "
            "a whole number after one, nor a bracket; write one such as C2H4 or Ca(OH)2"
        )
    if token["open"]:
        open_groups.append((token["open"], Counter()))
        return token.end()
    group = Counter({token["element"]: 1}) if token["element"] else _closed(formula, token[0], open_groups)
    count, end = _read_count(formula, token.end())
    for element, number in group.items():
        open_groups[-1][1][element] += number * count
    return end


def _closed(formula: str, bracket: str, open_groups: list[tuple[str, Counter[str]]]) -> Counter[str]:
    if open_groups[-1][0] != _PAIRS[bracket]:
        raise ValueError(f"formula {formula!r}: '{bracket}' closes no '{_PAIRS[bracket]}'")
    group = open_groups.pop()[1]
    if not group:
        raise ValueError(f"formula {formula!r}: there is nothing between '{_PAIRS[bracket]}' and '{bracket}'")
    return group


def _read_count(formula: str, position: int) -> tuple[int, int]:
    digits = _COUNT.match(formula, position)
    assert digits is not None
    count = int(digits[0] or 1)
    if count == 0:
        raise ValueError(f"formula {formula!r}: the count 0 at character {position + 1} means nothing")
    return count, digits.end()


@cache
def atomic_weight(element: str) -> float:
    """Atomic weight of an element symbol, kg/mol, from Cantera's element data (E is the electron).

    Raises ValueError when there is no such element or it has no standard weight.
    """
    import cantera

    try:
        weight = float(cantera.Element(element).weight)
    except cantera.CanteraError as error:
        raise ValueError(f"{element!r} is not an element with a standard atomic weight") from error
    return weight * 1e-3


def molar_mass(atoms: Mapping[str, float]) -> float:
    """Molar mass of a set of atoms (element symbol -> count), kg/mol."""
    return sum(count * atomic_weight(element) for element, count in atoms.items())
