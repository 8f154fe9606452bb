"""A bed at many depths: the collocation polynomial of each step, with temperatures from the energy balance."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import evaluate
from reactorstage.bed.compiled import compiled
from reactorstage.bed.events import weights
from reactorstage.bed.integrate import Steps
from reactorstage.bed.train_pass import bed_inlet


@compiled
def sample_bed(
    chem, beds, b, row, out, catalyst, activity, friction_factor, stages, per_step, work, w, T, p, F, r
):
    """Fill w, T, p (N,), F (N, S), r (N, R) at `per_step` points of each step and the inlet.

    N = count * per_step + 1; out and stages are those of a finished pass, row the record of the inlet.
    """
    inlet = bed_inlet(chem, beds, b, row, out, catalyst, activity, friction_factor)
    steps = Steps(stages.edges[b], stages.y0[b], stages.Z[b], stages.T[b])
    R = chem.nu.shape[0]
    y, f, J, share = np.zeros(R + 1), np.empty(R + 1), np.empty((R + 1, R + 1)), np.empty(3)
    T_now, position = inlet.T, 0
    for k in range(stages.counts[b]):
        for i in range(0 if k == 0 else 1, per_step + 1):
            theta = i / per_step
            weights(theta, share)
            for m in range(R + 1):
                y[m] = steps.y0[k, m]
                for j in range(3):
                    y[m] += share[j] * steps.Z[k, j, m]
            for _ in range(4):
                found = evaluate(chem, inlet, y, T_now, work, f, J, False)
                if np.isfinite(found):
                    T_now = found
            w[position] = catalyst * (steps.edges[k] + theta * (steps.edges[k + 1] - steps.edges[k]))
            T[position], p[position] = T_now, inlet.p_unit * y[R]
            F[position], r[position] = work.F, work.r
            position += 1
