"""What each bed could do at most with the stream that enters it, how much of that it does, and where.

The potential rise is that to the adiabatic equilibrium of the stream, at the pressure of the bed's inlet, by
all listed reactions (irreversible ones run until a reactant is gone): in normal operation the maximum
attainable temperature. A trip or design value it is not.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.equilibrium import adiabatic_equilibrium
from reactorstage.chemistry.rates import ln_K_of_laws
from reactorstage.train.quotients import quotient
from reactorstage.train.result import Profile, Value

if TYPE_CHECKING:
    from reactorstage.train.layout import BedPlace
    from reactorstage.train.programme import Model

Array = NDArray[np.float64]

UNLIT_SHARE = 0.1
"""A bed is unlit below this share of its potential rise (a convention of the trade)."""

UNLIT_POTENTIAL_K = 15.0
"""Potential below which a bed with little rise is not called unlit: not much is left to react (a choice)."""

UNLIT_CONVERSION = 0.5
"""Conversion of the main reactant from which a bed is lit whatever it rises (a choice): what is left of the
potential is then that of reactions that are not wanted."""

DONE_SHARE = 0.99
"""Catalyst is idle where this share of the bed's rise lies behind the stream."""

NO_RISE_K = 0.01
"""A rise, or a potential, below this is none."""


@dataclass(frozen=True)
class BedPotential:
    """One bed: T of adiabatic equilibrium K, potential and rise K, utilisation and idle as fractions.

    None stands where a value does not exist, why then says why not. converted is the part of the train's main
    reactant that the bed uses of what enters it, quotients are Q/K of the reversible reactions at the exit.
    """

    owner: str
    T: float | None
    potential: float | None
    rise: float
    utilisation: float | None
    idle: float | None
    converted: float = 0.0
    quotients: Mapping[str, float | None] = field(default_factory=dict)
    why: str = ""

    @property
    def unlit(self) -> bool:
        """Whether the bed does next to nothing although much could happen."""
        if self.potential is None or self.utilisation is None or self.converted > UNLIT_CONVERSION:
            return False
        return abs(self.potential) > UNLIT_POTENTIAL_K and self.utilisation < UNLIT_SHARE


def bed_potentials(
    model: Model, base: Array, profiles: Iterable[Profile], main_reactant: str
) -> tuple[BedPotential, ...]:
    """Potentials of the beds that have a profile; base is the base vector (size,) of a rating."""
    along = {profile.owner: profile for profile in profiles}
    return tuple(
        _potential(model, base, bed, along[bed.owner], main_reactant)
        for bed in model.layout.beds
        if bed.owner in along
    )


def _potential(model: Model, base: Array, bed: BedPlace, along: Profile, main_reactant: str) -> BedPotential:
    inlet, exit_ = _record(model, base, bed.inlet), _record(model, base, bed.exit)
    rise = float(exit_[-1] - inlet[-1])
    found = BedPotential(
        bed.owner,
        T=None,
        potential=None,
        rise=rise,
        utilisation=None,
        idle=None,
        converted=_converted(model, inlet, exit_, main_reactant),
        quotients=_quotients(model, exit_),
    )
    try:
        T = _attainable(model, inlet, exit_)
    except ValueError as error:
        return replace(found, why=str(error))
    potential = T - float(inlet[-1])
    found = replace(found, T=T, potential=potential)
    if not along.w[-1] > 0.0:
        return replace(found, why="no catalyst")
    used = rise / potential if abs(potential) > NO_RISE_K else None
    return replace(found, utilisation=used, idle=idle_share(along), why="no rise")


def _converted(model: Model, inlet: Array, exit_: Array, name: str) -> float:
    if name not in model.chemistry.species:
        return 0.0
    s = model.chemistry.species.index(name)
    return float(1.0 - exit_[s] / inlet[s]) if inlet[s] > 0.0 else 0.0


def _record(model: Model, base: Array, operation: int) -> Array:
    """Flows (S,), enthalpy flow, pressure and temperature after an operation."""
    return base[operation * model.layout.width : (operation + 1) * model.layout.width]


def _attainable(model: Model, inlet: Array, exit_: Array) -> float:
    """Temperature of adiabatic equilibrium at the inlet's pressure.

    What leaves has the atoms and the enthalpy of what enters, and is nearer to the answer: the search begins
    there unless irreversible reactions make the answer depend on the way.
    """
    chemistry, S = model.chemistry, model.layout.species
    reversible = [equation.reversible for equation in chemistry.equations]
    start = exit_ if all(reversible) else inlet
    found = adiabatic_equilibrium(
        chemistry.table,
        chemistry.laws.nu,
        reversible,
        start[:S],
        float(start[-1]),
        float(inlet[-2]),
        chemistry.fluid,
    )
    return found.T


def idle_share(along: Profile) -> float | None:
    """Share of the catalyst behind the last place that is more than 1 % of the bed's rise from its exit.

    Between points the distance from the exit temperature is taken to fall exponentially, before the last one
    linearly. None without a rise.
    """
    away = np.abs(along.T - along.T[-1])
    least = (1.0 - DONE_SHARE) * away[0]
    if away[0] <= NO_RISE_K:
        return None
    last = int(np.flatnonzero(away > least)[-1])
    before, after = float(away[last]), float(away[last + 1])
    part = np.log(before / least) / np.log(before / after) if after > 0.0 else 1.0 - least / before
    w = along.w[last] + part * (along.w[last + 1] - along.w[last])
    return float(1.0 - w / along.w[-1])


def _quotients(model: Model, exit_: Array) -> dict[str, float | None]:
    chemistry, S = model.chemistry, model.layout.species
    T, p = float(exit_[-1]), float(exit_[-2])
    quotients = [quotient(chemistry, r, exit_[:S], T, p).ln for r in range(len(chemistry.reactions))]
    with np.errstate(over="ignore"):
        shares = np.exp(np.array(quotients) - ln_K_of_laws(chemistry.laws, chemistry.table, T))
    return {
        name: float(share) if np.isfinite(share) else None
        for name, share, equation in zip(chemistry.reactions, shares, chemistry.equations, strict=True)
        if equation.reversible
    }


def potential_values(model: Model, potentials: Iterable[BedPotential]) -> dict[str, Value]:
    """The reported quantities of all beds, "not reached" for those without a potential."""
    known = {one.owner: one for one in potentials}
    values: dict[str, Value] = {}
    for bed in model.layout.beds:
        one = known.get(bed.owner) or BedPotential(bed.owner, None, None, 0.0, None, None, why="not reached")
        values |= {
            f"{one.owner}.equilibrium temperature": _value(one.T, "temperature", one.why),
            f"{one.owner}.potential rise": _value(one.potential, "temperature difference", one.why),
            f"{one.owner}.utilisation": _value(one.utilisation, "fraction", one.why),
            f"{one.owner}.idle catalyst": _value(one.idle, "fraction", one.why),
        }
        for name, share in one.quotients.items():
            values[f"{one.owner}.Q/K of {name}"] = _value(share, "fraction", "a reactant is absent")
    return values


def _value(value: float | None, kind: str, why: str) -> Value:
    return Value(value, kind, why if value is None else "")


def unlit_notes(potentials: Iterable[BedPotential]) -> list[str]:
    """One sentence for each bed that is practically unlit."""
    return [
        _unlit_note(one.owner, one.rise, one.potential) for one in potentials if one.unlit and one.potential
    ]


def _unlit_note(owner: str, rise: float, potential: float) -> str:
    verb, sign = ("rises", 1.0) if potential > 0.0 else ("falls", -1.0)
    did, could = sign * rise, sign * potential
    done = f"{verb} {did:.{0 if abs(did) >= 1.0 else 1}f} K"
    return f"{owner.capitalize()} is practically unlit: it {done} of a possible {could:.0f} K."
