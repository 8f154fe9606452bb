"""Cubic equations of state inside the kernel: volume, residual enthalpy, fugacities and all their slopes.

The equations and the meaning of the status are those of `reactorstage.chemistry.cubic`, the reference in
the tests. All follows from the residual Helmholtz energy over R T of the flows F (n their sum, volume V),

    A = -n ln(1 - beta) - Q L(beta),   beta = B / V,   Q = D / (B T),   dL/dbeta = M,
    B = sum b_i F_i,   D = sum q_i q_j (1 - k_ij) F_i F_j,   q_i = sqrt(a_i / R) = root_0 - root_T sqrt(T),

as in Michelsen & Mollerup, Thermodynamic Models, chapters 1 and 3 (from memory). What vanishes in the ideal
gas is formed without subtracting larger numbers: z = Z - 1, stiff = -V^2/(n R T) dp/dV - 1,
heat = V/(n R) dp/dT - 1, swell_i = V/(R T) dp/dF_i - 1.

Results, from a position in the work array on, whose first S numbers are the flows:

    (FIELD,)  Z, V m3/s, dV/dT, dV/dp, residual enthalpy flow H W, dH/dT W/K, dH/dp W/Pa, then intermediate
    (5, S)    ln phi, d ln phi/dT, d ln phi/dp, dV/dF m3/mol, dH/dF J/mol
    (S, S)    d ln phi_i/dF_j s/mol
    (3, S)    space
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import GAS_CONSTANT, Array
from reactorstage.chemistry.cubic import DENSE, FOUND, NOT_FINITE, OTHER_PHASE, VAPOUR, CubicFluid, Phase

HEAD = 5
"""Constants of the equation: delta_1, delta_2, a/(b R T) and b/v at the critical point, 1 for vapour.

Those of the species follow: root_0 (S,), root_T (S,), b (S,), 1 - k_ij (S, S).
"""

VAPOUR_MARK = 4
"""Position among the constants of what tells a vapour from a liquid."""

FIELD = 19
Z, VOLUME, VOLUME_T, VOLUME_P, H_RES, H_RES_T, H_RES_P = 0, 1, 2, 3, 4, 5, 6
TOTAL, B_T, Q, Q_T, Q_TT, BETA, G, M, L, Z_1, CURVE, STIFF = 7, 8, 9, 10, 11, 12, 13, 14, 15, 16, 17, 18
"""Numbers of the whole mixture: how many, the results, and what this module keeps for itself.

The latter: n, B T, Q, T dQ/dT, T d2D/dT2 / B, beta, 1/(1 - beta), M, L, z, beta^2 d2A/dbeta2 / n, stiff.
"""

BULK, SPECIES, PAIRS = 0, 1, 2
"""How much `cubic` computes: the mixture's numbers, also those of the species, also the (S, S) slopes."""


def pack_cubic(fluid: CubicFluid, phase: Phase) -> Array:
    """Constants of a mixture whose wanted root is that of `phase`."""
    kind = fluid.equation
    head = [*kind.delta, kind.omega_a / kind.omega_b, kind.density, float(phase == VAPOUR)]
    return np.concatenate([head, fluid.root_0, fluid.root_T, fluid.b, fluid.pairs.ravel()])


@compiled
def cubic_length(S):
    """Length of the results and the space behind them."""
    return FIELD + 8 * S + S * S


@compiled
def at_slopes(S):
    """d ln phi_i/dF_j (S, S) in the results."""
    return FIELD + 5 * S


@compiled
def cubic(real, start, S, T, p, work, at, extent):
    """Results for the flows in the work array at T [K] and p [Pa], from `at` on; the status is returned.

    The constants stand in real from `start` on; extent is BULK, SPECIES or PAIRS. Nothing is to be read
    when the status is NOT_FINITE.
    """
    mix(real, start, S, T, work, at)
    n, BT = work[at + TOTAL], work[at + B_T]
    if not (n > 0.0 and BT > 0.0 and p > 0.0 and T > 0.0):
        return NOT_FINITE
    ratio, B = work[at + Q] / n, p * BT / (n * GAS_CONSTANT * T * T)
    root = compressibility(real, start, ratio, B)
    bulk(real, start, n, T, p, B, root, work, at)
    if not (np.isfinite(work[at + H_RES_T]) and np.isfinite(work[at + VOLUME])):
        return NOT_FINITE
    if extent >= SPECIES:
        of_species(real, start, S, T, p, B, work, at)
    if extent >= PAIRS:
        of_pairs(real, start, S, T, work, at)
    if (root * real[start + 3] > B) == (real[start + VAPOUR_MARK] == 1.0):
        return FOUND
    return OTHER_PHASE if ratio > real[start + 2] else DENSE


@compiled
def mix(real, start, S, T, work, at):
    """Sums over the species; q, -T dq/dT and D_i/(B T) into the space, T D_iT/(B T) into the second row."""
    roots, b, pairs = start + HEAD, start + HEAD + 2 * S, start + HEAD + 3 * S
    space = at + at_slopes(S) + S * S
    half, n, B = 0.5 * np.sqrt(T), 0.0, 0.0
    for i in range(S):
        fall = real[roots + S + i] * half
        work[space + S + i] = fall
        work[space + i] = real[roots + i] - 2.0 * fall
        n += work[i]
        B += work[i] * real[b + i]
    D, D_T, D_TT, per_BT = 0.0, 0.0, 0.0, 1.0 / (B * T)
    for i in range(S):
        q, fall, u, u_fall = work[space + i], work[space + S + i], 0.0, 0.0
        for j in range(S):
            weight = real[pairs + i * S + j] * work[j]
            u += weight * work[space + j]
            u_fall += weight * work[space + S + j]
        work[space + 2 * S + i] = 2.0 * per_BT * q * u
        work[at + FIELD + S + i] = -2.0 * per_BT * (fall * u + q * u_fall)
        D += work[i] * q * u
        D_T -= 2.0 * work[i] * fall * u
        D_TT += work[i] * fall * (u + 2.0 * u_fall)
    work[at + TOTAL], work[at + B_T] = n, B * T
    work[at + Q], work[at + Q_T], work[at + Q_TT] = D * per_BT, (D_T - D) * per_BT, D_TT * per_BT


@compiled
def compressibility(real, start, ratio, B):
    """Root of Z^3 + c2 Z^2 + c1 Z + c0 above B on the wanted side, else the only root there is.

    Newton from beyond the outermost root of a side, hence monotone. At Z = B the cubic is below zero.
    """
    total, product = real[start] + real[start + 1], real[start] * real[start + 1]
    A, vapour = ratio * B, real[start + VAPOUR_MARK] == 1.0
    c2 = (total - 1.0) * B - 1.0
    c1 = A + (product - total) * B * B - total * B
    c0 = -(A + product * (1.0 + B) * B) * B
    spread = c2 * c2 - 3.0 * c1
    turn = np.sqrt(max(spread, 0.0)) / 3.0
    turn = (turn if vapour else -turn) - c2 / 3.0
    below = ((turn + c2) * turn + c1) * turn + c0 <= 0.0
    from_high = below or (not vapour and spread > 0.0 and turn <= B)
    root = 1.0 + B - min(A, 0.0) if from_high else B
    for _ in range(100):
        step = (((root + c2) * root + c1) * root + c0) / ((3.0 * root + 2.0 * c2) * root + c1)
        root -= step
        if abs(step) <= 1e-14 * root or (step > 0.0) != from_high:
            break
    return root


@compiled
def bulk(real, start, n, T, p, B, root, work, at):
    """Volume and residual enthalpy with their slopes by T and p."""
    delta_1, delta_2, RT = real[start], real[start + 1], GAS_CONSTANT * T
    beta, ratio, Q_T_n = B / root, work[at + Q] / n, work[at + Q_T] / n
    g = 1.0 / (1.0 - beta)
    m = 1.0 / ((1.0 + delta_1 * beta) * (1.0 + delta_2 * beta))
    m_beta = -m * m * (delta_1 + delta_2 + 2.0 * delta_1 * delta_2 * beta)
    log = np.log1p((delta_1 - delta_2) * beta / (1.0 + delta_2 * beta)) / (delta_1 - delta_2)
    z, curve = beta * (g - m * ratio), beta * beta * (g * g - m_beta * ratio)
    stiff, heat = 2.0 * z + curve, z - beta * m * Q_T_n
    volume, inverse = n * root * RT / p, 1.0 / (1.0 + stiff)
    work[at + Z], work[at + VOLUME] = root, volume
    work[at + VOLUME_T] = volume * (1.0 + heat) * inverse / T
    work[at + VOLUME_P] = -volume * root * inverse / p
    work[at + H_RES] = RT * (n * z + log * work[at + Q_T])
    work[at + H_RES_T] = GAS_CONSTANT * (log * work[at + Q_TT] + n * ((2.0 + heat) * heat - stiff) * inverse)
    work[at + H_RES_P] = volume * (stiff - heat) * inverse
    work[at + BETA], work[at + G], work[at + M], work[at + L] = beta, g, m, log
    work[at + Z_1], work[at + CURVE], work[at + STIFF] = z, curve, stiff


@compiled
def of_species(real, start, S, T, p, B, work, at):
    """ln phi with its slopes by T and p, dV/dF and dH/dF; swell into the space, Q_i in place of D_i/(B T)."""
    b, row, space = start + HEAD + 2 * S, at + FIELD, at + at_slopes(S) + S * S
    n, z, stiff, log = work[at + TOTAL], work[at + Z_1], work[at + STIFF], work[at + L]
    beta, g, m = work[at + BETA], work[at + G], work[at + M]
    inverse, per_b = 1.0 / (1.0 + stiff), n * T / work[at + B_T]
    beta_m_Q_T = beta * m * work[at + Q_T] / n
    heat = z - beta_m_Q_T
    ln_free = np.log1p(z - B) if z > -0.5 else np.log(work[at + Z] * (1.0 - beta))
    for i in range(S):
        x, D_i = per_b * real[b + i], work[space + 2 * S + i]
        Q_i = D_i - work[at + Q] * x / n
        swell = beta * (g - m * Q_i) + x * (z + work[at + CURVE])
        Q_iT = work[row + S + i] - D_i - work[at + Q_T] * x / n
        work[row + i] = x * z - ln_free - Q_i * log
        slope = ((stiff - swell - heat - swell * heat) * inverse - beta_m_Q_T * x - Q_iT * log) / T
        work[row + S + i] = slope
        work[row + 2 * S + i] = (z + swell + z * swell - stiff) * inverse / p
        work[row + 3 * S + i] = work[at + VOLUME] * (1.0 + swell) * inverse / n
        work[row + 4 * S + i] = -GAS_CONSTANT * T * T * slope
        work[space + S + i], work[space + 2 * S + i] = swell, Q_i


@compiled
def of_pairs(real, start, S, T, work, at):
    """d ln phi_i/dF_j, symmetric."""
    b, pairs, row = start + HEAD + 2 * S, start + HEAD + 3 * S, at + at_slopes(S)
    n, stiff, beta, log = work[at + TOTAL], work[at + STIFF], work[at + BETA], work[at + L]
    space, per_n, per_b = row + S * S, 1.0 / n, n * T / work[at + B_T]
    inverse, g_beta, bend = per_n / (1.0 + stiff), work[at + G] * beta, log - work[at + M] * beta
    attract, curve = 2.0 * log / work[at + B_T], work[at + CURVE]
    for i in range(S):
        x, q = per_b * real[b + i], attract * work[space + i]
        swell, Q_i = work[space + S + i], work[space + 2 * S + i]
        own, rest = g_beta + bend * Q_i, stiff - swell
        for j in range(i + 1):
            x_j, swell_j = per_b * real[b + j], work[space + S + j]
            slope = per_n * (x * (g_beta + curve * x_j + bend * work[space + 2 * S + j]) + x_j * own)
            slope += inverse * (rest - swell_j - swell * swell_j)
            slope -= q * work[space + j] * real[pairs + i * S + j]
            work[row + i * S + j] = slope
            work[row + j * S + i] = slope
