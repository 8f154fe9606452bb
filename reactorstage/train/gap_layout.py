"""Lays out exchangers, recycles, removal and pressure drops as operations, and gathers their closures."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from reactorstage.bed import gap_steps as steps
from reactorstage.bed import train_pass as kernel
from reactorstage.chemistry.constants import P_STANDARD
from reactorstage.chemistry.thermo import cp, h
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.closures import AREA_OF, Closure, Exchange, FeedHeat, HeldHeat, Return, Size
from reactorstage.train.forms import Linear, total
from reactorstage.train.inputs import InputBuilder

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Exchanger, Recycle, Step
    from reactorstage.train.layout import Layout

WARM, HEATED_BY = 600.0, 400.0
"""Search range of exchanged heat: all feeds, with their heat capacity at 600 K, through 400 K."""

BACKWARDS = 0.25
"""Part of that range to which an exchanger may be driven the wrong way, so that this can be shown."""

T_SEARCH = (150.0, 1500.0)
"""Search range of the temperature of a feed behind an exchanger, K."""


EFFECTIVENESS_SEARCH = (-1.0, 2.0)
"""Search range of an effectiveness that follows: beyond 1 there is no exchanger, which the limits say."""

SMALL_DIFFERENCE = 20.0
"""Kelvin at which all the heat of the search range would pass the largest area that is searched."""


def fixes_heat(step: Step) -> bool:
    """Whether a heater or cooler is given by something of its own beside the exchanger that it is part of."""
    return step.holds is not None or step.to is not None or step.heat is not None


def out_of_use(case: Case) -> tuple[str, ...]:
    """Exchangers that exchange nothing: bypassed themselves, or by one of the steps that they are part of."""
    steps = [step for section in case.train for step in section.steps]
    passed = {step.exchanger for step in steps if step.bypassed}
    return tuple(name for name, one in case.exchangers.items() if one.state == "bypassed" or name in passed)


@dataclass
class Sides:
    """An exchanger while it is laid out: its inputs and the operations of its two streams.

    heat is the heat that passes; cold and hot what the stream on that side is heated or cooled by as if all
    of it went through; streams: owner, operation before, operation behind it, by "heat" and "cool".
    """

    name: str
    exchanger: Exchanger
    heat: int
    through: dict[str, int]
    bypassed: dict[str, int]
    size: dict[str, int]
    unknown: int
    feed: int = -1
    held: str = ""
    size_unknown: int = -1
    streams: dict[str, tuple[str, int, int]] = field(default_factory=dict)


@dataclass(frozen=True)
class Loop:
    """A recycle while it is laid out: inputs of its S fractions, its molar enthalpy and its flow."""

    name: str
    fractions: int
    enthalpy: int
    flow: int
    unknown: int


@dataclass(frozen=True)
class Through:
    """A device whose heat follows from an area and the temperature of a level."""

    owner: str
    operation: int
    level: str
    T: float
    heating: bool
    heat: int
    size: dict[str, int]
    unknown: int


class GapWriter:
    """Writes operations of gaps that are more than mixing and heat given by the case."""

    def __init__(
        self,
        case: Case,
        chemistry: CaseChemistry,
        inputs: InputBuilder,
        operations: list[tuple[int, int, int, int]],
    ):
        self.case, self.chemistry, self.inputs, self.operations = case, chemistry, inputs, operations
        self.loops: dict[str, Loop] = {}
        self.sides: dict[str, Sides] = {}
        self.areas: list[Through] = []
        self.drawn: dict[str, int] = {}
        self.most = 1.0

    def begin(self, feed_flow: dict[str, int], compositions: np.ndarray) -> None:
        """Numbers of exchangers and recycles, once those of the feeds are there."""
        warm = compositions @ cp(self.chemistry.table, WARM) * HEATED_BY
        flows = [self.inputs.span(index)[1] for index in feed_flow.values()]
        self.most = float(np.dot(flows, warm))
        mixture = np.array(flows) @ compositions
        for name, exchanger in self.case.exchangers.items():
            if name not in out_of_use(self.case):
                self.sides[name] = self._sides(name, exchanger)
        for name, recycle in self.case.recycles.items():
            self.loops[name] = self._loop(name, recycle, mixture / mixture.sum())

    def _heat(self, name: str) -> int:
        number = self.inputs.unknown(name, 0.0, -BACKWARDS * self.most, self.most, "power")
        return number

    def _sides(self, name: str, exchanger: Exchanger) -> Sides:
        """Inputs of one exchanger: heat y that all of a bypassed stream would take up, Q = y (1 - b)."""
        count, owner = self.inputs.unknown_count, f"exchanger {name}"
        y = self._heat(f"{owner}.heat of its closure")
        heat, through, bypassed, shares = y, {"heat": y, "cool": y}, {}, {}
        for verb, share, words in (
            ("heat", exchanger.cold_bypass, "cold bypass"),
            ("cool", exchanger.hot_bypass, "hot bypass"),
        ):
            if share is None:
                continue
            b = self.inputs.number(f"{owner}.{words}", share)
            shares[words] = b
            passing = self.inputs.combination(
                f"{owner}.share passing", Linear(const=1.0) - self.inputs.form(b)
            )
            heat = self.inputs.product(f"{owner}.heat passed", y, passing)
            bypassed = {verb: self.inputs.product(f"{owner}.heat not passed", y, b)}
            through = {**dict.fromkeys(through, heat), verb: y}
        size = self._size(owner, exchanger.effectiveness, exchanger.area, exchanger.coefficient,
                          exchanger.fouling_resistance)  # fmt: skip
        found = Sides(name, exchanger, heat, through, bypassed, size | shares, count)
        if exchanger.with_feed is not None:
            T = self.case.feeds[exchanger.with_feed].temperature.now
            found.feed = self.inputs.unknown(f"{owner}.temperature of feed", T, *T_SEARCH, "temperature")
            pressure = self.case.feeds[exchanger.with_feed].pressure or P_STANDARD
            self.inputs.constant(f"{owner}.pressure of feed", pressure)
        found.held = self._held_side(name)
        if found.held:
            found.size_unknown = self.inputs.unknown_count
            found.size |= self._size_taken(owner, exchanger)
        return found

    def _held_side(self, name: str) -> str:
        """Verb of the stream whose own heat is fixed by a temperature or an amount; empty for none."""
        steps = [step for section in self.case.train for step in section.steps if step.exchanger == name]
        return next((step.kind for step in steps if fixes_heat(step)), "")

    def _size_taken(self, owner: str, exchanger: Exchanger) -> dict[str, int]:
        """The size as an unknown: an area where the coefficient is given, else the effectiveness."""
        if exchanger.coefficient is None:
            index = self.inputs.unknown(f"{owner}.effectiveness", 0.5, *EFFECTIVENESS_SEARCH, "fraction")
            return {"effectiveness": index}
        most = self.most / (exchanger.coefficient.now * SMALL_DIFFERENCE)
        return {"area": self.inputs.unknown(f"{owner}.area", 1e-3 * most, 0.0, most, "area")}

    def _size(self, owner: str, effectiveness: object, *area: object) -> dict[str, int]:
        names = ("effectiveness", "area", "coefficient", "fouling resistance")
        given = zip(names, (effectiveness, *area), strict=True)
        return {
            words: self.inputs.number(f"{owner}.{words}", number)  # type: ignore[arg-type]
            for words, number in given
            if number is not None
        }

    def _loop(self, name: str, recycle: Recycle, mixture: np.ndarray) -> Loop:
        """Inputs of one recycle: it begins with the mixture of all feeds at a warm temperature."""
        owner, count = f"recycle {name}", self.inputs.unknown_count
        fractions = [
            self.inputs.unknown(f"{owner}.fraction of {species}", float(z), -0.2, 1.2, "fraction")
            for species, z in zip(self.chemistry.species, mixture, strict=True)
        ]
        low, now, high = (float(mixture @ h(self.chemistry.table, T)) for T in (200.0, WARM, T_SEARCH[1]))
        spread = 4.0 * (high - low)
        enthalpy = self.inputs.unknown(f"{owner}.enthalpy", now, now - spread, now + spread, "molar energy")
        flow = self.inputs.number(f"{owner}.flow", recycle.flow)
        return Loop(name, fractions[0], enthalpy, flow, count)

    def feed_inputs(self) -> dict[str, int]:
        """Inputs of the temperatures of feeds that come from an exchanger."""
        return {
            one.exchanger.with_feed: one.feed
            for one in self.sides.values()
            if one.exchanger.with_feed is not None
        }

    def side(self, owner: str, step: Step) -> tuple[int, int]:
        """One stream of an exchanger; its first and last operation, written here unless it fixes the heat."""
        one = self.sides[step.exchanger or ""]
        sign = -1.0 if step.kind == "heat" else 1.0
        first = len(self.operations)
        if fixes_heat(step):
            one.streams[step.kind] = (owner, first - 1, first)
            return first, first
        one.streams[step.kind] = (owner, first - 1, first)
        self._remove_heat(one.name, one.through[step.kind], sign)
        if step.kind in one.bypassed:
            self._remove_heat(one.name, one.bypassed[step.kind], -sign)
        return first, len(self.operations) - 1

    def _remove_heat(self, name: str, heat: int, sign: float) -> None:
        index = self.inputs.scaled(f"exchanger {name}.heat of a stream", heat, sign)
        self.operations.append((kernel.REMOVE_HEAT, index, -1, -1))

    def by_area(self, owner: str, step: Step) -> None:
        """A heater or cooler whose heat follows from its area."""
        level = step.levels[0]
        assert self.case.heat_levels is not None
        given = self.case.heat_levels.levels[level]
        heating = step.kind == "heat"
        T = given.heats_up_to if heating else given.cools_down_to
        count = self.inputs.unknown_count
        heat = self._heat(f"{owner}.heat through area")
        size = self._size(owner, None, step.area, step.coefficient, step.fouling)
        operation = len(self.operations)
        self.areas.append(Through(owner, operation, level, float(T or 0.0), heating, heat, size, count))
        index = self.inputs.scaled(f"{owner}.heat of the stream", heat, -1.0 if heating else 1.0)
        self.operations.append((kernel.REMOVE_HEAT, index, -1, -1))

    def remove(self, owner: str, step: Step) -> None:
        """Removal of shares or of flows of some species."""
        kind = next(iter(step.removed.values())).kind
        indices = [
            self.inputs.number(f"{owner}.{removed_words(kind)} {name}", step.removed[name])
            if name in step.removed
            else self.inputs.constant(f"{owner}.nothing of {name}", 0.0)
            for name in self.chemistry.species
        ]
        code = steps.REMOVE_SHARES if kind == "fraction" else steps.REMOVE_FLOWS
        self.operations.append((code, indices[0], -1, -1))

    def pressure_drop(self, owner: str, step: Step) -> None:
        assert step.pressure is not None
        index = self.inputs.number(f"{owner}.pressure drop", step.pressure)
        self.operations.append((steps.DROP, index, -1, -1))

    def draw(self, step: Step) -> None:
        """The stream that a recycle takes along."""
        loop = self.loops[step.feed or ""]
        self.drawn[loop.name] = len(self.operations)
        self.operations.append((steps.DRAW, loop.flow, -1, -1))

    def bring_back(self, recycle: str, amount: int) -> None:
        """A recycle, or its part, mixed into the stream."""
        loop = self.loops[recycle]
        self.operations.append((steps.ADD_DRAWN, loop.fractions, loop.enthalpy, amount))

    def closures(self, layout: Layout) -> tuple[Closure, ...]:
        """The closures, in the order of their internal numbers."""
        users = len(self.inputs.numbers)
        found: list[tuple[int, Closure]] = []
        for one in self.sides.values():
            found += [(max(one.unknown, one.size_unknown), self._exchange(layout, one, users))]
            if one.held:
                found += [(one.unknown, self._held_heat(layout, one, users))]
            if one.feed >= 0:
                found += [(one.unknown + 1, self._feed_heat(layout, one, users))]
        for loop in self.loops.values():
            found += [(loop.unknown, self._return(layout, loop, users))]
        for through in self.areas:
            found += [(through.unknown, self._through(layout, through, users))]
        return tuple(closure for _, closure in sorted(found, key=lambda pair: pair[0]))

    def _ends(self, layout: Layout, one: Sides, verb: str) -> tuple[str, tuple[Linear, Linear]]:
        """Owner, and temperatures before and behind the exchanger, of one of its streams."""
        if verb in one.streams:
            owner, before, behind = one.streams[verb]
            return owner, (layout.temperature(before), layout.temperature(behind))
        feed = one.exchanger.with_feed or ""
        return f"feed {feed}", (
            layout.input(layout.feed_temperature[feed]),
            layout.input(one.feed),
        )

    def _exchange(self, layout: Layout, one: Sides, users: int) -> Exchange:
        hot, cold = self._ends(layout, one, "cool"), self._ends(layout, one, "heat")
        return Exchange(
            name=one.name,
            from_=hot[0],
            to=cold[0],
            hot=hot[1],
            cold=cold[1],
            heat=layout.input(one.heat),
            size=_size_of(layout, one.size),
            parallel=one.exchanger.arrangement == "parallel flow",
            approach=one.exchanger.minimum_approach,
            unknown=users + max(one.unknown, one.size_unknown),
            sized=bool(one.held),
        )

    def _held_heat(self, layout: Layout, one: Sides, users: int) -> HeldHeat:
        _, before, behind = one.streams[one.held]
        sign = 1.0 if one.held == "heat" else -1.0
        taken = (layout.enthalpy(behind) - layout.enthalpy(before)) * sign
        return HeldHeat(one.name, layout.input(one.heat), taken, users + one.unknown)

    def _feed_heat(self, layout: Layout, one: Sides, users: int) -> FeedHeat:
        feed = one.exchanger.with_feed or ""
        enters = [
            layout.input(amount)
            for operation, amount in layout.amounts.items()
            if layout.operations[operation][1] == layout.feeds.index(feed)
        ]
        return FeedHeat(
            name=one.name,
            flow=total(enters),
            fractions=layout.compositions[layout.feeds.index(feed)],
            before=layout.input(layout.feed_temperature[feed]),
            after=layout.input(one.feed),
            heat=layout.input(one.heat),
            sign=1.0 if "cool" in one.streams else -1.0,
            mixture=self.chemistry.mixture,
            pressure=self.case.feeds[feed].pressure or P_STANDARD,
            phase=self.case.feeds[feed].phase,
            unknown=users + one.unknown + 1,
        )

    def _return(self, layout: Layout, loop: Loop, users: int) -> Return:
        S = layout.species
        return Return(
            name=loop.name,
            fractions=tuple(layout.input(loop.fractions + s) for s in range(S)),
            enthalpy=layout.input(loop.enthalpy),
            record=self.drawn[loop.name] * layout.width,
            unknowns=tuple(users + loop.unknown + s for s in range(S + 1)),
        )

    def _through(self, layout: Layout, one: Through, users: int) -> Exchange:
        stream = (layout.temperature(one.operation - 1), layout.temperature(one.operation))
        level = (Linear(const=one.T), Linear(const=one.T))
        hot, cold = (level, stream) if one.heating else (stream, level)
        names = (f"level {one.level}", one.owner)
        from_, to = names if one.heating else names[::-1]
        return Exchange(
            f"{AREA_OF}{one.owner}", from_, to, hot, cold, layout.input(one.heat),
            _size_of(layout, one.size), False, 0.0, users + one.unknown,
        )  # fmt: skip


def removed_words(kind: str) -> str:
    """Words of the number that a removal is given by."""
    return "share removed of" if kind == "fraction" else "flow removed of"


def _size_of(layout: Layout, size: dict[str, int]) -> Size:
    forms = {words: layout.input(index) for words, index in size.items()}
    return Size(
        forms.get("effectiveness"),
        forms.get("area"),
        forms.get("coefficient"),
        forms.get("fouling resistance"),
        forms.get("cold bypass"),
        forms.get("hot bypass"),
    )
