"""The lead case as a symbolic graph with CVODES and forward sensitivities, through CasADi if installed."""

from __future__ import annotations

from collections.abc import Iterator
from importlib.util import find_spec
from typing import Any

import numpy as np

from tests.benchmarks.gas import P_STANDARD, R_GAS, Gas
from tests.benchmarks.lead import Array, Lead
from tests.benchmarks.scipy_route import ergun

Parts = list[Any]

INSTALLED = find_spec("casadi") is not None


class CasadiRoute:
    """Value (35,) and gradient (35, 7) of the lead case at a relative tolerance of CVODES."""

    def __init__(self, lead: Lead, tolerance: float):
        import casadi as ca

        self.lead, self.gas = lead, Gas(lead)
        x = ca.MX.sym("x", 7)
        out = self.train(ca, self.bed(ca, tolerance), x)
        self._value = ca.Function("value", [x], [out])
        self._both = ca.Function("both", [x], [out, ca.jtimes(out, x, ca.MX.eye(7))])

    def value(self, x: Array) -> Array:
        return np.asarray(self._value(x)).ravel()

    def value_and_gradient(self, x: Array) -> tuple[Array, Array]:
        value, gradient = self._both(x)
        return np.asarray(value).ravel(), np.asarray(gradient)

    def bed(self, ca: Any, tolerance: float) -> Any:
        """Integrator over one bed: extents as shares of the feed, T in 1000 K, p as a share of the inlet's.

        Parameters are flows (S,), inlet pressure, catalyst and drag.
        """
        gas, lead, R, S = self.gas, self.lead, self.gas.R, self.gas.S
        y, q = ca.SX.sym("y", R + 2), ca.SX.sym("q", S + 3)
        F_in, p_in, W, drag = q[:S], q[S], q[S + 1], q[S + 2]
        unit, T, p = ca.sum1(F_in), 1000 * y[R], p_in * y[R + 1]
        F = F_in + unit * (ca.DM(lead.nu.T) @ y[:R])
        rows = ca.DM(gas.bed_rows) @ basis(ca, T)
        P = ca.vertcat(F * (p / ca.sum1(F)), P_STANDARD)
        A, B, C, D = (P[row.tolist()] for row in gas.members)
        r = ca.exp(ca.DM(gas.ln_k0) - ca.DM(gas.E_over_R) / T) * (A * B - C * D * ca.exp(-rows[S + R :]))
        T_w = -T * ca.dot(r, rows[S : S + R]) / ca.dot(F, rows[:S])
        slope = ca.vertcat(W / unit * r, W / 1000 * T_w, -W * drag / p_in * ca.sum1(F) * T / p)
        options = {"abstol": 0.1 * tolerance, "reltol": tolerance}
        return ca.integrator("bed", "cvodes", {"x": y, "p": q, "ode": slope}, 0.0, 1.0, options)

    def train(self, ca: Any, bed: Any, x: Any) -> Any:
        """Cost and margins as one symbolic vector."""
        lead, R, M = self.lead, self.gas.R, ca.DM(self.lead.molar_mass)
        shares = ca.vertcat(x[:3], lead.ethylene_flow - ca.sum1(x[:3]))
        F, p = ca.DM(lead.benzene), lead.p_in
        entering, leaving, T_out = [], [], []
        for k, packing in enumerate(lead.packings):
            F = F + shares[k] * ca.DM(lead.ethylene_makeup)
            fixed, moving = ergun(packing, lead.viscosity, 0.0), ergun(packing, lead.viscosity, 1.0)
            drag = R_GAS * (fixed + (moving - fixed) * ca.dot(F, M))
            start = ca.vertcat(np.zeros(R), x[3 + k] / 1000, 1)
            y = bed(x0=start, p=ca.vertcat(F, p, packing.catalyst, drag))["xf"]
            entering.append(F)
            F = F + ca.sum1(F) * (ca.DM(lead.nu.T) @ y[:R])
            p = p * y[R + 1]
            leaving.append(F)
            T_out.append(1000 * y[R])
        return self.ledger(ca, entering, leaving, [x[3 + k] for k in range(4)], T_out, shares)

    def ledger(self, ca: Any, F_in: Parts, F_out: Parts, T_in: Parts, T_out: Parts, n: Any) -> Any:
        """As `tests.benchmarks.ledger`, symbolic; n are the flows of the ethylene feed."""
        lead, gas = self.lead, self.gas

        def H(F: Any, T: Any) -> Any:
            return ca.dot(F, T * (ca.DM(gas.h_rows) @ basis(ca, T)))

        def earned(F: Any, H_before: Any, Q: Any) -> Any:
            above = [Q] + [ca.fmin(ca.fmax(H_before - H(F, T), 0), Q) for T in lead.reach[1:].tolist()]
            given = [a - b for a, b in zip(above, [*above[1:], 0], strict=True)]
            return sum(price * heat for price, heat in zip(lead.price.tolist(), given, strict=True))

        h_ethylene = H(ca.DM(lead.ethylene_makeup), lead.ethylene_T)
        h_benzene = H(ca.DM(lead.benzene), lead.benzene_T)
        fired = H(F_in[0], T_in[0]) - h_benzene - n[0] * h_ethylene
        mixed = [H(F_out[g], T_out[g]) + n[g + 1] * h_ethylene for g in range(3)]
        cooled = [mixed[g] - H(F_in[g + 1], T_in[g + 1]) for g in range(3)]
        H_end = H(F_out[3], T_out[3])
        effluent = H_end - H(F_out[3], lead.effluent_T)
        money = fired * lead.fired_price + lead.by_product_price * F_out[3][lead.index("diethylbenzene")]
        money += sum(earned(F_in[g + 1], mixed[g], cooled[g]) for g in range(3))
        money += earned(F_out[3], H_end, effluent)
        furnace_T = T_in[0]
        for _ in range(4):
            heat = h_benzene + fired - H(ca.DM(lead.benzene), furnace_T)
            furnace_T += heat / ca.dot(ca.DM(lead.benzene), ca.DM(gas.cp_rows) @ basis(ca, furnace_T))
        benzene, ethylene = lead.index("benzene"), lead.index("ethylene")
        bound = {key: values.tolist() for key, values in lead.bounds.items()}
        hot, rise = bound["hot exit", "at most"], bound["rise", "at most"]
        light_off, coking = bound["light-off", "at least"], bound["coking", "at least"]

        def between(label: str, values: Any) -> Iterator[Any]:
            for k, (low, high) in enumerate(
                zip(bound[label, "at least"], bound[label, "at most"], strict=True)
            ):
                yield from (values[k] - low, high - values[k])

        return ca.vertcat(
            money,
            *(hot[k] - T_out[k] for k in range(4)),
            *(T_in[k] - light_off[k] for k in range(4)),
            *(F_in[k][benzene] - coking[k] * F_in[k][ethylene] for k in range(4)),
            *(rise[k] - (T_out[k] - T_in[k]) for k in range(4)),
            *between("valve", n),
            *between("cooler", cooled),
            bound["slip", "at most"][0] - F_out[3][ethylene],
            fired,
            effluent,
            bound["reach of fired heater", "at most"][0] - furnace_T,
        )


def basis(ca: Any, T: Any) -> Any:
    """As `tests.benchmarks.gas.basis`, symbolic."""
    i, log = 1 / T, ca.log(T)
    return ca.vertcat(i * i, i, log * i, log, T * i, T, T * T, T * T * T, (T * T) * (T * T))
