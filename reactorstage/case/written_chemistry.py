"""Species, fluid and reactions as they are written; see `written`."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import ConfigDict, Field

from reactorstage.case.fields import In
from reactorstage.case.word_fields import Choice, Orders, Powers, Span, TextOf, TextOr
from reactorstage.case.words import Name, Words, mergeable
from reactorstage.case.written_fluid import CriticalData, LiquidDensity
from reactorstage.case.written_rates import (
    FACTOR,
    RATE_CONSTANT,
    Constant,
    Effectiveness,
    Factor,
    OwnEquilibrium,
)

FROM_GIBBS = "from Gibbs energies"
REVERSIBLE = "<=>"
RatePer = Annotated[
    Literal["catalyst mass", "bed volume", "void volume"],
    Choice("catalyst mass", "bed volume", "void volume"),
]
DrivenBy = Annotated[
    Literal["partial pressure", "concentration", "mole fraction", "fugacity"],
    Choice("partial pressure", "concentration", "mole fraction", "fugacity"),
]


class Validity(Words):
    """Where the numbers of a rate or of species data hold."""

    temperature: Annotated[tuple[float, float], Span("temperature", "350 degC to 440 degC")] | None = Field(
        None, description="range of temperature"
    )
    pressure: Annotated[tuple[float, float], Span("pressure", "10 bar(a) to 30 bar(a)")] | None = Field(
        None, description="range of pressure"
    )


def capacity_unit(n: int) -> str:
    """Unit of the coefficient of T^n."""
    return f"J/(mol K^{n + 1})" if n else "J/(mol K)"


CAPACITY_EXAMPLE = '["-37.4 J/(mol K)", "0.87 J/(mol K^2)"]'


class HeatCapacity(Words):
    """Molar heat capacity at constant pressure, of the ideal gas (of the liquid, where the fluid is one)."""

    powers_of_T: Annotated[tuple[float, ...], Powers(capacity_unit, CAPACITY_EXAMPLE)] = Field(
        description="a, b, c ... of a + b T + c T^2 ..., each with its unit: J/(mol K), J/(mol K^2) ..."
    )


class SpeciesData(Words):
    """Data of one molecule: a name in data files, or formula, enthalpy, entropy and heat capacity."""

    gas_data: Name | None = Field(None, description="name in Cantera's data files, or file:name")
    formula: Name | None = Field(None, description="chemical formula, as in C10H14")
    enthalpy_of_formation: Annotated[float, In("molar energy")] | None = Field(
        None, description="at 298.15 K, of the ideal gas (of the liquid, where the fluid is one)"
    )
    entropy: Annotated[float, In("molar entropy", above=0.0)] | None = Field(
        None, description="absolute, at 298.15 K and the standard pressure"
    )
    standard_pressure: Annotated[float, In("pressure", above=0.0)] | None = Field(
        None, description="pressure to which the entropy belongs"
    )
    heat_capacity: HeatCapacity | None = Field(None, description="at constant pressure")
    valid: Validity | None = Field(None, description="where the data hold")
    source: Name | None = Field(None, description="where the numbers come from")


class Species(SpeciesData):
    """One species: a name in data files, data written out, or a group of isomers."""

    isomers: (
        Annotated[tuple[Annotated[SpeciesData, TextOr.key("gas data", TextOf())], ...], Field(min_length=2)]
        | None
    ) = Field(
        None, description="isomers in equilibrium among themselves: names in data files, or data of each"
    )
    critical_data: Annotated[CriticalData, TextOr.key("name", TextOf())] | None = Field(
        None, description="for a cubic equation of state: a name in Cantera's file, or numbers"
    )
    density: LiquidDensity | None = Field(None, description="as a liquid, where the fluid is one")


Backward = Annotated[OwnEquilibrium | str, TextOr(Choice(FROM_GIBBS).read, Choice(FROM_GIBBS))]


class EveryReaction(Words):
    """What holds for every reaction that does not say otherwise."""

    rate_per: RatePer | None = Field(None, description="what the rate is counted per")
    driven_by: DrivenBy | None = Field(None, description="what the orders are powers of")
    orders: Annotated[dict[str, float] | None, Orders()] = Field(
        None, description="`as written` (the numbers of the equation), or an order for each species"
    )
    backward: Backward | None = Field(
        None,
        description="`from Gibbs energies`, or a mapping with an equilibrium constant of the law's own",
    )
    slowed_by: Annotated[tuple[Factor, ...], Field(min_length=1)] | None = Field(
        None, description="factors below the line, each a sum of terms to a power"
    )
    effectiveness: Annotated[Effectiveness, TextOr.key("factor", FACTOR)] | None = Field(
        None, description="actual rate over the rate without pore limitation; none: 1"
    )
    valid: Validity | None = Field(None, description="where the rate law holds")
    source: Name | None = Field(None, description="where the numbers come from")


class Reaction(EveryReaction):
    """One reaction; its rate is that of the equation as written, `<=>` reversible, `=>` not."""

    model_config = ConfigDict(json_schema_extra=mergeable("rate per", "driven by"))

    equation: Name = Field(description="as in benzene + ethylene <=> ethylbenzene")
    constant: Annotated[Constant, TextOr.key("is", RATE_CONSTANT)] = Field(
        description="rate constant, with its temperature dependence if it has one"
    )
    power_of_K: Annotated[float, In("number", above=0.0, most=9.0)] = Field(
        1.0, description="m: times that the equation turns over in the step that sets the rate"
    )
    floor: dict[str, Annotated[float, In("fraction", above=0.0, most=0.1)]] = Field(
        {}, description="mole fraction by species below which its driver is held up smoothly"
    )
    rate_per: RatePer = Field(description="what the rate is counted per")
    driven_by: DrivenBy = Field(description="what the orders are powers of")


class ReactionsWritten(Words):
    """Reactions by name."""

    model_config = ConfigDict(extra="allow")
    __pydantic_extra__: dict[str, Reaction]

    every_reaction: EveryReaction | None = Field(
        None, description="written once; each reaction may say otherwise"
    )
