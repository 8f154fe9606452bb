"""Effectiveness factors inside the kernel, with their derivatives; see `reactorstage.chemistry.law`."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled
from reactorstage.bed.cubic import VOLUME, VOLUME_P, VOLUME_T
from reactorstage.bed.data import KIND
from reactorstage.bed.layout import (
    at_eta,
    at_every,
    at_member,
    at_rate,
    at_state,
    is_ideal,
)
from reactorstage.bed.state import at_swelling
from reactorstage.chemistry.effectiveness import LEAST_ETA, SLAB, SMALL, SPHERE, TRACE
from reactorstage.chemistry.law import MOST_POWERS_OF_T, MOST_POWERS_OF_Z, SHAPES
from reactorstage.chemistry.rate_law import ETA, POLYNOMIAL

SERIES = np.array([SLAB, SPHERE])
IS_SLAB = SHAPES["slab"]


@compiled
def of_modulus(kind, x):
    """Effectiveness of a slab or sphere for the square x of its Thiele modulus; x times its slope by x."""
    if x < SMALL:
        row = 0 if kind == IS_SLAB else 1
        eta, slope = 0.0, 0.0
        for k in range(SERIES.shape[1] - 1, -1, -1):
            slope = slope * x + eta
            eta = eta * x + SERIES[row, k]
        return eta, x * slope
    phi = np.sqrt(x)
    tanh = np.tanh(phi)
    if kind == IS_SLAB:
        eta = tanh / phi
        return eta, 0.5 * (1.0 - tanh * tanh - eta)
    coth = 1.0 / tanh
    eta = 3.0 * (phi * coth - 1.0) / x
    return eta, 1.5 * (coth / phi - (coth * coth - 1.0)) - eta


@compiled
def polynomial(real, at, T, Z):
    """Sum of powers of T and Z with its slopes by both."""
    value, by_T, by_Z, part = 0.0, 0.0, 0.0, 0.0
    for k in range(MOST_POWERS_OF_T - 1, -1, -1):
        by_T = by_T * T + value
        value = value * T + real[at + k]
    for k in range(MOST_POWERS_OF_Z - 1, -1, -1):
        by_Z = by_Z * Z + part
        part = part * Z + real[at + MOST_POWERS_OF_T + k]
    return value + part * Z, by_T, part + by_Z * Z


@compiled
def effectiveness(chem, q, r, F_total, T, work):
    """Effectiveness eta of reaction q whose rate without pore limitation is r.

    Gives eta, d(eta r)/dr at fixed state, and the slopes of eta at fixed r by T, the logarithm of the volume,
    the total flow, the flow of the key species and that of its product.
    """
    kind, at, real, whole = q * (KIND + chem.L), at_eta(chem) + q * ETA, chem.real, chem.whole
    key = work[whole[kind + KIND + whole[kind + 6]]] if whole[kind + 6] >= 0 else 0.0
    if whole[kind + 5] == POLYNOMIAL:
        Z, Z_key, Z_made = 0.0, 0.0, 0.0
        if whole[kind + 7] >= 0:
            weight = real[at + MOST_POWERS_OF_T + MOST_POWERS_OF_Z]
            made = weight * work[whole[kind + KIND + whole[kind + 7]]]
            if key + made > TRACE * F_total:
                Z = made / (key + made)
                Z_key, Z_made = -Z / (key + made), weight * (1.0 - Z) / (key + made)
        P, P_T, P_Z = polynomial(real, at, T, Z)
        root = np.sqrt(P * P + 4.0 * LEAST_ETA * LEAST_ETA)
        eta = 0.5 * (P + root)
        share = eta / root
        return eta, eta, share * P_T, 0.0, 0.0, share * P_Z * Z_key, share * P_Z * Z_made
    floor = TRACE * F_total
    root = np.sqrt(key * key + 4.0 * floor * floor)
    held = 0.5 * (key + root)
    x = real[at] * abs(r) * work[at_state(chem) + VOLUME] / held
    eta, bent = of_modulus(whole[kind + 5], x)
    by_total = -bent * 2.0 * floor * floor / (root * held * F_total)
    return eta, eta + bent, 0.0, bent, by_total, -bent / root, 0.0


@compiled
def limit_by_pores(chem, T, work, with_slopes):
    """Rates and their slopes in the work array, multiplied by effectiveness where a law has one."""
    S, R, L, rate, every = chem.S, chem.R, chem.L, at_rate(chem), at_every(chem)
    for q in range(R):
        kind, member = q * (KIND + L), at_member(chem) + q * L
        if chem.whole[kind + 5] == 0:
            continue
        F_total, r = 0.0, work[rate + q]
        for s in range(S):
            F_total += work[s]
        eta, gain, eta_T, eta_V, eta_F, eta_key, eta_made = effectiveness(chem, q, r, F_total, T, work)
        work[rate + q] = eta * r
        if with_slopes:
            for i in range(1, 6):
                work[rate + i * R + q] *= gain
            for k in range(chem.whole[kind + 2]):
                work[member + k] *= gain
            by_V = r * eta_V / work[at_state(chem) + VOLUME]
            work[rate + R + q] += r * eta_F
            work[rate + 2 * R + q] += r * eta_T + by_V * work[at_state(chem) + VOLUME_T]
            work[rate + 3 * R + q] += by_V * work[at_state(chem) + VOLUME_P]
            if chem.whole[kind + 6] >= 0:
                work[member + chem.whole[kind + 6]] += r * eta_key
            if chem.whole[kind + 7] >= 0:
                work[member + chem.whole[kind + 7]] += r * eta_made
            if is_ideal(chem):
                work[rate + R + q] += r * eta_V / F_total
            for s in range(0 if is_ideal(chem) else S):
                work[every + q * S + s] *= gain
                work[every + q * S + s] += by_V * work[at_swelling(chem) + s]
