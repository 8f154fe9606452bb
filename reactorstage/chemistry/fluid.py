"""What flows through the beds when it is no ideal gas: a cubic equation in one phase, or a plain liquid."""

from __future__ import annotations

from dataclasses import dataclass

from reactorstage.chemistry.cubic import CubicFluid, Phase
from reactorstage.chemistry.forms import Floats


@dataclass(frozen=True, eq=False)
class CubicStream:
    """A stream under a cubic equation of state that is to stay in one phase."""

    equation: CubicFluid
    phase: Phase


@dataclass(frozen=True, eq=False)
class PlainLiquid:
    """A liquid of given densities: density (S, up to 4) by powers of T, kg/m3; no excess properties.

    Enthalpies, entropies and heat capacities of its species are those of the liquids; activities are mole
    fractions.
    """

    density: Floats


Fluid = CubicStream | PlainLiquid
"""None stands for the ideal gas."""
