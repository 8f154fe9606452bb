"""Activities and enthalpies of a stream: ideal gas, cubic equation of state, or plain liquid.

Activities are fugacities over 1e5 Pa in gases and mole fractions in liquids; enthalpies are those of the
species plus what a cubic equation adds.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from reactorstage.chemistry import thermo
from reactorstage.chemistry.constants import P_STANDARD, R_GAS
from reactorstage.chemistry.cubic import Phase, cubic_state, fugacity_slopes, residual_capacity
from reactorstage.chemistry.fluid import CubicStream, Fluid, PlainLiquid
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.species import SpeciesTable
from reactorstage.chemistry.thermo import Array, Scalar


@dataclass(frozen=True, eq=False)
class Mixture:
    """Species data with the fluid that they make up; None is an ideal gas."""

    table: SpeciesTable
    fluid: Fluid | None = None

    def ln_coefficients(self, F: Array, T: Scalar, p: Scalar) -> Array:
        """(S,) ln a - ln y: of the pressure and, in a cubic equation, the fugacity coefficients."""
        if isinstance(self.fluid, PlainLiquid):
            return np.zeros(len(F))
        shift = np.full(len(F), np.log(p / P_STANDARD))
        if isinstance(self.fluid, CubicStream):
            shift = shift + cubic_state(self.fluid.equation, F, T, p, self.fluid.phase).ln_phi
        return shift

    def coefficient_slopes(self, F: Floats, T: float, p: float) -> tuple[Floats, Floats, Floats]:
        """Slopes of `ln_coefficients` by the flows (S, S), T and p (S,)."""
        S = len(F)
        if isinstance(self.fluid, CubicStream):
            Z = cubic_state(self.fluid.equation, F, T, p, self.fluid.phase).Z
            slopes = fugacity_slopes(self.fluid.equation, F, T, p, Z)
            return slopes.F, slopes.T, slopes.p + 1.0 / p
        gas = self.fluid is None
        return np.zeros((S, S)), np.zeros(S), np.full(S, 1.0 / p if gas else 0.0)

    def enthalpy(self, F: Array, T: Scalar, p: Scalar, phase: str | None = None) -> Any:
        """Enthalpy flow, W, of flows (S,) in mol/s; `phase` where it is not that of the stream."""
        H = F @ thermo.h(self.table, T)
        if isinstance(self.fluid, CubicStream):
            own: Phase = self.fluid.phase if phase is None else "liquid" if phase == "liquid" else "vapour"
            H = H + cubic_state(self.fluid.equation, F, T, p, own).H
        return H

    def heats(self, F: Floats, T: float, p: float) -> tuple[Floats, float]:
        """Partial molar enthalpies (S,), J/mol, and the heat capacity flow, W/K."""
        h, capacity = thermo.h(self.table, T), float(F @ thermo.cp(self.table, T))
        if not isinstance(self.fluid, CubicStream):
            return np.asarray(h, dtype=np.float64), capacity
        Z = cubic_state(self.fluid.equation, F, T, p, self.fluid.phase).Z
        slopes = fugacity_slopes(self.fluid.equation, F, T, p, Z)
        own = residual_capacity(self.fluid.equation, F, T, p, Z)
        return np.asarray(h - R_GAS * T * T * slopes.T), capacity + own

    def molar(self, y: Floats, T: float, p: float, phase: str | None = None) -> tuple[float, float]:
        """Enthalpy, J/mol, and heat capacity, J/(mol K), of mole fractions (S,), in a phase as `enthalpy`."""
        fluid = self.fluid
        if isinstance(fluid, CubicStream) and phase not in (None, fluid.phase):
            other: Phase = "liquid" if fluid.phase == "vapour" else "vapour"
            return Mixture(self.table, CubicStream(fluid.equation, other)).molar(y, T, p)
        return float(self.enthalpy(y, T, p)), self.heats(y, T, p)[1]

    def volume(self, F: Array, T: Scalar, p: Scalar) -> Any:
        """Volume flow, m3/s."""
        if isinstance(self.fluid, CubicStream):
            return cubic_state(self.fluid.equation, F, T, p, self.fluid.phase).V
        if isinstance(self.fluid, PlainLiquid):
            return F @ (self.table.molar_mass / self.fluid.densities(T))
        return np.sum(F, axis=0) * R_GAS * T / p

    def part(self, there: Array) -> Mixture:
        """The mixture of some of its species, (S,) true where wanted."""
        return Mixture(self.table.part(there), None if self.fluid is None else self.fluid.part(there))
