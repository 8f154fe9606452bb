"""A group of isomers in equilibrium among themselves as one species.

Isomer-group thermodynamics (R. A. Alberty and C. A. Gehrig, J. Phys. Chem. Ref. Data 13 (1984) 1173, and
14 (1985) 803, from memory):

    G = -R T ln sum_i exp(-G_i/(R T))
    y_i = exp((G - G_i)/(R T)),  h = sum y_i h_i,  s = sum y_i (s_i - R ln y_i),
    cp = sum y_i cp_i + ( sum y_i h_i^2 - h^2 )/(R T^2)

The group is fitted into the nine-coefficient form of `forms`, in which cp, h and s belong together by
construction: the seven coefficients of cp range by range by least squares, the two constants so that h and s
are right at 298.15 K and continuous.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations, pairwise

import numpy as np

from reactorstage.chemistry import forms, thermo
from reactorstage.chemistry.constants import R_GAS, T_STANDARD
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.species import Species, table_of

POINTS = 500
"""Temperatures, evenly spaced in ln T, to which cp is fitted."""

CANDIDATES = 5
"""Places, evenly spaced in ln T, at which ranges may be divided besides those of the isomers' data."""

APART = 0.15
"""Share by which two such places differ at least."""


def group_properties(isomers: Sequence[Species], T: float) -> tuple[float, float, float]:
    """cp J/(mol K), h J/mol and s J/(mol K) of the group at T in K and 1e5 Pa, by the formulas above."""
    table = table_of(isomers)
    cp, h, s = thermo.cp(table, T), thermo.h(table, T), thermo.s(table, T)
    ln_y = -(h - T * s) / (R_GAS * T)
    ln_y = ln_y - (np.log(np.sum(np.exp(ln_y - ln_y.max()))) + ln_y.max())
    y = np.exp(ln_y)
    h_group = float(y @ h)
    spread = float(y @ (h - h_group) ** 2)
    return float(y @ cp) + spread / (R_GAS * T * T), h_group, float(y @ (s - R_GAS * ln_y))


def isomer_group(name: str, isomers: Sequence[Species]) -> Species:
    """The species called `name` that stands for the isomers; its range is the one that their data share.

    Raises ValueError for fewer than two isomers, for one given twice, for different formulas and for data
    that share no range.
    """
    _check(isomers)
    low = max(float(one.edges[0]) for one in isomers)
    high = min(float(one.edges[-1]) for one in isomers)
    if not low < high:
        raise ValueError(
            f"the data of {', '.join(one.name for one in isomers)} share no range of temperature"
        )
    T = np.geomspace(low, high, POINTS)
    cp = np.array([group_properties(isomers, one)[0] for one in T])
    inner = _best_division(T, cp / R_GAS, _places(isomers, low, high))
    ranges = _joined(isomers, [_fit(T, cp / R_GAS, *pair) for pair in _pairs([low, *inner, high])], inner)
    coefficients, edges = forms.fill(ranges, [low, *inner, high])
    source = "isomer group of " + ", ".join(one.source for one in isomers)
    return Species(name, dict(isomers[0].atoms), isomers[0].molar_mass, coefficients, edges, source)


def _check(isomers: Sequence[Species]) -> None:
    if len(isomers) < 2:
        raise ValueError("a group of isomers has at least two members")
    first = isomers[0]
    for one in isomers[1:]:
        if dict(one.atoms) != dict(first.atoms):
            raise ValueError(f"{one.name} is no isomer of {first.name}: their formulas differ")


def _pairs(edges: Sequence[float]) -> list[tuple[float, float]]:
    return list(pairwise(edges))


def _fit(T: Floats, cp_R: Floats, low: float, high: float) -> Floats:
    """Coefficients (9,) of cp/R between two temperatures; those of h and s are zero."""
    inside = (low <= T) & (high >= T)
    powers = np.arange(-2.0, 5.0)
    found = np.linalg.lstsq((T[inside, None] / high) ** powers, cp_R[inside], rcond=None)[0]
    return np.array([*(found / high**powers), 0.0, 0.0])


def _misfit(T: Floats, cp_R: Floats, low: float, high: float) -> float:
    """Greatest error of cp/R between two temperatures."""
    inside = (low <= T) & (high >= T)
    found = T[inside, None] ** np.arange(-2.0, 5.0) @ _fit(T, cp_R, low, high)[:7]
    return float(np.abs(found - cp_R[inside]).max())


def _places(isomers: Sequence[Species], low: float, high: float) -> list[float]:
    """Temperatures at which ranges may be divided."""
    given = {float(edge) for one in isomers for edge in one.edges[1:3] if low < edge < high}
    spaced = np.geomspace(low, high, CANDIDATES + 2)[1:-1].tolist()
    places = sorted({*given, *(T for T in spaced if all(abs(T - edge) > APART * edge for edge in given))})
    return [T for T, before in zip(places, [0.0, *places], strict=False) if T - before > 0.01 * T]


def _best_division(T: Floats, cp_R: Floats, places: Sequence[float]) -> list[float]:
    """The two inner edges of the three ranges that fit best."""
    errors: dict[tuple[float, float], float] = {}

    def worst(edges: Sequence[float]) -> float:
        pairs = _pairs([float(T[0]), *edges, float(T[-1])])
        for pair in pairs:
            if pair not in errors:
                errors[pair] = _misfit(T, cp_R, *pair)
        return max(errors[pair] for pair in pairs)

    divisions = [list(pair) for pair in combinations(places, 2)]
    return divisions[int(np.argmin([worst(pair) for pair in divisions]))]


def _joined(isomers: Sequence[Species], ranges: list[Floats], inner: Sequence[float]) -> list[Floats]:
    """The ranges with constants of h and s: right at 298.15 K, or at the nearest end, and continuous."""
    start = min(max(T_STANDARD, float(isomers[0].edges[0])), float(isomers[0].edges[-1]))
    first = sum(edge < start for edge in inner)
    _, h, s = group_properties(isomers, start)
    _set_constants(ranges[first], start, h, s)
    for k in range(first + 1, len(ranges)):
        _set_constants(ranges[k], inner[k - 1], *_h_and_s(ranges[k - 1], inner[k - 1]))
    for k in range(first - 1, -1, -1):
        _set_constants(ranges[k], inner[k], *_h_and_s(ranges[k + 1], inner[k]))
    return ranges


def _h_and_s(c: Floats, T: float) -> tuple[float, float]:
    powers_h = np.array([-1 / T, np.log(T), T, T**2 / 2, T**3 / 3, T**4 / 4, T**5 / 5, 1.0, 0.0])
    powers_s = np.array([-(T**-2) / 2, -1 / T, np.log(T), T, T**2 / 2, T**3 / 3, T**4 / 4, 0.0, 1.0])
    return R_GAS * float(c @ powers_h), R_GAS * float(c @ powers_s)


def _set_constants(c: Floats, T: float, h: float, s: float) -> None:
    c[7:] = 0.0
    h_without, s_without = _h_and_s(c, T)
    c[7], c[8] = (h - h_without) / R_GAS, (s - s_without) / R_GAS
