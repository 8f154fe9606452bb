"""The three stages of one Radau step: what they miss, and the matrix of their equations.

A step starts at y0 and has the stages y0 + Z_i; its equations are f(y0 + Z_i) - (A^-1 Z)_i / h = 0.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import evaluate, flows
from reactorstage.bed.compiled import compiled, inlined
from reactorstage.bed.data import GAS_CONSTANT, H_IN, P_UNIT
from reactorstage.bed.radau import INVERSE, NODES
from reactorstage.bed.state import temperature_of


@inlined
def stage_slopes(chem, bed, step, settled, work, f, J, point, G, M):
    """f at the stages of `step` into G (3 n,); how many of the three could be evaluated.

    The stages' temperatures in `step` are guesses, refined once where `settled`, else to the end. With M not
    empty the matrix of the stages (3 n * 3 n,) as well, for which J is needed.
    """
    n = chem.R + 1
    Z, T = 2 + n, 2 + 4 * n
    for i in range(3):
        for k in range(n):
            point[k] = step[2 + k] + step[Z + i * n + k]
        if not settled:
            flows(chem, bed, point, work)
            step[T + i] = temperature_of(
                chem, bed[H_IN] / GAS_CONSTANT, step[T + i], bed[P_UNIT] * point[n - 1], work
            )
        found = evaluate(chem, bed, step[0] + NODES[i] * step[1], point, step[T + i], work, f, J)
        if not np.isfinite(found):
            return i
        step[T + i] = found
        for k in range(n):
            G[i * n + k] = f[k]
        if len(M) > 0:
            stage_rows(n, i, step[1], J, M)
    return 3


@compiled
def stage_rows(n, i, h, J, M):
    """Rows of stage i in the matrix of the three, A^-1 / h - J, into M (3 n * 3 n,)."""
    size = 3 * n
    for k in range(n):
        row = (i * n + k) * size
        for j in range(size):
            M[row + j] = 0.0
        for j in range(3):
            M[row + j * n + k] = INVERSE[i, j] / h
        for j in range(n):
            M[row + i * n + j] -= J[k * n + j]


@inlined
def defects(n, step, G):
    """Take (A^-1 Z)_i / h from the slopes G (3 n,) of the stages."""
    Z = 2 + n
    for k in range(n):
        for i in range(3):
            G[i * n + k] -= (
                INVERSE[i, 0] * step[Z + k]
                + INVERSE[i, 1] * step[Z + n + k]
                + INVERSE[i, 2] * step[Z + 2 * n + k]
            ) / step[1]
