"""A case laid out as operations on one stream, with the positions of everything in the base vector."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed import train_pass as kernel
from reactorstage.case.model import Activities
from reactorstage.chemistry.constants import P_STANDARD
from reactorstage.train import composition
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.evaluation import SplitGroup
from reactorstage.train.forms import Linear, at
from reactorstage.train.inputs import InputBuilder

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Feed, Number, Section, Step

Array = NDArray[np.float64]
Index = NDArray[np.int64]


@dataclass(frozen=True)
class Device:
    """A heater or cooler: its operation, what gives its heat, its levels, and its place in the case.

    outlet is the input that fixes the temperature right behind it, -1 when that follows from elsewhere.
    """

    operation: int
    heating: bool
    levels: tuple[str, ...] | str
    given: str
    outlet: int
    path: tuple[str | int, ...]


@dataclass(frozen=True)
class Place:
    """Entry, gap or effluent: the operations first..last; injections as (operation, feed)."""

    owner: str
    kind: str
    first: int
    last: int
    injections: tuple[tuple[int, str], ...]
    devices: tuple[Device, ...]


@dataclass(frozen=True)
class BedPlace:
    """A bed: the operations of its inlet and exit, the first of its inputs, what is injected before it."""

    owner: str
    number: int
    inlet: int
    exit: int
    inputs: int
    injections: tuple[tuple[int, str], ...]
    held: bool


@dataclass(frozen=True)
class Layout:
    """Everything about positions: operations (K, 4), compositions (NF, S), places, beds, inputs."""

    operations: Index
    compositions: Array
    places: tuple[Place, ...]
    beds: tuple[BedPlace, ...]
    feeds: tuple[str, ...]
    feed_flow: dict[str, int]
    feed_temperature: dict[str, int]
    amounts: dict[int, int]
    splits: tuple[SplitGroup, ...]
    species: int

    @property
    def width(self) -> int:
        """Rows of one record."""
        return self.species + 3

    @property
    def rows(self) -> int:
        """Rows that the pass writes."""
        return len(self.operations) * self.width + len(self.beds) * kernel.EXTRAS

    def flow(self, operation: int, species: int) -> Linear:
        return at(operation * self.width + species)

    def total_flow(self, operation: int) -> Linear:
        return Linear({operation * self.width + s: 1.0 for s in range(self.species)})

    def enthalpy(self, operation: int) -> Linear:
        return at(operation * self.width + self.species) if operation >= 0 else Linear()

    def pressure(self, operation: int) -> Linear:
        return at(operation * self.width + self.species + 1)

    def temperature(self, operation: int) -> Linear:
        return at(operation * self.width + self.species + 2)

    def extra(self, bed: int, which: int) -> Linear:
        """What was found in bed (from 0): 0 peak temperature, 1 its depth, 2..4 depths of the rise."""
        return at(len(self.operations) * self.width + bed * kernel.EXTRAS + which)

    def input(self, index: int) -> Linear:
        return at(self.rows + index)

    def heat_removed(self, device: Device) -> Linear:
        """Heat taken out by a device, W."""
        return self.enthalpy(device.operation - 1) - self.enthalpy(device.operation)


class _Writer:
    """Writes the operations of one case in flow order."""

    def __init__(self, case: Case, chemistry: CaseChemistry, inputs: InputBuilder):
        self.case, self.chemistry, self.inputs = case, chemistry, inputs
        self.operations: list[tuple[int, int, int, int]] = []
        self.feeds = list(case.feeds)
        self.compositions = np.array([mole_fractions(case, chemistry, feed) for feed in case.feeds.values()])
        self.molar = {
            name: float(row @ chemistry.table.molar_mass)
            for name, row in zip(self.feeds, self.compositions, strict=True)
        }
        self.feed_temperature = {name: self._condition(name, feed) for name, feed in case.feeds.items()}
        self.feed_flow = {
            name: inputs.number(f"feed {name}.flow", feed.flow, self._factor(name, feed.flow.kind))
            for name, feed in case.feeds.items()
        }
        self.amount: dict[tuple[str, str], int] = {}
        self.splits: list[SplitGroup] = []
        for name, feed in case.feeds.items():
            if feed.split is not None:
                self._split(name, feed)
        self.places: list[Place] = []
        self.beds: list[BedPlace] = []
        self.amounts: dict[int, int] = {}

    def _condition(self, name: str, feed: Feed) -> int:
        """Inputs for the temperature of a feed and, behind it, its pressure; position of the former."""
        first = self.inputs.number(f"feed {name}.temperature", feed.temperature)
        self.inputs.constant(f"feed {name}.pressure", feed.pressure or P_STANDARD)
        return first

    def _factor(self, feed: str, kind: str) -> float:
        return 1.0 / self.molar[feed] if kind == "mass flow" else 1.0

    def _split(self, name: str, feed: Feed) -> None:
        """Inputs for the flow of a feed to each bed; the rest takes what the others leave."""
        split = feed.split
        assert split is not None
        shares = any(number.kind == "fraction" for number in split.values.values())
        total = Linear(const=1.0) if shares else self.inputs.form(self.feed_flow[name])
        left, free, fixed = total, [], 0.0
        for bed in split.beds:
            if bed == split.rest:
                continue
            number = split.values[bed]
            label = f"{bed}.injected {name}" if not shares else f"{bed}.share of {name}"
            factor = 1.0 if shares else self._factor(name, number.kind)
            size = 1.0 if shares else feed.flow.now
            index = self.inputs.number(
                label, number, factor, role="split", feed=name, bed=int(bed.split()[1]), total=size
            )
            if number.free:
                free.append(len(self.inputs.numbers) - 1)
            else:
                fixed += number.now
            left = left - self.inputs.form(index)
            self.amount[name, bed] = index
        if split.rest is not None:
            label = f"{split.rest}.injected {name}" if not shares else f"{split.rest}.share of {name}"
            self.amount[name, split.rest] = self.inputs.combination(label, left)
        if shares:
            for bed in split.beds:
                self.amount[name, bed] = self.inputs.product(
                    f"{bed}.injected {name}", self.amount[name, bed], self.feed_flow[name]
                )
        if free:
            rest = int(split.rest.split()[1]) if split.rest else 0
            size = 1.0 if shares else feed.flow.now
            self.splits.append(SplitGroup(name, tuple(free), size, fixed, rest))

    def write(self) -> Layout:
        sections = list(self.case.train)
        pending: list[tuple[int, str]] = []
        for position, section in enumerate(sections):
            if section.kind == "bed":
                self._bed(section, tuple(pending))
                pending = []
            else:
                following = sections[position + 1].owner if position + 1 < len(sections) else ""
                pending = self._place(section, following, position)
        return Layout(
            operations=np.array(self.operations, dtype=np.int64).reshape(-1, 4),
            compositions=np.ascontiguousarray(self.compositions),
            places=tuple(self.places),
            beds=tuple(self.beds),
            feeds=tuple(self.feeds),
            feed_flow=self.feed_flow,
            feed_temperature=self.feed_temperature,
            amounts=self.amounts,
            splits=tuple(self.splits),
            species=len(self.case.species),
        )

    def _place(self, section: Section, following: str, position: int) -> list[tuple[int, str]]:
        first = len(self.operations)
        injections: list[tuple[int, str]] = []
        devices: list[Device] = []
        for number, step in enumerate(section.steps):
            if step.kind in ("take", "inject"):
                assert step.feed is not None
                self._inject(step.feed, following)
                injections.append((len(self.operations) - 1, step.feed))
            else:
                devices.append(
                    self._device(section, step, ("train", position, section.owner, number, step.kind))
                )
        if following.startswith("bed"):
            self._arrive(following, devices)
        last = len(self.operations) - 1
        self.places.append(Place(section.owner, section.kind, first, last, tuple(injections), tuple(devices)))
        return injections

    def _inject(self, feed: str, bed: str) -> None:
        amount = self.amount.get((feed, bed), self.feed_flow[feed])
        self.amounts[len(self.operations)] = amount
        given = self.case.feeds[feed].phase
        code = kernel.ADD if given in (None, self.case.fluid.phase) else kernel.ADD_OTHER
        self.operations.append((code, self.feeds.index(feed), amount, self.feed_temperature[feed]))

    def _device(self, section: Section, step: Step, path: tuple[str | int, ...]) -> Device:
        operation = len(self.operations)
        outlet, given = -1, "holds"
        if step.to is not None:
            outlet, given = self.inputs.number(f"{section.owner}.exit temperature", step.to), "to"
            self.operations.append((kernel.SET_TEMPERATURE, outlet, -1, -1))
        elif step.heat is not None:
            sign, given = (-1.0 if step.kind == "heat" else 1.0), "heat"
            heat = self.inputs.number(
                f"{section.owner}.heat {'added' if sign < 0 else 'removed'}", step.heat, sign
            )
            self.operations.append((kernel.REMOVE_HEAT, heat, -1, -1))
        else:
            self.operations.append((kernel.HOLD, -1, -1, -1))
        return Device(operation, step.kind == "heat", step.levels, given, outlet, path)

    def _arrive(self, bed: str, devices: list[Device]) -> None:
        """The stream before a bed: held temperature, own pressure."""
        given = next(section.bed for section in self.case.train if section.owner == bed)
        assert given is not None
        holder = next((device for device in devices if device.given == "holds"), None)
        held, pressure = -1, -1
        if holder is not None and given.inlet_temperature is not None:
            number = int(bed.split()[1])
            held = self.inputs.number(
                f"{bed}.inlet temperature", given.inlet_temperature, role="inlet temperature", bed=number
            )
            if holder.operation == len(self.operations) - 1:
                devices[devices.index(holder)] = Device(
                    holder.operation, holder.heating, holder.levels, holder.given, held, holder.path
                )
        if given.inlet_pressure is not None:
            pressure = self.inputs.number(f"{bed}.inlet pressure", given.inlet_pressure)
        self.operations.append((kernel.ARRIVE, held, pressure, holder.operation if holder else -1))

    def _bed(self, section: Section, injections: tuple[tuple[int, str], ...]) -> None:
        bed, owner, number = section.bed, section.owner, len(self.beds)
        assert bed is not None
        factor = 1.0 if bed.catalyst.kind == "mass" else float(bed.bulk_density or 1.0)
        running = bed.state != "bypassed"
        first = (
            self.inputs.number(f"{owner}.catalyst", bed.catalyst, factor)
            if running
            else self.inputs.constant(f"{owner}.catalyst", 0.0)
        )
        self.inputs.number(f"{owner}.catalyst activity", bed.catalyst_activity)
        self.inputs.number(f"{owner}.pressure drop factor", bed.pressure_drop_factor)
        each = self._activities(owner, bed.catalyst_activity, first + 1)
        inlet = len(self.operations) - 1
        held = self.operations[inlet][1] >= 0
        self.operations.append((kernel.BED, number, first, each))
        self.beds.append(BedPlace(owner, int(owner.split()[1]), inlet, inlet + 1, first, injections, held))

    def _activities(self, owner: str, activity: Number, common: int) -> int:
        """First of the activities of all reactions; -1 when one, at the input `common`, holds for all."""
        if not isinstance(activity, Activities):
            return -1
        own = {
            name: self.inputs.number(f"{owner}.catalyst activity of {name}", number)
            for name, number in activity.each.items()
        }
        listed = [
            self.inputs.combination(f"{owner}.activity for {name}", self.inputs.form(own.get(name, common)))
            for name in self.chemistry.reactions
        ]
        return listed[0]


def mole_fractions(case: Case, chemistry: CaseChemistry, feed: Feed) -> Array:
    """Mole fractions of a feed (S,), from mole or mass shares."""
    return composition.mole_fractions(case, chemistry.table, feed)


def lay_out(case: Case, chemistry: CaseChemistry, inputs: InputBuilder) -> Layout:
    """Operations and positions of a checked case; its inputs and free numbers go to `inputs`."""
    return _Writer(case, chemistry, inputs).write()
