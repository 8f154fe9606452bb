"""Places inside a bed: the hottest point and the depths at which the temperature passes given values."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import flows, temperature_of
from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import GAS_CONSTANT
from reactorstage.bed.radau import NODES, POLYNOMIAL

SHARES = np.array([0.1, 0.5, 0.9])


@compiled
def weights(theta, out):
    """Weights (3,) of the stages in the collocation polynomial at theta in [0, 1] of a step."""
    for i in range(3):
        out[i] = theta * (POLYNOMIAL[i, 0] + theta * (POLYNOMIAL[i, 1] + theta * POLYNOMIAL[i, 2]))


@compiled
def temperature_within(chem, inlet, steps, k, theta, T_guess, y, share, work):
    """Temperature at theta of step k; leaves the state in y and the flows and properties in work."""
    weights(theta, share)
    for m in range(y.shape[0]):
        y[m] = steps.y0[k, m]
        for i in range(3):
            y[m] += share[i] * steps.Z[k, i, m]
    flows(chem, inlet, y, work.F)
    return temperature_of(chem, work.F, inlet.H, T_guess, work.cp_R, work.h_RT)


@compiled
def slope_within(chem, inlet, steps, k, theta, T, work):
    """dT/d(theta) of step k there, after `temperature_within`."""
    R, S = chem.nu.shape
    capacity = 0.0
    for s in range(S):
        capacity += work.F[s] * work.cp_R[s]
    total = 0.0
    for q in range(R):
        speed = 0.0
        for i in range(3):
            speed += steps.Z[k, i, q] * (
                POLYNOMIAL[i, 0] + theta * (2.0 * POLYNOMIAL[i, 1] + theta * 3.0 * POLYNOMIAL[i, 2])
            )
        heat = 0.0
        for s in range(S):
            heat += chem.nu[q, s] * work.h_RT[s]
        total -= inlet.F_unit * heat * T / capacity * speed
    return total


@compiled
def temperature_tangent(chem, inlet, directions, tangents, k, theta, T, share, work, out):
    """dT at fixed depth along all directions into out (D,), after `temperature_within`."""
    R, S = chem.nu.shape
    capacity = 0.0
    for s in range(S):
        capacity += work.F[s] * work.cp_R[s]
    weights(theta, share)
    for d in range(out.shape[0]):
        heat = directions.H[d] / GAS_CONSTANT
        for s in range(S):
            heat -= work.h_RT[s] * T * directions.F[s, d]
        for q in range(R):
            dxi = tangents.y0[k, q, d]
            for i in range(3):
                dxi += share[i] * tangents.Z[k, i, q, d]
            for s in range(S):
                heat -= work.h_RT[s] * T * chem.nu[q, s] * inlet.F_unit * dxi
        out[d] = heat / capacity


@compiled
def hottest(chem, inlet, steps, count, y, share, work):
    """(step, theta, T) of the hottest place: the best stage or edge, refined inside its neighbourhood."""
    best_k, best_i, T_best = -1, 0, inlet.T
    for k in range(count):
        for i in range(3):
            if steps.T[k, i] > T_best:
                best_k, best_i, T_best = k, i, steps.T[k, i]
    if best_k < 0:
        return 0, 0.0, inlet.T
    k, low, high = best_k, 0.0, 1.0
    if best_i == 2:
        temperature_within(chem, inlet, steps, k, 1.0, T_best, y, share, work)
        if slope_within(chem, inlet, steps, k, 1.0, T_best, work) >= 0.0:
            if k + 1 >= count:
                return k, 1.0, T_best
            k += 1
    for _ in range(60):
        theta = 0.5 * (low + high)
        T = temperature_within(chem, inlet, steps, k, theta, T_best, y, share, work)
        if slope_within(chem, inlet, steps, k, theta, T, work) > 0.0:
            low = theta
        else:
            high = theta
    T = temperature_within(chem, inlet, steps, k, low, T_best, y, share, work)
    return k, low, T


@compiled
def passing(chem, inlet, steps, count, target, rising, y, share, work):
    """(step, theta, T) of the first depth where T passes target; step -1 when it never does."""
    for k in range(count):
        for i in range(3):
            T_end = steps.T[k, i]
            if (rising and T_end >= target) or (not rising and T_end <= target):
                low = NODES[i - 1] if i > 0 else 0.0
                high = NODES[i]
                T = T_end
                for _ in range(50):
                    theta = 0.5 * (low + high)
                    T = temperature_within(chem, inlet, steps, k, theta, T, y, share, work)
                    if (target <= T) == rising:
                        high = theta
                    else:
                        low = theta
                    if high - low < 1e-4:
                        break
                theta = 0.5 * (low + high)
                for _ in range(8):
                    T = temperature_within(chem, inlet, steps, k, theta, T, y, share, work)
                    slope = slope_within(chem, inlet, steps, k, theta, T, work)
                    if slope == 0.0:
                        break
                    theta -= (T - target) / slope
                T = temperature_within(chem, inlet, steps, k, theta, T, y, share, work)
                return k, theta, T
    return -1, 0.0, inlet.T
