"""Molar properties of ideal-gas species inside the kernel (nine-coefficient polynomials)."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled
from reactorstage.bed.layout import at_edges

THIRD = 1.0 / 3.0


@compiled
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


@compiled
def heat_capacity_flow(chem, work):
    """sum F cp / R of the flows in the work array, after `heat_and_enthalpy`."""
    total = 0.0
    for s in range(chem.S):
        total += work[s] * work[chem.S + s]
    return total


@compiled
def temperature_step(chem, H_R, T, work):
    """Newton correction of T towards H(F, T) = H for the flows in the work array; H_R is H/R.

    Properties at the old T stand in the work array afterwards.
    """
    heat_and_enthalpy(chem, T, work)
    held = 0.0
    for s in range(chem.S):
        held += work[s] * work[2 * chem.S + s]
    return (H_R - held * T) / heat_capacity_flow(chem, work)


@compiled
def temperature_of(chem, H_R, T, work):
    """T with H(F, T) = H by Newton from the guess T, kept within the data range (then its end is given)."""
    for _ in range(60):
        step = temperature_step(chem, H_R, T, work)
        if not np.isfinite(step):
            return np.nan
        new = min(max(T + min(max(step, -200.0), 200.0), chem.T_low), chem.T_high)
        if abs(new - T) <= 1e-13 * T:
            return new
        T = new
    return T
