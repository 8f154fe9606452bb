"""Every result with a name and a unit: the one namespace of limits, prices, tables and files.

A quantity's name, unit and meaning stand in the table of patterns of this module, and nowhere else; names
that only a rating gives, without derivatives, stand in a table of their own.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from functools import cached_property, lru_cache

from reactorstage.chemistry.fluid import CubicStream
from reactorstage.train.boundaries import WORDS, Boundary
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.closures import AREA_OF, Exchange
from reactorstage.train.equilibria import Equilibrium
from reactorstage.train.forms import Form, Linear, at, total
from reactorstage.train.layout import BedPlace, Layout, Place


@dataclass(frozen=True)
class Catalogue:
    """Finds the form of a quantity by its name `owner.quantity`."""

    layout: Layout
    chemistry: CaseChemistry
    money: dict[str, Form]
    levels: dict[str, Form]
    equilibria: tuple[Equilibrium, ...] = ()
    boundaries: tuple[Boundary, ...] = ()

    @property
    def found(self) -> tuple[Equilibrium | Boundary, ...]:
        """Temperatures that are found from records."""
        return (*self.equilibria, *self.boundaries)

    def find(self, name: str) -> Form:
        """The form; LookupError says what is unknown and what is near."""
        owner, quantity = self.parts(name.strip())
        if not quantity:
            raise LookupError(
                f"{name!r} is not a quantity; write owner.quantity, as in 'bed 1.exit temperature'"
            )
        for pattern in (*PATTERNS, *REPORTED):
            if pattern.owner == owner.split(" ", 1)[0]:
                words = pattern.matches(quantity, self)
                if words is not None:
                    return pattern.make(self, self.subject(owner), *words)
        raise LookupError(self._unknown(owner, quantity))

    def parts(self, name: str) -> tuple[str, str]:
        """Owner and quantity of a name; owners themselves may hold a point, as in `level steam 3.5 bar`."""
        known = [owner for owner in self.owners() if name.startswith(f"{owner}.")]
        owner = max(known, key=len) if known else name.partition(".")[0]
        return owner, name[len(owner) + 1 :]

    def subject(self, owner: str) -> Place | BedPlace | str:
        """The place, bed or name that an owner stands for; LookupError when there is none."""
        for place in self.layout.places:
            if place.owner == owner:
                return place
        for bed in self.layout.beds:
            if bed.owner == owner:
                return bed
        kind, _, rest = owner.partition(" ")
        known = {"feed": self.layout.feeds, "level": tuple(self.levels), "train": ("",), "money": ("",)}
        known |= {
            "exchanger": (*self.exchanges, *self.layout.bypassed),
            "recycle": tuple(self.layout.recycles),
        }
        if kind in known and rest in known[kind]:
            return rest
        raise LookupError(f"there is no {owner!r} in this train; owners are {', '.join(self.owners())}")

    def owners(self) -> list[str]:
        feeds = [f"feed {name}" for name in self.layout.feeds]
        levels = [f"level {name}" for name in self.levels]
        between = [f"exchanger {name}" for name in (*self.exchanges, *self.layout.bypassed)]
        between += [f"recycle {name}" for name in self.layout.recycles]
        places: list[Place | BedPlace] = sorted([*self.layout.places, *self.layout.beds], key=_position)
        return [*[place.owner for place in places], *between, *feeds, *levels, "train", "money"]

    def names(self) -> Iterator[str]:
        """Names of all quantities of this train that a result lists."""
        for owner in self.owners():
            for pattern in PATTERNS:
                if pattern.owner == owner.split(" ", 1)[0]:
                    for quantity in pattern.listed(self):
                        yield f"{owner}.{quantity}"

    @cached_property
    def exchanges(self) -> dict[str, Exchange]:
        """Exchangers between streams, by name."""
        found = [one for one in self.layout.closures if isinstance(one, Exchange)]
        return {one.name: one for one in found if not one.name.startswith(AREA_OF)}

    def species(self, name: str) -> int:
        return self.chemistry.species.index(name)

    def _unknown(self, owner: str, quantity: str) -> str:
        self.subject(owner)
        known = [name[len(owner) + 1 :] for name in self.names() if name.startswith(f"{owner}.")]
        near = get_close_matches(quantity, known, n=3, cutoff=0.5)
        return f"{owner} has no quantity {quantity!r}" + (
            f"; did you mean {' or '.join(map(repr, near))}?" if near else ""
        )


def _position(item: Place | BedPlace) -> int:
    return item.exit if isinstance(item, BedPlace) else item.last


def _place_before(c: Catalogue, place: Place) -> int:
    """Operation whose record is the stream that arrives at a place (the entry: its first feed)."""
    return place.first - 1 if place.first > 0 else 0


def _after_injection(c: Catalogue, place: Place) -> Form:
    if not place.injections:
        return Form("temperature", Linear(), reason="no injection", absent=True)
    return Form("temperature", c.layout.temperature(place.injections[-1][0]))


def _after_exchanger(c: Catalogue, place: Place) -> Form:
    if not place.devices:
        return Form("temperature", Linear(), reason="no exchanger", absent=True)
    return Form("temperature", c.layout.temperature(place.devices[-1].end))


def heat_of_place(layout: Layout, place: Place) -> Linear:
    """Heat removed in a place, W: positive when removed."""
    return total([layout.heat_removed(device) for device in place.devices])


def _exit_of(place: Place) -> int:
    return max(place.last, place.first - 1)


def _activity_of(c: Catalogue, bed: BedPlace, reaction: str) -> Form:
    each = int(c.layout.operations[bed.exit][3])
    index = bed.inputs + 1 if each < 0 else each + c.chemistry.reactions.index(reaction)
    return Form("number", c.layout.input(index))


def _made(c: Catalogue, bed: BedPlace, name: str) -> Linear:
    s = c.species(name)
    return c.layout.flow(bed.exit, s) - c.layout.flow(bed.inlet, s)


def _injected(c: Catalogue, bed: BedPlace, feed: str) -> Form:
    inputs = [c.layout.amount(operation) for operation, name in bed.injections if name == feed]
    return Form("molar flow", total([c.layout.input(index) for index in inputs]))


def fed(c: Catalogue, name: str) -> Linear:
    """Flow of a species in all feeds that enter the train."""
    s = c.species(name)
    parts = [
        c.layout.input(amount) * float(c.layout.compositions[c.layout.operations[operation][1], s])
        for operation, amount in c.layout.amounts.items()
    ]
    return total(parts)


def _end(c: Catalogue) -> int:
    return len(c.layout.operations) - 1


def _train_made(c: Catalogue, name: str) -> Linear:
    return c.layout.flow(_end(c), c.species(name)) + _removed_in(c, c.layout.places, name) - fed(c, name)


def _removed_in(c: Catalogue, places: Sequence[Place], name: str) -> Linear:
    """Flow of a species that the removals of some places take out."""
    s = c.species(name)
    removals = [k for place in places for k, kind, _ in place.others if kind == "remove"]
    return total([c.layout.flow(k - 1, s) - c.layout.flow(k, s) for k in removals])


def _removed(c: Catalogue, place: Place, name: str) -> Form:
    there = any(kind == "remove" for _, kind, _ in place.others)
    return Form("molar flow", _removed_in(c, [place], name), reason="no removal", absent=not there)


def _ratio(kind: str, top: Linear, bottom: Linear, name: str) -> Form:
    return Form(kind, top, bottom, f"no {name}")


def _catalyst(c: Catalogue) -> Linear:
    return total([c.layout.input(bed.inputs) for bed in c.layout.beds])


def _train_drop(c: Catalogue) -> Linear:
    return c.layout.pressure(c.layout.beds[0].inlet) - c.layout.pressure(c.layout.beds[-1].exit)


def _coolers(c: Catalogue) -> float:
    return float(sum(not device.heating for place in c.layout.places for device in place.devices))


def _cold_shots(c: Catalogue) -> float:
    """Gaps into which a feed is injected without any exchanger there."""
    return float(sum(bool(p.injections) and not p.devices for p in c.layout.places if p.kind == "gap"))


@dataclass(frozen=True)
class Pattern:
    """Quantities of one kind of owner: words with <species>, <reaction>, <feed> slots, and their form."""

    owner: str
    words: str
    make: Callable[..., Form]
    list_them: bool = True

    def matches(self, quantity: str, catalogue: Catalogue) -> tuple[str, ...] | None:
        found = _expression(self.words).fullmatch(quantity)
        if found is None:
            return None
        slots = re.findall("<(.*?)>", self.words)
        ok = all(
            value in self._known(slot, catalogue) for slot, value in zip(slots, found.groups(), strict=True)
        )
        return found.groups() if ok else None

    def listed(self, catalogue: Catalogue) -> Iterator[str]:
        slots = re.findall("<(.*?)>", self.words)
        if not slots:
            yield self.words
        elif self.list_them and len(slots) == 1:
            for value in self._known(slots[0], catalogue):
                yield self.words.replace(f"<{slots[0]}>", value)

    def _known(self, slot: str, catalogue: Catalogue) -> tuple[str, ...]:
        if slot == "reaction":
            return catalogue.chemistry.reactions
        if slot == "boundary":
            fluid = catalogue.chemistry.fluid
            return (WORDS[fluid.phase],) if isinstance(fluid, CubicStream) else ()
        if slot == "feed":
            return (*catalogue.layout.feeds, *catalogue.layout.recycles)
        return tuple(catalogue.money) if slot == "term" else catalogue.chemistry.species


@lru_cache(maxsize=256)
def _expression(words: str) -> re.Pattern[str]:
    return re.compile("(.+?)".join(re.escape(part) for part in re.split("<.*?>", words)))


def _places(words: str, make: Callable[..., Form]) -> list[Pattern]:
    return [Pattern(owner, words, make) for owner in ("entry", "gap", "effluent")]


PATTERNS: tuple[Pattern, ...] = (
    *_places(
        "inlet temperature", lambda c, p: Form("temperature", c.layout.temperature(_place_before(c, p)))
    ),
    *_places("temperature after injection", _after_injection),
    *_places("temperature after exchanger", _after_exchanger),
    *_places("exit temperature", lambda c, p: Form("temperature", c.layout.temperature(_exit_of(p)))),
    *_places("heat removed", lambda c, p: Form("power", heat_of_place(c.layout, p))),
    *_places("flow", lambda c, p: Form("molar flow", c.layout.total_flow(_exit_of(p)))),
    *_places(
        "flow of <species>", lambda c, p, s: Form("molar flow", c.layout.flow(_exit_of(p), c.species(s)))
    ),
    *_places(
        "mole fraction of <species>",
        lambda c, p, s: _ratio(
            "fraction", c.layout.flow(_exit_of(p), c.species(s)), c.layout.total_flow(_exit_of(p)), "flow"
        ),
    ),
    *(
        Pattern(owner, "removed <species>", _removed, list_them=False)
        for owner in ("entry", "gap", "effluent")
    ),
    *_places(
        "pressure",
        lambda c, p: Form("pressure", c.layout.pressure(max(_exit_of(p), c.layout.beds[0].inlet))),
    ),
    Pattern("bed", "catalyst", lambda c, b: Form("mass", c.layout.input(b.inputs))),
    Pattern("bed", "catalyst activity", lambda c, b: Form("number", c.layout.input(b.inputs + 1))),
    Pattern("bed", "catalyst activity of <reaction>", _activity_of, list_them=False),
    Pattern("bed", "pressure drop factor", lambda c, b: Form("number", c.layout.input(b.inputs + 2))),
    Pattern("bed", "inlet temperature", lambda c, b: Form("temperature", c.layout.temperature(b.inlet))),
    Pattern("bed", "exit temperature", lambda c, b: Form("temperature", c.layout.temperature(b.exit))),
    Pattern("bed", "peak temperature", lambda c, b: Form("temperature", c.layout.extra(b.number - 1, 0))),
    Pattern(
        "bed",
        "rise",
        lambda c, b: Form(
            "temperature difference", c.layout.temperature(b.exit) - c.layout.temperature(b.inlet)
        ),
    ),
    Pattern("bed", "inlet pressure", lambda c, b: Form("pressure", c.layout.pressure(b.inlet))),
    Pattern("bed", "exit pressure", lambda c, b: Form("pressure", c.layout.pressure(b.exit))),
    Pattern(
        "bed",
        "pressure drop",
        lambda c, b: Form("pressure difference", c.layout.pressure(b.inlet) - c.layout.pressure(b.exit)),
    ),
    Pattern("bed", "injected <feed>", _injected),
    Pattern("bed", "inlet flow", lambda c, b: Form("molar flow", c.layout.total_flow(b.inlet))),
    Pattern(
        "bed",
        "inlet flow of <species>",
        lambda c, b, s: Form("molar flow", c.layout.flow(b.inlet, c.species(s))),
    ),
    Pattern(
        "bed",
        "exit flow of <species>",
        lambda c, b, s: Form("molar flow", c.layout.flow(b.exit, c.species(s))),
    ),
    Pattern("bed", "made <species>", lambda c, b, s: Form("molar flow", _made(c, b, s))),
    Pattern(
        "bed",
        "inlet ratio <species>/<species>",
        lambda c, b, x, y: _ratio(
            "ratio", c.layout.flow(b.inlet, c.species(x)), c.layout.flow(b.inlet, c.species(y)), y
        ),
    ),
    Pattern(
        "bed",
        "conversion of <species>",
        lambda c, b, s: _ratio("fraction", _made(c, b, s) * -1.0, c.layout.flow(b.inlet, c.species(s)), s),
    ),
    Pattern(
        "bed",
        "selectivity to <species> from <species>",
        lambda c, b, p, s: _ratio("fraction", _made(c, b, p), _made(c, b, s) * -1.0, f"{s} converted"),
    ),
    Pattern("bed", "depth at 10 % of rise", lambda c, b: _depth(c, b, 2)),
    Pattern("bed", "depth at 50 % of rise", lambda c, b: _depth(c, b, 3)),
    Pattern("bed", "depth at 90 % of rise", lambda c, b: _depth(c, b, 4)),
    Pattern("bed", "approach to equilibrium of <reaction>", lambda c, b, r: _approach(c, b, r)),
    Pattern("bed", "inlet <boundary> margin", lambda c, b, _: _margin(c, b.inlet)),
    Pattern("bed", "exit <boundary> margin", lambda c, b, _: _margin(c, b.exit)),
    *_places("<boundary> margin after injection", lambda c, p, _: _margin(c, _last_injection(p))),
    *_places("<boundary> margin", lambda c, p, _: _margin(c, _exit_of(p))),
    Pattern(
        "train",
        "conversion of <species>",
        lambda c, _, s: _ratio("fraction", _train_made(c, s) * -1.0, fed(c, s), s),
    ),
    Pattern(
        "train",
        "selectivity to <species> from <species>",
        lambda c, _, p, s: _ratio("fraction", _train_made(c, p), _train_made(c, s) * -1.0, f"{s} converted"),
    ),
    Pattern(
        "train",
        "overall ratio <species>/<species>",
        lambda c, _, x, y: _ratio("ratio", fed(c, x), fed(c, y), y),
    ),
    Pattern("train", "made <species>", lambda c, _, s: Form("molar flow", _train_made(c, s))),
    Pattern("train", "catalyst", lambda c, _: Form("mass", _catalyst(c))),
    Pattern("train", "pressure drop", lambda c, _: Form("pressure difference", _train_drop(c))),
    Pattern("train", "number of beds", lambda c, _: Form("count", Linear(const=float(len(c.layout.beds))))),
    Pattern("train", "number of coolers", lambda c, _: Form("count", Linear(const=_coolers(c)))),
    Pattern("train", "number of cold shots", lambda c, _: Form("count", Linear(const=_cold_shots(c)))),
    Pattern("feed", "flow", lambda c, f: Form("molar flow", c.layout.feed_entering(f))),
    Pattern(
        "feed", "temperature", lambda c, f: Form("temperature", c.layout.input(c.layout.feed_temperature[f]))
    ),
    Pattern("exchanger", "heat", lambda c, x: _exchanged(c, x)),
    Pattern("exchanger", "difference at the hot end", lambda c, x: _end_difference(c, x, 0)),
    Pattern("exchanger", "difference at the cold end", lambda c, x: _end_difference(c, x, 1)),
    Pattern("exchanger", "area", lambda c, x: _size(c, x, "area", "area")),
    Pattern("exchanger", "effectiveness", lambda c, x: _size(c, x, "fraction", "effectiveness")),
    Pattern("exchanger", "cold bypass", lambda c, x: _size(c, x, "fraction", "cold bypass")),
    Pattern("exchanger", "hot bypass", lambda c, x: _size(c, x, "fraction", "hot bypass")),
    Pattern("recycle", "flow", lambda c, r: Form("molar flow", c.layout.input(c.layout.recycles[r][0]))),
    Pattern(
        "recycle",
        "temperature",
        lambda c, r: Form("temperature", c.layout.temperature(c.layout.recycles[r][1])),
    ),
    Pattern("recycle", "mole fraction of <species>", lambda c, r, s: _drawn_share(c, r, s)),
    Pattern("level", "heat", lambda c, level: c.levels[level]),
    Pattern("money", "<term>", lambda c, _, term: c.money[term]),
)


def _reported(owner: str, words: str) -> Pattern:
    """A value that a rating works out at its end, without derivatives."""

    def refuse(*_: object) -> Form:
        raise LookupError(f"{words!r} is reported only, it cannot be a limit, a price or the aim")

    return Pattern(owner, words, refuse)


REPORTED: tuple[Pattern, ...] = (
    _reported("bed", "depth of the peak"),
    _reported("bed", "equilibrium temperature"),
    _reported("bed", "potential rise"),
    _reported("bed", "utilisation"),
    _reported("bed", "idle catalyst"),
    _reported("bed", "Q/K of <reaction>"),
    _reported("bed", "outside validity of <reaction>"),
    _reported("train", "atom closure"),
    _reported("train", "energy closure"),
)
"""Names of results that have no derivative; the rating adds them to its quantities."""


def _depth(c: Catalogue, bed: BedPlace, which: int) -> Form:
    return Form("fraction", c.layout.extra(bed.number - 1, which), reason="no rise")


def _last_injection(place: Place) -> int | None:
    return place.injections[-1][0] if place.injections else None


def _margin(c: Catalogue, operation: int | None) -> Form:
    """Kelvin between a record and its dew or bubble point, above zero on the side of the stream's phase."""
    kind, fluid = "temperature difference", c.chemistry.fluid
    assert isinstance(fluid, CubicStream)
    if operation is None or operation < 0:
        return Form(kind, Linear(), reason="no injection", absent=True)
    apart = c.layout.temperature(operation) - at(c.boundaries[operation].index)
    apart = apart if fluid.phase == "vapour" else apart * -1.0
    return Form(kind, apart, reason=f"no {WORDS[fluid.phase]} at any temperature")


def _approach(c: Catalogue, bed: BedPlace, reaction: str) -> Form:
    """Equilibrium temperature at the exit composition less that of the exit; > 0 while forward remains."""
    number = c.chemistry.reactions.index(reaction)
    kind, why = "temperature difference", "no equilibrium at any temperature of the data"
    for one in c.equilibria:
        if one.bed == bed.owner and one.reaction == number:
            form = at(one.index) - c.layout.temperature(bed.exit)
            return Form(kind, form if one.exothermic else form * -1.0, reason=why)
    return Form(kind, Linear(), reason="the reaction is not reversible", absent=True)


def _end_difference(c: Catalogue, exchanger: str, end: int) -> Form:
    kind = "temperature difference"
    one = c.exchanges.get(exchanger)
    return Form(kind, one.ends[end]) if one else _bypassed(kind)


def _exchanged(c: Catalogue, exchanger: str) -> Form:
    one = c.exchanges.get(exchanger)
    return Form("power", one.heat) if one else _bypassed("power")


def _size(c: Catalogue, exchanger: str, kind: str, words: str) -> Form:
    """A size or bypass that the case gives; an effectiveness that an area makes is found when rating."""
    one = c.exchanges.get(exchanger)
    form = getattr(one.size, words.replace(" ", "_")) if one else None
    if one is None:
        return _bypassed(kind)
    return Form(kind, form) if form else Form(kind, Linear(), reason=f"no {words} is given", absent=True)


def _bypassed(kind: str) -> Form:
    return Form(kind, Linear(), reason="the exchanger is bypassed", absent=True)


def _drawn_share(c: Catalogue, recycle: str, name: str) -> Form:
    operation = c.layout.recycles[recycle][1]
    return _ratio(
        "fraction", c.layout.flow(operation, c.species(name)), c.layout.total_flow(operation), "flow"
    )
