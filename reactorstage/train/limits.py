"""Limits of a case, expanded over beds and gaps, and those that the tool adds by itself."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from math import floor, log10
from typing import TYPE_CHECKING

from reactorstage.case import units
from reactorstage.chemistry.fluid import CubicStream
from reactorstage.errors import CaseProblems, Problem
from reactorstage.train.boundaries import WORDS
from reactorstage.train.evaluation import LimitRow
from reactorstage.train.forms import Form, Linear
from reactorstage.train.heat import Ladder
from reactorstage.train.layout import Layout
from reactorstage.train.quantities import Catalogue

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Limit, Raw

DIFFERENCE = {"temperature": "temperature difference", "pressure": "pressure difference"}
"""Kind of a distance from a bound, where it is not the kind of the quantity itself."""

STEPS = {"temperature": 1.0, "temperature difference": 1.0, "ratio": 0.1, "power": 0.1e6}
"""Amounts by which the worth of a limit is asked, by kind; others: about a twentieth of the bound."""

SCALES = {"temperature": 10.0, "temperature difference": 10.0, "power": 0.3e6}
"""Typical sizes of margins by kind; others: a tenth of the bound."""


@dataclass(frozen=True)
class Bound:
    """An expanded limit, the form of its quantity, and the slack number of a soft one."""

    row: LimitRow
    form: Form
    slack: Linear = field(default_factory=Linear)

    def margin(self, shift: float = 0.0) -> Linear:
        """Linear form that is >= 0 inside, with the bound moved by shift towards more freedom."""
        sign = 1.0 if self.row.direction == "at most" else -1.0
        bound = self.row.bound + sign * shift
        held = self.form.bottom * bound if self.form.bottom is not None else Linear(const=bound)
        return (held - self.form.top) * sign + self.slack

    def weight(self) -> Linear:
        return self.form.bottom if self.form.bottom is not None else Linear(const=1.0)


def expand_limits(case: Case, catalogue: Catalogue, ladder: Ladder) -> list[Bound]:
    """All limits of a case; raises CaseProblems for names and units that do not fit."""
    problems: list[Problem] = []
    bounds: list[Bound] = []
    for label, limit in case.limits.items():
        bounds += _expand(case, catalogue, label, limit, problems)
    if problems:
        raise CaseProblems(problems)
    return bounds + _implied(catalogue, ladder, bounds)


def names_of(owner_and_quantity: str, layout: Layout) -> list[tuple[str, str]]:
    """(owner, name) of the quantities that a name stands for: `every bed.` and `every gap.` expand."""
    owner, dot, quantity = owner_and_quantity.partition(".")
    if owner == "every bed":
        owners = [bed.owner for bed in layout.beds]
    elif owner == "every gap":
        owners = [place.owner for place in layout.places if place.kind == "gap"]
    else:
        owners = [owner]
    return [(one, f"{one}{dot}{quantity}") for one in owners]


def _expand(
    case: Case, catalogue: Catalogue, label: str, limit: Limit, problems: list[Problem]
) -> list[Bound]:
    bounds: list[Bound] = []
    path = ("limits", label, "of")
    everywhere = limit.of.startswith("every ")
    targets = names_of(limit.of, catalogue.layout)
    owners = [owner for owner, _ in targets]
    resting = {bed.owner for bed in catalogue.layout.beds if not bed.in_service}
    for owner in limit.exceptions:
        if owner not in owners:
            where = ("limits", label, "except", owner)
            problems.append(case.problem(where, f"{owner!r} is not one of {', '.join(owners)}", on_key=True))
    for owner, name in targets:
        try:
            form = catalogue.find(name)
        except LookupError as error:
            problems.append(case.problem(path, str(error.args[0])))
            break
        if everywhere and (form.absent or not form.top.terms or owner in resting):
            continue
        if form.absent and owner.removeprefix("exchanger ") in catalogue.layout.bypassed:
            continue
        if form.absent:
            problems.append(case.problem(path, f"{name} does not exist in this train: {form.reason}"))
            continue
        bounds += _bounds(case, label, limit, owner, name, form, problems)
        if problems:
            break
    return bounds


def _bounds(
    case: Case, label: str, limit: Limit, owner: str, name: str, form: Form, problems: list[Problem]
) -> list[Bound]:
    """The one or two bounds of a limit on one owner; the particular replaces the general, per direction."""
    special = limit.exceptions.get(owner, {})
    found: list[Bound] = []
    for direction, key in (("at least", "at_least"), ("at most", "at_most")):
        raw = special.get(key) or getattr(limit, key)
        if raw is None:
            continue
        inside = ("limits", label, "except", owner) if key in special else ("limits", label)
        bound = _number(case, raw, form.kind, (*inside, direction), problems)
        away = special.get("keep_away") or limit.keep_away
        kept = 0.0
        if away is not None:
            kind = DIFFERENCE.get(form.kind, form.kind)
            kept = _number(case, away, kind, ("limits", label, "keep away"), problems)
        price = None
        if limit.soft is not None:
            try:
                price = units.penalty_to_si(limit.soft.text, form.kind, case.currency, case.hours_per_year)
            except units.UnitProblem as error:
                problems.append(case.problem(("limits", label, "soft"), error.message, error.hint))
        row = LimitRow(
            label=label,
            owner=owner,
            quantity=name,
            direction=direction,
            bound=bound - kept if direction == "at most" else bound + kept,
            keep_away=kept,
            kind=form.kind,
            scale=scale_of(form.kind, bound),
            step=step_of(form.kind, bound),
            why=limit.why,
            soft_price=price,
        )
        found.append(Bound(row, form))
    return found


def _number(case: Case, raw: Raw, kind: str, path: tuple[str, ...], problems: list[Problem]) -> float:
    try:
        return units.to_si(raw.text, kind, case.currency, case.hours_per_year)
    except units.UnitProblem as error:
        problems.append(case.problem(path, error.message, error.hint))
        return 0.0


def step_of(kind: str, bound: float) -> float:
    """The amount, in SI, by which the worth of a limit is asked."""
    if kind in STEPS:
        return STEPS[kind]
    unit = 1.0 / (units.to_display(1.0, kind) - units.to_display(0.0, kind))
    size = 0.05 * abs(bound) / unit or 1.0
    power = 10.0 ** floor(log10(size))
    return max(one for one in (1.0, 2.0, 5.0) if one * power <= size * 1.0000001) * power * unit


def scale_of(kind: str, bound: float) -> float:
    """A typical size, in SI, of the margin of a limit."""
    if kind in SCALES:
        return SCALES[kind]
    unit = 1.0 / (units.to_display(1.0, kind) - units.to_display(0.0, kind))
    return 0.1 * abs(bound) or 0.1 * unit


def _implied(catalogue: Catalogue, ladder: Ladder, given: Sequence[Bound]) -> list[Bound]:
    """A cooler may not heat, a heater may not cool, nothing flows backwards, levels are within reach."""
    bounds: list[Bound] = []
    layout = catalogue.layout
    for place in layout.places:
        covered = len(place.devices) == 1 and _has(given, f"{place.owner}.heat removed")
        for device in place.devices:
            if device.exchanger or device.given == "heat" or (covered and not device.heating):
                continue
            sign = -1.0 if device.heating else 1.0
            label = "a heater may not cool" if device.heating else "a cooler may not heat"
            form = Form("power", layout.heat_removed(device) * sign)
            bounds.append(Bound(_rule(label, place.owner, f"{place.owner}.heat removed", form.kind), form))
    bounds += _one_phase(catalogue)
    for name, exchange in catalogue.exchanges.items():
        bounds += _exchanger_rules(catalogue, name, exchange.approach)
    for device, owner, T, direction, level in ladder.reach:
        form = Form("temperature", layout.temperature(device.operation))
        row = _rule(f"reach of {level}", owner, f"{owner}.temperature after exchanger", "temperature")
        bounds.append(Bound(replace(row, bound=T, direction=direction), form))
    for group in layout.splits:
        name = f"bed {group.rest_bed}.injected {group.feed}"
        if group.rest_bed and not _has(given, name):
            bounds.append(
                Bound(
                    _rule("no negative injection", f"bed {group.rest_bed}", name, "molar flow"),
                    catalogue.find(name),
                )
            )
    for level, most in ladder.capacities.items():
        row = _rule("capacity", f"level {level}", f"level {level}.heat", "power")
        row = replace(row, bound=most, direction="at most", scale=scale_of("power", most), implied=False)
        bounds.append(Bound(row, catalogue.levels[level]))
    for name, form_ in ladder.rows:
        owner = name.partition(",")[0]
        bounds.append(Bound(_rule("heat ladder", owner, name, "power"), Form("power", form_)))
    return bounds


def _one_phase(catalogue: Catalogue) -> list[Bound]:
    """A stream under a cubic equation keeps to its phase at the inlet and exit of every bed."""
    fluid = catalogue.chemistry.fluid
    if not isinstance(fluid, CubicStream):
        return []
    bounds = []
    for bed in catalogue.layout.beds:
        for where in ("inlet", "exit"):
            name = f"{bed.owner}.{where} {WORDS[fluid.phase]} margin"
            row = _rule(f"stays {fluid.phase}", bed.owner, name, "temperature difference")
            bounds.append(Bound(row, catalogue.find(name)))
    return bounds


def _exchanger_rules(catalogue: Catalogue, name: str, approach: float) -> list[Bound]:
    """Heat flows from the hot stream to the cold one, and the temperatures do not cross."""
    owner = f"exchanger {name}"
    rules = [("an exchanger may not work backwards", "heat", 0.0)]
    rules += [("no temperature cross", f"difference at the {end} end", approach) for end in ("hot", "cold")]
    bounds = []
    for label, words, least in rules:
        form = catalogue.find(f"{owner}.{words}")
        row = replace(_rule(label, owner, f"{owner}.{words}", form.kind), bound=least)
        bounds.append(Bound(row, form))
    return bounds


def _has(given: Sequence[Bound], quantity: str) -> bool:
    """Whether a limit of the case keeps a quantity at or above zero already."""
    return any(
        b.row.quantity == quantity and b.row.direction == "at least" and b.row.bound >= 0.0 for b in given
    )


def _rule(label: str, owner: str, quantity: str, kind: str) -> LimitRow:
    return LimitRow(
        label,
        owner,
        quantity,
        "at least",
        0.0,
        0.0,
        kind,
        scale_of(kind, 0.0),
        step_of(kind, 0.0),
        implied=True,
    )
