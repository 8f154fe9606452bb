"""A case laid out as operations on one stream, with the positions of everything in the base vector."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed import train_pass as kernel
from reactorstage.case.model import Activities
from reactorstage.chemistry.constants import P_STANDARD
from reactorstage.train import composition
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.closures import Closure
from reactorstage.train.evaluation import SplitGroup
from reactorstage.train.forms import Linear, at, total
from reactorstage.train.gap_layout import GapWriter, fixes_heat, out_of_use
from reactorstage.train.inputs import InputBuilder

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Feed, Number, Recycle, Section, Split, Step

Array = NDArray[np.float64]
Index = NDArray[np.int64]


@dataclass(frozen=True)
class Device:
    """A heater or cooler: its operations, what gives its heat, its levels, and its place in the case.

    outlet is the input that fixes the temperature right behind it, -1 when that follows from elsewhere; last
    is its last operation where it has several (a stream that goes round it in part); exchanger its name, if
    any.
    """

    operation: int
    heating: bool
    levels: tuple[str, ...] | str
    given: str
    outlet: int
    path: tuple[str | int, ...]
    last: int = -1
    exchanger: str = ""

    @property
    def end(self) -> int:
        """The operation whose record is the stream behind it."""
        return max(self.last, self.operation)


@dataclass(frozen=True)
class Place:
    """Entry, gap or effluent: the operations first..last; injections as (operation, feed or recycle).

    others are removals, pressure drops and draws as (operation, kind, what).
    """

    owner: str
    kind: str
    first: int
    last: int
    injections: tuple[tuple[int, str], ...]
    devices: tuple[Device, ...]
    others: tuple[tuple[int, str, str], ...] = ()


@dataclass(frozen=True)
class BedPlace:
    """A bed: the operations of its inlet and exit, the first of its inputs, what is injected before it.

    in_service is false for one that is out of service: limits on every bed leave it out.
    """

    owner: str
    number: int
    inlet: int
    exit: int
    inputs: int
    injections: tuple[tuple[int, str], ...]
    held: bool
    in_service: bool = True


@dataclass(frozen=True)
class Layout:
    """Everything about positions: operations (K, 4), compositions (NF, S), places, beds, inputs.

    amounts are the inputs of the flows of feeds by operation, returned those of recycles; recycles gives the
    input of the flow and the operation that draws it off. shut names feeds of which a bed out of service
    shuts a part, bypassed exchangers that do nothing.
    """

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
    returned: dict[int, int] = field(default_factory=dict)
    recycles: dict[str, tuple[int, int]] = field(default_factory=dict)
    shut: frozenset[str] = frozenset()
    bypassed: tuple[str, ...] = ()
    closures: tuple[Closure, ...] = ()

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
        return self.enthalpy(device.operation - 1) - self.enthalpy(device.end)

    def amount(self, operation: int) -> int:
        """Input of the flow that an injection brings."""
        return self.amounts[operation] if operation in self.amounts else self.returned[operation]

    def feed_entering(self, feed: str) -> Linear:
        """Flow of a feed: as stated, or what enters where a bed out of service shuts a part of it."""
        if feed not in self.shut:
            return self.input(self.feed_flow[feed])
        index = self.feeds.index(feed)
        enters = [amount for k, amount in self.amounts.items() if self.operations[k][1] == index]
        return total([self.input(amount) for amount in enters])


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
        self.gaps = GapWriter(case, chemistry, inputs, self.operations)
        self.gaps.begin(self.feed_flow, self.compositions)
        self.entering = {**self.feed_temperature, **self.gaps.feed_inputs()}
        self.fate = {section.owner: fate_of_injection(section) for section in case.train if section.bed}
        self.amount: dict[tuple[str, str], int] = {}
        self.splits: list[SplitGroup] = []
        for name, feed in case.feeds.items():
            if feed.split is not None:
                self._split(name, feed, self.feed_flow[name])
        for name, recycle in case.recycles.items():
            if recycle.split is not None:
                self._split(name, recycle, self.gaps.loops[name].flow)
        self.places: list[Place] = []
        self.beds: list[BedPlace] = []
        self.amounts: dict[int, int] = {}
        self.returned: dict[int, int] = {}
        self.shut: set[str] = set()

    def _condition(self, name: str, feed: Feed) -> int:
        """Inputs for the temperature of a feed and, behind it, its pressure; position of the former."""
        first = self.inputs.number(f"feed {name}.temperature", feed.temperature)
        self.inputs.constant(f"feed {name}.pressure", feed.pressure or P_STANDARD)
        return first

    def _factor(self, feed: str, kind: str) -> float:
        return 1.0 / self.molar[feed] if kind == "mass flow" else 1.0

    def _split(self, name: str, feed: Feed | Recycle, flow: int) -> None:
        """Inputs for the flow of a feed to each bed; the rest takes what the others leave."""
        split = feed.split
        assert split is not None
        shares = any(number.kind == "fraction" for number in split.values.values())
        whole = Linear(const=1.0) if shares else self.inputs.form(flow)
        left, free, fixed = whole, [], 0.0
        for bed in split.beds:
            if bed == split.rest:
                continue
            number = self._settled(split, bed)
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
                    f"{bed}.injected {name}", self.amount[name, bed], flow
                )
        if free:
            rest = int(split.rest.split()[1]) if split.rest else 0
            size = 1.0 if shares else feed.flow.now
            steps = [step for section in self.case.train for step in section.steps]
            taken = any(step.kind == "take" and step.feed == name for step in steps)
            self.splits.append(SplitGroup(name, tuple(free), size, fixed, rest, taken))

    def _settled(self, split: Split, bed: str) -> Number:
        """The entry of a bed; that of one out of service is not free."""
        number = split.values[bed]
        return number if not self.fate[bed] else replace(number, low=None, high=None)

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
        layout = Layout(
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
            returned=self.returned,
            recycles={name: (loop.flow, self.gaps.drawn[name]) for name, loop in self.gaps.loops.items()},
            shut=frozenset(self.shut),
            bypassed=out_of_use(self.case),
        )
        return replace(layout, closures=self.gaps.closures(layout))

    def _place(self, section: Section, following: str, position: int) -> list[tuple[int, str]]:
        first = len(self.operations)
        injections: list[tuple[int, str]] = []
        devices: list[Device] = []
        others: list[tuple[int, str, str]] = []
        for number, step in enumerate(section.steps):
            path = ("train", position, section.owner, number, step.kind)
            if step.kind in ("take", "inject"):
                assert step.feed is not None
                injections += self._inject(step, following)
            elif step.kind in ("heat", "cool"):
                if not self._unused(step):
                    devices.append(self._device(section, step, path))
            else:
                others.append((len(self.operations), step.kind, ", ".join(step.removed) or step.feed or ""))
                self._other(section.owner, step)
        if following.startswith("bed"):
            self._arrive(following, devices)
        last = len(self.operations) - 1
        self.places.append(Place(section.owner, section.kind, first, last, tuple(injections), tuple(devices),
                                 tuple(others)))  # fmt: skip
        return injections

    def _unused(self, step: Step) -> bool:
        """A device that is bypassed, or whose exchanger is."""
        return step.bypassed or step.exchanger in out_of_use(self.case)

    def _other(self, owner: str, step: Step) -> None:
        if step.kind == "remove":
            self.gaps.remove(owner, step)
        elif step.kind == "pressure drop":
            self.gaps.pressure_drop(owner, step)
        else:
            self.gaps.draw(step)

    def _inject(self, step: Step, bed: str) -> list[tuple[int, str]]:
        """A feed or recycle as injected before a bed, with what moves here from beds out of service."""
        name = step.feed or ""
        flow = self.gaps.loops[name].flow if name in self.gaps.loops else self.feed_flow[name]
        own = self.amount.get((name, bed), flow)
        if step.kind == "inject" and self.fate.get(bed):
            self.shut |= {name} if self.fate[bed] == SHUT else set()
            return []
        moved = [
            self.amount[name, b] for b, to in self.fate.items() if to == bed and (name, b) in self.amount
        ]
        return [(self._add(name, amount), name) for amount in (own, *moved)]

    def _add(self, name: str, amount: int) -> int:
        operation = len(self.operations)
        if name in self.gaps.loops:
            self.returned[operation] = amount
            self.gaps.bring_back(name, amount)
        else:
            self.amounts[operation] = amount
            given = self.case.feeds[name].phase
            code = kernel.ADD if given in (None, self.case.fluid.phase) else kernel.ADD_OTHER
            self.operations.append((code, self.feeds.index(name), amount, self.entering[name]))
        return operation

    def _device(self, section: Section, step: Step, path: tuple[str | int, ...]) -> Device:
        operation = len(self.operations)
        outlet, given, last = -1, "holds", -1
        if step.exchanger is not None:
            given = "holds" if fixes_heat(step) else "exchanger"
            operation, last = self.gaps.side(section.owner, step)
        if step.area is not None:
            given = "area"
            self.gaps.by_area(section.owner, step)
        elif step.to is not None:
            outlet, given = self.inputs.number(f"{section.owner}.exit temperature", step.to), "to"
            self.operations.append((kernel.SET_TEMPERATURE, outlet, -1, -1))
        elif step.heat is not None:
            sign, given = (-1.0 if step.kind == "heat" else 1.0), "heat"
            heat = self.inputs.number(
                f"{section.owner}.heat {'added' if sign < 0 else 'removed'}", step.heat, sign
            )
            self.operations.append((kernel.REMOVE_HEAT, heat, -1, -1))
        elif given == "holds":
            self.operations.append((kernel.HOLD, -1, -1, -1))
        heating, exchanger = step.kind == "heat", step.exchanger or ""
        return Device(operation, heating, step.levels, given, outlet, path, last, exchanger)

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
                devices[devices.index(holder)] = replace(holder, outlet=held)
        if given.inlet_pressure is not None:
            pressure = self.inputs.number(f"{bed}.inlet pressure", given.inlet_pressure)
        self.operations.append((kernel.ARRIVE, held, pressure, holder.operation if holder else -1))

    def _bed(self, section: Section, injections: tuple[tuple[int, str], ...]) -> None:
        bed, owner, number = section.bed, section.owner, len(self.beds)
        assert bed is not None
        factor = 1.0 if bed.catalyst.kind == "mass" else float(bed.bulk_density or 1.0)
        running = bed.state == "running"
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
        place = BedPlace(owner, int(owner.split()[1]), inlet, inlet + 1, first, injections, held)
        self.beds.append(replace(place, in_service=bed.state != "out of service"))

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


SHUT = "shut"


def fate_of_injection(section: Section) -> str:
    """Where the injection before a bed goes: empty for into it, `shut`, or the bed that gets it."""
    bed = section.bed
    if bed is None or bed.state != "out of service":
        return ""
    return (bed.its_injection or "").removeprefix("moved to ")


def mole_fractions(case: Case, chemistry: CaseChemistry, feed: Feed) -> Array:
    """Mole fractions of a feed (S,), from mole or mass shares."""
    return composition.mole_fractions(case, chemistry.table, feed)


def lay_out(case: Case, chemistry: CaseChemistry, inputs: InputBuilder) -> Layout:
    """Operations and positions of a checked case; its inputs and free numbers go to `inputs`."""
    return _Writer(case, chemistry, inputs).write()
