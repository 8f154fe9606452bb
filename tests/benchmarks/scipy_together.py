"""Forward differences with all perturbed trains in one LSODA integration: the best that SciPy is made to do.

The trains take the same steps, so that noise cancels in the differences, and NumPy works on all at once.
"""

from __future__ import annotations

import numpy as np
from scipy.integrate import solve_ivp

from tests.benchmarks.gas import P_STANDARD, R_GAS, Gas, basis
from tests.benchmarks.lead import Array, Lead, Packing
from tests.benchmarks.ledger import Ledger, Streams
from tests.benchmarks.scipy_route import ergun


class TogetherRoute:
    """Value and gradient of the lead case at a relative tolerance of LSODA; N trains are columns."""

    def __init__(self, lead: Lead, tolerance: float):
        self.lead, self.tolerance, self.gas = lead, tolerance, Gas(lead)
        self.ledger = Ledger(lead, self.gas)

    def value_and_gradient(self, x: Array, step: Array) -> tuple[Array, Array]:
        """Cost and margins (35,) with forward differences (35, 7)."""
        trains = [self.ledger.of(streams) for streams in self.streams(np.vstack([x, x + np.diag(step)]))]
        return trains[0], (np.array(trains[1:]) - trains[0]).T / step

    def streams(self, xs: Array) -> list[Streams]:
        """The beds of N trains at the settings xs (N, 7)."""
        lead, N = self.lead, len(xs)
        injected, T_in = (np.array(parts) for parts in zip(*map(lead.divided, xs), strict=True))
        F, p, entering, leaving, T_out = np.tile(lead.benzene, (N, 1)).T, np.full(N, lead.p_in), [], [], []
        for b, packing in enumerate(lead.packings):
            entering.append(F + injected[:, b] * lead.ethylene_makeup[:, None])
            F, T, p = self.bed(packing, entering[-1], T_in[:, b], p)
            leaving.append(F)
            T_out.append(T)
        F_in, F_out, T_exit = np.array(entering), np.array(leaving), np.array(T_out)
        return [Streams(F_in[..., k], F_out[..., k], T_in[k], T_exit[:, k], injected[k]) for k in range(N)]

    def bed(self, packing: Packing, F_in: Array, T_in: Array, p_in: Array) -> tuple[Array, Array, Array]:
        """Flows (S, N), temperatures and pressures (N,) behind a bed; states as in `ScipyRoute.bed`."""
        R, N, W, unit = self.gas.R, len(T_in), packing.catalyst, F_in.sum(axis=0)
        nuT, mass_flow = self.lead.nu.T, self.lead.molar_mass @ F_in
        drag = np.array([ergun(packing, self.lead.viscosity, one) for one in mass_flow]) * R_GAS * W / p_in

        def slope(_: float, y: Array) -> Array:
            xi, T, p = y.reshape(N, -1).T[:R], 1000.0 * y[R :: R + 2], p_in * y[R + 1 :: R + 2]
            F, out = F_in + unit * (nuT @ xi), np.empty((N, R + 2))
            r, T_w = self.along(F, T, p)
            out[:, :R] = (W / unit * r).T
            out[:, R], out[:, R + 1] = W / 1000.0 * T_w, -drag * F.sum(axis=0) * T / p
            return out.ravel()

        start = np.zeros((N, R + 2))
        start[:, R], start[:, R + 1] = T_in / 1000.0, 1.0
        options = {"rtol": self.tolerance, "atol": 0.1 * self.tolerance, "lband": R + 1, "uband": R + 1}
        done = solve_ivp(slope, (0.0, 1.0), start.ravel(), method="LSODA", **options)
        y = done.y[:, -1].reshape(N, -1).T
        return F_in + unit * (nuT @ y[:R]), 1000.0 * y[R], p_in * y[R + 1]

    def along(self, F: Array, T: Array, p: Array) -> tuple[Array, Array]:
        """As `Gas.along` for N states: rates (R, N) and dT/dw (N,)."""
        gas, S, R = self.gas, self.gas.S, self.gas.R
        rows = gas.bed_rows @ basis(T)
        P = np.vstack([F * (p / F.sum(axis=0)), np.full(len(T), P_STANDARD)])
        A, B, C, D = P[gas.members]
        k = np.exp(gas.ln_k0[:, None] - gas.E_over_R[:, None] / T)
        r = k * (A * B - C * D * np.exp(-rows[S + R :]))
        return r, -T * (r * rows[S : S + R]).sum(axis=0) / (F * rows[:S]).sum(axis=0)
