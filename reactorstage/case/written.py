"""The case file as it is written: every key with its unit, bounds, default and meaning, once.

The check of a case, its JSON Schema and the names that can be set are all made from these models. A key is
the attribute's name with spaces for underscores.
"""

from __future__ import annotations

import re
from typing import Annotated, Any, ClassVar, Literal

from pydantic import (
    ConfigDict,
    Discriminator,
    Field,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
    StringConstraints,
    Tag,
    model_validator,
)
from pydantic_core import CoreSchema, core_schema

from reactorstage.case.fields import Free, In, Number, Raw, problem
from reactorstage.case.word_fields import (
    Aim,
    AimText,
    Between,
    ByReaction,
    Choice,
    Entry,
    Names,
    RawText,
    Share,
    TextOf,
    Version,
)
from reactorstage.case.words import Bound, Name, PriceText, Words, mergeable
from reactorstage.case.written_chemistry import ReactionsWritten, Species
from reactorstage.case.written_fluid import Fluid, PhaseWord
from reactorstage.case.written_gaps import Device, ExchangerWritten, RecycleWritten, Removed

FORMAT = 1
EVERY_BED, EVERY_GAP = "every bed", "every gap"
EVERY_COOLING_LEVEL, EVERY_HEATING_LEVEL, UNPRICED = "every cooling level", "every heating level", "unpriced"
INJECTION_ADVICE = "write shut, or moved to and a bed, as in moved to bed 3"
BED_NAME = r"bed [1-9][0-9]*"
STEPS_NAME = r"(entry|effluent|gap [1-9][0-9]*)"


class SplitWritten(Words):
    """How a feed is divided among the beds."""

    now: dict[str, Annotated[Number | None, Entry("molar flow", "mass flow", "fraction", least=0.0)]] = Field(
        description="flow or share for each bed; `rest` at most once", min_length=1
    )
    free: Annotated[tuple[str, ...] | str, Names("all")] | None = Field(
        None, description="`all`, or the beds whose entries may change; `rest` takes what is left"
    )


class FeedWritten(Words):
    """A stream that enters the train."""

    flow: Annotated[Number, Free("molar flow", "mass flow", above=0.0)] = Field(
        description="whole flow of the feed"
    )
    temperature: Annotated[Number, Free("temperature", above=0.0)] = Field(description="before it is mixed")
    composition: dict[str, Annotated[float | None, Share()]] = Field(
        description="share of each species (see `percent`); `rest` at most once", min_length=1
    )
    pressure: Annotated[float, In("pressure", above=0.0)] | None = Field(
        None, description="before it is mixed; asked for where enthalpy depends on it"
    )
    phase: PhaseWord | None = Field(
        None, description="of a feed that is not in the phase of the fluid, as a liquid that evaporates"
    )
    split: SplitWritten | None = Field(None, description="the only place where a division among beds stands")


def levels_or_exchanger(key: str) -> dict[str, Any]:
    """A device has levels for its heat, or is one side of an exchanger."""
    return {"anyOf": [{"required": [key]}, {"required": ["exchanger"]}]}


class HeatStep(Device):
    """A heater: holds an inlet temperature, or given by exit temperature, heat, area, or exchanger."""

    model_config = ConfigDict(json_schema_extra=levels_or_exchanger("heat from"))

    holds: Name | None = Field(
        None, description="the inlet temperature that it makes, as in bed 1.inlet temperature"
    )
    to: Annotated[Number, Free("temperature", above=0.0)] | None = Field(
        None, description="temperature behind it"
    )
    heat_added: Annotated[Number, Free("power", least=0.0)] | None = Field(None, description="heat given")
    heat_from: Annotated[tuple[str, ...] | str, Names(EVERY_HEATING_LEVEL, UNPRICED)] | None = Field(
        None, description="heat level, list of them, `every heating level` or `unpriced`"
    )
    heat_key: ClassVar[str] = "heat added"
    levels_key: ClassVar[str] = "heat from"

    @property
    def levels_named(self) -> tuple[str, ...] | str | None:
        return self.heat_from


class CoolStep(Device):
    """A cooler: holds an inlet temperature, or given by exit temperature, heat, area, or exchanger."""

    model_config = ConfigDict(json_schema_extra=levels_or_exchanger("heat to"))

    holds: Name | None = Field(
        None, description="the inlet temperature that it makes, as in bed 2.inlet temperature"
    )
    to: Annotated[Number, Free("temperature", above=0.0)] | None = Field(
        None, description="temperature behind it"
    )
    heat_removed: Annotated[Number, Free("power", least=0.0)] | None = Field(
        None, description="heat taken out"
    )
    heat_to: Annotated[tuple[str, ...] | str, Names(EVERY_COOLING_LEVEL, UNPRICED)] | None = Field(
        None, description="heat level, list of them, `every cooling level` or `unpriced`"
    )
    heat_key: ClassVar[str] = "heat removed"
    levels_key: ClassVar[str] = "heat to"

    @property
    def levels_named(self) -> tuple[str, ...] | str | None:
        return self.heat_to


class StepWritten(Words):
    """One step of the pipe: exactly one of take, inject, heat, cool, remove, pressure drop, draw."""

    model_config = ConfigDict(json_schema_extra={"minProperties": 1, "maxProperties": 1})

    take: Name | None = Field(None, description="the feed that begins the train")
    inject: Name | None = Field(None, description="a feed that is mixed in; how much stands in its split")
    heat: HeatStep | None = Field(None, description="a heater")
    cool: CoolStep | None = Field(None, description="a cooler")
    remove: Annotated[dict[str, Removed], Field(min_length=1)] | None = Field(
        None, description="shares or flows of species that leave here at the temperature of the stream"
    )
    pressure_drop: Annotated[Number, Free("pressure difference", least=0.0)] | None = Field(
        None, description="pressure lost here"
    )
    draw: Name | None = Field(None, description="a recycle that is drawn off here; how much stands in it")

    @model_validator(mode="after")
    def _one(self) -> StepWritten:
        if len(self.model_fields_set) != 1:
            raise problem(
                "a step has exactly one of take, inject, heat, cool, remove, pressure drop, draw",
                "begin each step with its own `- `",
            )
        return self


class DepthPoint(Words):
    """A point of an activity along the depth of a bed."""

    at: Annotated[float, In("fraction", least=0.0, most=1.0)] = Field(
        description="share of the catalyst above it"
    )
    is_: Annotated[float, In("fraction", least=0.0)] = Field(description="share of the catalyst activity")


class EveryBed(Words):
    """What holds for every bed that does not say otherwise."""

    catalyst: Annotated[Number, Free("mass", "volume", least=0.0)] | None = Field(
        None, description="by mass or by volume; zero is a bypass"
    )
    inlet_temperature: Annotated[Number, Free("temperature", above=0.0)] | None = Field(
        None, description="made by the device that holds it"
    )
    inlet_pressure: Annotated[Number, Free("pressure", above=0.0)] | None = Field(
        None, description="of bed 1 only; the others follow"
    )
    diameter: Annotated[float, In("length", above=0.0)] | None = Field(None, description="of the bed")
    bulk_density: Annotated[float, In("density", above=0.0)] | None = Field(
        None, description="catalyst mass per volume of bed"
    )
    void_fraction: Annotated[float, In("fraction", above=0.0, below=1.0)] | None = Field(
        None, description="empty part of the bed between the particles"
    )
    equivalent_size: Annotated[float, In("length", above=0.0)] | None = Field(
        None, description="6 x volume / surface of a particle"
    )
    catalyst_activity: Annotated[Number, ByReaction(1.0, "number", least=0.0)] = Field(
        Number(1.0),
        description="multiplies rates, forward and backward; 1 is fresh; or by reaction, as in "
        "{every reaction: 1.0, ethylation: 0.8}",
    )
    activity_along_depth: Annotated[tuple[DepthPoint, ...], Field(min_length=2)] | None = Field(
        None, description="multiplies the catalyst activity: straight lines between points, level outside"
    )
    pressure_drop_factor: Annotated[Number, Free("number", least=0.0)] = Field(
        Number(1.0), description="multiplies the calculated pressure drop; 0 switches it off"
    )
    design_temperature: Annotated[float, In("temperature", above=0.0)] | None = Field(
        None, description="of the vessel"
    )
    state: Annotated[
        Literal["running", "bypassed", "out of service"], Choice("running", "bypassed", "out of service")
    ] = Field(
        "running",
        description="a bypassed bed lets the stream pass unchanged, injection included; one that is out of "
        "service also says what becomes of `its injection`, and limits on every bed leave it out",
    )
    its_injection: Annotated[str, TextOf("shut|moved to bed [1-9][0-9]*", INJECTION_ADVICE)] | None = Field(
        None, description="what becomes of it when the bed is out of service: shut, or moved to bed 3"
    )


class Bed(EveryBed):
    """One adiabatic layer of catalyst."""

    model_config = ConfigDict(json_schema_extra=mergeable("catalyst"))

    catalyst: Annotated[Number, Free("mass", "volume", least=0.0)] = Field(
        description="by mass or by volume; zero is a bypass"
    )


def _section_form(raw: Any) -> str | None:
    name = next(iter(raw)) if isinstance(raw, dict) and len(raw) == 1 else ""
    if re.fullmatch(BED_NAME, name):
        return "#bed"
    return "#steps" if re.fullmatch(STEPS_NAME, name) else None


class NothingMeansEmpty:
    """A section without steps may be left empty."""

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        inner = handler(source)
        return core_schema.no_info_before_validator_function(lambda raw: () if raw is None else raw, inner)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        return {**handler(schema), "type": ["array", "null"]}


Steps = Annotated[tuple[StepWritten, ...], NothingMeansEmpty()]
SectionWritten = Annotated[
    Annotated[dict[Annotated[str, StringConstraints(pattern=f"^{BED_NAME}$")], Bed], Tag("#bed")]
    | Annotated[dict[Annotated[str, StringConstraints(pattern=f"^{STEPS_NAME}$")], Steps], Tag("#steps")],
    Discriminator(
        _section_form,
        custom_error_type="case",
        custom_error_message="a section of the train is expected",
        custom_error_context={
            "message": "a section of the train is expected here",
            "hint": "write one of `- entry:`, `- bed 1:`, `- gap 1:`, `- effluent:`",
        },
    ),
]


class Level(Words):
    """One heat level: heat is given to it (it cools the train) or taken from it (it heats)."""

    heats_up_to: Annotated[float, In("temperature", above=0.0)] | None = Field(
        None, description="hottest it makes"
    )
    cools_down_to: Annotated[float, In("temperature", above=0.0)] | None = Field(
        None, description="temperature of the cold side"
    )
    costs: PriceText | None = Field(None, description="price of its heat, as in 34 EUR/MWh")
    earns: PriceText | None = Field(None, description="worth of the heat given to it, as in 19 EUR/MWh")
    capacity: Annotated[float, In("power", least=0.0)] | None = Field(
        None, description="most heat it can take or give"
    )


class HeatLevelsWritten(Words):
    """One ladder of heat levels for heaters, gaps and effluent."""

    model_config = ConfigDict(extra="allow")
    __pydantic_extra__: dict[str, Level]

    minimum_approach: Annotated[float, In("temperature difference", above=0.0)] = Field(
        description="smallest temperature difference in an exchanger"
    )


class Price(Words):
    """Money on a quantity: a cost or an earning, never signed."""

    of: Name = Field(description="quantity, as in effluent.flow of diethylbenzene")
    costs: PriceText | None = Field(None, description="as in 62 EUR/kmol; EUR/(t year) on what stands still")
    earns: PriceText | None = Field(None, description="as in 62 EUR/kmol")


class LimitException(Words):
    """What replaces a general limit for one bed or gap."""

    at_most: Bound | None = Field(None, description="upper bound")
    at_least: Bound | None = Field(None, description="lower bound")
    between: Annotated[Raw, Between()] | None = Field(None, description="both, as in 30 kmol/h and 82 kmol/h")
    keep_away: Annotated[Raw, RawText(positive=True, example="3 K")] | None = Field(
        None, description="margin to keep"
    )


class LimitWritten(LimitException):
    """A bound on a quantity, with its reason."""

    of: Name = Field(description="quantity; `every bed.` and `every gap.` stand for all of them")
    why: Name = Field("", description="the reason, in a few words")
    soft: Annotated[Raw, RawText(positive=True, example="5 EUR/h per K")] | None = Field(
        None, description="may be broken at this price"
    )
    exceptions: dict[str, LimitException] = Field(
        {}, alias="except", description="other bounds for one bed or gap"
    )


class PanelWritten(Words):
    """How settings are entered by hand, and which differences are not worth a move."""

    steps: dict[str, Annotated[Raw, RawText(positive=True, example="1 K")]] = Field(
        {},
        description="smallest change that can be entered, by kind of quantity (temperature: 1 K) or by free "
        "number (bed 1.inlet temperature: 0.5 K)",
    )
    least_gain: Annotated[Raw, RawText(positive=True, example="1 EUR/h")] | None = Field(
        None,
        description="moves that gain less are left out; as the aim or %, by default 0.1 % of the money terms",
    )
    flat_within: Annotated[Raw, RawText(positive=True, example="1 %")] | None = Field(
        None, description="loss within which a setting counts as flat; as the aim or %, by default 1 %"
    )


class CaseWritten(Words):
    """A train of catalyst beds: what flows, what reacts, where, inside which limits, for what money."""

    case: Name = Field(description="name of the case")
    format: Annotated[int, Version(FORMAT)] = Field(description="version of this file format")
    aim: Annotated[Aim, AimText()] = Field(description="`least NAME` or `most NAME` of a quantity")
    percent: Annotated[Literal["mol", "mass"], Choice("mol", "mass")] = Field(
        description="basis of every composition in this file"
    )
    currency: Annotated[str, TextOf("[A-Z]{3}", "write three capital letters, as in EUR")] = Field(
        description="three capital letters, as in EUR"
    )
    hours_per_year: Annotated[float, In("number", above=0.0, most=8784.0)] | None = Field(
        None, description="hours of operation in a year; needed for prices per year"
    )
    species: dict[str, Species] = Field(description="every species that flows, by name", min_length=1)
    fluid: Fluid = Field(description="what flows through the beds")
    reactions: ReactionsWritten = Field(description="reactions by name")
    feeds: dict[str, FeedWritten] = Field(description="streams that enter, by name", min_length=1)
    train: tuple[SectionWritten, ...] = Field(
        description="entry, bed 1, gap 1, bed 2 ... effluent, in flow order; steps in the order of the pipe"
    )
    exchangers: dict[str, ExchangerWritten] = Field(
        {}, description="exchange of heat between streams of the train, by name"
    )
    recycles: dict[str, RecycleWritten] = Field(
        {}, description="streams drawn off behind the beds and injected again, by name"
    )
    every_bed: EveryBed | None = Field(None, description="written once; each bed may say otherwise")
    heat_levels: HeatLevelsWritten | None = Field(None, description="where heat goes to and comes from")
    prices: dict[str, Price] = Field({}, description="money on quantities, by label")
    limits: dict[str, LimitWritten] = Field({}, description="bounds on quantities, by label")
    panel: PanelWritten | None = Field(None, description="how settings are entered by hand")


class VariantWritten(Words):
    """Another case with some of its numbers changed."""

    case: Name | None = Field(None, description="name of the variant")
    format: Annotated[int, Version(FORMAT)] = Field(description="version of this file format")
    variant_of: Name = Field(description="the other case file, relative to the folder of this one")
    changes: dict[str, Any] = Field({}, description="new value by name, as in bed 2.state: bypassed")
