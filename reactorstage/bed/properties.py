"""Molar properties of ideal-gas species inside the kernel (nine-coefficient polynomials)."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled


@compiled
def heat_and_enthalpy(coefficients, edges, T, cp_R, h_RT):
    """cp/R and h/(R T) of all species at T [K], written into cp_R and h_RT (S,).

    cp/R = sum c_k T^(k-2), k = 0..6 (McBride, Zehe & Gordon 2002, form of the polynomial).
    """
    lnT, inv = np.log(T), 1.0 / T
    for s in range(cp_R.shape[0]):
        j = 0 if edges[s, 1] >= T else (1 if edges[s, 2] >= T else 2)
        c = coefficients[s, j]
        cp_R[s] = (c[0] * inv + c[1]) * inv + c[2] + T * (c[3] + T * (c[4] + T * (c[5] + T * c[6])))
        h_RT[s] = (
            (-c[0] * inv + c[1] * lnT + c[7]) * inv
            + c[2]
            + T * (c[3] / 2.0 + T * (c[4] / 3.0 + T * (c[5] / 4.0 + T * c[6] / 5.0)))
        )


@compiled
def entropy(coefficients, edges, T, s_R):
    """s/R of all species at T [K] and the standard pressure, written into s_R (S,)."""
    lnT, inv = np.log(T), 1.0 / T
    for s in range(s_R.shape[0]):
        j = 0 if edges[s, 1] >= T else (1 if edges[s, 2] >= T else 2)
        c = coefficients[s, j]
        s_R[s] = (
            (-0.5 * c[0] * inv - c[1]) * inv
            + c[2] * lnT
            + T * (c[3] + T * (c[4] / 2.0 + T * (c[5] / 3.0 + T * c[6] / 4.0)))
            + c[8]
        )
