"""The lead case without pressure drop through Cantera's compiled integrators, bed by bed, no gradient.

Rates k(T) (p_A p_B - ...) are elementary reactions with A = rho_bulk k0 R^2 and temperature exponent 2, so
Cantera solves exactly the same beds; only the Ergun equation cannot be said to its reactors.
"""

from __future__ import annotations

from typing import Any

import cantera as ct
import numpy as np

from reactorstage.train.chemistry import CaseChemistry
from tests.benchmarks.gas import R_GAS, Gas
from tests.benchmarks.lead import Array, Lead
from tests.benchmarks.ledger import Ledger, Streams


def solution(lead: Lead, chemistry: CaseChemistry) -> ct.Solution:
    """Gas and reactions of the lead case, rates per bed volume."""
    elements, names = chemistry.table.elements, [f"X{s}" for s in range(len(lead.species))]
    species = [
        _species(name, dict(zip(elements, atoms.tolist(), strict=True)), c)
        for name, atoms, c in zip(names, chemistry.table.atoms, lead.coefficients, strict=True)
    ]
    k0 = lead.k_ref * np.exp(lead.E_over_R / lead.T_ref)
    A = 1e3 * lead.packings[0].bulk_density * k0 * R_GAS**2
    reactions = [
        ct.Reaction(equation=_equation(nu, names), rate=ct.ArrheniusRate(A_r, 2.0, 1e3 * R_GAS * E))
        for nu, A_r, E in zip(lead.nu, A, lead.E_over_R, strict=True)
    ]
    return ct.Solution(thermo="ideal-gas", kinetics="gas", species=species, reactions=reactions)


def _species(name: str, atoms: dict[str, float], c: Array) -> ct.Species:
    """One species with a seven-coefficient polynomial: the data of the lead case are of that form."""
    assert not c[:2].any()
    data = [*c[2:7].tolist(), float(c[7]), float(c[8])]
    thermo: Any = {
        "model": "NASA7",
        "temperature-ranges": [200.0, 1000.0],
        "data": [data],
        "reference-pressure": 1e5,
    }
    return ct.Species.from_dict({"name": name, "composition": atoms, "thermo": thermo})


def _equation(nu: Array, names: list[str]) -> str:
    def side(sign: int) -> str:
        return " + ".join(
            f"{abs(count):g} {name}" for count, name in zip(nu, names, strict=True) if count * sign > 0
        )

    return f"{side(-1)} <=> {side(1)}"


class FlowRoute:
    """Cantera's steady plug-flow reactor, one per bed, at a relative tolerance of its integrator."""

    ABSOLUTE = 1e-4

    def __init__(self, lead: Lead, gas: ct.Solution, tolerance: float):
        self.lead, self.gas, self.tolerance = lead, gas, tolerance
        self.ledger = Ledger(lead, Gas(lead))

    def value(self, x: Array) -> Array:
        """(35,) cost and margins."""
        lead = self.lead
        injected, T_in = lead.divided(x)
        F, entering, leaving, T_out = lead.benzene, [], [], []
        for number, (amount, T) in enumerate(zip(injected, T_in, strict=True)):
            entering.append(F + lead.injection(amount))
            F, T_exit = self.bed(number, entering[-1], T)
            leaving.append(F)
            T_out.append(T_exit)
        streams = Streams(np.array(entering), np.array(leaving), T_in, np.array(T_out), injected)
        return self.ledger.of(streams)

    def bed(self, number: int, F_in: Array, T_in: float) -> tuple[Array, float]:
        """Flows and temperature behind a bed."""
        packing, mass_flow = self.lead.packings[number], float(F_in @ self.lead.molar_mass)
        self.gas.TPX = T_in, self.lead.p_in, F_in
        reactor = ct.FlowReactor(self.gas, clone=False)
        reactor.area, reactor.mass_flow_rate = packing.area, mass_flow
        self.network(reactor).advance(packing.length)
        return self.gas.Y * mass_flow / self.lead.molar_mass, float(self.gas.T)

    def network(self, reactor: Any, tolerance: float | None = None) -> ct.ReactorNet:
        network = ct.ReactorNet([reactor])
        network.rtol = tolerance or self.tolerance
        network.atol = network.rtol * self.ABSOLUTE
        return network


class ParcelRoute(FlowRoute):
    """A parcel of gas at constant pressure followed through each bed for a residence time known in advance.

    No rating, since the residence time is part of the answer (here it is found beforehand at a tight
    tolerance and remembered for every setting): a bound for what the integrator alone needs.
    """

    def __init__(self, lead: Lead, gas: ct.Solution, tolerance: float):
        super().__init__(lead, gas, tolerance)
        self.times: dict[tuple[int, bytes, float], float] = {}

    def bed(self, number: int, F_in: Array, T_in: float) -> tuple[Array, float]:
        mass_flow = float(F_in @ self.lead.molar_mass)
        key = number, np.round(F_in, 3).tobytes(), T_in
        if key not in self.times:
            self.times[key] = self.residence_time(number, F_in, T_in)
        reactor = self.parcel(F_in, T_in)
        self.network(reactor).advance(self.times[key])
        return self.gas.Y * mass_flow / self.lead.molar_mass, float(self.gas.T)

    def parcel(self, F_in: Array, T_in: float) -> ct.IdealGasConstPressureMoleReactor:
        """What flows by in one second."""
        self.gas.TPX = T_in, self.lead.p_in, F_in
        reactor = ct.IdealGasConstPressureMoleReactor(self.gas, clone=False)
        reactor.volume = F_in.sum() * R_GAS * T_in / self.lead.p_in
        return reactor

    def residence_time(self, number: int, F_in: Array, T_in: float) -> float:
        """Seconds until the volume that has flowed by is that of the bed."""
        packing, reactor = self.lead.packings[number], self.parcel(F_in, T_in)
        network = self.network(reactor, 1e-11)
        bed, passed, before, t = packing.area * packing.length, 0.0, reactor.volume, 0.0
        while passed < bed:
            now = network.step()
            passed += (now - t) * (before + reactor.volume) / 2
            t, before = now, reactor.volume
        return t - (passed - bed) / before
