"""The alkylation gas in Cantera, and one bed integrated by SciPy with Cantera's properties.

Nothing here comes from the program: thermochemistry from Cantera, balances in their differential form
(dT/dw from heats of reaction and heat capacities), SciPy's LSODA at 1e-12.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from functools import cache
from typing import Any

import cantera as ct
import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_ivp

Floats = NDArray[np.float64]
R = ct.gas_constant / 1e3

NAMES = {
    "benzene": "C6H6",
    "ethylene": "C2H4",
    "ethane": "C2H6",
    "ethylbenzene": "C8H10,ethylbenz",
    "styrene": "C8H8,styrene",
    "hydrogen": "H2",
}


@cache
def _nasa() -> dict[str, ct.Species]:
    return {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}


def species(name: str) -> ct.Species:
    """A species under the name of the case; diethylbenzene as in `build.ALKYLATION_SPECIES`."""
    if name == "diethylbenzene":
        return _diethylbenzene()
    given = _nasa()[NAMES.get(name, name)]
    found = ct.Species(name, given.composition)
    found.thermo = given.thermo
    return found


def _diethylbenzene() -> ct.Species:
    """Seven-coefficient form of the powers of T; entropy moved from 1 bar to Cantera's 1 atm."""
    a, T = np.array([-37.4, 0.8671, -5.56e-4, 1.411e-7, 0.0]) / R, 298.15
    k = np.arange(5)
    enthalpy = -22.0e3 / R - np.sum(a * T ** (k + 1) / (k + 1))
    entropy = 435.0 / R - np.log(1.01325) - a[0] * np.log(T) - np.sum(a[1:] * T ** k[1:] / k[1:])
    one = [*a, enthalpy, entropy]
    found = ct.Species("diethylbenzene", {"C": 10, "H": 14})
    found.thermo = ct.NasaPoly2(200.0, 3000.0, ct.one_atm, [1000.0, *one, *one])
    return found


@dataclass
class Reaction:
    """k = k_T exp(E/R (1/T_ref - 1/T)) in mol/(kg s Pa^n), driven by partial pressures."""

    left: dict[str, float]
    right: dict[str, float]
    k: float
    E: float
    T_ref: float = 673.15
    reversible: bool = True


@dataclass
class OutsideBed:
    """One adiabatic bed: flows F (mol/s), T (K), p (Pa) along the catalyst w (kg)."""

    names: Sequence[str]
    reactions: Sequence[Reaction]
    friction: Callable[[float, float], float] = field(default=lambda mass_flow, rho: 0.0)

    def __post_init__(self) -> None:
        self.gas = ct.Solution(thermo="ideal-gas", species=[species(name) for name in self.names])
        rows = [[one.right.get(n, 0.0) - one.left.get(n, 0.0) for n in self.names] for one in self.reactions]
        self.nu = np.array(rows)

    def rates(self, F: Floats, T: float, p: float) -> Floats:
        """r (R,) in mol/(kg s); Kp from Cantera's Gibbs energies of the pure gases at T and p."""
        a = dict(zip(self.names, p * F / F.sum(), strict=True))
        change = self.nu @ self.gas.standard_gibbs_RT
        found = []
        for one, dG, n in zip(self.reactions, change, self.nu.sum(axis=1), strict=True):
            k = one.k * np.exp(one.E / R * (1.0 / one.T_ref - 1.0 / T))
            forward = np.prod([a[name] ** order for name, order in one.left.items()])
            backward = np.prod([a[name] ** order for name, order in one.right.items()])
            K = np.exp(-dG) * p**n
            found.append(k * (forward - one.reversible * backward / K))
        return np.array(found)

    def slope(self, _w: float, y: Floats) -> Floats:
        F, T, p = y[:-2], y[-2], y[-1]
        self.gas.TPX = T, p, np.maximum(F, 0.0)
        r = self.rates(F, T, p)
        heat = self.nu @ self.gas.standard_enthalpies_RT * R * T
        cp = F @ self.gas.standard_cp_R * R
        return np.concatenate(
            [r @ self.nu, [-(heat @ r) / cp, -self.friction(self._mass(F), self.gas.density)]]
        )

    def _mass(self, F: Floats) -> float:
        return float(F @ self.gas.molecular_weights) / 1e3

    def run(self, F: Floats, T: float, p: float, W: float, **options: Any) -> Any:
        """SciPy's solution with dense output."""
        start, method = np.array([*F, T, p]), options.pop("method", "LSODA")
        return solve_ivp(
            self.slope,
            (0.0, W),
            start,
            method,
            rtol=1e-12,
            atol=1e-12 * F.sum(),
            dense_output=True,
            **options,
        )
