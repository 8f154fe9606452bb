"""One whole pass through a train: the boundary between Python and compiled code.

A train is a list of operations on one stream. Every operation leaves a record (flows F, enthalpy flow H,
pressure p, temperature T) with its derivatives; beds add places and temperatures found inside them.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.balance import Inlet, flows, temperature_of, work_space
from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import GAS_CONSTANT
from reactorstage.bed.events import (
    SHARES,
    hottest,
    passing,
    slope_within,
    temperature_tangent,
    temperature_within,
)
from reactorstage.bed.integrate import DONE, TOO_COLD, TOO_HOT, Steps, integrate
from reactorstage.bed.properties import heat_and_enthalpy
from reactorstage.bed.tangents import Directions, Tangents, differentiate

Array = NDArray[np.float64]
Index = NDArray[np.int64]

ADD, HOLD, SET_TEMPERATURE, REMOVE_HEAT, ARRIVE, BED = 0, 1, 2, 3, 4, 5
"""Operations (code, a, b, c); numbers are positions in the input vector u, -1 for none:
ADD a feed, b flow, c temperature; HOLD nothing (its heat follows at the next ARRIVE);
SET_TEMPERATURE a; REMOVE_HEAT a; ARRIVE a held temperature, b pressure, c position of the HOLD;
BED a bed number, b first of its three numbers in u: catalyst, catalyst activity, friction factor."""

EXTRAS = 5
"""Rows that a bed adds: peak temperature, its depth, depths at 10, 50 and 90 % of the rise."""


class Stages(NamedTuple):
    """Step sequences of all beds: counts (B,), edges (B, N+1), y0 (B, N, n), Z (B, N, 3, n), T (B, N, 3)."""

    counts: Index
    edges: Array
    y0: Array
    Z: Array
    T: Array


@compiled
def record_temperature(chem, row, out, T_guess, work):
    """Temperature of a record from its flows and enthalpy, with derivatives; False when there is none."""
    S = chem.nu.shape[1]
    D = out.shape[1] - 1
    total = 0.0
    for s in range(S):
        work.F[s] = out[row + s, 0]
        total += work.F[s]
    if not total > 0.0:
        out[row + S + 2, 0] = T_guess
        return False
    T = temperature_of(chem, work.F, out[row + S, 0], T_guess, work.cp_R, work.h_RT)
    out[row + S + 2, 0] = T
    if not (chem.T_low < T < chem.T_high):
        return False
    heat_and_enthalpy(chem.coefficients, chem.edges, T, work.cp_R, work.h_RT)
    capacity = 0.0
    for s in range(S):
        capacity += work.F[s] * work.cp_R[s]
    for d in range(1, D + 1):
        heat = out[row + S, d] / GAS_CONSTANT
        for s in range(S):
            heat -= work.h_RT[s] * T * out[row + s, d]
        out[row + S + 2, d] = heat / capacity
    return True


@compiled
def enthalpy_at(chem, row, out, T, T_d, work, H_d):
    """Enthalpy flow of a record's flows at T with derivatives T_d (D,); derivatives into H_d (D,)."""
    S = chem.nu.shape[1]
    heat_and_enthalpy(chem.coefficients, chem.edges, T, work.cp_R, work.h_RT)
    H, capacity = 0.0, 0.0
    for s in range(S):
        H += out[row + s, 0] * work.h_RT[s]
        capacity += out[row + s, 0] * work.cp_R[s]
    for d in range(H_d.shape[0]):
        H_d[d] = capacity * GAS_CONSTANT * T_d[d]
        for s in range(S):
            H_d[d] += work.h_RT[s] * GAS_CONSTANT * T * out[row + s, d + 1]
    return H * GAS_CONSTANT * T


@compiled
def add_feed(chem, row, out, composition, flow, T, flow_d, T_d, work):
    """Add a feed of `flow` mol/s at T to a record: flows and enthalpies add."""
    S = chem.nu.shape[1]
    heat_and_enthalpy(chem.coefficients, chem.edges, T, work.cp_R, work.h_RT)
    h, cp = 0.0, 0.0
    for s in range(S):
        h += composition[s] * work.h_RT[s] * GAS_CONSTANT * T
        cp += composition[s] * work.cp_R[s] * GAS_CONSTANT
    out[row + S, 0] += flow * h
    for s in range(S):
        out[row + s, 0] += flow * composition[s]
    for d in range(flow_d.shape[0]):
        out[row + S, d + 1] += flow_d[d] * h + flow * cp * T_d[d]
        for s in range(S):
            out[row + s, d + 1] += flow_d[d] * composition[s]


@compiled
def take_heat(chem, row, out, Q, Q_d, work):
    """Take Q (W) out of a record and find its temperature again."""
    S = chem.nu.shape[1]
    out[row + S, 0] -= Q
    for d in range(Q_d.shape[0]):
        out[row + S, d + 1] -= Q_d[d]
    return record_temperature(chem, row, out, out[row + S + 2, 0], work)


@compiled
def bed_inlet(chem, beds, b, row, out, catalyst, activity, friction_factor):
    """The integrator's view of bed b fed by the record at row."""
    R, S = chem.nu.shape
    F, factor = np.empty(S), np.empty(R)
    F_unit, mass_flow = 0.0, 0.0
    for s in range(S):
        F[s] = out[row + s, 0]
        F_unit += F[s]
        mass_flow += F[s] * chem.molar_mass[s]
    for q in range(R):
        factor[q] = activity * beds.rate_factor[b, q]
    friction = friction_factor * GAS_CONSTANT * (beds.viscous[b] + beds.inertial[b] * mass_flow)
    return Inlet(
        F, out[row + S, 0], out[row + S + 2, 0], F_unit, out[row + S + 1, 0], catalyst, factor, friction
    )


@compiled
def active_directions(row, rows, out, du, first):
    """Positions of the directions that reach a bed: through its inlet or through its own numbers."""
    D = du.shape[1]
    picked, count = np.empty(D, np.int64), 0
    for d in range(D):
        moved = du[first, d] != 0.0 or du[first + 1, d] != 0.0 or du[first + 2, d] != 0.0
        for s in range(rows):
            moved = moved or out[row + s, d + 1] != 0.0
        if moved:
            picked[count] = d
            count += 1
    return picked[:count]


@compiled
def bed_directions(chem, beds, b, row, out, u, du, first, picked):
    """Derivatives of the bed's inlet along the picked directions."""
    R, S = chem.nu.shape
    D = picked.shape[0]
    F, H, p, W = np.empty((S, D)), np.empty(D), np.empty(D), np.empty(D)
    ln_factor, friction = np.empty((R, D)), np.empty(D)
    mass_flow = 0.0
    for s in range(S):
        mass_flow += out[row + s, 0] * chem.molar_mass[s]
    for i in range(D):
        d = picked[i]
        mass_d = 0.0
        for s in range(S):
            F[s, i] = out[row + s, d + 1]
            mass_d += F[s, i] * chem.molar_mass[s]
        H[i], p[i], W[i] = out[row + S, d + 1], out[row + S + 1, d + 1], du[first, d]
        for q in range(R):
            ln_factor[q, i] = du[first + 1, d] / u[first + 1]
        friction[i] = GAS_CONSTANT * (
            du[first + 2, d] * (beds.viscous[b] + beds.inertial[b] * mass_flow)
            + u[first + 2] * beds.inertial[b] * mass_d
        )
    return Directions(F, H, p, W, ln_factor, friction)


@compiled
def write_exit(chem, inlet, row, out, y, T, work):
    """Record of the stream leaving a bed (values)."""
    R, S = chem.nu.shape
    flows(chem, inlet, y, work.F)
    for s in range(S):
        out[row + s, 0] = work.F[s]
    out[row + S, 0] = inlet.H
    out[row + S + 1, 0] = inlet.p_unit * y[R]
    out[row + S + 2, 0] = temperature_of(chem, work.F, inlet.H, T, work.cp_R, work.h_RT)


@compiled
def write_exit_tangents(chem, inlet, directions, picked, dy, row, out):
    """Derivatives of the record of the stream leaving a bed, but temperature."""
    R, S = chem.nu.shape
    for i in range(picked.shape[0]):
        d = picked[i] + 1
        for s in range(S):
            total = directions.F[s, i]
            for q in range(R):
                total += inlet.F_unit * chem.nu[q, s] * dy[q, i]
            out[row + s, d] = total
        out[row + S, d] = directions.H[i]
        out[row + S + 1, d] = inlet.p_unit * dy[R, i]


@compiled
def write_places(chem, inlet, steps, count, directions, tangents, picked, row, exit_row, extra, out, work):
    """Peak temperature and the depths at 10, 50 and 90 % of the rise, with derivatives."""
    R, S = chem.nu.shape
    y, share, T_d = np.empty(R + 1), np.empty(3), np.empty(picked.shape[0])
    k, theta, T = hottest(chem, inlet, steps, count, y, share, work)
    out[extra, 0] = T
    out[extra + 1, 0] = steps.edges[k] + theta * (steps.edges[k + 1] - steps.edges[k])
    T = temperature_within(chem, inlet, steps, k, theta, T, y, share, work)
    temperature_tangent(chem, inlet, directions, tangents, k, theta, T, share, work, T_d)
    for i in range(picked.shape[0]):
        out[extra, picked[i] + 1] = T_d[i]
    T_out = out[exit_row + S + 2, 0]
    rise = T_out - inlet.T
    for j in range(SHARES.shape[0]):
        out[extra + 2 + j, 0] = np.nan
        if abs(rise) < 1e-6:
            continue
        target = inlet.T + SHARES[j] * rise
        k, theta, T = passing(chem, inlet, steps, count, target, rise > 0.0, y, share, work)
        if k < 0:
            continue
        h = steps.edges[k + 1] - steps.edges[k]
        out[extra + 2 + j, 0] = steps.edges[k] + theta * h
        slope = slope_within(chem, inlet, steps, k, theta, T, work) / h
        temperature_tangent(chem, inlet, directions, tangents, k, theta, T, share, work, T_d)
        for i in range(picked.shape[0]):
            d = picked[i] + 1
            wanted = (1.0 - SHARES[j]) * out[row + S + 2, d] + SHARES[j] * out[exit_row + S + 2, d]
            out[extra + 2 + j, d] = (wanted - T_d[i]) / slope


@compiled
def run_bed(
    chem, beds, b, row, exit_row, extra, u, du, first, tolerance, frozen, stages, tangents, out, work
):
    """Integrate bed b between two records; (status, depth reached, evaluations)."""
    S = chem.nu.shape[1]
    rows = S + 3
    if u[first] <= 0.0:
        out[exit_row : exit_row + rows] = out[row : row + rows]
        out[extra] = out[row + S + 2]
        stages.counts[b] = 0
        return DONE, 1.0, 0
    inlet = bed_inlet(chem, beds, b, row, out, u[first], u[first + 1], u[first + 2])
    steps = Steps(stages.edges[b], stages.y0[b], stages.Z[b], stages.T[b])
    status, depth, count, calls = integrate(chem, inlet, tolerance, frozen, stages.counts[b], steps, work)
    if status != DONE:
        return status, depth, calls
    stages.counts[b] = count
    y = steps.y0[count - 1] + steps.Z[count - 1, 2]
    write_exit(chem, inlet, exit_row, out, y, steps.T[count - 1, 2], work)
    picked = active_directions(row, rows, out, du, first)
    directions = bed_directions(chem, beds, b, row, out, u, du, first, picked)
    n = y.shape[0]
    sized = Tangents(
        tangents[: (count + 1) * n * picked.shape[0]].reshape((count + 1, n, picked.shape[0])),
        tangents[(count + 1) * n * picked.shape[0] : (4 * count + 1) * n * picked.shape[0]].reshape(
            (count, 3, n, picked.shape[0])
        ),
    )
    if picked.shape[0] > 0:
        differentiate(chem, inlet, directions, steps, count, work, sized)
        write_exit_tangents(chem, inlet, directions, picked, sized.y0[count], exit_row, out)
    record_temperature(chem, exit_row, out, out[exit_row + S + 2, 0], work)
    write_places(chem, inlet, steps, count, directions, sized, picked, row, exit_row, extra, out, work)
    return DONE, 1.0, calls


@compiled
def train_pass(chem, beds, operations, feeds, u, du, tolerance, frozen, stages, out):
    """Run the operations; out (K (S + 3) + B EXTRAS, 1 + D) holds values and derivatives by records.

    feeds (NF, S) are molar compositions, u (U,) the inputs, du (U, D) their directions. Returns (status,
    operation where it stopped, depth reached there, evaluations, steps).
    """
    S = chem.nu.shape[1]
    D = du.shape[1]
    rows = S + 3
    K = operations.shape[0]
    n = chem.nu.shape[0] + 1
    work = work_space(chem.nu.shape[0], S, chem.member.shape[1])
    tangents = np.empty((4 * stages.y0.shape[1] + 1) * n * max(D, 1))
    Q_d, H_d = np.empty(D), np.empty(D)
    out[:] = 0.0
    calls, taken = 0, 0
    for k in range(K):
        code, a, b, c = operations[k]
        row = k * rows
        if k > 0:
            out[row : row + rows] = out[row - rows : row]
        if code == ADD:
            first = out[row + S + 2, 0] == 0.0
            add_feed(chem, row, out, feeds[a], u[b], u[c], du[b], du[c], work)
            record_temperature(chem, row, out, u[c] if first else out[row + S + 2, 0], work)
        elif code == SET_TEMPERATURE:
            out[row + S, 0] = enthalpy_at(chem, row, out, u[a], du[a], work, H_d)
            out[row + S, 1:] = H_d
            out[row + S + 2, 0] = u[a]
            out[row + S + 2, 1:] = du[a]
        elif code == REMOVE_HEAT:
            if not take_heat(chem, row, out, u[a], du[a], work):
                return (TOO_HOT if u[a] < 0.0 else TOO_COLD), k, 0.0, calls, taken
        elif code == ARRIVE:
            if b >= 0:
                out[row + S + 1, 0] = u[b]
                out[row + S + 1, 1:] = du[b]
            if c >= 0:
                H = enthalpy_at(chem, row, out, u[a], du[a], work, H_d)
                Q = out[row + S, 0] - H
                Q_d[:] = out[row + S, 1:] - H_d
                for j in range(c, k):
                    if not take_heat(chem, j * rows, out, Q, Q_d, work):
                        return (TOO_HOT if Q < 0.0 else TOO_COLD), j, 0.0, calls, taken
                out[row + S, 0] = H
                out[row + S, 1:] = H_d
                out[row + S + 2, 0] = u[a]
                out[row + S + 2, 1:] = du[a]
        elif code == BED:
            status, depth, used = run_bed(
                chem, beds, a, row - rows, row, K * rows + a * EXTRAS, u, du, b, tolerance, frozen, stages,
                tangents, out, work,
            )  # fmt: skip
            calls += used
            taken += stages.counts[a]
            if status != DONE:
                return status, k, depth, calls, taken
    return DONE, K, 1.0, calls, taken
