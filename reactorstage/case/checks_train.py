"""Checks of the train: order of sections, feeds used, devices and what they hold, data of beds."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from itertools import pairwise

from reactorstage.case.build import extras
from reactorstage.case.checks_gaps import check_gaps
from reactorstage.case.fields import Activities, Number
from reactorstage.case.marks import TreePath
from reactorstage.case.units import shown
from reactorstage.case.validate import Findings
from reactorstage.case.word_fields import one_of
from reactorstage.case.written import (
    EVERY_COOLING_LEVEL,
    EVERY_HEATING_LEVEL,
    UNPRICED,
    Bed,
    CaseWritten,
    CoolStep,
    FeedWritten,
    HeatStep,
    Level,
    StepWritten,
)
from reactorstage.case.written_chemistry import Reaction
from reactorstage.case.written_gaps import RecycleWritten


@dataclass(frozen=True)
class Part:
    """A section with its path; `next_bed` is the bed that the stream meets after it (empty: none)."""

    owner: str
    path: TreePath
    body: Bed | tuple[StepWritten, ...]

    @property
    def next_bed(self) -> str:
        number = {"entry": 1, "effluent": 0}.get(self.owner, number_of(self.owner) + 1)
        return f"bed {number}" if number else ""

    @property
    def steps(self) -> Iterator[tuple[TreePath, StepWritten]]:
        body = () if isinstance(self.body, Bed) else self.body
        return (((*self.path, i), step) for i, step in enumerate(body))


def number_of(owner: str) -> int:
    """The number in "bed 2" or "gap 2"; 0 without one."""
    return int(owner.split()[1]) if " " in owner else 0


def check_train(case: CaseWritten, reactions: Mapping[str, Reaction], findings: Findings) -> None:
    parts = [
        Part(owner, ("train", i, owner), body) for i, s in enumerate(case.train) for owner, body in s.items()
    ]
    if not parts:
        return
    check_order(parts, findings)
    check_takes(parts, findings)
    check_uses(parts, case, findings)
    beds = {part.owner: part for part in parts if isinstance(part.body, Bed)}
    for part in parts:
        for path, step in part.steps:
            if step.heat or step.cool:
                check_device(part, path, step, case, beds, findings)
        check_behind_holder(part, findings)
    check_held(parts, beds, findings)
    check_gaps(parts, case, findings)
    check_beds(beds, reactions, findings)


def check_order(parts: list[Part], findings: Findings) -> None:
    """entry, bed 1, gap 1, bed 2 ... effluent, each once."""
    if parts[0].owner != "entry":
        findings.add(
            parts[0].path, f"the train begins with {parts[0].owner}", "begin it with `- entry:`", True
        )
    seen: set[str] = set()
    for before, part in pairwise([parts[0], *parts]):
        allowed = after(before.owner)
        if part.owner in seen:
            findings.add(
                part.path,
                f"{part.owner} stands here a second time",
                "number the beds and gaps in order",
                True,
            )
        elif part is not parts[0] and part.owner not in allowed:
            hint = f"write {' or '.join(allowed)} here" if allowed else "effluent is the end of the train"
            findings.add(part.path, f"{part.owner} cannot follow {before.owner}", hint, True)
        seen.add(part.owner)
    if "bed 1" not in seen:
        findings.add(("train",), "the train has no bed 1", "add `- bed 1: {catalyst: ...}`", True)
    elif "effluent" not in seen:
        findings.add(
            ("train",), "the train has no effluent", "end it with `- effluent: []` (or with its steps)", True
        )


def after(owner: str) -> list[str]:
    """The sections that may follow one."""
    number = number_of(owner)
    if owner.startswith("bed"):
        return [f"gap {number}", "effluent"]
    return [] if owner == "effluent" else [f"bed {number + 1}"]


def check_takes(parts: list[Part], findings: Findings) -> None:
    """The train begins by taking one feed, and injects the others."""
    for part in parts:
        for path, step in part.steps:
            if step.take is not None and path != (*parts[0].path, 0):
                findings.add(
                    (*path, "take"), "a feed is taken once, as the first step of entry", "write `inject` here"
                )
    first = next(parts[0].steps, None)
    if parts[0].owner == "entry" and (first is None or first[1].take is None):
        path = first[0] if first else parts[0].path
        findings.add(
            path, "the train does not begin with a feed", "make `- take: FEED` the first step of entry", True
        )


def check_uses(parts: list[Part], case: CaseWritten, findings: Findings) -> None:
    """Feeds named by steps, and steps demanded by feeds."""
    sources: dict[str, FeedWritten | RecycleWritten] = {**case.recycles, **case.feeds}
    uses: dict[str, list[tuple[TreePath, str]]] = {name: [] for name in sources}
    for part in parts:
        for path, step in part.steps:
            key, name = ("take", step.take) if step.take is not None else ("inject", step.inject)
            if name and name in uses and (key == "inject" or name in case.feeds):
                uses[name].append(((*path, key), part.next_bed))
            elif name and case.feeds:
                known = list(sources) if key == "inject" else list(case.feeds)
                findings.add((*path, key), f"there is no feed {shown(name)}", one_of(name, known))
    beds = [part.owner for part in parts if isinstance(part.body, Bed)]
    for name, feed in sources.items():
        if not uses[name] and name in case.recycles:
            continue
        if not uses[name]:
            findings.add(
                ("feeds", name), f"{name} is never used", f"add `- inject: {name}` to the train", True
            )
        elif feed.split is None:
            for path, _ in uses[name][1:]:
                findings.add(
                    path, f"{name} is used a second time", f"say in a `split` of {name} how it is divided"
                )
        elif feed.split.now:
            group = "feeds" if name in case.feeds else "recycles"
            check_split_uses(name, list(feed.split.now), uses[name], beds, findings, group)


def check_split_uses(
    name: str,
    split: list[str],
    uses: list[tuple[TreePath, str]],
    beds: list[str],
    findings: Findings,
    group: str = "feeds",
) -> None:
    """Every share has its step and every step its share."""
    served = [bed for _, bed in uses]
    for bed in split:
        path: TreePath = (group, name, "split", "now", bed)
        if bed not in beds:
            findings.add(path, f"there is no {shown(bed)} in the train", one_of(bed, beds), True)
        elif bed not in served:
            where = "entry" if bed == "bed 1" else f"gap {number_of(bed) - 1}"
            message = f"{bed} has a share of {name}, but no step before it injects {name}"
            findings.add(path, message, f"add `- inject: {name}` to {where}", True)
    for i, (path, bed) in enumerate(uses):
        if bed in served[:i]:
            findings.add(path, f"{name} is already injected before {bed}", "keep one of the two steps")
        elif bed not in split:
            message = f"the split of {name} has no share for {bed or 'what follows the last bed'}"
            findings.add(path, message, f"add {bed} to the split of {name}" if bed else "take this step out")


def check_device(
    part: Part,
    path: TreePath,
    step: StepWritten,
    case: CaseWritten,
    beds: Mapping[str, Part],
    findings: Findings,
) -> None:
    """A heater or cooler: given in one way, and served by levels of its kind."""
    verb = "heat" if step.heat else "cool"
    device = step.heat or step.cool
    if device is None or device.levels_named == () or not device.model_fields_set:  # it could not be read
        return
    path = (*path, verb)
    ways = ("holds", "to", device.heat_key, "area", "exchanger")
    found = [way for way in given(device) if way != "exchanger"] or given(device)
    if len(found) != 1:
        what = "nothing says how much" if not found else f"{' and '.join(found)} are given together"
        findings.add(path, f"{what} in this `{verb}`", f"give exactly one of {', '.join(ways)}", True)
    if device.holds:
        check_holds(part, (*path, "holds"), device.holds, beds, findings)
    if device.levels_named is not None and device.exchanger is not None:
        message = "heat of an exchanger goes to no level"
        findings.add((*path, device.levels_key), message, "leave it out, or leave the exchanger out")
    elif device.levels_named is None and device.exchanger is None:
        words = str(type(device).model_fields[device.levels_key.replace(" ", "_")].description)
        message = f"{device.levels_key} is missing in {verb}"
        findings.add(path, message, f"{device.levels_key}: {words}", True)
    check_levels_of(path, device, case, findings)


def check_behind_holder(part: Part, findings: Findings) -> None:
    """Behind the device that holds the inlet of the next bed nothing may fix another temperature."""
    held = False
    for path, step in part.steps:
        device = step.heat or step.cool
        if held and step.remove:
            message = f"the inlet of {part.next_bed} is held by an earlier device, before this removal"
            findings.add((*path, "remove"), message, "let a device behind it hold the inlet")
        if device is None:
            continue
        if held and device.to is not None:
            verb = "heat" if step.heat else "cool"
            message = f"the inlet of {part.next_bed} is held by an earlier device, which would undo this one"
            findings.add((*path, verb, "to"), message, "let the last device of the gap hold the inlet")
        held = held or device.holds is not None


def check_holds(part: Part, path: TreePath, holds: str, beds: Mapping[str, Part], findings: Findings) -> None:
    match = re.fullmatch(r"(bed \d+)\.inlet temperature", holds)
    if not part.next_bed:
        findings.add(
            path, f"no bed follows {part.owner}, so nothing can be held", "write `to:` a temperature"
        )
    elif match is None:
        findings.add(
            path, f"{shown(holds)} cannot be held", f"write holds: {part.next_bed}.inlet temperature"
        )
    elif match[1] != part.next_bed:
        message = f"this device holds {holds}, but the next bed is {part.next_bed}"
        findings.add(path, message, f"write holds: {part.next_bed}.inlet temperature")
    elif part.next_bed in beds and getattr(beds[part.next_bed].body, "inlet_temperature", None) is None:
        message = f"{part.next_bed} gives no inlet temperature that could be held"
        findings.add(path, message, f"add `inlet temperature: ...` to {part.next_bed}, or write `to:` here")


def check_levels_of(
    path: TreePath, device: HeatStep | CoolStep, case: CaseWritten, findings: Findings
) -> None:
    """Levels must be there and work in the right direction."""
    key, heats = device.levels_key, isinstance(device, HeatStep)
    levels: dict[str, Level] = extras(case.heat_levels) if case.heat_levels else {}
    names = device.levels_named
    if names is None or names == UNPRICED:
        return
    fitting = [name for name, level in levels.items() if level.heats_up_to is None or heats]
    fitting = [name for name in fitting if levels[name].cools_down_to is None or not heats]
    if isinstance(names, str):
        if not fitting and not _unreadable(case):
            findings.add(
                (*path, key), f"there is no level for {shown(names)}", f"add one, or write {UNPRICED}"
            )
        return
    special = EVERY_HEATING_LEVEL if heats else EVERY_COOLING_LEVEL
    for i, name in enumerate(names):
        where = (*path, key, i)
        if name not in levels:
            hint = one_of(name, [*fitting, special, UNPRICED])
            findings.add(where, f"there is no heat level {shown(name)}", hint)
        elif name not in fitting:
            does = "cools" if heats else "heats"
            findings.add(where, f"{shown(name)} only {does}", one_of("", [*fitting, special, UNPRICED]))
    for name in {name for name in names if names.count(name) > 1}:
        findings.add((*path, key), f"{shown(name)} is named twice", "name each level once")


def _unreadable(case: CaseWritten) -> bool:
    return case.heat_levels is not None and math.isnan(case.heat_levels.minimum_approach)


def may_hold(step: StepWritten) -> bool:
    """True for a device that holds something, or whose way of being given was reported as missing."""
    device = step.heat or step.cool
    if device is None or not device.model_fields_set:
        return device is not None
    return device.holds is not None or device.levels_named == () or not given(device)


def given(device: HeatStep | CoolStep) -> list[str]:
    """Which of its possible keys say how much a device heats or cools."""
    return [
        way
        for way in ("holds", "to", device.heat_key, "area", "exchanger")
        if way.replace(" ", "_") in device.model_fields_set
    ]


def check_held(parts: list[Part], beds: Mapping[str, Part], findings: Findings) -> None:
    """Each inlet temperature that is given is made by exactly one device, in the section before the bed."""
    holding: dict[str, list[TreePath]] = {}
    for part in parts:
        for path, step in part.steps:
            if may_hold(step):
                verb = "heat" if step.heat else "cool"
                holding.setdefault(part.next_bed, []).append((*path, verb, "holds"))
    for owner, bed in beds.items():
        wanted, makers = f"{owner}.inlet temperature", holding.get(owner, [])
        for path in makers[1:]:
            findings.add(path, f"{wanted} is already held by another device", "let one device hold it")
        if not makers and getattr(bed.body, "inlet_temperature", None) is not None:
            before = "entry" if owner == "bed 1" else f"gap {number_of(owner) - 1}"
            hint = f"add `holds: {wanted}` to a heater or cooler in {before}, or leave the temperature out"
            findings.add((*bed.path, "inlet temperature"), f"no device makes {wanted}", hint)


FOR_PRESSURE_DROP = ("diameter", "bulk density", "void fraction", "equivalent size")


def check_beds(beds: Mapping[str, Part], reactions: Mapping[str, Reaction], findings: Findings) -> None:
    lacking: dict[tuple[str, tuple[str, ...]], list[str]] = {}
    for owner, part in beds.items():
        bed = part.body
        if not isinstance(bed, Bed):
            continue
        check_pressure(owner, bed, part.path, findings)
        check_activity(bed, part.path, reactions, findings)
        for reason, keys in needs(bed, reactions).items():
            missing = tuple(key for key in keys if getattr(bed, key.replace(" ", "_")) is None)
            if missing:
                lacking.setdefault((reason, missing), []).append(owner)
    for (reason, missing), owners in lacking.items():
        are = "is" if len(missing) == 1 else "are"
        message = f"{' and '.join(missing)} {are} missing in {', '.join(owners)}: needed for {reason}"
        advice = f"add {'it' if len(missing) == 1 else 'them'} to `every bed` or to the bed"
        extra = ", or write `pressure drop factor: 0`" if reason == PRESSURE_DROP else ""
        findings.add(beds[owners[0]].path, message, advice + extra, True)


def check_activity(bed: Bed, path: TreePath, reactions: Mapping[str, Reaction], findings: Findings) -> None:
    """Reactions that are there, and points of depth that rise."""
    activity = bed.catalyst_activity
    for name in activity.each if isinstance(activity, Activities) else ():
        if reactions and name not in reactions:
            where = (*path, "catalyst activity", name)
            findings.add(where, f"there is no reaction {shown(name)}", one_of(name, list(reactions)), True)
    for i, (before, point) in enumerate(pairwise(bed.activity_along_depth or ())):
        if before.at >= point.at:
            message = f"{100.0 * point.at:g} % of depth does not lie below {100.0 * before.at:g} %"
            hint = "write the points from the inlet down"
            findings.add((*path, "activity along depth", i + 1, "at"), message, hint)


PRESSURE_DROP = "the pressure drop"


def needs(bed: Bed, reactions: Mapping[str, Reaction]) -> dict[str, tuple[str, ...]]:
    """Keys that a bed must have, by reason."""
    found: dict[str, tuple[str, ...]] = {}
    if has_pressure_drop(bed.pressure_drop_factor):
        found[PRESSURE_DROP] = FOR_PRESSURE_DROP
    if math.isnan(bed.catalyst.now):
        return found
    by_mass = bed.catalyst.kind == "mass"
    for per in sorted({reaction.rate_per for reaction in reactions.values()}):
        density = by_mass != (per == "catalyst mass")
        keys = (("bulk density",) if density else ()) + (("void fraction",) if per == "void volume" else ())
        if keys and per and PRESSURE_DROP not in found:
            found[f"rates per {per} with catalyst by {bed.catalyst.kind}"] = keys
    return found


def has_pressure_drop(factor: Number) -> bool:
    return factor.free or (factor.now != 0.0 and not math.isnan(factor.now))


def check_pressure(owner: str, bed: Bed, path: TreePath, findings: Findings) -> None:
    if owner == "bed 1" and bed.inlet_pressure is None:
        findings.add(path, "bed 1 has no inlet pressure", "add `inlet pressure: ... bar(a)`", True)
    elif owner != "bed 1" and bed.inlet_pressure is not None:
        message = f"the inlet pressure of {owner} follows from bed 1"
        findings.add((*path, "inlet pressure"), message, "give it in bed 1 only")
