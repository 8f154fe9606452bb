"""Ideal-gas properties and rates of the lead case in NumPy: one matrix product gives them all."""

from __future__ import annotations

import numpy as np

from tests.benchmarks.lead import Array, Lead

R_GAS = 8.31446261815324
P_STANDARD = 1e5


def basis(T: float | Array) -> Array:
    """The functions of temperature of which all properties are made, (9,) or (9, N)."""
    i, log = 1.0 / T, np.log(T)
    return np.array([i * i, i, log * i, log, T * i, T, T * T, T * T * T, (T * T) * (T * T)])


class Gas:
    """Properties and rates of the lead case's gas.

    Reactions are A + B <=> C (+ D); a missing product counts as one at standard pressure, so that
    P_C P_D / K is the backward driving force of each of them.
    """

    def __init__(self, lead: Lead):
        c = lead.coefficients.T
        zero = 0 * c[0]
        cp = np.array([c[0], c[1], zero, zero, c[2], c[3], c[4], c[5], c[6]])
        h_T = np.array([-c[0], c[7], c[1], zero, c[2], c[3] / 2, c[4] / 3, c[5] / 4, c[6] / 5])
        s = np.array([-c[0] / 2, -c[1], zero, c[2], c[8], c[3], c[4] / 2, c[5] / 3, c[6] / 4])
        self.R, self.S = lead.nu.shape
        self.cp_rows, self.h_rows = R_GAS * cp.T, R_GAS * h_T.T
        self.bed_rows = np.concatenate([self.cp_rows, lead.nu @ self.h_rows, lead.nu @ (s - h_T).T])
        self.members = np.array([_members(row) for row in lead.nu]).T
        self.ln_k0, self.E_over_R = np.log(lead.k_ref) + lead.E_over_R / lead.T_ref, lead.E_over_R

    def h(self, T: float | Array) -> Array:
        """Molar enthalpies (S,) or (S, N), J/mol."""
        return T * (self.h_rows @ basis(T))

    def temperature(self, F: Array, H: float, T: float) -> float:
        """T with F h(T) = H."""
        for _ in range(20):
            b = basis(T)
            step = float((H - T * (F @ (self.h_rows @ b))) / (F @ (self.cp_rows @ b)))
            T += step
            if abs(step) < 1e-9 * T:
                break
        return T

    def along(self, F: Array, T: float, p: float) -> tuple[Array, float]:
        """Rates (R,) in mol/(kg s) and dT/dw in K/kg of an adiabatic bed."""
        rows = self.bed_rows @ basis(T)
        S, R = self.S, self.R
        P = np.append(F * (p / F.sum()), P_STANDARD)
        A, B, C, D = P[self.members]
        r = np.exp(self.ln_k0 - self.E_over_R / T) * (A * B - C * D * np.exp(-rows[S + R :]))
        return r, -T * float(r @ rows[S : S + R]) / float(F @ rows[:S])


def _members(nu: Array) -> list[int]:
    """Positions of A, B, C, D of one reaction; that of the standard pressure, S, for a missing D."""
    left = [s for s, count in enumerate(nu) for _ in range(round(-count))]
    right = [s for s, count in enumerate(nu) for _ in range(round(count))]
    return [*left, *right, len(nu)][:4]
