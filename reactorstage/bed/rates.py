"""Reaction rates and their hand-written derivatives by flows, temperature and pressure.

The law is that of `reactorstage.chemistry.rate_law`, whose NumPy evaluation is the reference in the tests.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import CONCENTRATION, GAS_CONSTANT, MOLE_FRACTION, STANDARD_PRESSURE

EXTENSION = 1e-12


@compiled
def power(a, n, delta):
    """a^n and its derivative; whole n >= 0 by multiplication, others extended smoothly through zero.

    n > 0: a (a^2 + delta^2)^((n-1)/2), odd through zero; n < 0: (a^2 + delta^2)^(n/2), even.
    """
    if n == 1.0:
        return a, 1.0
    if n == 2.0:
        return a * a, 2.0 * a
    if n >= 0.0 and n == np.floor(n):
        value, slope = 1.0, 0.0
        for _ in range(int(n)):
            slope = slope * a + value
            value = value * a
        return value, slope
    square = a * a + delta * delta
    if n > 0.0:
        base = square ** (0.5 * (n - 1.0))
        return a * base, base * (1.0 + (n - 1.0) * a * a / square)
    value = square ** (0.5 * n)
    return value, n * a * value / square


@compiled
def products(orders, count, a, delta, value, slope):
    """Product of a_k^n_k over the first `count` members; its derivative by each a_k into slope (L,)."""
    total = 1.0
    for k in range(count):
        value[k], slope[k] = power(a[k], orders[k], delta)
        total *= value[k]
    for k in range(count):
        for j in range(count):
            if j != k:
                slope[k] *= value[j]
    return total


@compiled
def rate_constant(law, T):
    """k(T) and d ln k / dT of a row of Chemistry.law."""
    lnk = law[0] + law[2] * (1.0 / law[1] - 1.0 / T)
    slope = law[2] / (T * T)
    if law[3] != 0.0:
        lnk += law[3] * np.log(T / law[1])
        slope += law[3] / T
    if law[4] != 0.0:
        lnk += law[4] * (T - law[1])
        slope += law[4]
    return np.exp(lnk), slope


@compiled
def equilibrium(nu, change, driver, T, p, h_RT, s_R):
    """ln Ka of one reaction in the units of its driver, with its derivatives by T and p."""
    lnK, slope_T, slope_p = 0.0, 0.0, 0.0
    for s in range(h_RT.shape[0]):
        lnK -= nu[s] * (h_RT[s] - s_R[s])
        slope_T += nu[s] * h_RT[s]
    slope_T /= T
    if change != 0.0:
        if driver == CONCENTRATION:
            lnK += change * np.log(STANDARD_PRESSURE / (GAS_CONSTANT * T))
            slope_T -= change / T
        elif driver == MOLE_FRACTION:
            lnK += change * np.log(STANDARD_PRESSURE / p)
            slope_p -= change / p
        else:
            lnK += change * np.log(STANDARD_PRESSURE)
    return lnK, slope_T, slope_p


@compiled
def driver_scale(driver, F_total, T, p):
    """a_i = scale * F_i; the scale with its logarithmic derivatives by T and p (by F_total: -1/F_total)."""
    if driver == CONCENTRATION:
        return p / (GAS_CONSTANT * T * F_total), -1.0 / T, 1.0 / p
    if driver == MOLE_FRACTION:
        return 1.0 / F_total, 0.0, 0.0
    return p / F_total, 0.0, 1.0 / p


@compiled
def denominator(chem, r, count, a, delta, T, value, slope, total_a):
    """Product of the factors under reaction r with d/dT; its derivative by each member into total_a (L,)."""
    total, total_T = 1.0, 0.0
    total_a[:count] = 0.0
    for f in range(chem.den_start[r], chem.den_start[r + 1]):
        under, under_T = 0.0, 0.0
        for t in range(chem.term_start[f], chem.term_start[f + 1]):
            term = chem.term[t]
            K = np.exp(term[0] + term[2] * (1.0 / term[1] - 1.0 / T))
            size = K * products(chem.term_order[t], count, a, delta, value, slope)
            under += size
            under_T += size * term[2] / (T * T)
        for t in range(chem.term_start[f], chem.term_start[f + 1]):
            term = chem.term[t]
            K = np.exp(term[0] + term[2] * (1.0 / term[1] - 1.0 / T))
            products(chem.term_order[t], count, a, delta, value, slope)
            for k in range(count):
                total_a[k] += chem.den_power[f] * K * slope[k] / under
        total *= under ** chem.den_power[f]
        total_T += chem.den_power[f] * under_T / under
    for k in range(count):
        total_a[k] *= total
    return total, total * total_T


@compiled
def rates(chem, factor, F, T, p, h_RT, s_R, local, r, r_member, r_common, r_T, r_p):
    """Rates r (R,) in mol/(kg s) with their derivatives by flows, T and p.

    dr/dF_s = r_common (R,) for every species, plus r_member (R, L) for the members of the law.
    factor (R,) is catalyst activity times the basis factor; h_RT and s_R (S,) are taken at T; local
    (5, L) is work space.
    """
    a, value, slope, back_slope, under_a = local[0], local[1], local[2], local[3], local[4]
    F_total = 0.0
    for s in range(F.shape[0]):
        F_total += F[s]
    for q in range(r.shape[0]):
        driver, count = chem.kind[q, 0], chem.kind[q, 2]
        scale, scale_T, scale_p = driver_scale(driver, F_total, T, p)
        delta = EXTENSION * scale * F_total
        for k in range(count):
            a[k] = scale * F[chem.member[q, k]]
        constant, lnk_T = rate_constant(chem.law[q], T)
        constant *= factor[q]
        force = products(chem.order[q, 0], count, a, delta, value, slope)
        force_T, force_p = 0.0, 0.0
        if chem.kind[q, 1] == 1:
            lnK, lnK_T, lnK_p = equilibrium(chem.nu[q], chem.change[q], driver, T, p, h_RT, s_R)
            share = np.exp(-chem.law[q, 5] * lnK)
            back = share * products(chem.order[q, 1], count, a, delta, value, back_slope)
            force -= back
            force_T = chem.law[q, 5] * back * lnK_T
            force_p = chem.law[q, 5] * back * lnK_p
            for k in range(count):
                slope[k] -= share * back_slope[k]
        if chem.den_start[q + 1] > chem.den_start[q]:
            under, under_T = denominator(chem, q, count, a, delta, T, value, back_slope, under_a)
            force /= under
            force_T = (force_T - force * under_T) / under
            force_p /= under
            for k in range(count):
                slope[k] = (slope[k] - force * under_a[k]) / under
        drive = 0.0
        for k in range(count):
            drive += slope[k] * a[k]
            r_member[q, k] = constant * scale * slope[k]
        r[q] = constant * force
        r_common[q] = -constant * drive / F_total
        r_T[q] = constant * (lnk_T * force + force_T + drive * scale_T)
        r_p[q] = constant * (force_p + drive * scale_p)
