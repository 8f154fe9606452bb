"""The case as the rest of the package uses it: frozen, in SI units, with everything merged and filled in.

`reactorstage.case.load` makes it. Keys of the file and their meaning are declared in `written`.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Sequence
from copy import deepcopy
from dataclasses import dataclass
from typing import Any, Literal

from pydantic import BaseModel, ConfigDict, PrivateAttr

from reactorstage.case.fields import Activities, Number, Raw
from reactorstage.case.marks import Marked
from reactorstage.case.word_fields import Aim
from reactorstage.case.written import Bed, DepthPoint, Level, Price
from reactorstage.case.written_chemistry import (
    HeatCapacity,
    Reaction,
    Species,
    SpeciesData,
    Validity,
)
from reactorstage.case.written_fluid import CriticalData, Fluid, LiquidDensity
from reactorstage.case.written_gaps import ExchangerWritten as Exchanger
from reactorstage.case.written_rates import (
    Constant,
    Effectiveness,
    EquilibriumConstant,
    Factor,
    OwnEquilibrium,
    TemperatureForm,
    TermConstant,
)
from reactorstage.errors import Problem

__all__ = [
    "Activities",
    "Aim",
    "Bed",
    "Case",
    "Constant",
    "CriticalData",
    "DepthPoint",
    "Effectiveness",
    "EquilibriumConstant",
    "Exchanger",
    "Factor",
    "Feed",
    "Fluid",
    "HeatCapacity",
    "HeatLevels",
    "Level",
    "Limit",
    "LiquidDensity",
    "Number",
    "OwnEquilibrium",
    "Panel",
    "Price",
    "Raw",
    "Reaction",
    "Recycle",
    "Section",
    "Source",
    "Species",
    "SpeciesData",
    "Split",
    "Step",
    "TemperatureForm",
    "TermConstant",
    "Validity",
]


@dataclass(frozen=True)
class Source:
    """Where a case came from: the file, its tree with the place of every value, the overrides."""

    file: str
    marked: Marked
    overrides: tuple[str, ...] = ()

    @property
    def text(self) -> str:
        return "\n".join(self.marked.mark(()).value.text.lines)


class Frozen(BaseModel):
    """Base of the parts of a case that differ from what is written."""

    model_config = ConfigDict(frozen=True, extra="forbid")


class Split(Frozen):
    """Division of a feed among beds.

    values: entry by bed, in `beds` order, without the one that takes the rest; all of one kind ("molar flow",
    "mass flow", "fraction"). rest: the bed that takes what is left, or None when every entry is fixed.
    """

    values: dict[str, Number]
    rest: str | None
    beds: tuple[str, ...]
    kind: str


class Feed(Frozen):
    """A stream that enters; composition holds fractions that sum to 1, on the basis `Case.percent`."""

    flow: Number
    temperature: Number
    composition: dict[str, float]
    split: Split | None = None
    pressure: float | None = None
    phase: str | None = None


class Recycle(Frozen):
    """A stream drawn off downstream and injected upstream."""

    flow: Number
    split: Split | None = None


class Step(Frozen):
    """One step of the pipe.

    kind: what it does; feed: of take and inject; holds, to [K], heat [W, removed by cool, added by heat]: the
    one that is given of a heater or cooler; levels: names of heat levels, or one of the words
    "every cooling level", "every heating level", "unpriced" (empty for all other steps); exchanger: its
    name; area with coefficient and fouling (SI) where heat follows from these; bypassed: it does nothing;
    removed: share or flow (mol/s) by species; pressure: Pa that a pressure drop takes. feed names the recycle
    of draw, and may name one for inject.
    """

    kind: Literal["take", "inject", "heat", "cool", "remove", "pressure drop", "draw"]
    feed: str | None = None
    holds: str | None = None
    to: Number | None = None
    heat: Number | None = None
    levels: tuple[str, ...] | str = ()
    exchanger: str | None = None
    area: Number | None = None
    coefficient: Number | None = None
    fouling: Number | None = None
    bypassed: bool = False
    removed: dict[str, Number] = {}
    pressure: Number | None = None


class Section(Frozen):
    """A bed, or the steps of entry, gap or effluent; index counts in the list `train` of the file."""

    owner: str
    kind: Literal["entry", "bed", "gap", "effluent"]
    index: int
    steps: tuple[Step, ...] = ()
    bed: Bed | None = None

    @property
    def path(self) -> tuple[str | int, ...]:
        """Path of the section in the file, for `Case.problem`."""
        return ("train", self.index, self.owner)


class HeatLevels(Frozen):
    """The ladder of heat levels; minimum_approach in K."""

    minimum_approach: float
    levels: dict[str, Level]


class Limit(Frozen):
    """A bound on a quantity; exceptions: by owner, the bounds (at_most, at_least, keep_away) that replace."""

    of: str
    at_most: Raw | None = None
    at_least: Raw | None = None
    keep_away: Raw | None = None
    why: str = ""
    soft: Raw | None = None
    exceptions: dict[str, dict[str, Raw]] = {}


class Panel(Frozen):
    """How settings are entered; steps by kind of quantity or name of a free number."""

    steps: dict[str, Raw] = {}
    least_gain: Raw | None = None
    flat_within: Raw | None = None


class Case(Frozen):
    """A whole case in SI units."""

    name: str
    format: int
    aim: Aim
    percent: Literal["mol", "mass"]
    currency: str
    hours_per_year: float | None = None
    species: dict[str, Species]
    fluid: Fluid
    reactions: dict[str, Reaction]
    feeds: dict[str, Feed]
    train: tuple[Section, ...]
    exchangers: dict[str, Exchanger] = {}
    recycles: dict[str, Recycle] = {}
    heat_levels: HeatLevels | None = None
    prices: dict[str, Price] = {}
    limits: dict[str, Limit] = {}
    panel: Panel | None = None
    _source: Source = PrivateAttr()

    @property
    def source(self) -> Source:
        return self._source

    @property
    def resolved(self) -> dict[str, Any]:
        """The case in the words and texts of the file, with everything merged and overridden."""
        tree: Any = deepcopy(self._source.marked.tree)
        return dict(tree)

    @property
    def hash(self) -> str:
        """SHA-256 of the resolved case, as hexadecimal text."""
        text = json.dumps(self.resolved, sort_keys=True, ensure_ascii=False, separators=(",", ":"))
        return hashlib.sha256(text.encode()).hexdigest()

    def problem(
        self, path: Sequence[str | int], message: str, hint: str = "", on_key: bool = False
    ) -> Problem:
        """A problem at a path of the file, such as ("limits", "hot exit", "of").

        The caret stands under the value, or under its key when the value is a mapping or a list or when
        on_key is true. A path that is not in the file is shown at the nearest one above it.
        """
        return self._source.marked.mark(tuple(path)).best(on_key).problem(message, hint)
