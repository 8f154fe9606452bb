"""Adaptive implicit integration of one bed by Radau IIA, or the same on a frozen step sequence."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.balance import evaluate, flows
from reactorstage.bed.compiled import compiled
from reactorstage.bed.linear import factorise, substitute
from reactorstage.bed.radau import (
    COMPLEX,
    ERROR,
    GAMMA,
    INVERSE,
    NODES,
    POLYNOMIAL,
    TRANSFORM,
    TRANSFORM_INVERSE,
)

Array = NDArray[np.float64]

DONE, TOO_MANY_STEPS, STEP_TOO_SMALL, NO_PRESSURE, TOO_HOT, TOO_COLD, FROZEN_FAILED = 0, 1, 2, 3, 4, 5, 6

NAMED_FACTOR = 10.0
NAMED_FLOOR = 1e-9
NEWTON_CAP = 25
SMALLEST_STEP = 1e-14


class Tolerance(NamedTuple):
    """Error per step: flow relative to the bed's feed, temperature in K, Newton (share of the feed).

    named (S,) is 1 for species whose own flow must be right relative to itself (NAMED_FACTOR * flow).
    """

    flow: float
    temperature: float
    newton: float
    named: Array


class Steps(NamedTuple):
    """The step sequence of one bed: edges (N+1,), and on each step y0 (N, n), Z (N, 3, n), T (N, 3)."""

    edges: Array
    y0: Array
    Z: Array
    T: Array


@compiled
def newton(chem, inlet, h, y0, Z, T, J, real, complex_, pivot_r, pivot_c, tol, work, f, point, G, W):
    """Simplified Newton on the three stages; (converged, rate of convergence, evaluations).

    real and complex_ hold the factors of gamma/h - J and (alpha - i beta)/h - J; Z (3, n) and T (3,) are
    guesses on entry and the solution on exit.
    """
    n = y0.shape[0]
    before, rate = -1.0, 0.0
    U = np.empty(n, np.complex128)
    for iteration in range(NEWTON_CAP):
        for i in range(3):
            for k in range(n):
                point[k] = y0[k] + Z[i, k]
            T_new = evaluate(chem, inlet, point, T[i], work, f, J, False)
            if not np.isfinite(T_new):
                return False, np.inf, 3 * iteration + i
            T[i] = T_new
            for k in range(n):
                G[i, k] = (
                    f[k] - (INVERSE[i, 0] * Z[0, k] + INVERSE[i, 1] * Z[1, k] + INVERSE[i, 2] * Z[2, k]) / h
                )
        for k in range(n):
            W[0, k] = 0.0
            low, high = 0.0, 0.0
            for i in range(3):
                W[0, k] += TRANSFORM_INVERSE[0, i] * G[i, k]
                low += TRANSFORM_INVERSE[1, i] * G[i, k]
                high += TRANSFORM_INVERSE[2, i] * G[i, k]
            U[k] = complex(low, high)
        substitute(real, pivot_r, W[0])
        substitute(complex_, pivot_c, U)
        size = 0.0
        for k in range(n):
            for i in range(3):
                change = TRANSFORM[i, 0] * W[0, k] + TRANSFORM[i, 1] * U[k].real + TRANSFORM[i, 2] * U[k].imag
                Z[i, k] += change
                size = max(size, abs(change))
        if not np.isfinite(size):
            return False, np.inf, 3 * iteration + 3
        if before > 0.0:
            rate = size / before
            if rate >= 2.0 or (rate >= 1.0 and size > 100.0 * tol):
                return False, rate, 3 * iteration + 3
            if size * min(rate / max(1.0 - rate, 1e-3), 1.0) <= tol or (rate >= 0.5 and size <= 1e-14):
                return True, rate, 3 * iteration + 3
        elif size <= 1e-3 * tol:
            return True, 0.0, 3 * iteration + 3
        before = size
    return before <= 1e3 * tol and rate < 1.0, rate, 3 * NEWTON_CAP


@compiled
def settle_temperature(chem, inlet, y0, Z, T, work, f, point, J):
    """Temperatures of the stages after the last Newton correction of Z."""
    for i in range(3):
        for k in range(y0.shape[0]):
            point[k] = y0[k] + Z[i, k]
        T_new = evaluate(chem, inlet, point, T[i], work, f, J, False)
        if np.isfinite(T_new):
            T[i] = T_new


@compiled
def factorise_step(J, h, real, complex_, pivot_r, pivot_c):
    """Factors of the two Newton systems of a step of length h."""
    n = J.shape[0]
    for i in range(n):
        for j in range(n):
            real[i, j] = -J[i, j]
            complex_[i, j] = -J[i, j]
        real[i, i] += GAMMA / h
        complex_[i, i] += COMPLEX / h
    return factorise(real, pivot_r) and factorise(complex_, pivot_c)


@compiled
def error_size(chem, inlet, y, T, error, tolerance, work):
    """Largest weighted error: flows, temperature, pressure; <= 1 is accepted. Uses work after `evaluate`."""
    R, S = chem.nu.shape
    flows(chem, inlet, y, work.F)
    size = abs(error[R]) / tolerance.flow
    heat, capacity = 0.0, 0.0
    for s in range(S):
        off = 0.0
        for q in range(R):
            off += chem.nu[q, s] * error[q]
        off *= inlet.F_unit
        allowed = tolerance.flow * inlet.F_unit
        if tolerance.named[s] > 0.0:
            allowed = min(
                allowed, NAMED_FACTOR * tolerance.flow * max(abs(work.F[s]), NAMED_FLOOR * inlet.F_unit)
            )
        size = max(size, abs(off) / allowed)
        heat += off * work.h_RT[s]
        capacity += work.F[s] * work.cp_R[s]
    return max(size, abs(heat * T / capacity) / tolerance.temperature)


@compiled
def extrapolate(ratio, y_shift, Z_old, Z):
    """Guess of the stages from the previous step's collocation polynomial continued over the new step."""
    for i in range(3):
        theta = 1.0 + NODES[i] * ratio
        for k in range(Z.shape[1]):
            total = 0.0
            for j in range(3):
                total += (
                    Z_old[j, k]
                    * theta
                    * (POLYNOMIAL[j, 0] + theta * (POLYNOMIAL[j, 1] + theta * POLYNOMIAL[j, 2]))
                )
            Z[i, k] = total - y_shift[k]


@compiled
def reason_of(chem, inlet, y, T, f):
    """Why no step can be taken from here: pressure exhausted, temperature out of range, or steps too small."""
    R = chem.nu.shape[0]
    if y[R] < 0.05 or -f[R] * 1e-6 > y[R]:
        return NO_PRESSURE
    if chem.T_high - 50.0 < T:
        return TOO_HOT
    if chem.T_low + 5.0 > T:
        return TOO_COLD
    return STEP_TOO_SMALL


@compiled
def integrate(chem, inlet, tolerance, frozen, count, steps, work):
    """Integrate one bed from depth 0 to 1; returns (status, depth reached, steps taken, evaluations).

    With frozen true the first `count` intervals of steps.edges are used as they are, else the edges are
    chosen by error control and written there. steps holds the stages of every step afterwards.
    """
    R = chem.nu.shape[0]
    n = R + 1
    most = steps.y0.shape[0]
    J, f, f0, point, error = np.empty((n, n)), np.empty(n), np.empty(n), np.empty(n), np.empty(n)
    Z, T, G, W = np.zeros((3, n)), np.empty(3), np.empty((3, n)), np.empty((3, n))
    real, complex_ = np.empty((n, n)), np.empty((n, n), np.complex128)
    pivot_r, pivot_c = np.empty(n, np.int64), np.empty(n, np.int64)
    y = np.zeros(n)
    y[R] = 1.0
    T_now, depth, k, calls, h_before, rejected = inlet.T, 0.0, 0, 0, 0.0, False
    steps.edges[0] = 0.0
    T_new = evaluate(chem, inlet, y, T_now, work, f0, J, True)
    calls += 1
    if not np.isfinite(T_new):
        return (TOO_HOT if T_now > 1000.0 else TOO_COLD), 0.0, 0, calls
    h = first_step(f0, tolerance.flow)
    while depth < 1.0:
        if k >= most:
            return TOO_MANY_STEPS, depth, k, calls
        if frozen:
            if k >= count:
                break
            h = steps.edges[k + 1] - steps.edges[k]
        elif depth + 1.01 * h >= 1.0:
            h = 1.0 - depth
        ok = factorise_step(J, h, real, complex_, pivot_r, pivot_c)
        guess(k, h, h_before, f0, steps, Z)
        T[:] = T_now
        rate = np.inf
        if ok:
            ok, rate, used = newton(
                chem,
                inlet,
                h,
                y,
                Z,
                T,
                J,
                real,
                complex_,
                pivot_r,
                pivot_c,
                tolerance.newton,
                work,
                f,
                point,
                G,
                W,
            )
            calls += used
        if frozen and not ok:
            return FROZEN_FAILED, depth, k, calls
        growth = 0.3
        if ok and not frozen:
            for i in range(n):
                error[i] = f0[i] + (ERROR[0] * Z[0, i] + ERROR[1] * Z[1, i] + ERROR[2] * Z[2, i]) / h
                point[i] = y[i] + Z[2, i]
            substitute(real, pivot_r, error)
            size = error_size(chem, inlet, point, T[2], error, tolerance, work)
            if size > 1.0 and (rejected or k == 0):
                for i in range(n):
                    point[i] = y[i] + error[i]
                if np.isfinite(evaluate(chem, inlet, point, T_now, work, f, J, False)):
                    for i in range(n):
                        error[i] = f[i] + (ERROR[0] * Z[0, i] + ERROR[1] * Z[1, i] + ERROR[2] * Z[2, i]) / h
                        point[i] = y[i] + Z[2, i]
                    substitute(real, pivot_r, error)
                    size = error_size(chem, inlet, point, T[2], error, tolerance, work)
                calls += 1
            growth = min(8.0, max(0.2, 0.9 * (size + 1e-30) ** -0.25))
            ok = size <= 1.0
            if not ok:
                growth = min(growth, 0.9)
            elif rejected:
                growth = min(growth, 1.0)
        if not ok:
            rejected = True
            h *= growth
            if h < SMALLEST_STEP:
                return reason_of(chem, inlet, y, T_now, f0), depth, k, calls
            continue
        rejected = False
        steps.y0[k] = y
        for i in range(3):
            steps.T[k, i] = T[i]
            for j in range(n):
                steps.Z[k, i, j] = Z[i, j]
        for i in range(n):
            y[i] += Z[2, i]
        depth += h
        k += 1
        if not frozen:
            if 1.0 - depth < 1e-14:
                depth = 1.0
            steps.edges[k] = depth
        elif k >= count:
            depth = 1.0
        h_before = h
        h *= growth
        T_now = T[2]
        if depth < 1.0:
            T_new = evaluate(chem, inlet, y, T_now, work, f0, J, True)
            calls += 1
            if not np.isfinite(T_new):
                return reason_of(chem, inlet, y, T_now, f0), depth, k, calls
            T_now = T_new
    return DONE, 1.0, k, calls


@compiled
def first_step(f0, tol):
    """Length of the first step from the slope at the inlet."""
    size = 0.0
    for value in f0:
        size = max(size, abs(value))
    return min(0.1, 0.3 * tol**0.25 / max(size, 1e-3))


@compiled
def guess(k, h, h_before, f0, steps, Z):
    """Starting values of the stages: the previous polynomial continued, or the slope on the first step."""
    n = f0.shape[0]
    if k > 0 and h_before > 0.0 and h < 10.0 * h_before:
        extrapolate(h / h_before, steps.Z[k - 1, 2], steps.Z[k - 1], Z)
    else:
        for i in range(3):
            for j in range(n):
                Z[i, j] = NODES[i] * h * f0[j]
