"""Reaction rates and their hand-written derivatives by flows, temperature, pressure and ln K.

The law is that of `reactorstage.chemistry.rate_law`, whose NumPy evaluation is the reference in the tests.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled, for_nonideal, inlined, small
from reactorstage.bed.cubic import FIELD, VOLUME, VOLUME_P, VOLUME_T, at_slopes
from reactorstage.bed.data import (
    CONCENTRATION,
    FUGACITY,
    GAS_CONSTANT,
    KIND,
    LAW,
    MOLE_FRACTION,
    STANDARD_PRESSURE,
    TERM,
)
from reactorstage.bed.layout import (
    at_every,
    at_factor,
    at_law,
    at_local,
    at_member,
    at_nu,
    at_order,
    at_power,
    at_rate,
    at_state,
    at_terms,
    is_ideal,
    is_liquid,
)
from reactorstage.bed.state import at_swelling
from reactorstage.chemistry.rates import DELTA


@small
def power(a, n, delta):
    """a^n and its derivative; whole n >= 0 by multiplication, others extended smoothly through zero.

    n > 0: a (a^2 + delta^2)^((n-1)/2), odd through zero; n < 0: (a^2 + delta^2)^(n/2), even.
    """
    if n == 1.0:
        return a, 1.0
    if n == 0.0:
        return 1.0, 0.0
    if n == 2.0:
        return a * a, 2.0 * a
    if n > 0.0 and n == np.floor(n):
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
def products(real, orders, count, delta, work, local, L, slopes):
    """Product of a_k^n_k over the members of a law; its slope by each a_k into the row `slopes` of work.

    orders is the position of n_k in real; local that of the rows a, values, ... (each L) in work. No slopes
    are made when `slopes` is negative.
    """
    total = 1.0
    if slopes < 0:
        for k in range(count):
            if real[orders + k] != 0.0:
                total *= power(work[local + k], real[orders + k], delta)[0]
        return total
    for k in range(count):
        value, slope = power(work[local + k], real[orders + k], delta)
        work[local + L + k] = value
        work[slopes + k] = slope
        total *= value
    for k in range(count):
        for j in range(count):
            if j != k:
                work[slopes + k] *= work[local + L + j]
    return total


@inlined
def ln_constant(real, at, T):
    """ln of a constant at T and its slope by T, from ln at T_ref, T_ref, E/R, c and d at position `at`."""
    ln = real[at] + real[at + 2] * (1.0 / real[at + 1] - 1.0 / T)
    slope = real[at + 2] / (T * T)
    if real[at + 3] != 0.0:
        ln += real[at + 3] * np.log(T / real[at + 1])
        slope += real[at + 3] / T
    if real[at + 4] != 0.0:
        ln += real[at + 4] * (T - real[at + 1])
        slope += real[at + 4]
    return ln, slope


@inlined
def equilibrium(chem, q, driver, T, p, work):
    """ln Ka of reaction q in the units of its driver, with its derivatives by T and p.

    Activities are fugacities over the standard pressure in a gas, mole fractions in a liquid.
    """
    own_K = chem.whole[q * (KIND + chem.L) + 1]
    S, nu, law = chem.S, at_nu(chem) + q * chem.S, at_law(chem) + q * LAW
    change = chem.real[law + 6]
    lnK, slope_T, slope_p = 0.0, 0.0, 0.0
    if own_K == 2:
        lnK, slope_T = ln_constant(chem.real, law + 7, T)
    else:
        for s in range(S):
            n = chem.real[nu + s]
            lnK -= n * (work[2 * S + s] - work[3 * S + s])
            slope_T += n * work[2 * S + s]
        slope_T /= T
    if change != 0.0:
        if is_liquid(chem) and (driver == MOLE_FRACTION or own_K == 1):
            if driver == CONCENTRATION:
                at, F_total = at_state(chem), 0.0
                for s in range(S):
                    F_total += work[s]
                lnK += change * np.log(F_total / work[at + VOLUME])
                slope_T -= change * work[at + VOLUME_T] / work[at + VOLUME]
        elif driver == CONCENTRATION:
            lnK += change * np.log(STANDARD_PRESSURE / (GAS_CONSTANT * T))
            slope_T -= change / T
        elif driver == MOLE_FRACTION:
            lnK += change * np.log(STANDARD_PRESSURE / p)
            slope_p -= change / p
        else:
            lnK += change * np.log(STANDARD_PRESSURE)
    return lnK, slope_T, slope_p


@small
def driver_scale(chem, driver, F_total, p, work):
    """a_i = scale * F_i; the scale with its logarithmic derivatives by T and p (by F_total: -1/F_total).

    A fugacity is that times its coefficient. The scale of a concentration falls with the volume.
    """
    if driver == CONCENTRATION:
        at = at_state(chem)
        V = work[at + VOLUME]
        return 1.0 / V, -work[at + VOLUME_T] / V, -work[at + VOLUME_P] / V
    if driver == MOLE_FRACTION:
        return 1.0 / F_total, 0.0, 0.0
    return p / F_total, 0.0, 1.0 / p


@inlined
def fill_drivers(chem, q, scale, F_total, work):
    """Drivers of the members of law q into the first local row; floored ones are above zero everywhere.

    The drivers without floors stand in the sixth row.
    """
    kind, local, ln_phi = q * (KIND + chem.L), at_local(chem), at_state(chem) + FIELD
    for k in range(chem.whole[kind + 2]):
        work[local + k] = scale * work[chem.whole[kind + KIND + k]]
        if chem.whole[kind] == FUGACITY and not is_ideal(chem):
            work[local + k] *= np.exp(work[ln_phi + chem.whole[kind + KIND + k]])
        work[local + 5 * chem.L + k] = work[local + k]
    if chem.whole[kind + 8] > 0:
        floors = at_order(chem) + (3 * q + 2) * chem.L
        for k in range(chem.whole[kind + 2]):
            if chem.real[floors + k] > 0.0:
                a, floor = work[local + k], chem.real[floors + k] * scale * F_total
                work[local + k] = 0.5 * (a + np.sqrt(a * a + 4.0 * floor * floor))


@compiled
def term_size(chem, term, count, delta, T, work, slopes):
    """A term of a denominator, its slope by T, its constant; slopes by the members without that into work."""
    ln, slope = ln_constant(chem.real, term, T)
    K = np.exp(ln)
    size = K * products(chem.real, term + TERM, count, delta, work, at_local(chem), chem.L, slopes)
    return size, size * slope, K


@compiled
def denominator(chem, q, count, delta, T, work, slopes):
    """Product of the factors under reaction q with d/dT; slopes by the members into the fifth local row."""
    L, local, real, whole = chem.L, at_local(chem), chem.real, chem.whole
    kind, powers = q * (KIND + L), at_power(chem)
    out = local + 4 * L
    total, total_T = 1.0, 0.0
    for k in range(count):
        work[out + k] = 0.0
    for f in range(whole[kind + 3], whole[kind + 4]):
        under, under_T, q_f = 0.0, 0.0, real[powers + f]
        first, last = whole[at_terms(chem) + 2 * f], whole[at_terms(chem) + 2 * f + 1]
        for t in range(first, last):
            size, size_T, _ = term_size(
                chem, powers + chem.factors + t * (TERM + L), count, delta, T, work, slopes
            )
            under += size
            under_T += size_T
        for t in range(first, last if slopes >= 0 else first):
            _, _, K = term_size(chem, powers + chem.factors + t * (TERM + L), count, delta, T, work, slopes)
            for k in range(count):
                work[out + k] += q_f * K * work[slopes + k] / under
        total *= under**q_f
        total_T += q_f * under_T / under
    for k in range(count):
        work[out + k] *= total
    return total, total * total_T


@compiled
def through_floors(chem, q, scale, F_total, work, slope):
    """Slopes by floored drivers in a row of work into those by drivers; slope by every flow over scale."""
    kind, local, floors = q * (KIND + chem.L), at_local(chem), at_order(chem) + (3 * q + 2) * chem.L
    spread = 0.0
    for k in range(chem.whole[kind + 2]):
        floor = chem.real[floors + k]
        if floor > 0.0:
            root = 2.0 * work[local + k] - work[local + 5 * chem.L + k]
            spread += work[slope + k] * 2.0 * floor * floor * scale * F_total / root
            work[slope + k] *= work[local + k] / root
    return spread


@for_nonideal(None)
def slopes_in_fluid(chem, q, constant, scale, drive, spread, back, F_total, slope, work):
    """What the fluid adds to the slopes of rate q by all flows (S,), T and p, where drivers depend on all.

    slope is the local row of slopes by the drivers, drive and spread as in `rates`, back that by -ln K.
    """
    S, R, L, rate, every = chem.S, chem.R, chem.L, at_rate(chem), at_every(chem) + q * chem.S
    kind, state, swelling, ln_phi = q * (KIND + L), at_state(chem), at_swelling(chem), at_state(chem) + FIELD
    driver, change = chem.whole[kind], chem.real[at_law(chem) + q * LAW + 6]
    for s in range(S):
        work[every + s] = 0.0
    if driver == CONCENTRATION:
        turn = back * change if is_liquid(chem) and chem.whole[kind + 1] == 1 else 0.0
        work[rate + R + q] = constant * (scale * spread + turn / F_total)
        for s in range(S):
            work[every + s] = -constant * (drive + turn) * work[swelling + s] / work[state + VOLUME]
    elif driver == FUGACITY:
        for k in range(chem.whole[kind + 2]):
            i = chem.whole[kind + KIND + k]
            weight = constant * work[slope + k] * work[at_local(chem) + 5 * L + k]
            work[at_member(chem) + q * L + k] *= np.exp(work[ln_phi + i])
            work[rate + 2 * R + q] += weight * work[ln_phi + S + i]
            work[rate + 3 * R + q] += weight * work[ln_phi + 2 * S + i]
            for s in range(S):
                work[every + s] += weight * work[state + at_slopes(S) + i * S + s]


@compiled
def rates(chem, bed, active, T, p, work, with_slopes):
    """Rates (R,) without pore limitation in mol/(kg s) and, when asked, their derivatives, in the work array.

    dr/dF_s = common (R,) for every species, plus the slopes by the members (R, L) of the law. bed holds the
    factors (catalyst activity times the basis factor), active what multiplies them here; the work array the
    flows and the properties at T.
    """
    S, R, L, real, whole = chem.S, chem.R, chem.L, chem.real, chem.whole
    local, rate, factor = at_local(chem), at_rate(chem), at_factor(chem)
    slope = local + 2 * L if with_slopes else -1
    back_slope = local + 3 * L if with_slopes else -1
    F_total = 0.0
    for s in range(S):
        F_total += work[s]
    for q in range(R):
        kind, law, orders = q * (KIND + L), at_law(chem) + q * LAW, at_order(chem) + q * 3 * L
        driver, count = whole[kind], whole[kind + 2]
        scale, scale_T, scale_p = driver_scale(chem, driver, F_total, p, work)
        delta = DELTA * scale * F_total
        fill_drivers(chem, q, scale, F_total, work)
        lnk, lnk_T = ln_constant(real, law, T)
        constant = bed[factor + q] * active * np.exp(lnk)
        force = products(real, orders, count, delta, work, local, L, slope)
        force_T, force_p, back = 0.0, 0.0, 0.0
        if whole[kind + 1] > 0:
            lnK, lnK_T, lnK_p = equilibrium(chem, q, driver, T, p, work)
            share = np.exp(-real[law + 5] * lnK)
            back = share * products(real, orders + L, count, delta, work, local, L, back_slope)
            force -= back
            back *= real[law + 5]
            force_T, force_p = back * lnK_T, back * lnK_p
            for k in range(count if with_slopes else 0):
                work[slope + k] -= share * work[back_slope + k]
        if whole[kind + 4] > whole[kind + 3]:
            under, under_T = denominator(chem, q, count, delta, T, work, back_slope)
            force /= under
            back /= under
            force_T = (force_T - force * under_T) / under
            force_p /= under
            for k in range(count if with_slopes else 0):
                work[slope + k] = (work[slope + k] - force * work[local + 4 * L + k]) / under
        work[rate + q] = constant * force
        if with_slopes:
            drive, spread = 0.0, 0.0
            for k in range(count):
                drive += work[slope + k] * work[local + k]
            if whole[kind + 8] > 0:
                spread = through_floors(chem, q, scale, F_total, work, slope)
            for k in range(count):
                work[at_member(chem) + q * L + k] = constant * scale * work[slope + k]
            work[rate + R + q] = constant * (scale * spread - drive / F_total)
            work[rate + 2 * R + q] = constant * (lnk_T * force + force_T + drive * scale_T)
            work[rate + 3 * R + q] = constant * (force_p + drive * scale_p)
            work[rate + 4 * R + q] = constant * back
            work[rate + 5 * R + q] = constant * force
            if not is_ideal(chem):
                slopes_in_fluid(chem, q, constant, scale, drive, spread, back, F_total, slope, work)
