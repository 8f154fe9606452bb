"""Ideal-gas properties of every species of a table at one temperature.

Plain NumPy, the readable twin of the compiled kernel; a complex temperature gives complex
properties, so that derivatives can be checked by complex step.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.constants import R_GAS
from reactorstage.chemistry.species import SpeciesTable

Scalar = float | complex
Array = NDArray[Any]


def cp(table: SpeciesTable, T: Scalar) -> Array:
    """Molar heat capacities (S,), J/(mol K), at T in K."""
    powers = [T**-2, 1 / T, 1.0, T, T**2, T**3, T**4, 0.0, 0.0]
    return _combined(table, T, powers)


def h(table: SpeciesTable, T: Scalar) -> Array:
    """Molar enthalpies (S,), J/mol, at T in K; at 298.15 K the enthalpies of formation."""
    powers = [-1 / T, np.log(T), T, T**2 / 2, T**3 / 3, T**4 / 4, T**5 / 5, 1.0, 0.0]
    return _combined(table, T, powers)


def s(table: SpeciesTable, T: Scalar) -> Array:
    """Molar entropies (S,) at T in K and 1e5 Pa, J/(mol K)."""
    powers = [-(T**-2) / 2, -1 / T, np.log(T), T, T**2 / 2, T**3 / 3, T**4 / 4, 0.0, 1.0]
    return _combined(table, T, powers)


def gibbs(table: SpeciesTable, T: Scalar) -> Array:
    """Molar Gibbs energies h - T s (S,) at T in K and 1e5 Pa, J/mol."""
    return h(table, T) - T * s(table, T)


def _combined(table: SpeciesTable, T: Scalar, powers: Sequence[Scalar]) -> Array:
    """R times the nine coefficients of each species' range at T, combined with `powers` (S,)."""
    index = np.count_nonzero(np.real(T) > table.edges[:, 1:3], axis=1)
    coefficients = table.coefficients[np.arange(len(index)), index]
    return np.asarray(R_GAS * (coefficients @ np.array(powers)))
