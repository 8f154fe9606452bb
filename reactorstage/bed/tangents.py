"""Exact derivatives of a frozen integration: the implicit-function derivative of every step.

A step solves (A^-1 Z)_i / h = f(y0 + Z_i; q). Its derivative along D directions of (y0, q) is one linear
system of size 3 n with the Jacobians of the three stages, so it is exact to rounding for that step.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.balance import evaluate
from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import GAS_CONSTANT
from reactorstage.bed.linear import factorise, substitute_many
from reactorstage.bed.radau import INVERSE

Array = NDArray[np.float64]


class Directions(NamedTuple):
    """Derivatives of one bed's inlet along D directions; ln_factor (R, D) of the rate factors."""

    F: Array
    H: Array
    p: Array
    W: Array
    ln_factor: Array
    friction: Array


class Tangents(NamedTuple):
    """Along D directions: dy0 (N + 1, n, D) at the edges of the steps, dZ (N, 3, n, D) of the stages."""

    y0: Array
    Z: Array


@compiled
def forcing(chem, inlet, directions, y, T, f, work, out):
    """df/dq at one stage for all directions, into out (n, D); work holds the stage's properties and rates."""
    R, S = chem.nu.shape
    D = directions.H.shape[0]
    per_unit = inlet.W / inlet.F_unit
    p = inlet.p_unit * y[R]
    F_total, capacity = 0.0, 0.0
    for s in range(S):
        F_total += work.F[s]
        capacity += work.F[s] * work.cp_R[s]
    for d in range(D):
        T_q = directions.H[d] / GAS_CONSTANT
        F_q = 0.0
        for s in range(S):
            T_q -= work.h_RT[s] * T * directions.F[s, d]
            F_q += directions.F[s, d]
        T_q /= capacity
        for q in range(R):
            slope = work.r_T[q] * T_q + work.r[q] * directions.ln_factor[q, d]
            slope += work.r_common[q] * F_q
            for k in range(chem.kind[q, 2]):
                slope += work.r_member[q, k] * directions.F[chem.member[q, k], d]
            out[q, d] = per_unit * slope + work.r[q] * directions.W[d] / inlet.F_unit
        drag = inlet.W / (inlet.p_unit * p)
        out[R, d] = -drag * (
            inlet.friction * (F_q * T + F_total * T_q)
            + F_total * T * (directions.friction[d] + inlet.friction * directions.W[d] / inlet.W)
        )


@compiled
def differentiate(chem, inlet, directions, steps, count, work, tangents):
    """Fill tangents along all directions for `count` steps; False when a linear system is singular."""
    R = chem.nu.shape[0]
    n = R + 1
    D = directions.H.shape[0]
    J, f, point = np.empty((n, n)), np.empty(n), np.empty(n)
    M, pivot, b = np.empty((3 * n, 3 * n)), np.empty(3 * n, np.int64), np.empty((3 * n, D))
    for i in range(n):
        for d in range(D):
            tangents.y0[0, i, d] = 0.0
    for d in range(D):
        tangents.y0[0, R, d] = directions.p[d] / inlet.p_unit
    for k in range(count):
        h = steps.edges[k + 1] - steps.edges[k]
        dy0 = tangents.y0[k]
        for i in range(3):
            for m in range(n):
                point[m] = steps.y0[k, m] + steps.Z[k, i, m]
            T = evaluate(chem, inlet, point, steps.T[k, i], work, f, J, True)
            rows = b[i * n : (i + 1) * n]
            forcing(chem, inlet, directions, point, T, f, work, rows)
            for m in range(n):
                for j in range(n):
                    slope = J[m, j]
                    for d in range(D):
                        rows[m, d] += slope * dy0[j, d]
                for j in range(3):
                    for q in range(n):
                        M[i * n + m, j * n + q] = 0.0
                    M[i * n + m, j * n + m] = INVERSE[i, j] / h
                for q in range(n):
                    M[i * n + m, i * n + q] -= J[m, q]
        if not factorise(M, pivot):
            return False
        substitute_many(M, pivot, b)
        for m in range(n):
            for d in range(D):
                for i in range(3):
                    tangents.Z[k, i, m, d] = b[i * n + m, d]
                tangents.y0[k + 1, m, d] = dy0[m, d] + b[2 * n + m, d]
    return True
