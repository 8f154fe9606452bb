"""The fluid of a case: its equation of state with critical data, or its densities."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.case import units
from reactorstage.case.written_fluid import CUBIC, IDEAL_GAS, PAIR
from reactorstage.chemistry.critical import Critical, critical_data
from reactorstage.chemistry.cubic import cubic_fluid
from reactorstage.chemistry.fluid import CubicStream, Fluid, PlainLiquid
from reactorstage.chemistry.saturation import bubble_temperature, dew_temperature
from reactorstage.chemistry.species import data_name
from reactorstage.train.laws import attempt

if TYPE_CHECKING:
    from reactorstage.case.model import Case
    from reactorstage.errors import Problem


Array = NDArray[np.float64]


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


def feeds_in_phase(case: Case, fluid: Fluid | None, compositions: Mapping[str, Array]) -> Iterator[Problem]:
    """One problem for each feed that is not wholly in the phase it is said to be in, where it enters."""
    if not isinstance(fluid, CubicStream):
        return
    for name, feed in case.feeds.items():
        phase = feed.phase or fluid.phase
        find = dew_temperature if phase == "vapour" else bubble_temperature
        assert feed.pressure is not None
        edge = find(fluid.equation, compositions[name], feed.pressure)
        T = feed.temperature.now
        if edge is None or (edge.temperature <= T if phase == "vapour" else edge.temperature >= T):
            continue
        word = "dew" if phase == "vapour" else "bubble"
        point = f"{units.to_display(edge.temperature, 'temperature'):.1f} {units.display_unit('temperature')}"
        side = "below its dew point" if word == "dew" else "above its bubble point"
        message = f"{name} is {side}, {point} at its pressure: it is no single {phase} when it enters"
        yield case.problem(
            ("feeds", name, "temperature"),
            message,
            "change its temperature or pressure, or state its `phase`",
        )
