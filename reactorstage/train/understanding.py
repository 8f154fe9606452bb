"""What was understood of a case, for `check`, and conflicts that arithmetic can see before any run."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.case import units
from reactorstage.chemistry.critical import Critical
from reactorstage.chemistry.fluid import CubicStream, PlainLiquid
from reactorstage.chemistry.rates import ln_K_of_laws
from reactorstage.chemistry.reaction import data_range, heat_of_reaction, imbalance
from reactorstage.chemistry.thermo import cp
from reactorstage.train.evaluation import FreeNumber, LimitRow
from reactorstage.train.law_words import LawWords, law_words
from reactorstage.train.limits import names_of
from reactorstage.train.temperatures import at_inlets

if TYPE_CHECKING:
    from reactorstage.train.programme import Model, TrainProgramme

Array = NDArray[np.float64]
Tell = Callable[[float, str], str]

SPAN = 100.0
"""Kelvin between the two temperatures at which heats and equilibrium constants are shown."""


@dataclass(frozen=True)
class StreamRow:
    """A feed: flow mol/s, mass flow kg/s, T in K, mole fractions; (place, flow now mol/s) where it enters."""

    name: str
    flow: float
    mass_flow: float
    T: float
    composition: dict[str, float]
    enters: tuple[tuple[str, float], ...]


@dataclass(frozen=True)
class ReactionRow:
    """A reaction: equation, worst atom imbalance, heat [J/mol] and K (standard pressure 1 bar) at two T [K].

    K is that by which the law comes to rest, law what goes beyond a power law.
    orders are those of the forward rate; order_in_split of the split reactant, None where it takes no part.
    """

    name: str
    equation: str
    imbalance: float
    T: tuple[float, float]
    heat: tuple[float, float]
    K: tuple[float, float]
    reversible: bool
    rate_per: str
    driven_by: str
    orders: dict[str, float]
    order_in_split: float | None
    source: str
    law: LawWords


@dataclass(frozen=True)
class FluidRow:
    """A species under the equation of state: critical T in K, p in Pa, acentric factor, source; or density.

    Where the fluid is a liquid of given densities, density [kg/m3] at the temperature of the first feed.
    """

    name: str
    critical: Critical | None
    density: float | None


@dataclass(frozen=True)
class PriceRow:
    """A price: label, quantity, "costs" or "earns", the text of the amount."""

    label: str
    of: str
    way: str
    amount: str


@dataclass(frozen=True)
class Understanding:
    """Everything that `check` prints; degrees holds (what, what fixes it); split_reactant may be empty."""

    streams: tuple[StreamRow, ...]
    fluid: tuple[FluidRow, ...]
    fluid_words: str
    reactions: tuple[ReactionRow, ...]
    limits: tuple[LimitRow, ...]
    prices: tuple[PriceRow, ...]
    numbers: tuple[FreeNumber, ...]
    degrees: tuple[tuple[str, str], ...]
    split_reactant: str
    warnings: tuple[str, ...]


def understand(programme: TrainProgramme, tell: Tell | None = None) -> Understanding:
    """Streams, reactions, limits, prices, numbers and degrees of freedom of a compiled case.

    tell(value, kind) writes a number with its unit into the warnings; by default in trade units.
    """
    tell = tell or _shown
    model = programme.model
    reactant = split_reactant(model)
    return Understanding(
        streams=tuple(_streams(model)),
        fluid=tuple(_fluid(model)),
        fluid_words=fluid_words(model),
        reactions=tuple(_reactions(model, reactant)),
        limits=tuple(row for row in programme.limits if row.label != "heat ladder"),
        prices=tuple(_prices(model)),
        numbers=tuple(number for number in programme.numbers if not number.internal),
        degrees=tuple(_degrees(model)),
        split_reactant=reactant,
        warnings=tuple(_warnings(programme, reactant, tell)),
    )


def split_reactant(model: Model) -> str:
    """The species that a split feed brings and reactions consume; empty when no feed is split."""
    nu, names = model.chemistry.laws.nu, model.chemistry.species
    for index, feed in enumerate(model.layout.feeds):
        if model.case.feeds[feed].split is not None:
            row = model.layout.compositions[index] * (nu < 0.0).any(axis=0)
            if row.max() > 0.0:
                return names[int(row.argmax())]
    return ""


def _streams(model: Model) -> Iterator[StreamRow]:
    u, _ = model.inputs.values(np.array([number.now for number in model.numbers]))
    layout, names = model.layout, model.chemistry.species
    for index, feed in enumerate(layout.feeds):
        flow = float(u[layout.feed_flow[feed]])
        row = layout.compositions[index]
        enters = tuple(
            (place.owner, float(u[layout.amounts[operation]]))
            for place in layout.places
            for operation, name in place.injections
            if name == feed
        )
        shares = {name: float(y) for name, y in zip(names, row, strict=True) if y > 0.0}
        mass = flow * float(row @ model.chemistry.table.molar_mass)
        yield StreamRow(feed, flow, mass, float(u[layout.feed_temperature[feed]]), shares, enters)


def fluid_words(model: Model) -> str:
    """The fluid in words: "ideal gas", "Soave 1972, liquid", ..."""
    fluid = model.case.fluid
    return fluid.density + (f", {fluid.phase}" if fluid.phase else "")


def _fluid(model: Model) -> Iterator[FluidRow]:
    fluid, names = model.chemistry.fluid, model.chemistry.species
    if isinstance(fluid, CubicStream):
        for name, critical in zip(names, fluid.equation.critical, strict=True):
            yield FluidRow(name, critical, None)
    elif isinstance(fluid, PlainLiquid):
        T = next(iter(model.case.feeds.values())).temperature.now
        for name, density in zip(names, fluid.densities(T), strict=True):
            yield FluidRow(name, None, float(density))


def _reactions(model: Model, reactant: str) -> Iterator[ReactionRow]:
    chemistry, case = model.chemistry, model.case
    T_first = at_inlets(case, chemistry.table)[0].now
    for r, name in enumerate(chemistry.reactions):
        row = chemistry.laws.nu[r : r + 1]
        low, high = data_range(chemistry.table, row[0])
        T = tuple(float(np.clip(one, low, high)) for one in (T_first, T_first + SPAN))
        orders = {
            s: float(a) for s, a in zip(chemistry.species, chemistry.laws.alpha[r], strict=True) if a != 0.0
        }
        consumed = bool(reactant) and bool(row[0, chemistry.species.index(reactant)] < 0.0)
        takes_part = consumed or reactant in orders
        yield ReactionRow(
            name=name,
            equation=case.reactions[name].equation,
            imbalance=max(
                (abs(v) for v in imbalance(chemistry.equations[r], chemistry.table).values()), default=0.0
            ),
            T=(T[0], T[1]),
            heat=tuple(float(heat_of_reaction(chemistry.table, row, one)[0]) for one in T),  # type: ignore[arg-type]
            K=tuple(float(np.exp(ln_K_of_laws(chemistry.laws, chemistry.table, one)[r])) for one in T),  # type: ignore[arg-type]
            reversible=chemistry.equations[r].reversible,
            rate_per=case.reactions[name].rate_per,
            driven_by=case.reactions[name].driven_by,
            orders=orders,
            order_in_split=orders.get(reactant, 0.0) if takes_part else None,
            source=case.reactions[name].source or "",
            law=law_words(case.reactions[name], name, chemistry, (T[0], T[1])),
        )


def _prices(model: Model) -> Iterator[PriceRow]:
    for label, price in model.case.prices.items():
        way, raw = ("costs", price.costs) if price.costs is not None else ("earns", price.earns)
        yield PriceRow(label, price.of, way, raw.text if raw else "")
    levels = model.case.heat_levels.levels if model.case.heat_levels else {}
    for name, level in levels.items():
        way, raw = ("costs", level.costs) if level.costs is not None else ("earns", level.earns)
        yield PriceRow(f"level {name}", f"level {name}.heat", way, raw.text if raw else "nothing")


def _degrees(model: Model) -> Iterator[tuple[str, str]]:
    """Every inlet temperature and every division with what fixes it."""
    layout = model.layout
    free = {number.name for number in model.numbers}
    before = {bed.inlet: place for bed in layout.beds for place in layout.places if place.last == bed.inlet}
    for bed in layout.beds:
        place = before.get(bed.inlet)
        what = f"{bed.owner}.inlet temperature"
        if bed.held and place is not None:
            device = next(d for d in place.devices if d.given == "holds")
            state = "free" if what in free else "fixed"
            yield what, f"held by the {'heater' if device.heating else 'cooler'} of {place.owner} ({state})"
        elif place is not None and place.devices:
            yield what, f"follows from the exchanger of {place.owner}"
        else:
            yield what, "follows from what arrives"
    for feed in layout.feeds:
        split = model.case.feeds[feed].split
        if split is not None:
            count = sum(number.role == "split" and number.feed == feed for number in model.numbers)
            rest = f"{split.rest} takes the rest" if split.rest else "all given"
            counted = f"{count} free number{'' if count == 1 else 's'}"
            yield f"division of {feed} over {len(split.beds)} beds", f"{counted}, {rest}"
    users = [number for number in model.numbers if not number.internal]
    yield "free numbers in all", str(len(users))


def _warnings(programme: TrainProgramme, reactant: str, tell: Tell) -> Iterator[str]:
    model = programme.model
    yield from _empty_limits(model)
    yield from _unused_species(model)
    yield from _injection_sums(model, tell)
    yield from _rise_against_exit(programme, reactant, tell)
    for owner in dict.fromkeys(model.ladder.unpriced):
        yield f"Heat of {owner} carries no price: the answer may move heat there because it is free."


def _empty_limits(model: Model) -> Iterator[str]:
    labels = {bound.row.label for bound in model.bounds}
    for label, limit in model.case.limits.items():
        if label not in labels:
            found = ", ".join(owner for owner, _ in names_of(limit.of, model.layout)) or "nothing"
            yield f"Limit {label!r} on {limit.of!r} holds nothing: {found} has nothing there that can move."


def _unused_species(model: Model) -> Iterator[str]:
    for s, name in enumerate(model.chemistry.species):
        if (
            not (model.chemistry.laws.nu[:, s] != 0.0).any()
            and not (model.layout.compositions[:, s] > 0.0).any()
        ):
            yield f"Species {name!r} is in no feed and in no reaction."


def _injection_sums(model: Model, tell: Tell) -> Iterator[str]:
    """The least and the most that limits on injections allow in all, against the flow of the feed."""
    u, _ = model.inputs.values(np.array([number.now for number in model.numbers]))
    for feed in model.layout.feeds:
        if model.case.feeds[feed].split is None:
            continue
        beds = [bed.owner for bed in model.layout.beds if any(name == feed for _, name in bed.injections)]
        index = model.layout.feeds.index(feed)
        enters = [a for k, a in model.layout.amounts.items() if model.layout.operations[k][1] == index]
        total = float(u[enters].sum())
        ends = {
            (b.row.owner, b.row.direction): b.row.bound
            for b in model.bounds
            if b.row.quantity.endswith(f".injected {feed}")
        }
        least = sum(ends.get((bed, "at least"), 0.0) for bed in beds)
        most = sum(ends.get((bed, "at most"), np.inf) for bed in beds)
        flows = f"there are {tell(total, 'molar flow')} of {feed}"
        if least > total * (1.0 + 1e-9):
            yield f"Limits on injections ask for at least {tell(least, 'molar flow')} in all; {flows}."
        if most < total * (1.0 - 1e-9):
            yield f"Limits on injections let at most {tell(most, 'molar flow')} in; {flows}."


def _rise_against_exit(programme: TrainProgramme, reactant: str, tell: Tell) -> Iterator[str]:
    """Lowest allowed inlet plus the rise of the smallest injection, against the highest allowed exit."""
    model = programme.model
    if not reactant:
        return
    bounds = {(b.row.quantity, b.row.direction): b.row.bound for b in model.bounds}
    for bed in model.layout.beds:
        exit_ = min(
            bounds.get((f"{bed.owner}.{which} temperature", "at most"), np.inf) for which in ("exit", "peak")
        )
        inlet = _lowest_inlet(model, bed.owner, bounds)
        least = sum(
            bounds.get((f"{bed.owner}.injected {feed}", "at least"), 0.0) for _, feed in bed.injections
        )
        if not np.isfinite(exit_) or inlet is None or least <= 0.0:
            continue
        rise = _rise_of(model, reactant, bed.injections[0][1], least, inlet)
        if inlet + rise > exit_:
            yield (
                f"{bed.owner}: lowest inlet {tell(inlet, 'temperature')} plus the rise of its smallest "
                f"injection ({tell(least, 'molar flow')}, about {tell(rise, 'temperature difference')}) is "
                f"{tell(inlet + rise, 'temperature')}, above the limit of {tell(exit_, 'temperature')} "
                "at its exit."
            )


def _shown(value: float, kind: str) -> str:
    return f"{units.to_display(value, kind):.4g} {units.display_unit(kind)}"


def _lowest_inlet(model: Model, owner: str, bounds: dict[tuple[str, str], float]) -> float | None:
    name = f"{owner}.inlet temperature"
    number = next((n for n in model.numbers if n.name == name), None)
    given = next((s.bed.inlet_temperature for s in model.case.train if s.bed and s.owner == owner), None)
    low = number.low if number is not None else (given.now if given is not None else None)
    limit = bounds.get((name, "at least"))
    return low if limit is None else max(limit, low if low is not None else limit)


def _rise_of(model: Model, reactant: str, feed: str, flow: float, T: float) -> float:
    """Adiabatic rise when the split reactant in `flow` mol/s of a feed is used up by its mildest reaction.

    The stream is taken as all that enters the train, which is at least what any bed sees.
    """
    chemistry, layout = model.chemistry, model.layout
    s = chemistry.species.index(reactant)
    using = chemistry.laws.nu[:, s] < 0.0
    heats = heat_of_reaction(chemistry.table, chemistry.laws.nu, T)[using] / -chemistry.laws.nu[using, s]
    u, _ = model.inputs.values(np.array([number.now for number in model.numbers]))
    capacity = sum(
        float(u[layout.feed_flow[name]] * layout.compositions[k] @ cp(chemistry.table, T))
        for k, name in enumerate(layout.feeds)
    )
    amount = flow * float(layout.compositions[layout.feeds.index(feed), s])
    return float(np.min(np.abs(heats))) * amount / capacity
