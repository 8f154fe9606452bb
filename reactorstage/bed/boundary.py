"""Dew and bubble temperatures of streams under a cubic equation, and enthalpies at given temperatures.

The equations of the boundary are those of `reactorstage.chemistry.saturation`, the reference in the tests.
Here temperature and the composition of the second phase are found together: one successive substitution of
E = phi(stream) / phi(second phase), then one Newton step of ln T for ln sum y E = 0.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled, entry
from reactorstage.bed.cubic import (
    FIELD,
    H_RES,
    H_RES_P,
    PAIRS,
    SPECIES,
    Z,
    at_slopes,
    cubic,
    cubic_length,
)
from reactorstage.chemistry.cubic import DENSE, FOUND, NOT_FINITE

MOST = 300
WIDEST = 0.1
TRIVIAL = 1e-5
CLOSE = 1e-11
COLDEST, HOTTEST = 0.2, 1.6


@compiled
def wilson(critical, s, T, p, sign):
    """First guess of ln E: sign (ln(pc/p) + 5.373 (1 + omega) (1 - Tc/T)) (Wilson 1968, from memory)."""
    Tc, pc, omega = critical[s, 0], critical[s, 1], critical[s, 2]
    return sign * (np.log(pc / p) + 5.373 * (1.0 + omega) * (1.0 - Tc / T))


@compiled
def first_temperature(critical, S, F, n, p, sign):
    """Temperature at which sum y E = 1 with E of `wilson`; its logarithm is convex in 1/T."""
    mean = 0.0
    for s in range(S):
        mean += max(F[s], 0.0) * critical[s, 0] / n
    inverse = 1.0 / (0.7 * mean)
    for _ in range(40):
        total, slope = 0.0, 0.0
        for s in range(S):
            X = max(F[s], 0.0) / n * np.exp(wilson(critical, s, 1.0 / inverse, p, sign))
            total += X
            slope -= sign * X * 5.373 * critical[s, 0] * (1.0 + critical[s, 2])
        step = np.log(total) * total / slope
        inverse = max(inverse - step, 0.5 * inverse)
        if abs(step) < 1e-10 * inverse:
            break
    return 1.0 / inverse


@compiled
def boundary(chem, critical, sign, p, own, other, ln_E):
    """Temperature of the boundary of the flows in `own`, not a number without one.

    sign is -1 for the dew point of a vapour, 1 for the bubble point of a liquid. own and other are work
    arrays of the stream and of the second phase; the results of all kinds stand in them afterwards.
    """
    S, size = chem.S, chem.state.shape[0] // 2
    n, lowest, highest = 0.0, np.inf, 0.0
    for s in range(S):
        n += own[s]
        if own[s] > 0.0:
            lowest, highest = min(lowest, critical[s, 0]), max(highest, critical[s, 0])
    if not (n > 0.0 and p > 0.0):
        return np.nan
    T = first_temperature(critical, S, own, n, p, sign)
    for s in range(S):
        ln_E[s] = wilson(critical, s, T, p, sign)
    for _ in range(MOST):
        if not COLDEST * lowest < T < HOTTEST * highest:
            return np.nan
        status = cubic(chem.state, 0, S, T, p, own, S, SPECIES)
        if status == NOT_FINITE:
            return np.nan
        if status not in (FOUND, DENSE):
            T *= 1.0 - 0.02 * sign
            continue
        total, gap, spread = 0.0, 0.0, 0.0
        for s in range(S):
            other[s] = own[s] / n * np.exp(ln_E[s])
            total += other[s]
        if cubic(chem.state, size, S, T, p, other, S, SPECIES) == NOT_FINITE:
            return np.nan
        slope = 0.0
        for s in range(S):
            new = own[S + FIELD + s] - other[S + FIELD + s]
            gap = max(gap, abs(new - ln_E[s]))
            spread = max(spread, abs(new))
            slope += other[s] / total * (own[S + FIELD + S + s] - other[S + FIELD + S + s])
            ln_E[s] = new
        if spread < TRIVIAL and abs(own[S + Z] - other[S + Z]) < TRIVIAL * own[S + Z]:
            return np.nan
        total = 0.0
        for s in range(S):
            total += own[s] / n * np.exp(ln_E[s])
        if slope * sign <= 0.0:
            return np.nan
        step = -np.log(total) / slope
        if gap < CLOSE and abs(step) < CLOSE * T:
            return T
        if gap < 1.0:
            T += min(max(step, -WIDEST * T), WIDEST * T)
    return np.nan


@entry
def boundaries(chem, critical, sign, rows, out, found):
    """Boundary temperatures of the records at `rows` with their derivatives, into found (N, 1 + D).

    critical (S, 3) holds critical temperature, critical pressure and acentric factor.
    """
    S = chem.S
    own, other, ln_E = np.zeros(S + cubic_length(S)), np.zeros(S + cubic_length(S)), np.zeros(S)
    for i in range(rows.shape[0]):
        row = rows[i]
        for s in range(S):
            own[s] = out[row + s, 0]
        p = out[row + S + 1, 0]
        T = boundary(chem, critical, sign, p, own, other, ln_E)
        found[i, 0] = T
        if np.isnan(T):
            continue
        cubic(chem.state, 0, S, T, p, own, S, PAIRS)
        n, total, by_T, by_p = 0.0, 0.0, 0.0, 0.0
        for s in range(S):
            n += own[s]
        for s in range(S):
            X = own[s] / n * np.exp(ln_E[s])
            other[s] = X
            total += X
            by_T += X * (own[S + FIELD + S + s] - other[S + FIELD + S + s])
            by_p += X * (own[S + FIELD + 2 * S + s] - other[S + FIELD + 2 * S + s])
        for d in range(out.shape[1] - 1):
            change = by_p * out[row + S + 1, d + 1]
            for j in range(S):
                by_F = (np.exp(ln_E[j]) - total) / n
                for s in range(S):
                    by_F += other[s] * own[S + at_slopes(S) + s * S + j]
                change += by_F * out[row + j, d + 1]
            found[i, d + 1] = -change / by_T


@entry
def residual_enthalpies(chem, temperatures, rows, out, found):
    """Residual enthalpy flows, W, of the records at `rows` at other temperatures, into found (N, 1 + D)."""
    S = chem.S
    work = np.zeros(S + cubic_length(S))
    for i in range(rows.shape[0]):
        row = rows[i]
        for s in range(S):
            work[s] = out[row + s, 0]
        for d in range(out.shape[1]):
            found[i, d] = 0.0
        if cubic(chem.state, 0, S, temperatures[i], out[row + S + 1, 0], work, S, SPECIES) == NOT_FINITE:
            continue
        found[i, 0] = work[S + H_RES]
        for d in range(1, out.shape[1]):
            found[i, d] = work[S + H_RES_P] * out[row + S + 1, d]
            for s in range(S):
                found[i, d] += work[S + FIELD + 4 * S + s] * out[row + s, d]
