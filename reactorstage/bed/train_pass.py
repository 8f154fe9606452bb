"""One whole pass through a train: the boundary between Python and compiled code.

A train is a list of operations on one stream. Every operation leaves a record (flows F, enthalpy flow H,
pressure p, temperature T) with its derivatives; beds add places and temperatures found inside them.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed import data as d_
from reactorstage.bed.compiled import compiled, entry
from reactorstage.bed.cubic import H_RES_P
from reactorstage.bed.data import BED as BED_ROWS
from reactorstage.bed.data import COMPOSITION, ENTHALPY, F_UNIT, GAS_CONSTANT, P_UNIT
from reactorstage.bed.events import (
    SHARES,
    hottest,
    passing,
    slope_within,
    temperature_tangent,
)
from reactorstage.bed.gap_steps import (
    DRAW,
    DROP,
    MORE_THAN_THERE,
    REMOVE_FLOWS,
    REMOVE_SHARES,
    add_drawn,
    draw,
    drop_pressure,
    remove_flows,
    remove_shares,
)
from reactorstage.bed.integrate import DONE, NO_PRESSURE, OTHER_PHASE, TOO_COLD, TOO_HOT, integrate
from reactorstage.bed.layout import at_factor, at_mass, at_nu, at_partial, at_profile, at_state, work_length
from reactorstage.bed.state import all_properties, enthalpy_flow, heat_capacity_flow, temperature_of
from reactorstage.bed.tangents import differentiate

ADD, HOLD, SET_TEMPERATURE, REMOVE_HEAT, ARRIVE, BED, ADD_OTHER = 0, 1, 2, 3, 4, 5, 6
"""Operations (code, a, b, c), with those of `gap_steps`; numbers are positions in u, -1 for none:
ADD a feed, b flow, c temperature with the feed's pressure behind it; ADD_OTHER likewise a feed that comes in
the other phase of a cubic equation (a liquid into a vapour: it evaporates); HOLD nothing (its heat follows at
the next ARRIVE);
SET_TEMPERATURE a; REMOVE_HEAT a; ARRIVE a held temperature, b pressure, c position of the HOLD;
BED a bed number, b first of its three numbers in u: catalyst, catalyst activity, friction factor; c first of
its catalyst activities by reaction (-1: that one holds for all)."""

LEAST = 1e-200
"""Catalyst and catalyst activity are not taken below this, so that derivatives exist at zero."""

EXTRAS = 5
"""Rows that a bed adds: peak temperature, its depth, depths at 10, 50 and 90 % of the rise."""


@compiled
def moves(du, index):
    """Whether any direction moves an input."""
    size = 0.0
    for d in range(du.shape[1]):
        size += abs(du[index, d])
    return size > 0.0


@compiled
def copy_record(out, source, target, rows):
    """Copy rows of out from one position to another."""
    for i in range(rows):
        for d in range(out.shape[1]):
            out[target + i, d] = out[source + i, d]


@compiled
def set_row(out, row, value, slopes):
    """Write a value with its derivatives (D,)."""
    out[row, 0] = value
    for d in range(slopes.shape[0]):
        out[row, d + 1] = slopes[d]


@compiled
def record_temperature(chem, row, out, T_guess, moved, work):
    """Temperature of a record from its flows and enthalpy, with derivatives; False beyond the data."""
    S, D = chem.S, out.shape[1] - 1
    total = 0.0
    for s in range(S):
        work[s] = out[row + s, 0]
        total += work[s]
    if not total > 0.0:
        out[row + S + 2, 0] = T_guess
        return False
    p = out[row + S + 1, 0]
    T = temperature_of(chem, out[row + S, 0] / GAS_CONSTANT, T_guess, p, work)
    out[row + S + 2, 0] = T
    if np.isnan(T) or not all_properties(chem, T, p, 0, work):
        return False
    capacity, partial, H_p = heat_capacity_flow(chem, work), at_partial(chem), work[at_state(chem) + H_RES_P]
    for d in range(D):
        heat = (out[row + S, d + 1] - H_p * out[row + S + 1, d + 1]) / GAS_CONSTANT
        for s in range(S):
            heat -= work[partial + s] * T * out[row + s, d + 1]
        if moved[d, 0] == ENTHALPY:
            heat -= work[moved[d, 1]] / GAS_CONSTANT
        out[row + S + 2, d + 1] = heat / capacity
    return chem.T_low < T < chem.T_high


@compiled
def enthalpy_at(chem, row, out, T, T_d, moved, work, H_d):
    """Enthalpy flow of a record's flows at T with derivatives T_d (D,); derivatives into H_d (D,).

    Not a number where the phase does not exist at T.
    """
    S = chem.S
    for s in range(S):
        work[s] = out[row + s, 0]
    if not all_properties(chem, T, out[row + S + 1, 0], 0, work):
        return np.nan
    capacity, partial, H_p = heat_capacity_flow(chem, work), at_partial(chem), work[at_state(chem) + H_RES_P]
    for d in range(H_d.shape[0]):
        H_d[d] = capacity * GAS_CONSTANT * T_d[d] + H_p * out[row + S + 1, d + 1]
        for s in range(S):
            H_d[d] += work[partial + s] * GAS_CONSTANT * T * out[row + s, d + 1]
        if moved[d, 0] == ENTHALPY:
            H_d[d] += work[moved[d, 1]]
    return enthalpy_flow(chem, T, work) * GAS_CONSTANT


@compiled
def add_feed(chem, row, out, feed, composition, u, du, b, c, start, moved, work):
    """Add a feed of u[b] mol/s at u[c] K and u[c + 1] Pa to a record: flows and enthalpies add.

    start tells the feed's phase (see `equation_of_state`); False where that does not exist.
    """
    S, flow, T = chem.S, u[b], u[c]
    for s in range(S):
        work[s] = composition[s]
    if not all_properties(chem, T, u[c + 1], start, work):
        return False
    h, cp = enthalpy_flow(chem, T, work) * GAS_CONSTANT, heat_capacity_flow(chem, work) * GAS_CONSTANT
    H_p, partial = work[at_state(chem) + H_RES_P], at_partial(chem)
    out[row + S, 0] += flow * h
    for s in range(S):
        out[row + s, 0] += flow * composition[s]
    for d in range(du.shape[1]):
        out[row + S, d + 1] += du[b, d] * h + flow * (cp * du[c, d] + H_p * du[c + 1, d])
        for s in range(S):
            out[row + s, d + 1] += du[b, d] * composition[s]
        kind, index = moved[d, 0], moved[d, 1]
        if kind == ENTHALPY:
            out[row + S, d + 1] += flow * composition[index]
        elif kind == COMPOSITION and index // S == feed:
            out[row + index % S, d + 1] += flow
            out[row + S, d + 1] += flow * work[partial + index % S] * GAS_CONSTANT * T
    return True


@compiled
def take_heat(chem, row, out, Q, Q_d, moved, work):
    """Take Q (W) out of a record and find its temperature again."""
    S = chem.S
    out[row + S, 0] -= Q
    for d in range(Q_d.shape[0]):
        out[row + S, d + 1] -= Q_d[d]
    return record_temperature(chem, row, out, out[row + S + 2, 0], moved, work)


@compiled
def bed_length(chem, beds):
    """Length of the array of a bed."""
    return at_profile(chem) + beds.profile.shape[1]


@compiled
def fill_bed(chem, beds, b, row, out, u, first, each, bed):
    """The integrator's view of bed b fed by the record at row, its numbers in u from first and each on."""
    S, mass = chem.S, at_mass(chem)
    F_total, mass_flow = 0.0, 0.0
    for s in range(S):
        bed[BED_ROWS + s] = out[row + s, 0]
        F_total += out[row + s, 0]
        mass_flow += out[row + s, 0] * chem.real[mass + s]
    for q in range(chem.R):
        activity = u[first + 1 if each < 0 else each + q]
        bed[at_factor(chem) + q] = max(activity, LEAST) * beds.rate_factor[b, q]
    for i in range(beds.profile.shape[1]):
        bed[at_profile(chem) + i] = beds.profile[b, i]
    bed[d_.H_IN], bed[d_.T_IN] = out[row + S, 0], out[row + S + 2, 0]
    bed[F_UNIT], bed[P_UNIT], bed[d_.W_BED] = F_total, out[row + S + 1, 0], max(u[first], LEAST)
    bed[d_.FRICTION] = u[first + 2] * GAS_CONSTANT * (beds.viscous[b] + beds.inertial[b] * mass_flow)


@compiled
def active_directions(row, rows, R, out, du, first, each, moved):
    """Directions that reach a bed through its inlet, its numbers or the chemistry: positions and how many."""
    D = du.shape[1]
    picked, count = np.empty(D, np.int64), 0
    for d in range(D):
        reaches = moved[d, 0] >= 0 and moved[d, 0] != COMPOSITION
        for i in range(3):
            reaches = reaches or du[first + i, d] != 0.0
        for q in range(R if each >= 0 else 0):
            reaches = reaches or du[each + q, d] != 0.0
        for s in range(rows):
            reaches = reaches or out[row + s, d + 1] != 0.0
        if reaches:
            picked[count] = d
            count += 1
    return picked, count


@compiled
def bed_directions(chem, beds, b, row, out, u, du, first, each, picked, D):
    """Derivatives of the bed's inlet along the D picked directions, rows as in `tangents`, flat."""
    S, mass = chem.S, at_mass(chem)
    ways = np.empty((S + 4 + chem.R) * D)
    mass_flow = 0.0
    for s in range(S):
        mass_flow += out[row + s, 0] * chem.real[mass + s]
    for i in range(D):
        d, mass_d = picked[i], 0.0
        for s in range(S):
            ways[s * D + i] = out[row + s, d + 1]
            mass_d += out[row + s, d + 1] * chem.real[mass + s]
        ways[S * D + i], ways[(S + 1) * D + i] = out[row + S, d + 1], out[row + S + 1, d + 1]
        ways[(S + 2) * D + i] = du[first, d]
        ways[(S + 3) * D + i] = GAS_CONSTANT * (
            du[first + 2, d] * (beds.viscous[b] + beds.inertial[b] * mass_flow)
            + u[first + 2] * beds.inertial[b] * mass_d
        )
        for q in range(chem.R):
            activity = first + 1 if each < 0 else each + q
            ways[(S + 4 + q) * D + i] = du[activity, d] / max(u[activity], LEAST)
    return ways


@compiled
def write_exit(chem, bed, row, out, step, work):
    """Record of the stream leaving a bed (values)."""
    S, n, nu = chem.S, chem.R + 1, at_nu(chem)
    end = 2 + n + 2 * n
    for s in range(S):
        total = bed[BED_ROWS + s]
        for q in range(chem.R):
            total += chem.real[nu + q * S + s] * bed[F_UNIT] * (step[2 + q] + step[end + q])
        out[row + s, 0] = total
    out[row + S, 0] = bed[d_.H_IN]
    out[row + S + 1, 0] = bed[P_UNIT] * (step[2 + n - 1] + step[end + n - 1])
    out[row + S + 2, 0] = step[2 + 4 * n + 2]


@compiled
def write_exit_tangents(chem, bed, ways, picked, D, y_d, row, out):
    """Derivatives of the record of the stream leaving a bed, but temperature."""
    S, R, nu = chem.S, chem.R, at_nu(chem)
    for i in range(D):
        d = picked[i] + 1
        for s in range(S):
            total = ways[s * D + i]
            for q in range(R):
                total += bed[F_UNIT] * chem.real[nu + q * S + s] * y_d[q * D + i]
            out[row + s, d] = total
        out[row + S, d] = ways[S * D + i]
        out[row + S + 1, d] = bed[P_UNIT] * y_d[R * D + i]


@compiled
def write_places(chem, bed, steps, count, ways, moved, y0_d, Z_d, picked, D, row, exit_row, extra, out, work):
    """Peak temperature and the depths at 10, 50 and 90 % of the rise, with derivatives."""
    S = chem.S
    y, T_d = np.empty(chem.R + 1), np.empty(D)
    k, theta, T = hottest(chem, bed, steps, count, y, work)
    out[extra, 0] = T
    out[extra + 1, 0] = steps[k, 0] + theta * steps[k, 1]
    temperature_tangent(chem, bed, ways, moved, D, y0_d[k], Z_d[k], theta, T, work, T_d)
    for i in range(D):
        out[extra, picked[i] + 1] = T_d[i]
    rise = out[exit_row + S + 2, 0] - bed[d_.T_IN]
    for j in range(SHARES.shape[0]):
        out[extra + 2 + j, 0] = np.nan
        target = bed[d_.T_IN] + SHARES[j] * rise
        k = -1
        if abs(rise) >= 1e-6:
            k, theta, T = passing(chem, bed, steps, count, target, rise > 0.0, y, work)
        if k < 0:
            continue
        out[extra + 2 + j, 0] = steps[k, 0] + theta * steps[k, 1]
        slope = slope_within(chem, bed, steps[k], theta, T, work) / steps[k, 1]
        temperature_tangent(chem, bed, ways, moved, D, y0_d[k], Z_d[k], theta, T, work, T_d)
        for i in range(D):
            d = picked[i] + 1
            wanted = (1.0 - SHARES[j]) * out[row + S + 2, d] + SHARES[j] * out[exit_row + S + 2, d]
            out[extra + 2 + j, d] = (wanted - T_d[i]) / slope


@compiled
def run_bed(
    chem, beds, b, row, exit_row, extra, u, du, first, each, moved, tolerance, frozen, places, stages,
    reference, out, work,
):  # fmt: skip
    """Integrate bed b between two records; (status, depth reached, evaluations)."""
    S, n = chem.S, chem.R + 1
    if u[first] <= 0.0 and not moves(du, first):
        copy_record(out, row, exit_row, S + 3)
        for d in range(out.shape[1]):
            out[extra, d] = out[row + S + 2, d]
        for i in range(2, EXTRAS):
            out[extra + i, 0] = np.nan
        stages.counts[b] = 0
        return DONE, 1.0, 0
    bed = np.empty(bed_length(chem, beds))
    fill_bed(chem, beds, b, row, out, u, first, each, bed)
    steps = stages.steps[b]
    status, depth, count, calls = integrate(
        chem, bed, tolerance, frozen, reference.counts[b], steps, reference.steps[b], work
    )
    if status != DONE:
        return status, depth, calls
    stages.counts[b] = count
    write_exit(chem, bed, exit_row, out, steps[count - 1], work)
    picked, D = active_directions(row, S + 3, chem.R, out, du, first, each, moved)
    ways = bed_directions(chem, beds, b, row, out, u, du, first, each, picked, D)
    y0_d, Z_d, mine = np.empty((count + 1, n * D)), np.empty((count, 3 * n * D)), np.empty((D, 2), np.int64)
    for i in range(D):
        mine[i, 0], mine[i, 1] = moved[picked[i], 0], moved[picked[i], 1]
        for m in range(n):
            y0_d[0, m * D + i] = 0.0
        y0_d[0, (n - 1) * D + i] = ways[(S + 1) * D + i] / bed[P_UNIT]
    if D > 0:
        differentiate(chem, bed, ways, mine, D, steps, count, work, y0_d, Z_d)
        write_exit_tangents(chem, bed, ways, picked, D, y0_d[count], exit_row, out)
    record_temperature(chem, exit_row, out, out[exit_row + S + 2, 0], moved, work)
    if places:
        write_places(
            chem, bed, steps, count, ways, mine, y0_d, Z_d, picked, D, row, exit_row, extra, out, work
        )
    return DONE, 1.0, calls


@compiled
def first_pressure(operations, u, du, row, out):
    """Write the first pressure that a bed states, which is that of all that comes before it."""
    for k in range(operations.shape[0]):
        if operations[k, 0] == ARRIVE and operations[k, 2] >= 0:
            set_row(out, row, u[operations[k, 2]], du[operations[k, 2]])
            break


@compiled
def beyond(chem, T):
    """Why a record has no temperature: its phase, or the end of the data that lies near."""
    if np.isnan(T):
        return OTHER_PHASE
    return TOO_HOT if chem.T_high <= T else TOO_COLD


@compiled
def gap_step(chem, code, a, b, c, row, out, u, du, moved, work, H_d):
    """One of the operations of `gap_steps`; its status."""
    S, there = chem.S, True
    T = out[row + S + 2, 0]
    if code in (REMOVE_SHARES, REMOVE_FLOWS):
        if code == REMOVE_SHARES:
            remove_shares(S, row, out, u, du, a)
        else:
            there = remove_flows(S, row, out, u, du, a)
        H = enthalpy_at(chem, row, out, T, out[row + S + 2, 1:], moved, work, H_d)
        if np.isnan(H):
            return OTHER_PHASE
        set_row(out, row + S, H, H_d)
    elif code == DROP:
        if not drop_pressure(S, row, out, u, du, a):
            return NO_PRESSURE
        if not record_temperature(chem, row, out, T, moved, work):
            return beyond(chem, out[row + S + 2, 0])
    elif code == DRAW:
        there = draw(S, row, out, u, du, a)
    else:
        add_drawn(S, row, out, u, du, a, b, c)
        if not record_temperature(chem, row, out, T, moved, work):
            return beyond(chem, out[row + S + 2, 0])
    return DONE if there else MORE_THAN_THERE


@entry
def train_pass(
    chem, beds, operations, feeds, u, du, moved, tolerance, frozen, places, stages, reference, out
):  # fmt: skip
    """Run the operations; out (K (S + 3) + B EXTRAS, 1 + D) holds values and derivatives by records.

    feeds (NF, S) are molar compositions, u (U,) the inputs, du (U, D) their directions, moved (D, 2) the
    parameter that a direction moves (kind, index; -1 for none). With frozen true the steps of `reference`
    are taken. The rows of the beds are filled when `places` is true. Returns (status, operation where it
    stopped, depth reached there, evaluations, steps).
    """
    S, D, K = chem.S, du.shape[1], operations.shape[0]
    rows = S + 3
    work = np.zeros(work_length(chem))
    Q_d, H_d = np.empty(D), np.empty(D)
    for i in range(out.shape[0]):
        for d in range(D + 1):
            out[i, d] = 0.0
    calls, taken = 0, 0
    for k in range(K):
        code, a, b, c = operations[k]
        row = k * rows
        if k > 0:
            copy_record(out, row - rows, row, rows)
        else:
            first_pressure(operations, u, du, S + 1, out)
        if code in (ADD, ADD_OTHER):
            T_before = out[row + S + 2, 0]
            start = 0 if code == ADD else chem.state.shape[0] // 2
            if not add_feed(chem, row, out, a, feeds[a], u, du, b, c, start, moved, work):
                return OTHER_PHASE, k, 0.0, calls, taken
            found = record_temperature(chem, row, out, u[c] if T_before == 0.0 else T_before, moved, work)
            if not found and np.isnan(out[row + S + 2, 0]):
                return OTHER_PHASE, k, 0.0, calls, taken
        elif code == SET_TEMPERATURE:
            H = enthalpy_at(chem, row, out, u[a], du[a], moved, work, H_d)
            if np.isnan(H):
                return OTHER_PHASE, k, 0.0, calls, taken
            set_row(out, row + S, H, H_d)
            set_row(out, row + S + 2, u[a], du[a])
        elif code == REMOVE_HEAT:
            if not take_heat(chem, row, out, u[a], du[a], moved, work):
                return (TOO_HOT if u[a] < 0.0 else TOO_COLD), k, 0.0, calls, taken
        elif code == ARRIVE:
            if b >= 0:
                set_row(out, row + S + 1, u[b], du[b])
            if c >= 0:
                H = enthalpy_at(chem, row, out, u[a], du[a], moved, work, H_d)
                if np.isnan(H):
                    return OTHER_PHASE, k, 0.0, calls, taken
                Q = out[row + S, 0] - H
                for d in range(D):
                    Q_d[d] = out[row + S, d + 1] - H_d[d]
                for j in range(c, k):
                    if not take_heat(chem, j * rows, out, Q, Q_d, moved, work):
                        return (TOO_HOT if Q < 0.0 else TOO_COLD), j, 0.0, calls, taken
                set_row(out, row + S, H, H_d)
                set_row(out, row + S + 2, u[a], du[a])
        elif code == BED:
            status, depth, used = run_bed(
                chem, beds, a, row - rows, row, K * rows + a * EXTRAS, u, du, b, c, moved, tolerance, frozen,
                places, stages, reference, out, work,
            )  # fmt: skip
            calls += used
            taken += stages.counts[a]
            if status != DONE:
                return status, k, depth, calls, taken
        elif code >= REMOVE_SHARES:
            status = gap_step(chem, code, a, b, c, row, out, u, du, moved, work, H_d)
            if status != DONE:
                return status, k, 0.0, calls, taken
    return DONE, K, 1.0, calls, taken
