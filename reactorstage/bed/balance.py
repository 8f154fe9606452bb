"""Right-hand side of one bed and its Jacobian, on the manifold where the enthalpy flow is constant.

State y (R + 1,): extents of reaction in units of the feed flow `F_UNIT`, then pressure in units of
`P_UNIT`; depth runs from 0 to 1. Flows are F = F_in + F_UNIT nu^T xi, so atoms close by construction;
temperature follows from H(F, T, p) = H_in, so energy does.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled, inlined
from reactorstage.bed.cubic import VOLUME, VOLUME_P, VOLUME_T
from reactorstage.bed.data import (
    BED,
    F_UNIT,
    FRICTION,
    GAS_CONSTANT,
    H_IN,
    KIND,
    LAW,
    P_UNIT,
    W_BED,
)
from reactorstage.bed.depth import local_activity
from reactorstage.bed.effectiveness import limit_by_pores
from reactorstage.bed.layout import (
    at_every,
    at_law,
    at_member,
    at_nu,
    at_partial,
    at_profile,
    at_rate,
    at_state,
    is_ideal,
)
from reactorstage.bed.properties import entropy, heat_and_enthalpy
from reactorstage.bed.rates import rates
from reactorstage.bed.state import (
    at_swelling,
    equation_of_state,
    exists,
    extent_of,
    heat_capacity_flow,
    pressure_slope,
    temperature_step,
)


@compiled
def flows(chem, bed, y, work):
    """F (S,) at the state y, into the work array."""
    nu = at_nu(chem)
    for s in range(chem.S):
        work[s] = bed[BED + s]
    for q in range(chem.R):
        xi = bed[F_UNIT] * y[q]
        for s in range(chem.S):
            work[s] += chem.real[nu + q * chem.S + s] * xi


@compiled
def evaluate(chem, bed, depth, y, T, work, f, J):
    """dy/d(depth) at `depth` into f (n,), its Jacobian into J (n * n,) unless that is empty; gives T.

    Not a number when temperature leaves the species' data range, pressure is not positive or the phase that
    should flow does not exist.
    """
    R = chem.R
    p = bed[P_UNIT] * y[R]
    flows(chem, bed, y, work)
    if not p > 0.0:
        return np.nan
    T += temperature_step(chem, bed[H_IN] / GAS_CONSTANT, T, p, work)
    if not chem.T_low <= T <= chem.T_high:
        return np.nan
    heat_and_enthalpy(chem, T, work)
    if not exists(equation_of_state(chem, T, p, 0, extent_of(chem, J.shape[0] > 0), work)):
        return np.nan
    entropy(chem, T, work)
    active = local_activity(chem, bed, depth) if bed.shape[0] > at_profile(chem) else 1.0
    rates(chem, bed, active, T, p, work, J.shape[0] > 0)
    if chem.limited > 0:
        limit_by_pores(chem, T, work, J.shape[0] > 0)
    rate = at_rate(chem)
    for q in range(R):
        f[q] = bed[W_BED] / bed[F_UNIT] * work[rate + q]
    drag = bed[W_BED] * bed[FRICTION] / (bed[P_UNIT] * GAS_CONSTANT)
    f[R] = -drag * work[at_state(chem) + VOLUME]
    if J.shape[0] > 0:
        jacobian(chem, bed, T, drag, work, J)
    return T


@inlined
def jacobian(chem, bed, T, drag, work, J):
    """Total derivative of f along the constant-enthalpy manifold, from the work array after `evaluate`."""
    S, R, L, n, real = chem.S, chem.R, chem.L, chem.R + 1, chem.real
    nu, law, rate, member = at_nu(chem), at_law(chem), at_rate(chem), at_member(chem)
    T_xi, every, partial, unit = rate + 6 * R, at_every(chem), at_partial(chem), bed[F_UNIT]
    state, swelling = at_state(chem), at_swelling(chem)
    per_unit, T_p = bed[W_BED] / unit, pressure_slope(chem, work)
    capacity = heat_capacity_flow(chem, work)
    for j in range(R):
        heat, swell = 0.0, 0.0
        for s in range(S):
            heat += real[nu + j * S + s] * work[partial + s]
            swell += real[nu + j * S + s] * work[swelling + s]
        work[T_xi + j] = -unit * heat * T / capacity
        J[R * n + j] = -drag * (unit * swell + work[state + VOLUME_T] * work[T_xi + j])
    J[R * n + R] = -drag * (work[state + VOLUME_P] + work[state + VOLUME_T] * T_p) * bed[P_UNIT]
    for q in range(R):
        kind = q * (KIND + L)
        for j in range(R):
            slope = work[rate + R + q] * real[law + j * LAW + 6]
            for k in range(chem.whole[kind + 2]):
                slope += work[member + q * L + k] * real[nu + j * S + chem.whole[kind + KIND + k]]
            for s in range(0 if is_ideal(chem) else S):
                slope += work[every + q * S + s] * real[nu + j * S + s]
            J[q * n + j] = per_unit * (unit * slope + work[rate + 2 * R + q] * work[T_xi + j])
        J[q * n + R] = per_unit * (work[rate + 3 * R + q] + work[rate + 2 * R + q] * T_p) * bed[P_UNIT]
