"""Places inside a bed: the hottest point and the depths at which the temperature passes given values."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import flows
from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import F_UNIT, GAS_CONSTANT, H_IN, P_UNIT, T_IN
from reactorstage.bed.layout import (
    at_nu,
    at_partial,
    is_cubic,
)
from reactorstage.bed.radau import NODES, POLYNOMIAL
from reactorstage.bed.state import all_properties, heat_capacity_flow, pressure_slope, temperature_of
from reactorstage.bed.tangents import temperature_forcing

SHARES = np.array([0.1, 0.5, 0.9])


@compiled
def weight(i, theta):
    """Weight of stage i in the collocation polynomial at theta in [0, 1] of a step."""
    return theta * (POLYNOMIAL[i, 0] + theta * (POLYNOMIAL[i, 1] + theta * POLYNOMIAL[i, 2]))


@compiled
def state_within(step, n, theta, y):
    """State at theta of a step into y (n,)."""
    for m in range(n):
        y[m] = step[2 + m]
        for i in range(3):
            y[m] += weight(i, theta) * step[2 + n + i * n + m]


@compiled
def temperature_within(chem, bed, step, theta, T_guess, y, work):
    """Temperature at theta of a step; leaves the state in y and the flows and properties in work."""
    state_within(step, chem.R + 1, theta, y)
    flows(chem, bed, y, work)
    p = bed[P_UNIT] * y[chem.R]
    T = temperature_of(chem, bed[H_IN] / GAS_CONSTANT, T_guess, p, work)
    if is_cubic(chem):
        all_properties(chem, T, p, 0, work)
    return T


@compiled
def speed_within(step, n, theta, q):
    """d y_q / d(theta) of a step there."""
    speed = 0.0
    for i in range(3):
        speed += step[2 + n + i * n + q] * (
            POLYNOMIAL[i, 0] + theta * (2.0 * POLYNOMIAL[i, 1] + theta * 3.0 * POLYNOMIAL[i, 2])
        )
    return speed


@compiled
def moved_within(n, theta, y0_d, Z_d, D, q, d):
    """Derivative of y_q at theta of a step along direction d."""
    moved = y0_d[q * D + d]
    for i in range(3):
        moved += weight(i, theta) * Z_d[(i * n + q) * D + d]
    return moved


@compiled
def slope_within(chem, bed, step, theta, T, work):
    """dT/d(theta) of a step there, after `temperature_within`."""
    S, n, nu = chem.S, chem.R + 1, at_nu(chem)
    total = pressure_slope(chem, work) * bed[P_UNIT] * speed_within(step, n, theta, chem.R)
    capacity = heat_capacity_flow(chem, work)
    for q in range(chem.R):
        heat = 0.0
        for s in range(S):
            heat += chem.real[nu + q * S + s] * work[at_partial(chem) + s]
        total -= heat * bed[F_UNIT] * speed_within(step, n, theta, q) * T / capacity
    return total


@compiled
def temperature_tangent(chem, bed, ways, moved, D, y0_d, Z_d, theta, T, work, out):
    """dT at fixed depth along all directions into out (D,), after `temperature_within` of that step."""
    S, R, n, nu = chem.S, chem.R, chem.R + 1, at_nu(chem)
    capacity, T_p = heat_capacity_flow(chem, work), pressure_slope(chem, work)
    for d in range(D):
        out[d] = temperature_forcing(chem, ways, D, d, moved[d, 0], moved[d, 1], T, capacity, work)
        for q in range(R):
            heat = 0.0
            for s in range(S):
                heat += chem.real[nu + q * S + s] * work[at_partial(chem) + s]
            out[d] -= heat * T * bed[F_UNIT] * moved_within(n, theta, y0_d, Z_d, D, q, d) / capacity
        out[d] += T_p * bed[P_UNIT] * moved_within(n, theta, y0_d, Z_d, D, R, d)


@compiled
def hottest(chem, bed, steps, count, y, work):
    """(step, theta, T) of the hottest place: the best stage or edge, refined inside its neighbourhood."""
    at_T = 2 + 4 * (chem.R + 1)
    k, which, T_best = -1, 0, bed[T_IN]
    for j in range(count):
        for i in range(3):
            if steps[j, at_T + i] > T_best:
                k, which, T_best = j, i, steps[j, at_T + i]
    if k < 0:
        return 0, 0.0, temperature_within(chem, bed, steps[0], 0.0, bed[T_IN], y, work)
    if which == 2:
        T = temperature_within(chem, bed, steps[k], 1.0, T_best, y, work)
        if slope_within(chem, bed, steps[k], 1.0, T, work) >= 0.0:
            if k + 1 >= count:
                return k, 1.0, T
            k += 1
    low, high = 0.0, 1.0
    for _ in range(60):
        theta = 0.5 * (low + high)
        T = temperature_within(chem, bed, steps[k], theta, T_best, y, work)
        if slope_within(chem, bed, steps[k], theta, T, work) > 0.0:
            low = theta
        else:
            high = theta
    return k, low, temperature_within(chem, bed, steps[k], low, T_best, y, work)


@compiled
def first_interval(chem, steps, count, target, rising):
    """(step, stage) whose end is the first at or beyond target; step -1 when there is none."""
    at_T = 2 + 4 * (chem.R + 1)
    for k in range(count):
        for i in range(3):
            T_end = steps[k, at_T + i]
            if (rising and T_end >= target) or (not rising and T_end <= target):
                return k, i
    return -1, 0


@compiled
def passing(chem, bed, steps, count, target, rising, y, work):
    """(step, theta, T) of the first depth where T passes target; step -1 when it never does."""
    k, i = first_interval(chem, steps, count, target, rising)
    if k < 0:
        return -1, 0.0, bed[T_IN]
    step = steps[k]
    low, high, T = (NODES[i - 1] if i > 0 else 0.0), NODES[i], target
    theta = 0.5 * (low + high)
    for _ in range(60):
        T = temperature_within(chem, bed, step, theta, T, y, work)
        if (target <= T) == rising:
            high = theta
        else:
            low = theta
        slope = slope_within(chem, bed, step, theta, T, work)
        new = theta - (T - target) / slope if slope != 0.0 else np.nan
        if not low <= new <= high:
            new = 0.5 * (low + high)
        if abs(new - theta) <= 1e-15:
            break
        theta = new
    return k, theta, temperature_within(chem, bed, step, theta, T, y, work)
