"""A bed of real gas against Cantera's Peng-Robinson phase integrated by SciPy; boundaries; kernel properties.

Nothing on the other side comes from the program: fugacities from Cantera's chemical potentials, temperature
by Cantera's own search at given enthalpy, SciPy's LSODA at 1e-11, constants of the rate law typed anew.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from reactorstage.bed.boundary import boundaries
from reactorstage.bed.compiled import entry
from reactorstage.bed.cubic import VOLUME
from reactorstage.bed.data import GAS_CONSTANT
from reactorstage.bed.layout import at_state
from reactorstage.bed.pack import pack_chemistry
from reactorstage.bed.state import all_properties, enthalpy_flow, heat_capacity_flow
from reactorstage.chemistry import RateLaws, SpeciesTable, rate_laws
from reactorstage.chemistry.cubic import EQUATIONS
from reactorstage.chemistry.fluid import CubicStream
from reactorstage.chemistry.law import Constant, RateLaw
from reactorstage.chemistry.saturation import bubble_temperature, dew_temperature
from reactorstage.chemistry.species import species_from_cantera, table_of
from tests.bed.build import programme
from tests.bed.fluid_cases import ammonia
from tests.chemistry.fluids import MIXTURES, Floats, constants, mixture
from tests.chemistry.test_cubic import cantera_entry, cantera_phase, cantera_phases

ROOM = 1000
"""Length of a work array that holds every mixture here."""

NAMES = ("N2", "H2", "NH3", "CH4")


def cantera_gas() -> tuple[Any, Any]:
    """Cantera's Peng-Robinson phase of the species of `ammonia`, without binary parameters; its ideal gas."""
    import cantera as ct

    found = {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}
    kind, R, entries = EQUATIONS["Peng-Robinson 1978"], ct.gas_constant, []
    critical = {name: constants(name) for name in NAMES}
    a = {n: kind.omega_a * (R * one.temperature) ** 2 / one.pressure for n, one in critical.items()}
    for name, one in critical.items():
        state = {
            "model": "Peng-Robinson",
            "a": float(a[name]),
            "b": kind.omega_b * R * one.temperature / one.pressure,
            "acentric-factor": one.acentric_factor,
            "binary-a": {other: float(np.sqrt(a[name] * a[other])) for other in NAMES if other != name},
        }
        entries.append(cantera_entry(found[name], state))
    real = cantera_phase(entries)
    return real, ct.Solution(thermo="ideal-gas", species=real.species())


def test_a_bed_of_ammonia_against_cantera_and_scipy() -> None:
    import cantera as ct

    tree = ammonia("Peng-Robinson 1978", {})
    tree["every bed"] = {"bulk density": "800 kg/m^3", "pressure drop factor": 0}
    profile = programme(tree).rate().profiles[0]
    real, ideal = cantera_gas()
    F_in, p, nu = profile.F[0], float(profile.p[0]), np.array([-1.0, -3.0, 2.0, 0.0])
    order = [NAMES.index(name) for name in ("N2", "H2", "CH4", "NH3")]
    F_in, back = F_in[np.argsort(order)], order
    mass = float(F_in @ real.molecular_weights) * 1e-3
    real.TPX = float(profile.T[0]), p, F_in
    h = real.enthalpy_mass

    def slope(_: float, xi: Floats) -> list[float]:
        F = F_in + nu * xi[0]
        real.TPX = real.T, p, F
        real.HP = h, p
        ideal.TPX = real.T, ct.one_atm, np.ones(4)
        mu0 = ideal.standard_gibbs_RT * ct.gas_constant * real.T
        a = np.exp((real.chemical_potentials - mu0) / (ct.gas_constant * real.T)) * ct.one_atm
        K = np.exp(-(nu @ mu0) / (ct.gas_constant * real.T)) * ct.one_atm**-2
        R = ct.gas_constant * 1e-3
        k = 2e-5 / 3.6 * 1e5**-1.5 * np.exp(87e3 / R * (1 / 723.15 - 1 / real.T))
        floor = 1e-3 * p
        held = (a[2] + np.sqrt(a[2] ** 2 + 4 * floor**2)) / 2
        return [k * (a[0] * a[1] ** 1.5 - a[2] ** 2 / (K * a[1] ** 1.5)) / held]

    found = solve_ivp(slope, (0.0, float(profile.w[-1])), [0.0], "LSODA", rtol=1e-11, atol=1e-9)
    F = (F_in + nu * found.y[0, -1])[back]
    slope(0.0, found.y[:, -1])
    assert mass > 0.0 and found.y[0, -1] > 0.03 * F_in[0]
    assert np.abs(profile.F[-1] - F).max() < 1e-7 * F_in.sum()
    assert profile.T[-1] == pytest.approx(real.T, abs=1e-4)


@entry
def properties_alone(chem, T, p, work):
    """Volume, H/R and dH/dT/R of the flows in the work array, as Python can ask for them."""
    known = all_properties(chem, T, p, 0, work)
    volume = work[at_state(chem) + VOLUME]
    return known, volume, enthalpy_flow(chem, T, work), heat_capacity_flow(chem, work)


def packed(name: str, fluid: CubicStream | None) -> tuple[Any, SpeciesTable]:
    """A chemistry with one reaction that nobody asks for, with the species of a mixture."""
    table = table_of([species_from_cantera(f"nasa_gas.yaml:{one}", one) for one in MIXTURES[name]])
    still: RateLaws = rate_laws(
        [
            RateLaw(
                "none", {table.names[0]: -1.0}, {table.names[0]: 1.0}, Constant(0.0), "mole fraction", False
            )
        ],
        table.names,
    )
    return pack_chemistry(table, still, fluid), table


@pytest.mark.parametrize("name", MIXTURES)
@pytest.mark.parametrize("kind", ["ideal gas", "Peng-Robinson 1978"])
def test_kernel_properties_are_those_of_cantera_over_the_data_range(name: str, kind: str) -> None:
    """At the density that the kernel finds: Cantera's own search for it is less exact.

    A cubic equation has no meaning far above the critical temperature, where the root of its attraction
    passes through zero: that of carbon monoxide near 1,280 K.
    """
    hottest = 2400.0 if kind == "ideal gas" else 1250.0
    real, ideal = cantera_phases(name)
    other = ideal if kind == "ideal gas" else real
    fluid = None if kind == "ideal gas" else CubicStream(mixture(kind, name), "vapour")
    chem, table = packed(name, fluid)
    rng, S = np.random.default_rng(4), len(table.names)
    for _ in range(60):
        y, T, p = rng.dirichlet(np.ones(S)), float(rng.uniform(500, hottest)), float(10 ** rng.uniform(5, 7))
        work = np.zeros(ROOM)
        work[:S] = y
        known, V, H, capacity = properties_alone(chem, T, p, work)
        other.TPX = T, p, y
        other.TD = T, other.mean_molecular_weight * 1e-3 / V
        assert known and pytest.approx(p, rel=1e-8) == other.P
        assert abs(H * GAS_CONSTANT - other.enthalpy_mole * 1e-3) < 1e-8 * GAS_CONSTANT * T
        assert abs(capacity * GAS_CONSTANT - other.cp_mole * 1e-3) < 1e-8 * GAS_CONSTANT


@pytest.mark.parametrize(
    ("name", "phase"), [*((one, "vapour") for one in MIXTURES), ("alkylation", "liquid")]
)
def test_compiled_boundaries_are_those_of_the_readable_form(name: str, phase: str) -> None:
    """Random compositions and pressures: temperatures, and slopes by every flow and by pressure."""
    fluid = mixture("Soave 1972", name)
    chem, table = packed(name, CubicStream(fluid, phase))  # type: ignore[arg-type]
    S, rng, seen = len(table.names), np.random.default_rng(11), 0
    critical = np.array([[one.temperature, one.pressure, one.acentric_factor] for one in fluid.critical])
    find = dew_temperature if phase == "vapour" else bubble_temperature
    for _ in range(25):
        F, p = rng.dirichlet(np.ones(S)) * 30.0, float(10 ** rng.uniform(5, 6.6))
        out, found = np.zeros((S + 3, S + 2)), np.zeros((1, S + 2))
        out[:S, 0], out[S + 1, 0] = F, p
        out[:S, 1 : S + 1], out[S + 1, S + 1] = np.eye(S), 1.0
        boundaries(chem, critical, 1.0 if phase == "liquid" else -1.0, np.zeros(1, np.int64), out, found)
        expected = find(fluid, F, p)
        assert (expected is None) == np.isnan(found[0, 0])
        if expected is None:
            continue
        seen += 1
        assert found[0, 0] == pytest.approx(expected.temperature, abs=1e-6)
        assert found[0, 1 : S + 1] == pytest.approx(expected.F, rel=1e-6, abs=1e-6)
        assert found[0, S + 1] == pytest.approx(expected.p, rel=1e-6)
    assert seen >= 15
