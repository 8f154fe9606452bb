"""Adaptive implicit integration of one bed by Radau IIA, or the same on a frozen step sequence."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import evaluate, flows
from reactorstage.bed.compiled import compiled
from reactorstage.bed.damped import damped_newton
from reactorstage.bed.data import BED, F_UNIT, P_UNIT, T_IN
from reactorstage.bed.depth import next_kink
from reactorstage.bed.layout import (
    at_nu,
    at_partial,
    is_cubic,
)
from reactorstage.bed.linear import factorise, substitute
from reactorstage.bed.radau import (
    COMPLEX,
    ERROR,
    GAMMA,
    NODES,
    POLYNOMIAL,
    TRANSFORM,
    TRANSFORM_INVERSE,
)
from reactorstage.bed.stages import defects, stage_slopes
from reactorstage.bed.state import heat_capacity_flow, loses_phase

DONE, TOO_MANY_STEPS, STEP_TOO_SMALL, NO_PRESSURE, TOO_HOT, TOO_COLD, FROZEN_FAILED = 0, 1, 2, 3, 4, 5, 6
NO_FLOW, USED_UP, OTHER_PHASE = 7, 8, 9

NAMED_FACTOR = 10.0
NAMED_FLOOR = 1e-9
FAR = 4.0
GROWTH = 3.0
LENGTHS = 2.0
OWN = 10.0
NEWTON_CAP = 25
STALLED = 1e-11
SMALLEST_STEP = 1e-14
OVERDRAFT = 1e-4
ROUNDING = 1e-15
NEWTON = 1e-2
PLACE = 1e-4
SMALLEST_START = 1e-40


@compiled
def weigh(n, slope, J, y, left, weight):
    """Weights of errors (n,), above 1 for an extent whose rate grows by orders over the depth `left`.

    Errors grow no faster than exp(mu x), mu the logarithmic norm of J (Dahlquist 1958, from memory). Where
    that is much, the rate of reaction q grows as exp(g x), g = (J f)_q / f_q, and so does an error made now:
    it is held to a share of what the reaction makes within one growth length, f_q / g. Returns how long a
    step may be; over longer ones the method, stable where it should not be, damps growth to nothing.
    """
    mu, longest = 0.0, 1.0
    for q in range(n):
        weight[q] = 1.0
        total = J[q * n + q]
        for j in range(n):
            total += abs(J[q * n + j]) if j != q else 0.0
        mu = max(mu, total)
    if left * mu <= GROWTH:
        return longest
    for q in range(n - 1):
        rise = 0.0
        for j in range(n):
            rise += J[q * n + j] * slope[j]
        if slope[q] < 0.0:
            rise = -rise
        scale = abs(slope[q]) + rise / mu
        if rise > 0.0 and left * rise > GROWTH * scale:
            share = max(OWN * scale * scale / rise, abs(y[q]) / OWN)
            weight[q] = max(1.0, 1.0 / share)
            longest = min(longest, LENGTHS * scale / rise)
    return longest


@compiled
def sharpen(chem, bed, tolerance, weight, work, sharp):
    """Weights of Newton's corrections (n,): those of errors, and more where a named species is scarce.

    Newton is then a hundred times as exact as the error that such a species may have, but for rounding.
    """
    for q in range(chem.R):
        sharp[q] = weight[q]
    for s in range(chem.S):
        if tolerance.named[s] > 0.0:
            flow = max(abs(work[s]), NAMED_FLOOR * bed[F_UNIT])
            allowed = max(NEWTON * NAMED_FACTOR * tolerance.flow * flow, ROUNDING * bed[F_UNIT])
            if allowed < tolerance.newton * bed[F_UNIT]:
                for q in range(chem.R):
                    if chem.real[at_nu(chem) + q * chem.S + s] != 0.0:
                        sharp[q] = max(sharp[q], tolerance.newton * bed[F_UNIT] / allowed)


@compiled
def stage_correction(n, step, G, Z, real, complex_, pivots, U, weight):
    """One simplified Newton correction of the stages Z (3 n) in `step` from the residuals; weighted size."""
    defects(n, step, G)
    for k in range(n):
        first = low = high = 0.0
        for i in range(3):
            first += TRANSFORM_INVERSE[0, i] * G[i * n + k]
            low += TRANSFORM_INVERSE[1, i] * G[i * n + k]
            high += TRANSFORM_INVERSE[2, i] * G[i * n + k]
        U[k] = complex(low, high)
        G[k] = first
    substitute(real, n, pivots[:n], G[:n])
    substitute(complex_, n, pivots[n:], U)
    size = 0.0
    for k in range(n):
        for i in range(3):
            change = TRANSFORM[i, 0] * G[k] + TRANSFORM[i, 1] * U[k].real + TRANSFORM[i, 2] * U[k].imag
            step[Z + i * n + k] += change
            size = max(size, abs(change) * weight[k])
    return size


@compiled
def newton(chem, bed, step, real, complex_, pivots, tol, work, f, point, G, U, weight, none):
    """Simplified Newton on the three stages of a step; (converged, evaluations).

    real and complex_ hold the factors of gamma/h - J and (alpha - i beta)/h - J; the stages and their
    temperatures in `step` are guesses on entry and the solution on exit.
    """
    n = chem.R + 1
    Z = 2 + n
    before = -1.0
    for iteration in range(NEWTON_CAP):
        found = stage_slopes(chem, bed, step, iteration > 0, work, f, none, point, G, none)
        if found < 3:
            return False, 3 * iteration + found
        size = stage_correction(n, step, G, Z, real, complex_, pivots, U, weight)
        calls = 3 * iteration + 3
        if not np.isfinite(size):
            return False, calls
        if size <= 0.1 * tol:
            return True, calls
        if before > 0.0:
            rate = size / before
            if rate >= 2.0 or (rate >= 1.0 and size > 100.0 * tol):
                return False, calls
            if rate >= 0.5 and size <= STALLED:
                return True, calls
            if size * min(rate / max(1.0 - rate, 1e-3), 1.0) <= tol:
                return True, calls
        before = size
    return before <= 1e3 * tol, 3 * NEWTON_CAP


@compiled
def factorise_step(J, n, h, real, complex_, pivots):
    """Factors of the two Newton systems of a step of length h."""
    for i in range(n):
        for j in range(n):
            real[i * n + j] = -J[i * n + j]
            complex_[i * n + j] = -J[i * n + j]
        real[i * n + i] += GAMMA / h
        complex_[i * n + i] += COMPLEX / h
    return factorise(real, n, pivots[:n]) and factorise(complex_, n, pivots[n:])


@compiled
def error_size(chem, bed, y, T, error, tolerance, work, weight):
    """Largest weighted error: flows, temperature, pressure; <= 1 is accepted. Properties stand in work."""
    S, nu = chem.S, at_nu(chem)
    flows(chem, bed, y, work)
    size = abs(error[chem.R]) / tolerance.flow
    heat, unit = 0.0, bed[F_UNIT]
    for q in range(chem.R):
        if weight[q] > 1.0:
            size = max(size, abs(error[q]) * weight[q] / tolerance.flow)
    for s in range(S):
        off = 0.0
        for q in range(chem.R):
            off += chem.real[nu + q * S + s] * error[q]
        off *= unit
        allowed = tolerance.flow * unit
        if tolerance.named[s] > 0.0:
            allowed = min(allowed, NAMED_FACTOR * tolerance.flow * max(abs(work[s]), NAMED_FLOOR * unit))
        size = max(size, abs(off) / allowed)
        heat += off * work[at_partial(chem) + s]
    return max(size, abs(heat * T / heat_capacity_flow(chem, work)) / tolerance.temperature)


@compiled
def estimate(chem, bed, h, slope, step, real, pivots, tolerance, work, error, point, weight):
    """Weighted size of the embedded error of a step; slope (n,) is f at its start."""
    n = chem.R + 1
    Z = 2 + n
    for i in range(n):
        error[i] = (
            slope[i]
            + (ERROR[0] * step[Z + i] + ERROR[1] * step[Z + n + i] + ERROR[2] * step[Z + 2 * n + i]) / h
        )
        point[i] = step[2 + i] + step[Z + 2 * n + i]
    substitute(real, n, pivots[:n], error)
    return error_size(chem, bed, point, step[2 + 4 * n + 2], error, tolerance, work, weight)


@compiled
def continued(before, after, n, sign):
    """Add sign times the previous step's polynomial, continued over the new step, to the new stages."""
    Z = 2 + n
    ratio = after[1] / before[1]
    for i in range(3):
        theta = 1.0 + NODES[i] * ratio
        for j in range(3):
            weight = theta * (POLYNOMIAL[j, 0] + theta * (POLYNOMIAL[j, 1] + theta * POLYNOMIAL[j, 2]))
            if j == 2:
                weight -= 1.0
            for k in range(n):
                after[Z + i * n + k] += sign * weight * before[Z + j * n + k]


@compiled
def guess(k, n, steps, slope, reference, frozen):
    """Stages to start Newton from: the previous polynomial continued, else the slope at the start.

    On a frozen sequence the defect of that continuation in the reference solution is added, which leaves an
    error of second order only.
    """
    step, Z = steps[k], 2 + n
    if frozen:
        for i in range(3 * n):
            step[Z + i] = reference[k, Z + i]
        if k > 0 and step[1] < FAR * steps[k - 1, 1]:
            continued(reference[k - 1], step, n, -1.0)
            continued(steps[k - 1], step, n, 1.0)
        return
    far = k == 0 or step[1] >= 10.0 * steps[k - 1, 1]
    for i in range(3):
        for j in range(n):
            step[Z + i * n + j] = NODES[i] * step[1] * slope[j] if far else 0.0
    if not far:
        continued(steps[k - 1], step, n, 1.0)


@compiled
def first_step(slope, tol):
    """Length of the first step from the slope at the inlet."""
    size = 0.0
    for value in slope:
        size = max(size, abs(value))
    return min(0.1, 0.3 * tol**0.25 / max(size, 1e-3))


@compiled
def reason_of(chem, bed, y, T, slope, work):
    """Why no step can be taken from here: pressure, temperature, a flow that is at its end; or unknown."""
    p_share = y[chem.R]
    if p_share < 0.05 or -slope[chem.R] * 1e-6 > p_share:
        return NO_PRESSURE
    if chem.T_low + 5.0 > T:
        return TOO_COLD
    if chem.T_high - 50.0 < T:
        return TOO_HOT
    flows(chem, bed, y, work)
    if is_cubic(chem) and loses_phase(chem, T, bed[P_UNIT] * p_share, work):
        return OTHER_PHASE
    for s in range(chem.S):
        if abs(work[s]) < OVERDRAFT * bed[F_UNIT] < bed[BED + s]:
            return USED_UP
    return STEP_TOO_SMALL


@compiled
def overdrawn(chem, bed, work):
    """Whether a flow in work is below zero, or below a negative inlet flow, by more than errors explain."""
    most = 0.0
    for s in range(chem.S):
        most = max(most, min(0.0, bed[BED + s]) - work[s])
    return most > OVERDRAFT * bed[F_UNIT]


@compiled
def integrate(chem, bed, tolerance, frozen, count, steps, reference, work):
    """Integrate one bed from depth 0 to 1; returns (status, depth reached, steps taken, evaluations).

    With frozen true the `count` steps of `reference` are taken as they stand, else lengths are chosen by
    error control. steps (N, 2 + 4 n + 3) holds every step afterwards.
    """
    n = chem.R + 1
    Z, T = 2 + n, 2 + 4 * n
    J, none, f, slope = np.empty(n * n), np.empty(0), np.empty(n), np.zeros(n)
    weight, sharp = np.ones(n), np.ones(n)
    y, point, error, G = np.zeros(n), np.empty(n), np.empty(n), np.empty(3 * n)
    real, complex_ = np.empty(n * n), np.empty(n * n, np.complex128)
    U, pivots = np.empty(n, np.complex128), np.empty(2 * n, np.int64)
    y[n - 1] = 1.0
    T_now, depth, kink, k, calls, rejected, h, longest = bed[T_IN], 0.0, 1.0, 0, 0, False, 0.0, 1.0
    if not bed[F_UNIT] > 0.0:
        return NO_FLOW, 0.0, 0, 0
    if frozen and count == 0:
        return FROZEN_FAILED, 0.0, 0, 0
    while depth < 1.0:
        if k >= steps.shape[0]:
            flows(chem, bed, y, work)
            lost = is_cubic(chem) and loses_phase(chem, T_now, bed[P_UNIT] * y[n - 1], work)
            return OTHER_PHASE if lost else TOO_MANY_STEPS, depth, k, calls
        if not rejected:
            T_new = evaluate(chem, bed, depth, y, T_now, work, slope, J)
            calls += 1
            if not np.isfinite(T_new):
                return reason_of(chem, bed, y, T_now, slope, work), depth, k, calls
            T_now = T_new
            longest = weigh(n, slope, J, y, 1.0 - depth, weight)
            sharpen(chem, bed, tolerance, weight, work, sharp)
        if k == 0 and h == 0.0:
            h = first_step(slope, tolerance.flow)
        if frozen:
            h = reference[k, 1]
        else:
            h, kink = min(h, longest), next_kink(chem, bed, depth)
            if depth + 1.01 * h >= kink:
                h = kink - depth
        step = steps[k]
        step[0], step[1] = depth, h
        for i in range(n):
            step[2 + i] = y[i]
        guess(k, n, steps, slope, reference, frozen)
        for i in range(3):
            step[T + i] = T_now
        ok = factorise_step(J, n, h, real, complex_, pivots)
        if ok:
            ok, used = newton(
                chem, bed, step, real, complex_, pivots, tolerance.newton, work, f, point, G, U, sharp, none
            )
            calls += used
        if frozen and not ok:
            guess(k, n, steps, slope, reference, frozen)
            ok, used = damped_newton(chem, bed, step, T_now, tolerance.newton, sharp, work, f, J, point)
            calls += used
        if frozen and not ok:
            return FROZEN_FAILED, depth, k, calls
        growth = 0.3
        if ok and not frozen:
            size = estimate(chem, bed, h, slope, step, real, pivots, tolerance, work, error, point, weight)
            if size > 1.0 and (rejected or k == 0):
                for i in range(n):
                    point[i] = y[i] + error[i]
                calls += 1
                if np.isfinite(evaluate(chem, bed, depth, point, T_now, work, f, none)):
                    size = estimate(
                        chem, bed, h, f, step, real, pivots, tolerance, work, error, point, weight
                    )
            growth = min(8.0, max(0.2, 0.9 * (size + 1e-30) ** -0.25))
            ok = size <= 1.0
            if ok and overdrawn(chem, bed, work):
                if h < PLACE:
                    return USED_UP, depth, k, calls
                ok, growth = False, 0.5
            if not ok:
                growth = min(growth, 0.9)
            elif rejected:
                growth = min(growth, 1.0)
        if not ok:
            rejected = True
            h *= growth
            if h < SMALLEST_STEP * max(depth, SMALLEST_START):
                return reason_of(chem, bed, y, T_now, slope, work), depth, k, calls
            continue
        rejected = False
        for i in range(n):
            y[i] += step[Z + 2 * n + i]
        T_now = step[T + 2]
        k += 1
        if frozen:
            depth = 1.0 if k >= count else reference[k, 0]
        else:
            depth = kink if kink - depth - h < 1e-14 else depth + h
        h *= growth
    return DONE, 1.0, k, calls
