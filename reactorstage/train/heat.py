"""One ladder of heat levels for heaters, gaps and effluent, without kinks.

A stream that is cooled gives its heat to the best level it can reach at each temperature. With levels sorted
by the lowest stream temperature b_j that they reach (their own temperature plus the minimum approach) and
prices rising along, what is earned is sum_j (price_j - price_(j-1)) * c_j, c_j the heat given above b_j:

    c_j = Q                              where the outlet always stays above b_j
    c_j = hinge(H(T_in) - H(b_j))        where the outlet always stays below b_j
    c_j an internal number, at most both where the outlet may lie on either side, or a level has a capacity

so that a cold end that settles on a level is a limit at work and not a kink; hinge(y) is max(0, y), rounded
within 0.05 K of zero. A heater is the mirror image with costs.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from reactorstage.case import units
from reactorstage.chemistry.fluid import CubicStream, Fluid
from reactorstage.chemistry.thermo import h
from reactorstage.errors import CaseProblems, Problem
from reactorstage.train.boundaries import Residual
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.forms import Linear, at
from reactorstage.train.layout import Device, Layout, Place

if TYPE_CHECKING:
    from reactorstage.case.model import Case

HINGE_WIDTH = 0.05
"""Half width, in kelvin of the stream, over which a hot end that just reaches a level is rounded."""


@dataclass(frozen=True)
class Rung:
    """A level as one stream sees it: reach [K] of the stream, price per J (cost +), capacity W or None."""

    level: str
    reach: float
    price: float
    capacity: float | None


@dataclass(frozen=True)
class Hinge:
    """A rounded max(0, form) of the stream at an operation, with its half width as a form too."""

    form: Linear
    width: Linear
    operation: int


@dataclass
class Ladder:
    """What the heat of a case adds to the programme.

    given[(owner, level)] is the heat to or from a level (W >= 0), cost[owner] money per second, both as
    linear forms of the base vector extended by hinges (from `hinge_start` on) and internal numbers
    (from `internal_start` on). rows are linear forms that must be >= 0, with a name; reach holds
    (device, owner, temperature, direction) of outlets that must stay within reach of their levels;
    capacities the most heat [W] of each level that states one.
    """

    hinge_start: int
    internal_start: int
    hinges: list[Hinge] = field(default_factory=list)
    internal: list[str] = field(default_factory=list)
    given: dict[tuple[str, str], Linear] = field(default_factory=dict)
    heating: dict[str, bool] = field(default_factory=dict)
    cost: dict[str, Linear] = field(default_factory=dict)
    rows: list[tuple[str, Linear]] = field(default_factory=list)
    reach: list[tuple[Device, str, float, str, str]] = field(default_factory=list)
    unpriced: list[str] = field(default_factory=list)
    capacities: dict[str, float] = field(default_factory=dict)

    def hinge(self, form: Linear, width: Linear, operation: int) -> Linear:
        self.hinges.append(Hinge(form, width, operation))
        return at(self.hinge_start + len(self.hinges) - 1)

    def number(self, name: str) -> Linear:
        self.internal.append(name)
        return at(self.internal_start + len(self.internal) - 1)


def read_rungs(case: Case, problems: list[Problem]) -> dict[str, Rung]:
    """Every level of the ladder by name, prices in money per joule."""
    rungs: dict[str, Rung] = {}
    if case.heat_levels is None:
        return rungs
    approach = case.heat_levels.minimum_approach
    for name, level in case.heat_levels.levels.items():
        sign, raw = (1.0, level.costs) if level.costs is not None else (-1.0, level.earns)
        price = 0.0
        if raw is not None:
            path = ("heat levels", name, "costs" if sign > 0 else "earns")
            try:
                price = sign * units.price_to_si(raw.text, "power", case.currency, case.hours_per_year)
            except units.UnitProblem as error:
                problems.append(case.problem(path, error.message, error.hint))
        if level.cools_down_to is not None:
            rungs[name] = Rung(name, level.cools_down_to + approach, price, level.capacity)
        elif level.heats_up_to is not None:
            rungs[name] = Rung(name, level.heats_up_to - approach, price, level.capacity)
    return rungs


def build_ladder(
    case: Case,
    chemistry: CaseChemistry,
    layout: Layout,
    outlet_range: dict[int, tuple[float, float]],
    hinge_start: int,
    internal_start: int,
    residuals: Sequence[Residual] = (),
) -> Ladder:
    """The ladder of a case; outlet_range gives lowest and highest of each input that fixes an outlet."""
    problems: list[Problem] = []
    rungs = read_rungs(case, problems)
    if problems:
        raise CaseProblems(problems)
    ladder = Ladder(hinge_start, internal_start)
    cools = {
        name
        for name, level in (case.heat_levels.levels if case.heat_levels else {}).items()
        if level.cools_down_to is not None
    }
    for place in layout.places:
        for device in place.devices:
            if device.exchanger:
                continue
            if device.levels == "unpriced":
                ladder.unpriced.append(place.owner)
                continue
            wanted = _wanted(device, rungs, cools)
            span = outlet_range.get(device.outlet, (0.0, np.inf))
            stream = _Stream(chemistry, layout, place, device, span, residuals)
            (_heat if device.heating else _cool)(ladder, stream, wanted)
    used = {level for _, level in ladder.given}
    ladder.capacities = {
        name: rung.capacity for name, rung in rungs.items() if rung.capacity is not None and name in used
    }
    return ladder


def residuals_of(case: Case, fluid: Fluid | None, layout: Layout, first: int) -> tuple[Residual, ...]:
    """Residual enthalpies that the ladder of a case needs, from position `first` of the base vector on."""
    rungs = read_rungs(case, [])
    places = [
        (device.operation, rung.reach)
        for place in layout.places
        for device in place.devices
        for rung in rungs.values()
    ]
    if not isinstance(fluid, CubicStream):
        return ()
    return tuple(Residual(first + k, *one) for k, one in enumerate(dict.fromkeys(places)))


def _wanted(device: Device, rungs: dict[str, Rung], cools: set[str]) -> list[Rung]:
    """Levels that a device may use, coldest reach first."""
    if isinstance(device.levels, str):
        names = [name for name in rungs if (name in cools) != device.heating]
    else:
        names = list(device.levels)
    return sorted((rungs[name] for name in names), key=lambda rung: rung.reach)


@dataclass(frozen=True)
class _Stream:
    """The stream through one device, and its enthalpies as linear forms."""

    chemistry: CaseChemistry
    layout: Layout
    place: Place
    device: Device
    span: tuple[float, float]
    residuals: Sequence[Residual]

    @property
    def removed(self) -> Linear:
        return self.layout.heat_removed(self.device)

    def before_above(self, T: float) -> Linear:
        """H(T_in) - H(T): heat of the arriving stream above T."""
        return self.layout.enthalpy(self.device.operation - 1) - self._at(T)

    def after_above(self, T: float) -> Linear:
        return self.layout.enthalpy(self.device.operation) - self._at(T)

    def width(self, T: float) -> Linear:
        return (self._ideal(T + HINGE_WIDTH) - self._ideal(T - HINGE_WIDTH)) * 0.5

    def _at(self, T: float) -> Linear:
        own = [
            at(one.index) for one in self.residuals if one.operation == self.device.operation and one.T == T
        ]
        return self._ideal(T) + (own[0] if own else Linear())

    def _ideal(self, T: float) -> Linear:
        molar = h(self.chemistry.table, T)
        start = self.device.operation * self.layout.width
        return Linear({start + s: float(value) for s, value in enumerate(molar)})


def _cool(ladder: Ladder, stream: _Stream, rungs: Sequence[Rung]) -> None:
    """Heat given to the rungs of a cooler."""
    owner, (low, high) = stream.place.owner, stream.span
    limited = any(rung.capacity is not None for rung in rungs)
    kept = list(rungs) if limited else _improving(rungs)
    if low < kept[0].reach and stream.device.given != "area":
        ladder.reach.append((stream.device, owner, kept[0].reach, "at least", kept[0].level))
    above = [stream.removed]
    for rung in kept[1:]:
        if not limited and low >= rung.reach:
            above.append(stream.removed)
        elif not limited and high <= rung.reach:
            above.append(
                ladder.hinge(
                    stream.before_above(rung.reach), stream.width(rung.reach), stream.device.operation
                )
            )
        else:
            above.append(_internal(ladder, stream, rung, above[-1]))
    _book(ladder, owner, kept, above, stream.device.heating)


def _internal(ladder: Ladder, stream: _Stream, rung: Rung, less: Linear) -> Linear:
    """Heat above a rung as an internal number, bounded by what lies above it and by the rung below."""
    owner = stream.place.owner
    number = ladder.number(f"{owner}.heat above {rung.level}")
    reachable = ladder.hinge(
        stream.before_above(rung.reach), stream.width(rung.reach), stream.device.operation
    )
    ladder.rows.append((f"{owner}, heat that reaches {rung.level}", reachable - number))
    ladder.rows.append((f"{owner}, heat left for {rung.level}", less - number))
    return number


def _heat(ladder: Ladder, stream: _Stream, rungs: Sequence[Rung]) -> None:
    """Heat taken from the rungs of a heater: cheapest first, hotter ones for what lies above their reach."""
    owner, high = stream.place.owner, stream.span[1]
    hottest = max(rungs, key=lambda rung: rung.reach)
    if high > hottest.reach and stream.device.given != "area":
        ladder.reach.append((stream.device, owner, hottest.reach, "at most", hottest.level))
    limited = any(rung.capacity is not None for rung in rungs)
    kept = list(rungs) if limited else _rising(rungs)
    above = [stream.removed * -1.0]
    for rung in kept[:-1]:
        needed = _needed_above(ladder, stream, rung)
        above.append(_internal_heat(ladder, stream, rung, needed, above[-1]) if limited else needed)
    _book(ladder, owner, kept, above, stream.device.heating)


def _needed_above(ladder: Ladder, stream: _Stream, rung: Rung) -> Linear:
    """Heat that a rung is too cold to give."""
    T, width, operation = rung.reach, stream.width(rung.reach), stream.device.operation
    after = ladder.hinge(stream.after_above(T), width, operation)
    return after - ladder.hinge(stream.before_above(T), width, operation)


def _internal_heat(ladder: Ladder, stream: _Stream, rung: Rung, needed: Linear, most: Linear) -> Linear:
    """Heat from rungs hotter than this one, an internal number: what is needed or, where it is full, more."""
    owner = stream.place.owner
    number = ladder.number(f"{owner}.heat from above {rung.level}")
    ladder.rows.append((f"{owner}, heat that {rung.level} is too cold for", number - needed))
    ladder.rows.append((f"{owner}, heat from {rung.level}", most - number))
    return number


def _improving(rungs: Sequence[Rung]) -> list[Rung]:
    """Rungs that pay better than every colder one."""
    kept = [rungs[0]]
    for rung in rungs[1:]:
        if rung.price < kept[-1].price:
            if rung.reach == kept[-1].reach:
                kept.pop()
            kept.append(rung)
    return kept


def _rising(rungs: Sequence[Rung]) -> list[Rung]:
    """Rungs that cost less than every hotter one, coldest first."""
    kept: list[Rung] = []
    for rung in sorted(rungs, key=lambda rung: -rung.reach):
        if not kept or rung.price < kept[-1].price:
            kept.append(rung)
    return kept[::-1]


def _book(ladder: Ladder, owner: str, rungs: Sequence[Rung], above: Sequence[Linear], heating: bool) -> None:
    """Heat and money of one device from the heat above each rung."""
    for j, rung in enumerate(rungs):
        share = above[j] - above[j + 1] if j + 1 < len(above) else above[j]
        key = (owner, rung.level)
        ladder.given[key] = ladder.given.get(key, Linear()) + share
        ladder.heating[rung.level] = heating
        ladder.cost[owner] = ladder.cost.get(owner, Linear()) + share * rung.price
