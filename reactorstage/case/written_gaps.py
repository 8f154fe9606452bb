"""What may stand in gaps beyond levels of heat, as written: exchangers, recycles, devices by area."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from reactorstage.case.fields import Free, In, Number
from reactorstage.case.word_fields import Choice, Entry, Names
from reactorstage.case.words import Name, Words

Area = Annotated[Number, Free("area", above=0.0)]
Coefficient = Annotated[Number, Free("heat transfer coefficient", above=0.0)]
Fouling = Annotated[Number, Free("fouling resistance", least=0.0)]
Bypass = Annotated[Number, Free("fraction", least=0.0, below=1.0)]
State = Annotated[Literal["running", "bypassed"], Choice("running", "bypassed")]
Removed = Annotated[Number, Free("fraction", "molar flow", least=0.0)]


class Device(Words):
    """What heaters and coolers have in common."""

    exchanger: Name | None = Field(None, description="name of the exchanger of which this is one side")
    area: Area | None = Field(
        None, description="heat follows from area, coefficient and the level's temperature"
    )
    coefficient: Coefficient | None = Field(None, description="of heat transfer, clean, with the area")
    fouling_resistance: Fouling | None = Field(None, description="added to the resistance 1/coefficient")
    state: State = Field("running", description="a bypassed heater or cooler lets the stream pass unchanged")


class ExchangerWritten(Words):
    """Exchange of heat between two streams of the train, or of one with a feed before it enters.

    One `heat` and one `cool` step name it, or one of them when it has a feed.
    """

    effectiveness: Annotated[Number, Free("fraction", above=0.0, most=1.0)] | None = Field(
        None, description="heat over the most that could pass with endless area"
    )
    area: Area | None = Field(
        None, description="of transfer; with the coefficient instead of the effectiveness"
    )
    coefficient: Coefficient | None = Field(None, description="of heat transfer over the area, clean")
    fouling_resistance: Fouling | None = Field(None, description="added to the resistance 1/coefficient")
    arrangement: Annotated[
        Literal["countercurrent", "parallel flow"], Choice("countercurrent", "parallel flow")
    ] = Field("countercurrent", description="how the two streams pass each other")
    cold_bypass: Bypass | None = Field(None, description="share of the cold stream that goes round it")
    hot_bypass: Bypass | None = Field(None, description="share of the hot stream that goes round it")
    minimum_approach: Annotated[float, In("temperature difference", least=0.0)] = Field(
        0.0, description="smallest allowed temperature difference at either end"
    )
    with_feed: Name | None = Field(
        None, description="the feed that is its other stream, whole, before it enters"
    )
    state: State = Field("running", description="a bypassed exchanger exchanges nothing")


class RecycleSplitWritten(Words):
    """How a recycle is divided among the beds."""

    now: dict[str, Annotated[Number | None, Entry("molar flow", "fraction", least=0.0)]] = Field(
        ..., description="flow or share for each bed; `rest` at most once", min_length=1
    )
    free: Annotated[tuple[str, ...] | str, Names("all")] | None = Field(
        None, description="`all`, or the beds whose entries may change; `rest` takes what is left"
    )


class RecycleWritten(Words):
    """A stream that a `draw` step takes off and `inject` steps bring back upstream."""

    flow: Annotated[Number, Free("molar flow", least=0.0)] = Field(..., description="whole flow of it")
    split: RecycleSplitWritten | None = Field(None, description="division among beds, where it is divided")
