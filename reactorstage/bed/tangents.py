"""Exact derivatives of a frozen integration: the implicit-function derivative of every step.

A step solves (A^-1 Z)_i / h = f(y0 + Z_i; q). Its derivative along D directions of (y0, q) is one linear
system of size 3 n with the Jacobians of the three stages, so it is exact to rounding for that step.

Directions of one bed are rows of a flat array (S + 4 + R, D): flows (S), enthalpy flow, pressure,
catalyst, friction, logarithm of the rate factors (R). A direction may instead move one parameter of the
chemistry: moved (D, 2) holds its kind (see `data.PARAMETERS`) and index, -1 for none.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import evaluate
from reactorstage.bed.compiled import compiled, inlined
from reactorstage.bed.cubic import VOLUME, VOLUME_T
from reactorstage.bed.data import (
    E_OVER_R,
    ENTHALPY,
    ENTROPY,
    F_UNIT,
    FRICTION,
    GAS_CONSTANT,
    H_TERM,
    KIND,
    LAW,
    LN_K,
    LN_K_TERM,
    P_UNIT,
    TERM,
    W_BED,
)
from reactorstage.bed.layout import (
    at_every,
    at_law,
    at_local,
    at_member,
    at_nu,
    at_partial,
    at_power,
    at_rate,
    at_state,
    at_terms,
    is_ideal,
)
from reactorstage.bed.linear import factorise, substitute_many
from reactorstage.bed.radau import NODES
from reactorstage.bed.rates import driver_scale, fill_drivers, term_size
from reactorstage.bed.stages import stage_rows
from reactorstage.bed.state import at_swelling, heat_capacity_flow
from reactorstage.chemistry.rates import DELTA


@compiled
def temperature_forcing(chem, ways, D, d, kind, index, T, capacity, work):
    """dT at fixed extents along direction d, from the energy balance of the flows in the work array."""
    S = chem.S
    heat = ways[S * D + d] / GAS_CONSTANT
    for s in range(S):
        heat -= work[at_partial(chem) + s] * T * ways[s * D + d]
    if kind == ENTHALPY:
        heat -= work[index] / GAS_CONSTANT
    return heat / capacity


@compiled
def term_share(chem, q, wanted, T, p, F_total, work):
    """- d ln r_q / d ln K_t of term `wanted`: power times the term's share of its factor; 0 elsewhere."""
    L, local, real, whole = chem.L, at_local(chem), chem.real, chem.whole
    kind, powers = q * (KIND + L), at_power(chem)
    count = whole[kind + 2]
    scale, _, _ = driver_scale(chem, whole[kind], F_total, p, work)
    fill_drivers(chem, q, scale, F_total, work)
    for f in range(whole[kind + 3], whole[kind + 4]):
        first, last = whole[at_terms(chem) + 2 * f], whole[at_terms(chem) + 2 * f + 1]
        if first <= wanted < last:
            under, size = 0.0, 0.0
            for t in range(first, last):
                term = powers + chem.factors + t * (TERM + L)
                part, _, _ = term_size(chem, term, count, DELTA * scale * F_total, T, work, local + 3 * L)
                under += part
                if t == wanted:
                    size = part
            return real[powers + f] * size / under
    return 0.0


@compiled
def parameter_slope(chem, q, kind, index, T, p, F_total, work):
    """Explicit derivative of rate q by a parameter of the chemistry."""
    R, real, rate = chem.R, chem.real, at_rate(chem)
    r = work[rate + 5 * R + q]
    if kind == LN_K:
        return r if index == q else 0.0
    if kind == E_OVER_R:
        return r * (1.0 / real[at_law(chem) + q * LAW + 1] - 1.0 / T) if index == q else 0.0
    if kind in (LN_K_TERM, H_TERM):
        slope = -r * term_share(chem, q, index, T, p, F_total, work)
        if kind == H_TERM:
            term = at_power(chem) + chem.factors + index * (TERM + chem.L)
            slope *= 1.0 / real[term + 1] - 1.0 / T
        return slope
    if kind in (ENTHALPY, ENTROPY) and chem.whole[q * (KIND + chem.L) + 1] == 1:
        lnK = real[at_nu(chem) + q * chem.S + index] / GAS_CONSTANT
        return work[rate + 4 * R + q] * (-lnK / T if kind == ENTHALPY else lnK)
    return 0.0


@inlined
def forcing(chem, bed, ways, moved, D, y, T, f, work, out, first):
    """df/dq at one stage for all directions, added up into out from row `first` on; work holds that stage."""
    S, R, L = chem.S, chem.R, chem.L
    rate, member = at_rate(chem), at_member(chem)
    every, state, swelling = at_every(chem), at_state(chem), at_swelling(chem)
    per_unit, p = bed[W_BED] / bed[F_UNIT], bed[P_UNIT] * y[R]
    drag = bed[W_BED] / (bed[P_UNIT] * GAS_CONSTANT)
    capacity, F_total = heat_capacity_flow(chem, work), 0.0
    for s in range(S):
        F_total += work[s]
    for d in range(D):
        kind, index = moved[d, 0], moved[d, 1]
        T_q = temperature_forcing(chem, ways, D, d, kind, index, T, capacity, work)
        F_q, V_q = 0.0, work[state + VOLUME_T] * T_q
        for s in range(S):
            F_q += ways[s * D + d]
            V_q += work[swelling + s] * ways[s * D + d]
        W_q = ways[(S + 2) * D + d]
        for q in range(R):
            whole = q * (KIND + L)
            slope = work[rate + 2 * R + q] * T_q + work[rate + 5 * R + q] * ways[(S + 4 + q) * D + d]
            slope += work[rate + R + q] * F_q
            for k in range(chem.whole[whole + 2]):
                slope += work[member + q * L + k] * ways[chem.whole[whole + KIND + k] * D + d]
            for s in range(0 if is_ideal(chem) else S):
                slope += work[every + q * S + s] * ways[s * D + d]
            if kind >= 0:
                slope += parameter_slope(chem, q, kind, index, T, p, F_total, work)
            out[first + q * D + d] = per_unit * slope + work[rate + q] * W_q / bed[F_UNIT]
        out[first + R * D + d] = -drag * (
            bed[FRICTION] * V_q
            + work[state + VOLUME] * (ways[(S + 3) * D + d] + bed[FRICTION] * W_q / bed[W_BED])
        )


@compiled
def differentiate(chem, bed, ways, moved, D, steps, count, work, y0_d, Z_d):
    """Derivatives of every step along D directions: y0_d (count + 1, n * D), Z_d (count, 3 * n * D).

    y0_d[0] holds the derivative of the inlet state on entry. False when a linear system is singular; the
    derivatives from there on are then not numbers.
    """
    n = chem.R + 1
    J, f, point = np.empty(n * n), np.empty(n), np.empty(n)
    size = 3 * n
    M, pivot = np.empty(size * size), np.empty(size, np.int64)
    for k in range(count):
        step, b = steps[k], Z_d[k]
        for i in range(3):
            for m in range(n):
                point[m] = step[2 + m] + step[2 + n + i * n + m]
            T = evaluate(chem, bed, step[0] + NODES[i] * step[1], point, step[2 + 4 * n + i], work, f, J)
            forcing(chem, bed, ways, moved, D, point, T, f, work, b, i * n * D)
            for m in range(n):
                for j in range(n):
                    slope = J[m * n + j]
                    for d in range(D):
                        b[(i * n + m) * D + d] += slope * y0_d[k, j * D + d]
            stage_rows(n, i, step[1], J, M)
        if not factorise(M, size, pivot):
            for j in range(k, count):
                for m in range(3 * n * D):
                    Z_d[j, m] = np.nan
                for m in range(n * D):
                    y0_d[j + 1, m] = np.nan
            return False
        substitute_many(M, size, pivot, b, D)
        for m in range(n * D):
            y0_d[k + 1, m] = y0_d[k, m] + b[2 * n * D + m]
    return True
