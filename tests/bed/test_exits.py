"""What leaves a bed, against Cantera's flow reactor and against SciPy with Cantera's properties."""

from __future__ import annotations

import cantera as ct
import numpy as np
import pytest

from tests.bed.build import ALKYLATION_SPECIES, Tree, one_bed, programme
from tests.bed.outside import OutsideBed, Reaction, species

NAMES = ("benzene", "ethylene", "ethane", "ethylbenzene", "diethylbenzene")
SHARES = {"benzene": 90.0, "ethylene": 6.0, "ethane": 0.5, "ethylbenzene": 3.0, "diethylbenzene": 0.5}
FLOW, T_IN, P_IN = 300.0, 655.0, 19.0e5
KINETICS = {  # invented: k at 400 degC and activation energy; per bed volume and concentrations
    "ethylation": ("benzene + ethylene", "ethylbenzene", 1.0, 66.0),
    "second ethylation": ("ethylbenzene + ethylene", "diethylbenzene", 0.6, 88.0),
    "transalkylation": ("diethylbenzene + benzene", "2 ethylbenzene", 0.04, 105.0),
}
TIGHT, CLOSE = 1e-9, 1e-9


def feed() -> Tree:
    return {
        "flow": f"{FLOW} mol/s",
        "temperature": f"{T_IN} K",
        "composition": {name: f"{share} %" for name, share in SHARES.items()},
    }


def reactions(rate: Tree, unit: str, arrow: str = "<=>", factor: float = 1.0) -> Tree:
    return {
        name: {
            "equation": f"{left} {arrow} {right}",
            "constant": {
                "at": "400 degC",
                "is": f"{factor * k!r} {unit}",
                "activation energy": f"{E} kJ/mol",
            },
            **rate,
        }
        for name, (left, right, k, E) in KINETICS.items()
    }


def tight_exit(tree: Tree) -> tuple[np.ndarray, float, float]:
    """F (mol/s), T and p behind the bed at a tight tolerance."""
    train = programme(tree)
    u, _ = train.model.inputs.values(np.zeros(0))
    outcome = train.model.passing.adaptive(u, np.zeros((len(u), 0)), TIGHT, most=20_000)
    assert not outcome.failure
    bed = train.model.layout.beds[0]
    record = outcome.out[bed.exit * train.model.layout.width :][: train.model.layout.width, 0]
    return record[:-3], float(record[-1]), float(record[-2])


@pytest.mark.parametrize("volume", [0.3, 2.0, 6.0])
@pytest.mark.parametrize("arrow", ["<=>", "=>"])
def test_exit_of_a_bed_is_that_of_canteras_flow_reactor(volume: float, arrow: str) -> None:
    """Independent program: Cantera's FlowReactor, so wide that its pressure stays constant."""
    per_volume = {"rate per": "bed volume", "driven by": "concentration"}
    tree = one_bed(
        ALKYLATION_SPECIES, reactions(per_volume, "m^3/(kmol s)", arrow), feed(), f"{volume} m^3", "19 bar(a)"
    )
    F, T, p = tight_exit(tree)
    gas = mechanism(arrow)
    reactor = ct.FlowReactor(gas, clone=False)
    mass = FLOW / 1e3 * gas.mean_molecular_weight
    reactor.area, reactor.mass_flow_rate = 1e4, mass
    net = ct.ReactorNet([reactor])
    net.rtol, net.atol = 1e-11, 1e-18
    net.advance(volume / reactor.area)
    expected = mass * gas.Y / gas.molecular_weights * 1e3
    assert np.abs(F - expected).max() < CLOSE * FLOW
    assert pytest.approx(gas.T, rel=CLOSE) == T
    assert p == pytest.approx(P_IN, rel=1e-12)


def mechanism(arrow: str) -> ct.Solution:
    made = []
    for left, right, k, E in KINETICS.values():
        rate = ct.ArrheniusRate(k * np.exp(E * 1e6 / (ct.gas_constant * 673.15)), 0.0, E * 1e6)
        made.append(ct.Reaction(equation=f"{left} {arrow} {right}", rate=rate))
    gas = ct.Solution(
        thermo="ideal-gas", kinetics="gas", species=[species(name) for name in NAMES], reactions=made
    )
    gas.TPX = T_IN, P_IN, SHARES
    return gas


@pytest.mark.parametrize("size", ["2.4 mm", "0.3 mm"])
def test_exit_with_pressure_drop_is_that_of_lsoda(size: str) -> None:
    """Independent program: SciPy's LSODA at 1e-12 with Cantera's properties; up to a third of p is lost."""
    geometry = {
        "diameter": "1.8 m",
        "bulk density": "640 kg/m^3",
        "void fraction": "41 %",
        "equivalent size": size,
    }
    per_mass = {"rate per": "catalyst mass", "driven by": "partial pressure"}
    tree = one_bed(
        ALKYLATION_SPECIES,
        reactions(per_mass, "mol/(kg s bar^2)", factor=0.05),
        feed(),
        "4000 kg",
        "19 bar(a)",
        geometry,
    )
    F, T, p = tight_exit(tree)
    F_in = FLOW / 100.0 * np.array([SHARES[name] for name in NAMES])
    bed = OutsideBed(
        NAMES, partial_pressure_reactions(), ergun(1.8, 640.0, 0.41, float(size.split()[0]) / 1e3)
    )
    found = bed.run(F_in, T_IN, P_IN, 4000.0).y[:, -1]
    assert np.abs(F - found[:-2]).max() < CLOSE * FLOW
    assert pytest.approx(found[-2], rel=CLOSE) == T
    assert p == pytest.approx(found[-1], rel=CLOSE)
    assert p / P_IN < (0.99 if size == "2.4 mm" else 0.75)


def partial_pressure_reactions() -> list[Reaction]:
    return [
        Reaction({"benzene": 1, "ethylene": 1}, {"ethylbenzene": 1}, 5e-12, 66e3),
        Reaction({"ethylbenzene": 1, "ethylene": 1}, {"diethylbenzene": 1}, 3e-12, 88e3),
        Reaction({"diethylbenzene": 1, "benzene": 1}, {"ethylbenzene": 2}, 0.2e-12, 105e3),
    ]


def ergun(diameter: float, bulk_density: float, eps: float, d: float, mu: float = 1.7e-5):
    """-dp/dw (Ergun, Chem. Eng. Prog. 48 (1952) 89, from memory) from mass flow and density."""
    area = np.pi * diameter**2 / 4.0

    def drop(mass_flow: float, rho: float) -> float:
        u = mass_flow / area / rho
        viscous = 150.0 * mu * (1.0 - eps) ** 2 / (eps**3 * d**2) * u
        return float((viscous + 1.75 * rho * (1.0 - eps) / (eps**3 * d) * u * u) / (bulk_density * area))

    return drop
