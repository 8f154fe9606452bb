"""Species, fluid and reactions as they are written; see `written`."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import (
    ConfigDict,
    Field,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
)
from pydantic_core import CoreSchema, core_schema

from reactorstage.case.fields import In, Raw
from reactorstage.case.word_fields import (
    Choice,
    Orders,
    Powers,
    RawText,
    Span,
)
from reactorstage.case.words import Name, Words, mergeable

EVERY_REACTION = "every reaction"
FROM_GIBBS = "from Gibbs energies"
REVERSIBLE = "<=>"
RatePer = Annotated[
    Literal["catalyst mass", "bed volume", "void volume"],
    Choice("catalyst mass", "bed volume", "void volume"),
]
DrivenBy = Annotated[
    Literal["partial pressure", "concentration", "mole fraction"],
    Choice("partial pressure", "concentration", "mole fraction"),
]


class Validity(Words):
    """Where the numbers of a rate or of species data hold."""

    temperature: Annotated[tuple[float, float], Span("temperature", "350 degC to 440 degC")] | None = Field(
        None, description="range of temperature"
    )
    pressure: Annotated[tuple[float, float], Span("pressure", "10 bar(a) to 30 bar(a)")] | None = Field(
        None, description="range of pressure"
    )


class HeatCapacity(Words):
    """Molar heat capacity of the ideal gas at constant pressure."""

    powers_of_T: Annotated[tuple[float, ...], Powers()] = Field(
        description="a, b, c ... of a + b T + c T^2 ..., each with its unit: J/(mol K), J/(mol K^2) ..."
    )


class Species(Words):
    """One species: a name in data files, or formula, enthalpy, entropy and heat capacity written out."""

    gas_data: Name | None = Field(None, description="name in Cantera's data files, or file:name")
    formula: Name | None = Field(None, description="chemical formula, as in C10H14")
    enthalpy_of_formation: Annotated[float, In("molar energy")] | None = Field(
        None, description="of the ideal gas at 298.15 K"
    )
    entropy: Annotated[float, In("molar entropy", above=0.0)] | None = Field(
        None, description="absolute, of the ideal gas at 298.15 K and the standard pressure"
    )
    standard_pressure: Annotated[float, In("pressure", above=0.0)] | None = Field(
        None, description="pressure to which the entropy belongs"
    )
    heat_capacity: HeatCapacity | None = Field(None, description="of the ideal gas")
    valid: Validity | None = Field(None, description="where the data hold")
    source: Name | None = Field(None, description="where the numbers come from")


class Fluid(Words):
    """What flows through the beds."""

    density: Annotated[Literal["ideal gas"], Choice("ideal gas")] = Field(description="how density is found")
    viscosity: Annotated[float, In("viscosity", above=0.0)] = Field(description="dynamic viscosity")


RATE_CONSTANT = RawText(positive=True, example="4.2e-3 kmol/(kg h bar^2)")


class Constant(Words):
    """A rate constant, k = is exp(-E/R (1/T - 1/at)); without `at`, k = is exp(-E/(R T))."""

    is_: Annotated[Raw, RATE_CONSTANT] = Field(
        description="value; its unit must fit `rate per`, `driven by` and the sum of the orders"
    )
    at: Annotated[float, In("temperature", above=0.0)] | None = Field(
        None,
        description="temperature at which the value holds; without it: pre-exponential factor",
    )
    activation_energy: Annotated[float, In("molar energy")] | None = Field(
        None, description="E; none: no change with T"
    )


class TextOrMapping:
    """The constant as a mapping, or its value alone as text."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        inner = handler(source)
        return core_schema.no_info_before_validator_function(
            lambda raw: {"is": raw} if isinstance(raw, str) else raw, inner
        )

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {"oneOf": [RATE_CONSTANT.schema(), handler(schema)]}


class EveryReaction(Words):
    """What holds for every reaction that does not say otherwise."""

    rate_per: RatePer | None = Field(None, description="what the rate is counted per")
    driven_by: DrivenBy | None = Field(None, description="what the orders are powers of")
    orders: Annotated[dict[str, float] | None, Orders()] = Field(
        None, description="`as written` (the numbers of the equation), or an order for each species"
    )
    backward: Annotated[Literal["from Gibbs energies"], Choice(FROM_GIBBS)] | None = Field(
        None, description="where the equilibrium constant of a reversible equation comes from"
    )
    valid: Validity | None = Field(None, description="where the rate law holds")
    source: Name | None = Field(None, description="where the numbers come from")


class Reaction(EveryReaction):
    """One reaction; its rate is that of the equation as written, `<=>` reversible, `=>` not."""

    model_config = ConfigDict(json_schema_extra=mergeable("rate per", "driven by"))

    equation: Name = Field(description="as in benzene + ethylene <=> ethylbenzene")
    constant: Annotated[Constant, TextOrMapping()] = Field(
        description="rate constant, with its temperature dependence if it has one"
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
