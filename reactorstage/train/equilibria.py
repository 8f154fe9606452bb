"""Equilibrium temperatures at bed exits with exact derivatives, for approaches to equilibrium."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.data import ENTHALPY, ENTROPY
from reactorstage.chemistry.constants import R_GAS
from reactorstage.chemistry.reaction import data_range, equilibrium_temperature, heat_of_reaction, ln_K
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.layout import Layout
from reactorstage.train.quotients import quotient

Array = NDArray[np.float64]

MOST_STEPS = 40


@dataclass(frozen=True)
class Equilibrium:
    """The temperature at which one reaction would stand still with what leaves one bed.

    index is its place in the base vector, operation that of the bed's exit; exothermic fixes the sign of the
    approach, so that it is positive while the forward reaction remains.
    """

    index: int
    operation: int
    bed: str
    reaction: int
    exothermic: bool

    def temperature(
        self,
        chemistry: CaseChemistry,
        layout: Layout,
        base: Array,
        moved: NDArray[np.int64] | None = None,
    ) -> Array:
        """T_eq with its derivatives (1 + D,), from ln K(T_eq) = ln Q; not a number where Q does not exist.

        moved (D, 2) states parameters of the chemistry that directions move, as in the kernel.
        """
        record = base[self.operation * layout.width : (self.operation + 1) * layout.width]
        F, p = record[: layout.species, 0], record[layout.species + 1, 0]
        row, exit_T = chemistry.laws.nu[self.reaction], float(record[layout.species + 2, 0])
        found = np.full(base.shape[1], np.nan)
        if (F[row != 0.0] <= 0.0).any():
            return found
        T = self._stands_still(chemistry, row, F, exit_T, float(p))
        if T is None:
            return found
        Q = quotient(chemistry, self.reaction, F, T, float(p))
        slope = self._heat(chemistry, row, T) / (R_GAS * T * T) - Q.T
        T -= (self._ln_K(chemistry, row, T) - Q.ln) / slope
        ln_Q_d = Q.F @ record[: layout.species, 1:] + Q.p * record[layout.species + 1, 1:]
        if moved is not None and chemistry.own_K(self.reaction) is None:
            ln_Q_d = ln_Q_d - _ln_K_shift(row, T, moved)
        found[0], found[1:] = T, ln_Q_d / slope
        return found

    def _stands_still(
        self, chemistry: CaseChemistry, row: Array, F: Array, exit_T: float, p: float
    ) -> float | None:
        """T with K(T) = Q, by Newton where Q depends on T; None without one in the range of the data."""
        Q = quotient(chemistry, self.reaction, F, exit_T, p)
        own = chemistry.own_K(self.reaction)
        T = equilibrium_temperature(chemistry.table, row, Q.ln, exit_T, own)
        if T is None or chemistry.fluid is None:
            return T
        low, high = data_range(chemistry.table, row)
        for _ in range(MOST_STEPS):
            Q = quotient(chemistry, self.reaction, F, T, p)
            slope = self._heat(chemistry, row, T) / (R_GAS * T * T) - Q.T
            step = -(self._ln_K(chemistry, row, T) - Q.ln) / slope
            T += float(np.clip(step, -0.1 * T, 0.1 * T))
            if not low <= T <= high:
                return None
            if abs(step) <= 1e-12 * T:
                return T
        return None

    def _heat(self, chemistry: CaseChemistry, row: Array, T: float) -> float:
        own = chemistry.own_K(self.reaction)
        return float(heat_of_reaction(chemistry.table, row[None, :], T)[0] if own is None else own.heat(T))

    def _ln_K(self, chemistry: CaseChemistry, row: Array, T: float) -> float:
        own = chemistry.own_K(self.reaction)
        return float(ln_K(chemistry.table, row[None, :], T)[0] if own is None else own.ln(T))


def _ln_K_shift(row: Array, T: float, moved: NDArray[np.int64]) -> Array:
    """d ln K / d parameter (D,) at T: formation enthalpies and entropies of the reaction's species."""
    shift = np.zeros(len(moved))
    for d, (kind, index) in enumerate(moved):
        if kind == ENTHALPY:
            shift[d] = -row[index] / (R_GAS * T)
        elif kind == ENTROPY:
            shift[d] = row[index] / R_GAS
    return shift


def equilibria_of(layout: Layout, chemistry: CaseChemistry, first: int) -> tuple[Equilibrium, ...]:
    """One for every bed and reversible reaction, from position `first` of the base vector on."""
    pairs = [
        (bed, r)
        for bed in layout.beds
        for r, equation in enumerate(chemistry.equations)
        if equation.reversible
    ]
    heats = heat_of_reaction(chemistry.table, chemistry.laws.nu, 500.0)
    return tuple(
        Equilibrium(first + k, bed.exit, bed.owner, r, bool(heats[r] <= 0.0))
        for k, (bed, r) in enumerate(pairs)
    )
