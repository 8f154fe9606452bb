"""How far an equilibrium constant of a law's own lies from that of the Gibbs energies: value and slope."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from reactorstage.chemistry.equilibrium import loop_inconsistency
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.law import Constant
from reactorstage.chemistry.reaction import heat_of_reaction, ln_K
from reactorstage.chemistry.species import SpeciesTable

SAMPLES = 9
"""Temperatures at which constants are compared, ends of the window included."""


@dataclass(frozen=True)
class Difference:
    """At the temperature T [K] where it is greatest: the law's own value and that of the Gibbs energies."""

    T: float
    own: float
    gibbs: float


@dataclass(frozen=True)
class Agreement:
    """ln K and heat of reaction [J/mol] compared over the window (K) of temperature."""

    window: tuple[float, float]
    ln_K: Difference
    heat: Difference

    @property
    def off(self) -> float:
        """K over that of the Gibbs energies, less 1."""
        return float(np.expm1(self.ln_K.own - self.ln_K.gibbs))

    @property
    def heat_off(self) -> float:
        """Heat of reaction less that of the species data, J/mol."""
        return self.heat.own - self.heat.gibbs


def compare(K: Constant, table: SpeciesTable, nu_row: Floats, window: tuple[float, float]) -> Agreement:
    """K (standard pressure 1e5 Pa) against the Gibbs energies of a reaction; nu_row (S,), window in K.

    The heat of reaction of K is R T^2 d ln K/dT (van 't Hoff).
    """
    T = np.linspace(*window, SAMPLES)
    row = nu_row[None, :]
    gibbs = np.array([float(ln_K(table, row, one)[0]) for one in T])
    heats = np.array([float(heat_of_reaction(table, row, one)[0]) for one in T])
    values = _greatest(T, K.ln(T), gibbs, np.abs(np.expm1(K.ln(T) - gibbs)))
    return Agreement(window, values, _greatest(T, K.heat(T), heats, np.abs(K.heat(T) - heats)))


def _greatest(T: Floats, own: Floats, gibbs: Floats, off: Floats) -> Difference:
    worst = int(np.argmax(off))
    return Difference(float(T[worst]), float(own[worst]), float(gibbs[worst]))


def loop_products(
    constants: Sequence[Constant | None], table: SpeciesTable, nu: Floats, window: tuple[float, float]
) -> tuple[Floats, Floats]:
    """Loops (L, R) of reactions that together change nothing, and the product of K round each (L,).

    The product that is farthest from 1 in the window (K); None in constants (R) means the Gibbs energies.
    """
    ln_Ks = [_ln_K(one, table, nu[r : r + 1]) for r, one in enumerate(constants)]
    loops, sums = loop_inconsistency(ln_Ks, nu, np.linspace(*window, SAMPLES).tolist())
    return loops, np.exp(sums)


def _ln_K(constant: Constant | None, table: SpeciesTable, row: Floats) -> Callable[[float], float]:
    if constant is None:
        return lambda T: float(ln_K(table, row, T)[0])
    return lambda T: float(constant.ln(T))
