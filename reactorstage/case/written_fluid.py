"""The fluid and what it asks of species, as they are written; see `written`."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from reactorstage.case.fields import In
from reactorstage.case.word_fields import Choice, Powers
from reactorstage.case.words import Name, Words

IDEAL_GAS, LIQUID = "ideal gas", "liquid"
CUBIC = ("Peng-Robinson 1976", "Peng-Robinson 1978", "Soave 1972")
PAIR = "/"
"""Between the two species of a binary parameter, as in benzene/ethylene."""

Density = Annotated[
    Literal["ideal gas", "liquid", "Peng-Robinson 1976", "Peng-Robinson 1978", "Soave 1972"],
    Choice(IDEAL_GAS, LIQUID, *CUBIC),
]
PhaseWord = Annotated[Literal["vapour", "liquid"], Choice("vapour", "liquid")]


class Fluid(Words):
    """What flows through the beds."""

    density: Density = Field(
        description="how it is found: ideal gas, a cubic equation of state, or a liquid of given densities"
    )
    viscosity: Annotated[float, In("viscosity", above=0.0)] = Field(description="dynamic viscosity")
    phase: PhaseWord | None = Field(
        None, description="of a cubic equation of state: what flows through the beds and is to stay so"
    )
    binary_parameters: dict[str, Annotated[float, In("number", above=-1.0, below=1.0)]] = Field(
        {}, description="k_ij of a cubic equation of state by pair, as in benzene/ethylene; others are 0"
    )


class CriticalData(Words):
    """Critical constants of a species, for a cubic equation of state."""

    name: Name | None = Field(None, description="name in Cantera's critical-properties.yaml")
    temperature: Annotated[float, In("temperature", above=0.0)] | None = Field(
        None, description="critical temperature"
    )
    pressure: Annotated[float, In("pressure", above=0.0)] | None = Field(
        None, description="critical pressure"
    )
    acentric_factor: Annotated[float, In("number", above=-1.0, below=3.0)] | None = Field(
        None, description="acentric factor"
    )


def density_unit(n: int) -> str:
    """Unit of the coefficient of T^n."""
    return ("kg/m^3", "kg/(m^3 K)")[n] if n < 2 else f"kg/(m^3 K^{n})"


class LiquidDensity(Words):
    """Density of a species as a liquid."""

    powers_of_T: Annotated[
        tuple[float, ...], Powers(density_unit, '["1100 kg/m^3", "-0.9 kg/(m^3 K)"]'), Field(max_length=4)
    ] = Field(description="a, b, c ... of a + b T + c T^2 ..., T in K, each with its unit")
