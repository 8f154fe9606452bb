"""Mixtures for the tests of the equations of state, and derivatives of the readable form by complex step."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.critical import Critical, critical_data
from reactorstage.chemistry.cubic import CubicFluid, CubicState, cubic_fluid, cubic_state

Floats = NDArray[np.float64]

GIVEN = {
    "NH3": (405.4, 11.333e6, 0.256),
    "H2O": (647.1, 22.064e6, 0.344),
    "Ar": (150.7, 4.863e6, 0.0),
    "CH3OH": (513.0, 8.01e6, 0.556),
}
"""Critical constants from memory; the other species are in Cantera's file."""

MIXTURES = {
    "alkylation": ("C6H6", "C2H4", "C2H6", "C8H10,ethylbenz"),
    "ammonia": ("N2", "H2", "NH3"),
    "methanol": ("CO", "CO2", "H2", "CH3OH", "H2O", "Ar"),
}
"""Names of Cantera's gas data. The acentric factor of methanol lies above the bend of Peng-Robinson 1978."""


def constants(name: str) -> Critical:
    return critical_data(name, *GIVEN.get(name, ()))


def interactions(S: int) -> Floats:
    """Invented binary parameters, different for every pair, between -0.03 and 0.09."""
    k = np.fromfunction(lambda i, j: 0.03 * np.sin(3.0 * (i + 1.0) * (j + 1.0)) + 0.03, (S, S))
    k = np.triu(k, 1)
    return np.asarray(k + k.T)


def mixture(equation: str, name: str) -> CubicFluid:
    species = MIXTURES[name]
    return cubic_fluid(equation, [constants(one) for one in species], interactions(len(species)))


def random_states(fluid: CubicFluid, count: int, seed: int) -> list[tuple[Floats, float, float]]:
    """Flows of 0.1 to 100 mol/s, 250 to 900 K, 1 kPa to 300 bar."""
    rng, S = np.random.default_rng(seed), len(fluid.b)
    return [
        (
            rng.dirichlet(np.ones(S)) * 10.0 ** rng.uniform(-1.0, 2.0),
            float(rng.uniform(250.0, 900.0)),
            float(10.0 ** rng.uniform(3.0, 7.5)),
        )
        for _ in range(count)
    ]


STEP = 1e-40

Pick = Callable[[CubicState], Any]


def by_flows(fluid: CubicFluid, F: Floats, T: float, p: float, phase: str, of: Pick) -> Floats:
    """Derivatives by every flow, in the last dimension."""
    steps = 1j * STEP * np.eye(len(F))
    states = [cubic_state(fluid, F + step, T, p, phase) for step in steps]
    return np.stack([np.imag(of(one)) / STEP for one in states], axis=-1)


def by_temperature(fluid: CubicFluid, F: Floats, T: float, p: float, phase: str, of: Pick) -> Any:
    return np.imag(of(cubic_state(fluid, F, T + 1j * STEP, p, phase))) / STEP


def by_pressure(fluid: CubicFluid, F: Floats, T: float, p: float, phase: str, of: Pick) -> Any:
    return np.imag(of(cubic_state(fluid, F, T, p + 1j * STEP, phase))) / STEP


def stiffness(fluid: CubicFluid, F: Floats, T: float, p: float, phase: str) -> float:
    """-V^2/(n R T) dp/dV: 1 in an ideal gas, 0 at the end of a phase, where slopes grow without bound."""
    state = cubic_state(fluid, F, T, p, phase)
    V_p = by_pressure(fluid, F, T, p, phase, lambda one: one.V)
    return float(-state.Z * state.V / (p * V_p))
