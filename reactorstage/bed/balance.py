"""Right-hand side of one bed and its Jacobian, on the manifold where the enthalpy flow is constant.

State y (R + 1,): extents of reaction in units of the feed flow `F_unit`, then pressure in units of
`p_unit`; depth runs from 0 to 1. Flows are F = F_in + F_unit nu^T xi, so atoms close by construction;
temperature follows from H(F, T) = H_in, so energy does.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import GAS_CONSTANT
from reactorstage.bed.properties import entropy, heat_and_enthalpy
from reactorstage.bed.rates import rates

Array = NDArray[np.float64]


class Inlet(NamedTuple):
    """One bed as the integrator sees it: inlet stream, catalyst W [kg], rate factors (R,), friction.

    friction is -dp/dw * p / (F_total T), from Ergun with local ideal-gas density.
    """

    F: Array
    H: float
    T: float
    F_unit: float
    p_unit: float
    W: float
    factor: Array
    friction: float


class Work(NamedTuple):
    """Work space of one evaluation; after it: flows, properties, rates and their derivatives there."""

    F: Array
    cp_R: Array
    h_RT: Array
    s_R: Array
    local: Array
    r: Array
    r_member: Array
    r_common: Array
    r_T: Array
    r_p: Array
    T_xi: Array


@compiled
def work_space(R, S, L):
    """Fresh work space for R reactions, S species and laws that name up to L species."""
    return Work(
        np.zeros(S), np.zeros(S), np.zeros(S), np.zeros(S), np.zeros((5, L)),
        np.zeros(R), np.zeros((R, L)), np.zeros(R), np.zeros(R), np.zeros(R), np.zeros(R),
    )  # fmt: skip


@compiled
def temperature_step(chem, F, H, T, cp_R, h_RT):
    """One Newton correction of T towards H(F, T) = H, with the heat capacity flow; properties at the old T."""
    heat_and_enthalpy(chem.coefficients, chem.edges, T, cp_R, h_RT)
    held, capacity = 0.0, 0.0
    for s in range(F.shape[0]):
        held += F[s] * h_RT[s]
        capacity += F[s] * cp_R[s]
    return (H / GAS_CONSTANT - held * T) / capacity, capacity * GAS_CONSTANT


@compiled
def temperature_of(chem, F, H, T, cp_R, h_RT):
    """T with H(F, T) = H by Newton from the guess T, kept within the data range (then the end is returned)."""
    for _ in range(60):
        step, _ = temperature_step(chem, F, H, T, cp_R, h_RT)
        if not np.isfinite(step):
            return np.nan
        new = min(max(T + min(max(step, -200.0), 200.0), chem.T_low), chem.T_high)
        if abs(new - T) <= 1e-13 * T:
            return new
        T = new
    return T


@compiled
def flows(chem, inlet, y, F):
    """F (S,) at the state y."""
    R, S = chem.nu.shape
    for s in range(S):
        F[s] = inlet.F[s]
    for q in range(R):
        xi = inlet.F_unit * y[q]
        for s in range(S):
            F[s] += chem.nu[q, s] * xi


@compiled
def evaluate(chem, inlet, y, T, work, f, J, with_J):
    """dy/d(depth) into f (n,), its Jacobian into J (n, n) when asked; the corrected temperature is returned.

    Not a number when temperature leaves the species' data range or pressure is not positive.
    """
    R, S = chem.nu.shape
    p = inlet.p_unit * y[R]
    flows(chem, inlet, y, work.F)
    step, _ = temperature_step(chem, work.F, inlet.H, T, work.cp_R, work.h_RT)
    T += step
    if not (chem.T_low <= T <= chem.T_high and p > 0.0):
        return np.nan
    heat_and_enthalpy(chem.coefficients, chem.edges, T, work.cp_R, work.h_RT)
    entropy(chem.coefficients, chem.edges, T, work.s_R)
    rates(
        chem, inlet.factor, work.F, T, p, work.h_RT, work.s_R, work.local,
        work.r, work.r_member, work.r_common, work.r_T, work.r_p,
    )  # fmt: skip
    F_total = 0.0
    for s in range(S):
        F_total += work.F[s]
    per_unit = inlet.W / inlet.F_unit
    for q in range(R):
        f[q] = per_unit * work.r[q]
    drag = inlet.W * inlet.friction / (inlet.p_unit * p)
    f[R] = -drag * F_total * T
    if with_J:
        jacobian(chem, inlet, T, p, F_total, per_unit, drag, work, J)
    return T


@compiled
def jacobian(chem, inlet, T, p, F_total, per_unit, drag, work, J):
    """Total derivative of f along the constant-enthalpy manifold, from the work space of `evaluate`."""
    R, S = chem.nu.shape
    capacity = 0.0
    for s in range(S):
        capacity += work.F[s] * work.cp_R[s]
    for j in range(R):
        heat = 0.0
        for s in range(S):
            heat += chem.nu[j, s] * work.h_RT[s]
        work.T_xi[j] = -inlet.F_unit * heat * T / capacity
    for q in range(R):
        for j in range(R):
            slope = work.r_common[q] * chem.change[j]
            for k in range(chem.kind[q, 2]):
                slope += work.r_member[q, k] * chem.nu[j, chem.member[q, k]]
            J[q, j] = per_unit * (inlet.F_unit * slope + work.r_T[q] * work.T_xi[j])
        J[q, R] = per_unit * work.r_p[q] * inlet.p_unit
    for j in range(R):
        J[R, j] = -drag * (inlet.F_unit * chem.change[j] * T + F_total * work.T_xi[j])
    J[R, R] = drag * F_total * T * inlet.p_unit / p
