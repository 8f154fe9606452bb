"""Critical constants of species: from Cantera's data by name, or as given."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from functools import lru_cache
from math import isfinite

from reactorstage.chemistry.formula import parse_formula
from reactorstage.chemistry.species import _shipped

CRITICAL_FILE = "critical-properties.yaml"
"""Cantera's data file of critical constants."""


@dataclass(frozen=True)
class Critical:
    """Critical temperature K, critical pressure Pa, acentric factor, and where they come from."""

    temperature: float
    pressure: float
    acentric_factor: float
    source: str


@dataclass(frozen=True)
class _Entry:
    name: str
    words: str
    constants: tuple[float, float, float]

    @property
    def shown(self) -> str:
        return f"{self.name} ({self.words})"


def critical_data(
    name: str,
    temperature: float | None = None,
    pressure: float | None = None,
    acentric_factor: float | None = None,
) -> Critical:
    """Constants of a species; those given stand before those of the file.

    name as in Cantera's critical-properties.yaml: "C8H10-1" or the words "m-xylene", upper and lower case
    alike, or "formula,words" with words that begin those of just one isomer ("C8H10,ethylbenz"). A name
    without words is the isomer that the file lists under it; other spellings of a formula are not guessed.

    Raises LookupError with the nearest names when something is missing and the file does not have the
    species (it lacks water, ammonia, argon and helium, among others); ValueError for impossible numbers.
    """
    given = (temperature, pressure, acentric_factor)
    if temperature is None or pressure is None or acentric_factor is None:
        entry = _entry(name)
        mixed = any(own is not None for own in given)
        source = f"{CRITICAL_FILE}: {entry.shown}" + (", some as given" if mixed else "")
        pairs = zip(given, entry.constants, strict=True)
        T, p, omega = (there if own is None else own for own, there in pairs)
    else:
        T, p, omega, source = temperature, pressure, acentric_factor, "as given"
    if not (isfinite(T) and T > 0.0 and isfinite(p) and p > 0.0):
        raise ValueError(f"{name}: critical temperature {T:g} K and pressure {p:g} Pa must be above zero")
    if not -1.0 < omega < 3.0:
        raise ValueError(f"{name}: an acentric factor of {omega:g} is not between -1 and 3")
    return Critical(T, p, omega, source)


def critical_names() -> tuple[str, ...]:
    """Species that the file has, as "C8H10-1 (m-xylene)", in its order."""
    return tuple(entry.shown for entry in _entries().values())


def _entry(name: str) -> _Entry:
    wanted, entries = name.strip().casefold(), _entries()
    found = entries.get(wanted) or next((one for one in entries.values() if one.words == wanted), None)
    if found:
        return found
    formula, comma, words = wanted.partition(",")
    same = [one for one in entries.values() if one.name.casefold().partition("-")[0] == formula]
    begun = [one for one in same if comma and words and one.words.startswith(words)]
    if len(begun) == 1:
        return begun[0]
    near = begun or same or _same_atoms(name) or _alike(wanted)
    hint = f"; nearest: {', '.join(one.shown for one in near[:8])}" if near else ""
    raise LookupError(
        f"no critical constants of {name!r} in {CRITICAL_FILE}{hint}; "
        "give the critical temperature, the critical pressure and the acentric factor"
    )


def _same_atoms(formula: str) -> list[_Entry]:
    """Entries made of the same atoms as a formula written in another way."""
    try:
        atoms = parse_formula(formula)
    except ValueError:
        return []
    return [one for one in _entries().values() if _atoms(one) == atoms]


def _atoms(entry: _Entry) -> Mapping[str, float]:
    formula = entry.name.partition("-")[0].replace("CL", "Cl").replace("BR", "Br")
    return parse_formula(formula)


def _alike(wanted: str) -> list[_Entry]:
    """Entries with words that look like the wanted ones."""
    by_words = {one.words: one for one in _entries().values()}
    return [by_words[words] for words in get_close_matches(wanted, by_words, n=6, cutoff=0.7)]


@lru_cache(maxsize=1)
def _entries() -> Mapping[str, _Entry]:
    """The file's entries by name in lower case; it is a flat list, so its lines are read as they stand."""
    text = _shipped(CRITICAL_FILE).read_text(encoding="utf-8")
    blocks = re.split(r"^- (?=name:)", text, flags=re.MULTILINE)[1:]
    read = [_read(dict(_LINE.findall(block))) for block in blocks]
    return {entry.name.casefold(): entry for entry in read}


_LINE = re.compile(r"^ *([a-z-]+): *(\S+)$", re.MULTILINE)


def _read(lines: Mapping[str, str]) -> _Entry:
    keys = ("critical-temperature", "critical-pressure", "acentric-factor")
    T, p, omega = (float(lines[key]) for key in keys)
    return _Entry(lines["name"], lines["descriptive-name"].casefold(), (T, p, omega))
