"""Full Newton on the stages of one step, damped: for frozen steps that the simplified one cannot do.

Corrections are shortened until the next one with the same matrix is smaller (natural monotonicity test,
Deuflhard, Newton Methods for Nonlinear Problems, 2004, from memory). Laws of broken order that have used up
their reactant need this: there the correction of an undamped iteration jumps from one side to the other.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled
from reactorstage.bed.linear import factorise, substitute
from reactorstage.bed.stages import defects, stage_slopes

CAP = 600
SMALLEST = 1e-4


@compiled
def damped_newton(chem, bed, step, T_start, tol, weight, work, f, J, point):
    """Stages of a step that starts at T_start, from their guesses in `step`; (converged, evaluations)."""
    n = chem.R + 1
    Z, T, size = 2 + n, 2 + 4 * n, 3 * n
    M, pivot, none = np.empty(size * size), np.empty(size, np.int64), np.empty(0)
    now, G, correction = np.empty(size), np.empty(size), np.zeros(size)
    calls, share, before = 0, 1.0, np.inf
    for i in range(size):
        now[i] = step[Z + i]
    fresh = True
    while calls < CAP:
        for i in range(size):
            step[Z + i] = now[i] + share * correction[i]
        for i in range(3):
            step[T + i] = T_start
        calls += 3
        found = stage_slopes(chem, bed, step, False, work, f, J, point, G, M if fresh else none)
        after = np.inf
        if found == 3 and (not fresh or factorise(M, size, pivot)):
            defects(n, step, G)
            substitute(M, size, pivot, G)
            after = 0.0
            for i in range(size):
                after = max(after, abs(G[i]) * weight[i % n])
        if fresh:
            if not np.isfinite(after):
                return False, calls
            before, share = after, min(1.0, 4.0 * share)
            for i in range(size):
                now[i], correction[i] = step[Z + i], G[i]
                step[Z + i] += G[i]
            if before <= 0.1 * tol:
                return True, calls
        elif after > (1.0 - 0.25 * share) * before:
            share *= 0.5
            if share < SMALLEST:
                return False, calls
            continue
        fresh = not fresh
    return False, calls
