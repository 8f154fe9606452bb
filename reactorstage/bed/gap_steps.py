"""Steps of a gap that change flows inside the compiled pass: removal, drawing off, adding what was drawn.

None of them looks at properties: enthalpy and temperature of the record follow where they are called.
"""

from __future__ import annotations

from reactorstage.bed.compiled import compiled

REMOVE_SHARES, REMOVE_FLOWS, DROP, DRAW, ADD_DRAWN = 10, 11, 12, 13, 14
"""Operations (code, a, b, c); numbers are positions in the input vector u:
REMOVE_SHARES and REMOVE_FLOWS a first of the S shares (0 to 1) or flows that are taken out at the temperature
of the stream; DROP a pressure; DRAW a flow, of the stream's composition; ADD_DRAWN a first of S mole
fractions, b molar enthalpy, c flow."""

MORE_THAN_THERE = 20
"""Status: a step takes out more than there is."""


@compiled
def remove_shares(S, row, out, u, du, first):
    """Take shares of the flows out of a record (enthalpy not yet changed)."""
    for s in range(S):
        flow, left = out[row + s, 0], 1.0 - u[first + s]
        out[row + s, 0] = left * flow
        for d in range(du.shape[1]):
            out[row + s, d + 1] = left * out[row + s, d + 1] - flow * du[first + s, d]


@compiled
def remove_flows(S, row, out, u, du, first):
    """Take flows out of a record (enthalpy not yet changed); False when there is less."""
    for s in range(S):
        if u[first + s] > out[row + s, 0]:
            return False
        out[row + s, 0] -= u[first + s]
        for d in range(du.shape[1]):
            out[row + s, d + 1] -= du[first + s, d]
    return True


@compiled
def drop_pressure(S, row, out, u, du, index):
    """Lower the pressure of a record; False when nothing is left."""
    out[row + S + 1, 0] -= u[index]
    for d in range(du.shape[1]):
        out[row + S + 1, d + 1] -= du[index, d]
    return out[row + S + 1, 0] > 0.0


@compiled
def draw(S, row, out, u, du, index):
    """Draw a flow of the record's own composition and temperature off it; False when there is less.

    Flows and enthalpy flow are multiplied by 1 - f/sum(F).
    """
    total = 0.0
    for s in range(S):
        total += out[row + s, 0]
    if not total > u[index]:
        return False
    left = 1.0 - u[index] / total
    for d in range(du.shape[1]):
        total_d = 0.0
        for s in range(S):
            total_d += out[row + s, d + 1]
        left_d = (u[index] * total_d / total - du[index, d]) / total
        for i in range(S + 1):
            out[row + i, d + 1] = left * out[row + i, d + 1] + left_d * out[row + i, 0]
    for i in range(S + 1):
        out[row + i, 0] *= left
    return True


@compiled
def add_drawn(S, row, out, u, du, fractions, enthalpy, flow):
    """Add a flow of given mole fractions (S,) and molar enthalpy to a record."""
    for i in range(S + 1):
        index = enthalpy if i == S else fractions + i
        out[row + i, 0] += u[flow] * u[index]
        for d in range(du.shape[1]):
            out[row + i, d + 1] += du[flow, d] * u[index] + u[flow] * du[index, d]
