"""The lead case as plain numbers in SI units, for the reference routes."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

import reactorstage as rs
from reactorstage.case import units
from reactorstage.case.model import Bed, Case
from reactorstage.train.heat import read_rungs
from reactorstage.train.programme import TrainProgramme

Array = NDArray[np.float64]

LEAD = Path(__file__).resolve().parents[2] / "cases" / "selkemouth-ethylation.yaml"


@dataclass(frozen=True)
class Packing:
    """A bed as the Ergun equation sees it: kg, m, kg/m3, -, m, and the factor on the pressure drop."""

    catalyst: float
    diameter: float
    bulk_density: float
    void_fraction: float
    particle: float
    factor: float

    @property
    def area(self) -> float:
        return float(np.pi * self.diameter**2 / 4)

    @property
    def length(self) -> float:
        return self.catalyst / self.bulk_density / self.area


@dataclass(frozen=True)
class Lead:
    """Everything that a rating of the lead case needs; S species in the order of the file.

    coefficients (S, 9) of the polynomials below 1000 K, nu (R, S), k_ref (R,) in mol/(kg s Pa2).
    benzene (S,) and ethylene_makeup (S,) are a flow in mol/s and mole fractions; reach (levels,) and
    price (levels,) are those of the cooling levels, coldest first. bounds holds the limits by label and
    direction, one number for each bed or gap.
    """

    species: tuple[str, ...]
    coefficients: Array
    molar_mass: Array
    nu: Array
    k_ref: Array
    T_ref: Array
    E_over_R: Array
    viscosity: float
    packings: tuple[Packing, ...]
    p_in: float
    benzene: Array
    benzene_T: float
    ethylene_makeup: Array
    ethylene_flow: float
    ethylene_T: float
    reach: Array
    price: Array
    fired_price: float
    by_product_price: float
    effluent_T: float
    bounds: dict[tuple[str, str], Array]

    def index(self, species: str) -> int:
        return self.species.index(species)

    def divided(self, x: Array) -> tuple[Array, Array]:
        """Ethylene feed to each bed and inlet temperatures, from the free numbers (three shares, four T)."""
        return np.append(x[:3], self.ethylene_flow - x[:3].sum()), x[3:7]

    def injection(self, flow: float) -> Array:
        """Flows (S,) that an amount of the ethylene feed brings."""
        return flow * self.ethylene_makeup


def lead_case(*overrides: str) -> Case:
    return rs.load(LEAD, overrides)


def lead_numbers(programme: TrainProgramme) -> Lead:
    """The plain numbers of the compiled lead case."""
    case, chemistry, layout = programme.case, programme.model.chemistry, programme.model.layout
    rungs = read_rungs(case, [])
    cooling = sorted((r for r in rungs.values() if r.price < 0 or r.level == "air"), key=lambda r: r.reach)
    beds = [section.bed for section in case.train if section.bed is not None]
    laws, feeds = chemistry.laws, case.feeds
    makeup = {name: layout.compositions[k] for k, name in enumerate(layout.feeds)}
    price = case.prices["by-product"].costs
    inlet_pressure, effluent_T = beds[0].inlet_pressure, case.train[-1].steps[0].to
    assert price is not None and inlet_pressure is not None and effluent_T is not None
    return Lead(
        species=chemistry.species,
        coefficients=chemistry.table.coefficients[:, 0],
        molar_mass=chemistry.table.molar_mass,
        nu=laws.nu,
        k_ref=np.exp(laws.lnk_ref),
        T_ref=laws.T_ref,
        E_over_R=laws.E_over_R,
        viscosity=case.fluid.viscosity,
        packings=tuple(packing(bed) for bed in beds),
        p_in=inlet_pressure.now,
        benzene=feeds["benzene"].flow.now * makeup["benzene"],
        benzene_T=feeds["benzene"].temperature.now,
        ethylene_makeup=makeup["ethylene"],
        ethylene_flow=feeds["ethylene"].flow.now,
        ethylene_T=feeds["ethylene"].temperature.now,
        reach=np.array([r.reach for r in cooling]),
        price=np.array([r.price for r in cooling]),
        fired_price=rungs["fired heater"].price,
        by_product_price=units.price_to_si(price.text, "molar flow", case.currency, None),
        effluent_T=effluent_T.now,
        bounds=bounds(programme),
    )


def bounds(programme: TrainProgramme) -> dict[tuple[str, str], Array]:
    """The limits by label and direction, in the order in which the case lists beds and gaps."""
    found: dict[tuple[str, str], list[float]] = {}
    for limit in programme.limits:
        found.setdefault((limit.label, limit.direction), []).append(limit.bound)
    return {key: np.array(values) for key, values in found.items()}


def packing(bed: Bed) -> Packing:
    assert bed.diameter and bed.bulk_density and bed.void_fraction and bed.equivalent_size
    return Packing(
        bed.catalyst.now,
        bed.diameter,
        bed.bulk_density,
        bed.void_fraction,
        bed.equivalent_size,
        bed.pressure_drop_factor.now,
    )
