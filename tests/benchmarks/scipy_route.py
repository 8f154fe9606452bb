"""The lead case as a user would write it with NumPy and SciPy: LSODA, finite differences, SLSQP."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.integrate import solve_ivp
from scipy.optimize import OptimizeResult, minimize

from tests.benchmarks.gas import R_GAS, Gas
from tests.benchmarks.lead import Array, Lead, Packing
from tests.benchmarks.ledger import Ledger, Streams


def ergun(packing: Packing, viscosity: float, mass_flow: float) -> float:
    """-dp/dw times density over mass flow, Pa/(kg m3/s): Ergun (1952), linear in the volume flow."""
    solid, eps3, flux = 1 - packing.void_fraction, packing.void_fraction**3, mass_flow / packing.area
    viscous = 150 * viscosity * solid**2 / (eps3 * packing.particle**2)
    inertial = 1.75 * solid / (eps3 * packing.particle) * flux
    return packing.factor * (viscous + inertial) / packing.area / (packing.bulk_density * packing.area)


class ScipyRoute:
    """Ratings of the lead case at a relative tolerance of LSODA.

    A bed's unknowns are the extents as shares of its feed, temperature in units of 1000 K and pressure in
    units of the inlet pressure, so that one absolute tolerance serves all.
    """

    def __init__(self, lead: Lead, tolerance: float):
        self.lead, self.tolerance = lead, tolerance
        self.gas = Gas(lead)
        self.ledger = Ledger(lead, self.gas)
        self.calls = 0

    def bed(self, packing: Packing, F_in: Array, T_in: float, p_in: float) -> tuple[Array, float, float]:
        """Flows, temperature and pressure behind a bed."""
        unit, W = F_in.sum(), packing.catalyst
        nuT, R = self.lead.nu.T * unit, self.gas.R
        drag = ergun(packing, self.lead.viscosity, float(F_in @ self.lead.molar_mass)) * R_GAS * W / p_in

        def slope(_: float, y: Array) -> Array:
            F, T, p = F_in + nuT @ y[:R], 1000.0 * float(y[R]), p_in * float(y[R + 1])
            out = np.empty(R + 2)
            r, T_w = self.gas.along(F, T, p)
            out[:R] = W / unit * r
            out[R], out[R + 1] = W / 1000.0 * T_w, -drag * F.sum() * T / p
            return out

        start = np.zeros(R + 2)
        start[R], start[R + 1] = T_in / 1000.0, 1.0
        tolerances = {"rtol": self.tolerance, "atol": 0.1 * self.tolerance}
        done = solve_ivp(slope, (0.0, 1.0), start, method="LSODA", **tolerances)
        self.calls += done.nfev
        y = done.y[:, -1]
        return F_in + nuT @ y[:R], float(1000.0 * y[R]), float(p_in * y[R + 1])

    def streams(self, x: Array) -> Streams:
        """All beds in a row at the free numbers x."""
        lead = self.lead
        injected, T_in = lead.divided(x)
        F, p, entering, leaving, T_out = lead.benzene, lead.p_in, [], [], []
        for packing, amount, T in zip(lead.packings, injected, T_in, strict=True):
            entering.append(F + lead.injection(amount))
            F, T_exit, p = self.bed(packing, entering[-1], T, p)
            leaving.append(F)
            T_out.append(T_exit)
        return Streams(np.array(entering), np.array(leaving), T_in, np.array(T_out), injected)

    def value(self, x: Array) -> Array:
        """(35,) cost and margins."""
        return self.ledger.of(self.streams(x))

    def value_and_gradient(self, x: Array, step: Array) -> tuple[Array, Array]:
        """Cost and margins with forward differences (35, 7)."""
        value = self.value(x)
        moved = [self.value(x + h * unit) for h, unit in zip(step, np.eye(len(x)), strict=True)]
        return value, (np.array(moved) - value).T / step

    def value_and_central_gradient(self, x: Array, step: Array) -> tuple[Array, Array]:
        """Cost and margins with central differences (35, 7)."""
        pairs = [(x + h * unit, x - h * unit) for h, unit in zip(step, np.eye(len(x)), strict=True)]
        moved = [self.value(high) - self.value(low) for high, low in pairs]
        return self.value(x), np.array(moved).T / (2.0 * step)


@dataclass
class Remembered:
    """SLSQP asks for cost and limits one after the other: each point is rated once."""

    rated: Callable[[Array], tuple[Array, Array]]
    x: Array | None = None
    last: tuple[Array, Array] | None = None
    count: int = 0

    def __call__(self, x: Array) -> tuple[Array, Array]:
        if self.x is None or self.last is None or not np.array_equal(x, self.x):
            self.x, self.last = x.copy(), self.rated(x)
            self.count += 1
        return self.last


def optimum(
    route: ScipyRoute, x: Array, low: Array, high: Array, scale: Array, step: float
) -> tuple[OptimizeResult, int]:
    """SLSQP in numbers scaled to their ranges, limits scaled by `scale`; the result and points rated."""
    span = high - low
    point = Remembered(lambda u: route.value_and_gradient(low + span * u, step * span))
    money = abs(point((x - low) / span)[0][0])
    limits = {
        "type": "ineq",
        "fun": lambda u: point(u)[0][1:] / scale,
        "jac": lambda u: point(u)[1][1:] * span / scale[:, None],
    }
    done = minimize(
        lambda u: point(u)[0][0] / money,
        (x - low) / span,
        jac=lambda u: point(u)[1][0] * span / money,
        bounds=[(0.0, 1.0)] * len(x),
        constraints=[limits],
        method="SLSQP",
        options={"ftol": 1e-7, "maxiter": 100},
    )
    return done, point.count
