"""The fluid of a case: its equation of state with critical data, or its densities."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from reactorstage.case.written_fluid import CUBIC, IDEAL_GAS, PAIR
from reactorstage.chemistry.critical import Critical, critical_data
from reactorstage.chemistry.cubic import cubic_fluid
from reactorstage.chemistry.fluid import CubicStream, Fluid, PlainLiquid
from reactorstage.chemistry.species import data_name
from reactorstage.train.laws import attempt

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.errors import Problem


def read_fluid(case: Case, problems: list[Problem]) -> Fluid | None:
    """The fluid, None for an ideal gas or with problems added."""
    density = case.fluid.density
    if density == IDEAL_GAS:
        return None
    if density not in CUBIC:
        rows = [one.density.powers_of_T if one.density else () for one in case.species.values()]
        widest = max(map(len, rows))
        return PlainLiquid(np.array([[*row, *[0.0] * (widest - len(row))] for row in rows]))
    critical = [_critical(case, name, problems) for name in case.species]
    known = [one for one in critical if one is not None]
    if len(known) < len(critical):
        return None
    names, k = list(case.species), np.zeros((len(critical), len(critical)))
    for pair, value in case.fluid.binary_parameters.items():
        i, j = (names.index(name.strip()) for name in pair.split(PAIR))
        k[i, j] = k[j, i] = value
    assert case.fluid.phase is not None
    return CubicStream(cubic_fluid(density, known, k), case.fluid.phase)


def _critical(case: Case, name: str, problems: list[Problem]) -> Critical | None:
    """Critical constants of a species: as given, under a name given, or under that of its gas data."""
    given, species = case.species[name].critical_data, case.species[name]
    path = ("species", name) if given is None else ("species", name, "critical data")
    own = (given.temperature, given.pressure, given.acentric_factor) if given else (None, None, None)
    known = (given.name if given else None) or data_name(species.gas_data or "") or species.formula or name
    return attempt(case, problems, path, lambda: critical_data(known, *own))
