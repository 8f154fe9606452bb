"""Beds of two shipped cases against Cantera's Peng-Robinson phase integrated by SciPy.

Nothing on the other side comes from the program: heats, heat capacities, densities and fugacities from
Cantera, balances in their differential form, rate laws and Ergun's equation typed anew, LSODA at 1e-12.
Only what enters each bed is taken from the rating.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import cantera as ct
import numpy as np
import pytest
import yaml
from scipy.integrate import solve_ivp

import reactorstage as rs
from reactorstage.train.result import Rating
from tests.chemistry.fluids import Floats
from tests.chemistry.test_cubic import cantera_entry, cantera_phase

R = ct.gas_constant / 1e3
BAR = 1e5
PER_KG_H = 1e3 / 3600.0
"""mol/(kg s) in a kmol/(kg h)."""


@cache
def tabulated() -> dict[str, Any]:
    """Cantera's table of critical constants by name."""
    path = Path(ct.__file__).parent / "data" / "critical-properties.yaml"
    return {one["name"]: one["critical-parameters"] for one in yaml.safe_load(path.read_text())["species"]}


Rates = Callable[[dict[str, float], dict[str, float], float], Floats]
"""Rates, mol/(kg s), of partial pressures and fugacities in bar and T in K."""


@dataclass(frozen=True)
class Constants:
    """A species in Cantera's data and its critical temperature (K), pressure (Pa) and acentric factor."""

    name: str
    T: float
    p: float
    omega: float

    @classmethod
    def of(cls, name: str, critical: str = "") -> Constants:
        """A species under its names in Cantera's two files."""
        found = tabulated()[critical or name]
        T, p = float(found["critical-temperature"]), float(found["critical-pressure"])
        return cls(name, T, p, float(found["acentric-factor"]))

    @property
    def a(self) -> float:
        return float(0.45723552892138218 * (ct.gas_constant * self.T) ** 2 / self.p)

    @property
    def b(self) -> float:
        return float(0.077796073903888455 * ct.gas_constant * self.T / self.p)


@dataclass(frozen=True)
class Unit:
    """What both sides must agree on: the case as a whole in plain numbers."""

    file: str
    settings: tuple[str, ...]
    species: dict[str, Constants]
    pairs: dict[tuple[str, str], float]
    nu: list[dict[str, float]]
    rates: Rates
    diameter: float
    bulk: float
    void: float
    size: float
    viscosity: float

    @cache  # noqa: B019 - one of each unit for the whole run
    def rating(self) -> Rating:
        path = Path(__file__).parents[2] / "cases" / self.file
        return rs.rate(rs.load(path, list(self.settings)))

    def __hash__(self) -> int:
        return hash(self.file)

    def phases(self) -> tuple[Any, Any]:
        """Cantera's Peng-Robinson phase, and an ideal gas of the same species."""
        known = {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}
        entries = []
        for name, one in self.species.items():
            others = {other: self.pair(name, other) for other in self.species if other != name}
            state = {"model": "Peng-Robinson", "a": one.a, "b": one.b, "acentric-factor": one.omega}
            entry = cantera_entry(known[one.name], {**state, "binary-a": others})
            entries.append({**entry, "name": name})
        real = cantera_phase(entries)
        return real, ct.Solution(thermo="ideal-gas", species=real.species())

    def pair(self, one: str, other: str) -> float:
        k = self.pairs.get((one, other), self.pairs.get((other, one), 0.0))
        return float(np.sqrt(self.species[one].a * self.species[other].a) * (1.0 - k))

    def ergun(self, real: Any, mass_flow: float) -> float:
        """dp/dw, Pa/kg (Ergun, Chem. Eng. Prog. 48 (1952) 89, from memory)."""
        area, rho, eps, d = np.pi * self.diameter**2 / 4, real.density_mass, self.void, self.size
        u = mass_flow / area / rho
        viscous = 150 * self.viscosity * (1 - eps) ** 2 / (eps**3 * d**2) * u
        return float(-(viscous + 1.75 * rho * (1 - eps) / (eps**3 * d) * u**2) / (self.bulk * area))

    def exit(self, bed: int) -> tuple[dict[str, float], float, float]:
        """Flows (mol/s), T (K) and p (Pa) behind a bed, by Cantera and SciPy from what enters it."""
        profile, names = self.rating().profiles[bed - 1], list(self.species)
        order = [self.rating().species.index(name) for name in names]
        real, ideal = self.phases()
        F_in = profile.F[0, order]
        mass_flow = float(F_in @ real.molecular_weights) / 1e3
        nu = np.array([[one.get(name, 0.0) for name in names] for one in self.nu])

        def slope(_w: float, y: Floats) -> Floats:
            F, T, p = F_in + y[:-2] @ nu, y[-2], y[-1]
            real.TPX = T, p, np.maximum(F, 0.0)
            r = self.rates(*self.drivers(real, ideal, F), T)
            dp = self.ergun(real, mass_flow)
            heat = nu @ real.partial_molar_enthalpies / 1e3
            by_pressure = F.sum() * real.volume_mole / 1e3 * (1 - T * real.thermal_expansion_coeff)
            return np.array([*r, -(heat @ r + by_pressure * dp) / (F.sum() * real.cp_mole / 1e3), dp])

        start = np.array([*np.zeros(len(nu)), profile.T[0], profile.p[0]])
        found = solve_ivp(slope, (0.0, profile.w[-1] - profile.w[0]), start, "LSODA", rtol=1e-12, atol=1e-12)
        end = found.y[:, -1]
        return dict(zip(names, F_in + end[:-2] @ nu, strict=True)), float(end[-2]), float(end[-1])

    def drivers(self, real: Any, ideal: Any, F: Floats) -> tuple[dict[str, float], dict[str, float]]:
        """Partial pressures and fugacities, bar; a species that is absent has none."""
        names, y = list(self.species), F / F.sum()
        ideal.TPX = real.T, real.P, np.maximum(F, 0.0)
        ln_phi = (real.chemical_potentials - ideal.chemical_potentials) / (ct.gas_constant * real.T)
        partial = y * real.P / BAR
        fugacity = partial * np.where(F > 0.0, np.exp(ln_phi), 1.0)
        return dict(zip(names, partial, strict=True)), dict(zip(names, fugacity, strict=True))


def arrhenius(k: float, E: float, T: float) -> float:
    """A constant of 50 degC at T; E in J/mol."""
    return float(k * np.exp(E / R * (1.0 / 323.15 - 1.0 / T)))


def hydrogenations(p: dict[str, float], _f: dict[str, float], T: float) -> Floats:
    """The invented laws of Larkenfell."""
    K = arrhenius(60.0, -30e3, T) * p["acetylene"]
    CO = p["carbon monoxide"] * arrhenius(1.0, -40e3, T)
    free, held = (1 + K + 1e5 * CO) ** 2, (1 + K + 3e5 * CO) ** 2
    H = p["hydrogen"]
    return PER_KG_H * np.array(
        [
            arrhenius(6.0, 45e3, T) * p["acetylene"] * H / free,
            arrhenius(4e-3, 68e3, T) * p["ethylene"] * np.sign(H) * abs(H) ** 1.5 / held,
            arrhenius(1.4, 70e3, T) * p["acetylene"] ** 2 * H / free,
        ]
    )


LARKENFELL = Unit(
    file="larkenfell-acetylene.yaml",
    settings=(
        "feed hydrogen.flow=37.5 kmol/h",
        "bed 1.injected hydrogen=94.67 %",
        "feed dosing gas.flow=0.1 kmol/h",
        "bed 1.inlet temperature=40.8 degC",
        "bed 2.inlet temperature=52.3 degC",
    ),
    species={
        "acetylene": Constants.of("C2H2,acetylene", "C2H2"),
        "ethylene": Constants.of("C2H4"),
        "ethane": Constants.of("C2H6"),
        "hydrogen": Constants.of("H2"),
        "carbon monoxide": Constants.of("CO"),
        "methane": Constants.of("CH4"),
        "green oil": Constants.of("C4H6,butadiene", "C4H6-1"),
    },
    pairs={},
    nu=[
        {"acetylene": -1, "hydrogen": -1, "ethylene": 1},
        {"ethylene": -1, "hydrogen": -1, "ethane": 1},
        {"acetylene": -2, "hydrogen": -1, "green oil": 1},
    ],
    rates=hydrogenations,
    diameter=2.6,
    bulk=700.0,
    void=0.38,
    size=3.5e-3,
    viscosity=1.1e-5,
)


def methanol(_p: dict[str, float], f: dict[str, float], T: float) -> Floats:
    """Vanden Bussche and Froment (1996) with Graaf et al. (1986), from memory, in fugacities; 65 % of it."""

    def constant(A: float, B: float) -> float:
        return float(A * np.exp(B / (8.314 * T)))

    H, water, CO2 = f["hydrogen"], f["water"], f["carbon dioxide"]
    D = 1 + 3453.38 * water / H + constant(0.499, 17197.0) * H**0.5 + constant(6.62e-11, 124119.0) * water
    K1, K3 = 10 ** (3066.0 / T - 10.592), 10 ** (2.029 - 2073.0 / T)
    synthesis = constant(1.07, 36696.0) * (CO2 * H - water * f["methanol"] / (K1 * H**2)) / D**3
    shift = constant(1.22e10, -94765.0) * (CO2 - water * f["carbon monoxide"] / (K3 * H)) / D
    return 0.6 * 0.65 * np.array([synthesis, shift])


MARROWHYTHE = Unit(
    file="marrowhythe-methanol.yaml",
    settings=("bed 1.inlet temperature=222 degC",),
    species={
        "hydrogen": Constants.of("H2"),
        "carbon monoxide": Constants.of("CO"),
        "carbon dioxide": Constants.of("CO2"),
        "methane": Constants.of("CH4"),
        "nitrogen": Constants.of("N2"),
        "methanol": Constants("CH3OH", 513.4, 82.16e5, 0.5625),
        "water": Constants("H2O", 647.1, 220.64e5, 0.3443),
    },
    pairs={
        ("methanol", "water"): -0.08,
        ("carbon dioxide", "water"): 0.1,
        ("carbon dioxide", "methanol"): 0.05,
    },
    nu=[
        {"carbon dioxide": -1, "hydrogen": -3, "methanol": 1, "water": 1},
        {"carbon dioxide": -1, "hydrogen": -1, "carbon monoxide": 1, "water": 1},
    ],
    rates=methanol,
    diameter=3.4,
    bulk=1150.0,
    void=0.38,
    size=5.5e-3,
    viscosity=1.9e-5,
)


@pytest.mark.parametrize("bed", [1, 2])
def test_acetylene_is_right_to_parts_per_million_of_itself(bed: int) -> None:
    """Near the optimum: 3,600 ppm behind bed 1, 1 ppm behind bed 2, 1e-6 relative."""
    profile = LARKENFELL.rating().profiles[bed - 1]
    flows, T, p = LARKENFELL.exit(bed)
    for name, flow in flows.items():
        ours = profile.F[-1, LARKENFELL.rating().species.index(name)]
        assert ours == pytest.approx(flow, rel=1e-6), name
    assert profile.T[-1] == pytest.approx(T, abs=1e-6)
    assert profile.p[-1] == pytest.approx(p, rel=1e-9)


@pytest.mark.parametrize("bed", [1, 5])
def test_methanol_by_fugacities(bed: int) -> None:
    """The first bed and the last, which stands near equilibrium: 1e-6 relative, 1e-4 K."""
    profile = MARROWHYTHE.rating().profiles[bed - 1]
    flows, T, p = MARROWHYTHE.exit(bed)
    for name, flow in flows.items():
        ours = profile.F[-1, MARROWHYTHE.rating().species.index(name)]
        assert ours == pytest.approx(flow, rel=1e-6), name
    assert profile.T[-1] == pytest.approx(T, abs=1e-4)
    assert profile.p[-1] == pytest.approx(p, rel=1e-8)
