"""Cubic equations of state against Cantera, CoolProp, closed forms and the laws that every fluid obeys."""

from __future__ import annotations

from functools import cache
from typing import Any

import numpy as np
import pytest

from reactorstage.chemistry import R_GAS
from reactorstage.chemistry.critical import Critical
from reactorstage.chemistry.cubic import (
    DENSE,
    EQUATIONS,
    FOUND,
    LIQUID,
    NOT_FINITE,
    OTHER_PHASE,
    VAPOUR,
    WORDS,
    CubicFluid,
    cubic_fluid,
    cubic_state,
    fugacity_slopes,
)
from tests.chemistry.fluids import (
    MIXTURES,
    Floats,
    by_flows,
    by_pressure,
    by_temperature,
    constants,
    interactions,
    mixture,
    random_states,
    stiffness,
)

PHASES = (VAPOUR, LIQUID)


@pytest.mark.parametrize(
    ("name", "omega_a", "omega_b", "Zc"),
    [
        ("Soave 1972", 0.42747, 0.08664, 0.3333),
        ("Peng-Robinson 1976", 0.45724, 0.07780, 0.3074),
        ("Peng-Robinson 1978", 0.45724, 0.07780, 0.3074),
    ],
)
def test_numbers_of_the_critical_point(name: str, omega_a: float, omega_b: float, Zc: float) -> None:
    """Published, five digits as in Soave (1972, 0.427480 cut) and Peng & Robinson (1976), from memory."""
    one = EQUATIONS[name]
    assert one.omega_a == pytest.approx(omega_a, abs=1.1e-5)
    assert one.omega_b == pytest.approx(omega_b, abs=1.1e-5)
    assert one.omega_b / one.density == pytest.approx(Zc, abs=1e-4)


def test_kappa() -> None:
    """Published: the polynomials of Soave (1972) and of Peng & Robinson (1976), from memory."""
    for omega in (0.0, 0.21, 0.6):
        peng_robinson = 0.37464 + 1.54226 * omega - 0.26992 * omega**2
        assert EQUATIONS["Soave 1972"].kappa(omega) == pytest.approx(0.480 + 1.574 * omega - 0.176 * omega**2)
        assert EQUATIONS["Peng-Robinson 1976"].kappa(omega) == pytest.approx(peng_robinson)
        newer = EQUATIONS["Peng-Robinson 1978"].kappa(omega)
        assert (newer == pytest.approx(peng_robinson)) == (omega < 0.491)
        assert newer == pytest.approx(peng_robinson, abs=0.01)


@pytest.mark.parametrize("name", EQUATIONS)
def test_critical_point_is_where_the_isotherm_has_its_inflection(name: str) -> None:
    """Closed form: at Tc and the critical volume p = pc and both derivatives by volume vanish."""
    one, Tc, pc = EQUATIONS[name], 562.0, 4.89e6
    a, b = one.omega_a * (R_GAS * Tc) ** 2 / pc, one.omega_b * R_GAS * Tc / pc
    (d1, d2), v = one.delta, b / one.density
    q = np.poly1d([1.0, d1 * b]) * np.poly1d([1.0, d2 * b])
    p = R_GAS * Tc / (v - b) - a / q(v)
    p_v = -R_GAS * Tc / (v - b) ** 2 + a * q.deriv()(v) / q(v) ** 2
    bend = q.deriv(2)(v) / q(v) ** 2 - 2.0 * q.deriv()(v) ** 2 / q(v) ** 3
    p_vv = 2.0 * R_GAS * Tc / (v - b) ** 3 + a * bend
    assert p == pytest.approx(pc, rel=1e-12)
    assert abs(p_v) * v / pc < 1e-11
    assert abs(p_vv) * v * v / pc < 1e-10


@cache
def cantera_phases(name: str) -> tuple[Any, Any]:
    """Cantera's Peng-Robinson phase with the constants of `mixture`, and the ideal gas of its species."""
    import cantera as ct

    species = MIXTURES[name]
    found = {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}
    kind, k, R = EQUATIONS["Peng-Robinson 1978"], interactions(len(species)), ct.gas_constant
    critical = [constants(one) for one in species]
    a = np.array([kind.omega_a * (R * one.temperature) ** 2 / one.pressure for one in critical])
    a_ij, entries = (1.0 - k) * np.sqrt(np.outer(a, a)), []
    for i, own in enumerate(species):
        state = {
            "model": "Peng-Robinson",
            "a": float(a[i]),
            "b": kind.omega_b * R * critical[i].temperature / critical[i].pressure,
            "acentric-factor": critical[i].acentric_factor,
            "binary-a": {other: float(a_ij[i, j]) for j, other in enumerate(species) if j != i},
        }
        entries.append(cantera_entry(found[own], state))
    real = cantera_phase(entries)
    return real, ct.Solution(thermo="ideal-gas", species=real.species())


def cantera_entry(found: Any, state: dict[str, Any]) -> dict[str, Any]:
    """A species in Cantera's file format with the thermochemistry of another."""
    thermo = found.input_data["thermo"]
    plain = {
        "model": thermo["model"],
        "temperature-ranges": [float(T) for T in thermo["temperature-ranges"]],
        "data": [[float(c) for c in row] for row in thermo["data"]],
    }
    whose = {"name": found.name, "composition": dict(found.composition)}
    return {**whose, "thermo": plain, "equation-of-state": state}


def cantera_phase(entries: list[dict[str, Any]]) -> Any:
    import cantera as ct
    import yaml

    names, state = [one["name"] for one in entries], {"T": 600.0, "P": 1e5}
    phase = {"name": "gas", "thermo": "Peng-Robinson", "species": names, "state": state}
    return ct.Solution(yaml=yaml.safe_dump({"phases": [phase], "species": entries}))


def from_cantera(name: str, y: Floats, T: float, v: float) -> dict[str, Any]:
    """Pressure at the molar volume v, and residual properties there (SI, per mole)."""
    real, ideal = cantera_phases(name)
    real.TDX = T, real.mean_molecular_weight, y
    real.TD = T, real.mean_molecular_weight * 1e-3 / v
    if not real.P > 0.0:
        return {}
    ideal.TPX = T, real.P, y
    return {
        "p": real.P,
        "H": (real.enthalpy_mole - ideal.enthalpy_mole) * 1e-3,
        "cp": (real.cp_mole - ideal.cp_mole) * 1e-3,
        "h": (real.partial_molar_enthalpies - ideal.partial_molar_enthalpies) * 1e-3,
        "ln phi": (real.chemical_potentials - ideal.chemical_potentials) * 1e-3 / (R_GAS * T),
    }


@pytest.mark.parametrize("name", MIXTURES)
def test_against_cantera(name: str) -> None:
    """Independent program: Cantera's PengRobinson phase at given density, 350 to 900 K, gas to liquid.

    Measured agreement 1e-14 in Z, H and ln phi and 1e-12 in heat capacity and partial enthalpies, at
    stiffness above 0.02.
    """
    fluid, rng, compared = mixture("Peng-Robinson 1978", name), np.random.default_rng(5), 0
    for _ in range(250):
        y, T = rng.dirichlet(np.ones(len(fluid.b))), float(rng.uniform(350.0, 900.0))
        v = float(fluid.b @ y) / 10.0 ** rng.uniform(-4.0, np.log10(0.8))
        there = from_cantera(name, y, T, v)
        for phase in PHASES if there else ():
            p = there["p"]
            here = cubic_state(fluid, y, T, p, phase)
            if abs(here.V / v - 1.0) > 1e-3 or stiffness(fluid, y, T, p, phase) < 0.02:
                continue
            slopes, RT, compared = fugacity_slopes(fluid, y, T, p, here.Z), R_GAS * T, compared + 1
            cp = by_temperature(fluid, y, T, p, phase, lambda one: one.H)
            assert pytest.approx(v, rel=1e-10) == here.V
            assert pytest.approx(there["H"] / RT, rel=1e-10, abs=1e-10) == here.H / RT
            assert cp == pytest.approx(there["cp"], rel=1e-9, abs=1e-9)
            np.testing.assert_allclose(here.ln_phi, there["ln phi"], rtol=1e-10, atol=1e-10)
            np.testing.assert_allclose(-T * slopes.T, there["h"] / RT, rtol=1e-9, atol=1e-9)
    assert compared > 150


def test_against_cantera_with_constants_from_its_file() -> None:
    """Independent program: Cantera looks the critical constants up itself."""
    import cantera as ct

    names = ["C6H6", "C2H4", "H2"]
    found = {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}
    gas = cantera_phase([cantera_entry(found[name], {"model": "Peng-Robinson"}) for name in names])
    gas.TPX = 520.0, 20e5, [0.6, 0.3, 0.1]
    fluid = cubic_fluid("Peng-Robinson 1978", [constants(name) for name in names])
    here = cubic_state(fluid, np.array([0.6, 0.3, 0.1]), 520.0, gas.P)
    assert pytest.approx(gas.volume_mole * 1e-3, rel=1e-10) == here.V


@cache
def coolprop(backend: str, k: float) -> tuple[Any, CubicFluid]:
    """CoolProp's cubic mixture and ours with its constants; k between benzene and ethylene."""
    import CoolProp
    from CoolProp import AbstractState

    names = ["Benzene", "Ethylene", "Ethane", "EthylBenzene"]
    state = AbstractState(backend, "&".join(names))
    state.set_binary_interaction_double(0, 1, "kij", k)
    keys = (CoolProp.iT_critical, CoolProp.iP_critical, CoolProp.iacentric_factor)
    numbers = [[state.get_fluid_constant(i, key) for key in keys] for i in range(len(names))]
    critical = [Critical(*one, source="CoolProp") for one in numbers]
    table = np.zeros((4, 4))
    table[0, 1] = table[1, 0] = k
    return state, cubic_fluid({"SRK": "Soave 1972", "PR": "Peng-Robinson 1976"}[backend], critical, table)


@pytest.mark.parametrize(("backend", "precision"), [("SRK", 2e-8), ("PR", 1e-10)])
def test_against_coolprop(backend: str, precision: float) -> None:
    """Independent program: CoolProp's cubic equations, with its critical constants and the same R.

    Measured: 1e-14 to 1e-11 for Peng-Robinson; 1e-9 for Soave (2e-8 in heat capacity), presumably the digits
    of its constants.
    """
    import CoolProp

    state, fluid = coolprop(backend, 0.04)
    compared = 0
    state.specify_phase(CoolProp.iphase_gas)
    for F, T, p in random_states(fluid, 200, seed=11):
        y = F / np.sum(F)
        here = cubic_state(fluid, y, T, p)
        if here.status != FOUND or stiffness(fluid, y, T, p, VAPOUR) < 0.05:
            continue
        state.set_mole_fractions(y)
        state.update(CoolProp.PT_INPUTS, p, T)
        ln_phi = np.log([state.fugacity_coefficient(i) for i in range(4)])
        cp = by_temperature(fluid, y, T, p, VAPOUR, lambda one: one.H)
        assert state.gas_constant() == R_GAS
        assert pytest.approx(1.0 / state.rhomolar(), rel=precision) == here.V
        assert pytest.approx(state.hmolar_residual(), rel=precision, abs=precision * R_GAS * T) == here.H
        there = state.cpmolar() - state.cp0molar()
        assert cp == pytest.approx(there, rel=10.0 * precision, abs=10.0 * precision * R_GAS)
        np.testing.assert_allclose(here.ln_phi, ln_phi, rtol=precision, atol=precision)
        compared += 1
    assert compared > 100


@pytest.mark.parametrize("equation", EQUATIONS)
@pytest.mark.parametrize("name", MIXTURES)
def test_slopes_of_fugacity_by_complex_step(equation: str, name: str) -> None:
    fluid = mixture(equation, name)
    for F, T, p in random_states(fluid, 60, seed=1):
        for phase in PHASES:
            where, state = (fluid, F, T, p, phase), cubic_state(fluid, F, T, p, phase)
            slopes, tight = fugacity_slopes(fluid, F, T, p, state.Z), min(1.0, stiffness(*where))
            pairs = [
                (slopes.F * np.sum(F), by_flows(*where, lambda one: one.ln_phi) * np.sum(F)),
                (slopes.T * T, by_temperature(*where, lambda one: one.ln_phi) * T),
                (slopes.p * p, by_pressure(*where, lambda one: one.ln_phi) * p),
            ]
            for exact, stepped in pairs:
                limit = 1e-12 * max(1.0, float(np.max(np.abs(stepped)))) / tight
                np.testing.assert_allclose(exact, stepped, rtol=0.0, atol=limit)


@pytest.mark.parametrize("equation", EQUATIONS)
@pytest.mark.parametrize("name", MIXTURES)
def test_laws_of_every_fluid(equation: str, name: str) -> None:
    """Closed form: Gibbs-Duhem, Euler, symmetry, and H and V from the fugacities they belong to."""
    fluid = mixture(equation, name)
    for F, T, p in random_states(fluid, 40, seed=2):
        for phase in PHASES:
            state, n = cubic_state(fluid, F, T, p, phase), float(np.sum(F))
            slopes, scale = fugacity_slopes(fluid, F, T, p, state.Z), 1e-11 / stiffness(fluid, F, T, p, phase)
            size = max(1.0, float(np.max(np.abs(slopes.F))) * n)
            np.testing.assert_allclose(F @ slopes.F, 0.0, atol=scale * size)
            np.testing.assert_allclose(slopes.F @ F, 0.0, atol=scale * size)
            np.testing.assert_allclose(slopes.F, slopes.F.T, atol=scale * size / n)
            H = -R_GAS * T**2 * (F @ slopes.T)
            assert pytest.approx(state.H, rel=scale, abs=scale * n * R_GAS * T) == H
            assert p * (F @ slopes.p) == pytest.approx(n * (state.Z - 1.0), rel=scale, abs=scale * n)
            assert pytest.approx(n * state.Z * R_GAS * T / p, rel=1e-13) == state.V


@pytest.mark.parametrize("equation", EQUATIONS)
def test_second_virial_coefficients_at_low_pressure(equation: str) -> None:
    """Closed form: ln phi_i -> (2 sum_j y_j B_ij - B) p/(R T), B_ij = (b_i + b_j)/2 - a_ij/(R T)."""
    fluid, y, T, p = mixture(equation, "alkylation"), np.array([0.6, 0.2, 0.05, 0.15]), 480.0, 1.0
    q = fluid.root_0 - fluid.root_T * np.sqrt(T)
    virial = np.add.outer(fluid.b, fluid.b) / 2.0 - np.outer(q, q) * fluid.pairs / T
    expected = (2.0 * virial @ y - y @ virial @ y) * p / (R_GAS * T)
    state = cubic_state(fluid, y, T, p)
    np.testing.assert_allclose(state.ln_phi, expected, rtol=1e-5)
    np.testing.assert_allclose(fugacity_slopes(fluid, y, T, p, state.Z).p, expected / p, rtol=1e-5)
    assert pytest.approx(1.0 + y @ virial @ y * p / (R_GAS * T), abs=1e-11) == state.Z
    assert abs(state.H) < 1e-4 * R_GAS * T


def loop(fluid: CubicFluid, y: Floats, T: float) -> tuple[float, float] | None:
    """Molar volumes between which the isotherm rises, found by looking along it; None when it only falls."""
    b, (d1, d2) = float(fluid.b @ y), fluid.equation.delta
    q = y * (fluid.root_0 - fluid.root_T * np.sqrt(T))
    v = b * np.geomspace(1.0 + 1e-6, 1e5, 40_000)
    p = R_GAS * (T / (v - b) - q @ fluid.pairs @ q / ((v + d1 * b) * (v + d2 * b)))
    rising = np.flatnonzero(np.diff(p) > 0.0)
    return (float(v[rising[0]]), float(v[rising[-1] + 1])) if len(rising) else None


@pytest.mark.parametrize("equation", EQUATIONS)
@pytest.mark.parametrize("name", MIXTURES)
def test_root_and_status(equation: str, name: str) -> None:
    """Independent program: all roots by NumPy's companion matrix, and the shape of the isotherm itself."""
    fluid, seen = mixture(equation, name), set()
    for F, T, p in random_states(fluid, 150, seed=3):
        y, (d1, d2) = F / np.sum(F), fluid.equation.delta
        q, rise = y * (fluid.root_0 - fluid.root_T * np.sqrt(T)), loop(fluid, y, T)
        B = float(fluid.b @ y) * p / (R_GAS * T)
        A, u, w = q @ fluid.pairs @ q * p / (R_GAS * T**2), d1 + d2, d1 * d2
        cubic = [1.0, (u - 1.0) * B - 1.0, A + (w - u) * B**2 - u * B, -(A * B + w * B**2 * (1.0 + B))]
        found = np.roots(cubic)
        roots = np.sort(found.real[(np.abs(found.imag) < 1e-9) & (found.real > B)])
        assert len(roots) in (1, 3)
        for phase, Z in ((VAPOUR, roots[-1]), (LIQUID, roots[0])):
            state = cubic_state(fluid, F, T, p, phase)
            seen.add((state.status, phase, len(roots)))
            assert pytest.approx(Z, rel=1e-6) == state.Z
            v = state.Z * R_GAS * T / p
            if rise is None:
                assert state.status in (FOUND, DENSE)
            else:
                side = VAPOUR if v > np.mean(rise) else LIQUID
                assert state.status == (FOUND if side == phase else OTHER_PHASE)
    if name == "alkylation":
        either = {(FOUND, phase, 3) for phase in PHASES} | {(OTHER_PHASE, phase, 1) for phase in PHASES}
        assert seen >= either | {(FOUND, phase, 1) for phase in PHASES} | {(DENSE, LIQUID, 1)}


@pytest.mark.parametrize("equation", EQUATIONS)
@pytest.mark.parametrize("size", [0.96, 1.04])
def test_sides_just_beside_the_critical_point(equation: str, size: float) -> None:
    """Closed form: at 0.9999 Tc the loop ends 2 % from the critical volume, above Tc there is none."""
    fluid, one = cubic_fluid(equation, [constants("C6H6")]), np.ones(1)
    (d1, d2), b, Tc = fluid.equation.delta, float(fluid.b[0]), constants("C6H6").temperature
    v, side = size * b / fluid.equation.density, VAPOUR if size > 1.0 else LIQUID
    for T, beyond in ((0.9999 * Tc, OTHER_PHASE), (1.0001 * Tc, DENSE)):
        a = R_GAS * float(fluid.root_0[0] - fluid.root_T[0] * np.sqrt(T)) ** 2
        p = R_GAS * T / (v - b) - a / ((v + d1 * b) * (v + d2 * b))
        for phase in PHASES:
            state = cubic_state(fluid, one, T, p, phase)
            assert pytest.approx(v, rel=1e-8) == state.V
            assert state.status == (FOUND if phase == side else beyond)


def test_conditions_without_meaning() -> None:
    fluid, F = mixture("Soave 1972", "ammonia"), np.array([1.0, 3.0, 0.5])
    wrong = [(0.0 * F, 600.0, 1e6), (-F, 600.0, 1e6), (F, -1.0, 1e6), (F, 600.0, 0.0)]
    for flows, T, p in [*wrong, (F * np.nan, 600.0, 1e6)]:
        assert cubic_state(fluid, flows, T, p).status == NOT_FINITE
    assert cubic_state(fluid, F * [1.0, 1.0, -0.01], 600.0, 1e6).status == FOUND
    assert set(WORDS) == {FOUND, DENSE, OTHER_PHASE, NOT_FINITE}


def test_order_and_scale_of_flows() -> None:
    fluid, order = mixture("Peng-Robinson 1976", "methanol"), [3, 0, 5, 1, 4, 2]
    species = [MIXTURES["methanol"][i] for i in order]
    k = interactions(6)[np.ix_(order, order)]
    turned = cubic_fluid("Peng-Robinson 1976", [constants(one) for one in species], k)
    for F, T, p in random_states(fluid, 20, seed=4):
        here, there = cubic_state(fluid, F, T, p), cubic_state(turned, 7.0 * F[order], T, p)
        np.testing.assert_allclose(here.ln_phi[order], there.ln_phi, rtol=1e-10, atol=1e-12)
        assert pytest.approx(there.H / 7.0, rel=1e-10) == here.H
        assert pytest.approx(there.V / 7.0, rel=1e-10) == here.V


def test_wrong_calls() -> None:
    one = [constants("C6H6"), constants("H2")]
    with pytest.raises(LookupError, match="no equation of state 'Redlich-Kwong'; there are Soave 1972, Peng"):
        cubic_fluid("Redlich-Kwong", one)
    for k in (np.zeros((3, 3)), np.array([[0.0, 0.1], [0.2, 0.0]]), np.eye(2)):
        with pytest.raises(ValueError, match="symmetric 2 by 2 table with a diagonal of zeros"):
            cubic_fluid("Soave 1972", one, k)
