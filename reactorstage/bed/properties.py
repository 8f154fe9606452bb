"""Molar properties of ideal-gas species inside the kernel (nine-coefficient polynomials)."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled, small
from reactorstage.bed.layout import at_edges

THIRD = 1.0 / 3.0


@small
def first_coefficient(chem, s, T):
    """Position of the coefficients that hold for species s at T."""
    edges = at_edges(chem) + 2 * s
    if chem.real[edges] >= T:
        return 27 * s
    return 27 * s + 9 if chem.real[edges + 1] >= T else 27 * s + 18


@compiled
def heat_and_enthalpy(chem, T, work):
    """cp/R and h/(R T) of all species at T [K] into the work array.

    cp/R = sum c_k T^(k-2), k = 0..6 (McBride, Zehe & Gordon 2002, form of the polynomial).
    """
    S, c = chem.S, chem.real
    lnT, inv = np.log(T), 1.0 / T
    for s in range(S):
        j = first_coefficient(chem, s, T)
        work[S + s] = (
            (c[j] * inv + c[j + 1]) * inv
            + c[j + 2]
            + T * (c[j + 3] + T * (c[j + 4] + T * (c[j + 5] + T * c[j + 6])))
        )
        work[2 * S + s] = (
            (-c[j] * inv + c[j + 1] * lnT + c[j + 7]) * inv
            + c[j + 2]
            + T * (c[j + 3] * 0.5 + T * (c[j + 4] * THIRD + T * (c[j + 5] * 0.25 + T * c[j + 6] * 0.2)))
        )


@compiled
def entropy(chem, T, work):
    """s/R of all species at T [K] and the standard pressure into the work array."""
    S, c = chem.S, chem.real
    lnT, inv = np.log(T), 1.0 / T
    for s in range(S):
        j = first_coefficient(chem, s, T)
        work[3 * S + s] = (
            (-0.5 * c[j] * inv - c[j + 1]) * inv
            + c[j + 2] * lnT
            + T * (c[j + 3] + T * (c[j + 4] * 0.5 + T * (c[j + 5] * THIRD + T * c[j + 6] * 0.25)))
            + c[j + 8]
        )
