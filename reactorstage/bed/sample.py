"""A bed at many depths: the collocation polynomial of each step, temperatures from the energy balance."""

from __future__ import annotations

import numpy as np

from reactorstage.bed.balance import evaluate
from reactorstage.bed.compiled import entry
from reactorstage.bed.data import P_UNIT, T_IN, W_BED
from reactorstage.bed.events import state_within
from reactorstage.bed.layout import at_rate, work_length
from reactorstage.bed.train_pass import bed_length, fill_bed


@entry
def sample_bed(chem, beds, b, row, out, u, first, each, stages, per_step, w, T, p, F, r):
    """Fill w, T, p (N,), F (N, S), r (N, R) at `per_step` points of each step and the inlet.

    N = count * per_step + 1; out and stages are those of a finished pass, row the record of the inlet,
    first the position of the bed's numbers in u, each that of its activities by reaction (-1: none).
    """
    S, R, rate = chem.S, chem.R, at_rate(chem)
    bed, work = np.empty(bed_length(chem, beds)), np.zeros(work_length(chem))
    fill_bed(chem, beds, b, row, out, u, first, each, bed)
    y, f, none = np.zeros(R + 1), np.empty(R + 1), np.empty(0)
    T_now, position = bed[T_IN], 0
    for k in range(stages.counts[b]):
        step = stages.steps[b, k]
        for i in range(0 if k == 0 else 1, per_step + 1):
            depth = step[0] + i / per_step * step[1]
            state_within(step, R + 1, i / per_step, y)
            for _ in range(4):
                found = evaluate(chem, bed, depth, y, T_now, work, f, none)
                if np.isfinite(found):
                    T_now = found
            w[position] = bed[W_BED] * depth
            T[position], p[position] = T_now, bed[P_UNIT] * y[R]
            for s in range(S):
                F[position, s] = work[s]
            for q in range(R):
                r[position, q] = work[rate + q]
            position += 1
