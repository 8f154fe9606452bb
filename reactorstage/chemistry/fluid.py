"""What flows through the beds when it is no ideal gas: a cubic equation in one phase, or a plain liquid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reactorstage.chemistry.cubic import CubicFluid, Phase
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.thermo import Array, Scalar


@dataclass(frozen=True, eq=False)
class CubicStream:
    """A stream under a cubic equation of state that is to stay in one phase."""

    equation: CubicFluid
    phase: Phase

    def part(self, there: Array) -> CubicStream:
        """The stream of some of its species, (S,) true where wanted."""
        return CubicStream(self.equation.part(there), self.phase)


@dataclass(frozen=True, eq=False)
class PlainLiquid:
    """A liquid of given densities: density (S, up to 4) by powers of T, kg/m3; no excess properties.

    Enthalpies, entropies and heat capacities of its species are those of the liquids; activities are mole
    fractions.
    """

    density: Floats

    def densities(self, T: Scalar) -> Array:
        """Of the species (S,), kg/m3."""
        return np.asarray(self.density @ T ** np.arange(self.density.shape[1]))

    def part(self, there: Array) -> PlainLiquid:
        """The liquid of some of its species, (S,) true where wanted."""
        return PlainLiquid(self.density[there])


Fluid = CubicStream | PlainLiquid
"""None stands for the ideal gas."""
