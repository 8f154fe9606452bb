"""Checks of exchangers, recycles, removal and pressure drops, and of beds that are out of service."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from reactorstage.case.build import extras
from reactorstage.case.marks import TreePath
from reactorstage.case.units import shown
from reactorstage.case.validate import Findings
from reactorstage.case.word_fields import one_of
from reactorstage.case.written import Bed, CaseWritten, CoolStep, HeatStep, StepWritten
from reactorstage.case.written_gaps import ExchangerWritten

if TYPE_CHECKING:
    from reactorstage.case.checks_train import Part

Use = tuple[TreePath, str]


def check_gaps(parts: Sequence[Part], case: CaseWritten, findings: Findings) -> None:
    """Everything of this module, for the sections of a train."""
    for part in parts:
        for path, step in part.steps:
            check_removal(path, step, case, findings)
            if step.pressure_drop is not None and part.owner == "entry":
                findings.add(
                    (*path, "pressure drop"),
                    "the pressure of entry follows from the inlet pressure of bed 1",
                    "lower the inlet pressure of bed 1 instead",
                )
    check_exchangers(parts, case, findings)
    check_recycles(parts, case, findings)
    check_out_of_service(parts, findings)


def check_removal(path: TreePath, step: StepWritten, case: CaseWritten, findings: Findings) -> None:
    """Species that are there, not more than all of them, shares or flows but not both."""
    removed = step.remove or {}
    for name, number in removed.items():
        where = (*path, "remove", name)
        if case.species and name not in case.species:
            hint = one_of(name, list(case.species))
            findings.add(where, f"there is no species {shown(name)}", hint, True)
        most = number.high if number.high is not None else number.now
        if number.kind == "fraction" and most > 1.0:
            message = f"{100.0 * most:.10g} % of {name} is more than is there"
            findings.add(where, message, "write a share of at most 100 %, or a flow")
    kinds = {number.kind for number in removed.values() if number.now == number.now}
    if len(kinds) > 1:
        hint = "write two `remove` steps"
        findings.add((*path, "remove"), "shares and flows are mixed in one removal", hint, True)


def devices(parts: Sequence[Part]) -> Iterator[tuple[Part, TreePath, str, HeatStep | CoolStep]]:
    """Heaters and coolers with their section, path and verb."""
    for part in parts:
        for path, step in part.steps:
            if step.heat is not None:
                yield part, (*path, "heat"), "heat", step.heat
            if step.cool is not None:
                yield part, (*path, "cool"), "cool", step.cool


def check_exchangers(parts: Sequence[Part], case: CaseWritten, findings: Findings) -> None:
    """Each exchanger has two sides and is given in one way."""
    uses: dict[str, list[Use]] = {name: [] for name in case.exchangers}
    held: dict[str, list[TreePath]] = {}
    for _, path, verb, device in devices(parts):
        ways = ("holds", "to", device.heat_key)
        own = [way for way in ways if getattr(device, way.replace(" ", "_")) is not None]
        if device.exchanger and own:
            held.setdefault(device.exchanger, []).append((*path, own[0]))
        name = device.exchanger
        if name and name in uses:
            uses[name].append(((*path, "exchanger"), verb))
        elif name:
            known = list(case.exchangers)
            hint = one_of(name, known) if known else "add it under `exchangers`"
            findings.add((*path, "exchanger"), f"there is no exchanger {shown(name)}", hint)
        check_by_area(path, device, case, findings)
    for name, exchanger in case.exchangers.items():
        check_sides(name, exchanger, uses[name], case, findings)
        check_size(name, exchanger, held.get(name, []), findings)


def check_by_area(path: TreePath, device: HeatStep | CoolStep, case: CaseWritten, findings: Findings) -> None:
    """A device given by area needs a coefficient and one level whose temperature drives it."""
    if device.area is None:
        for key in ("coefficient", "fouling resistance"):
            if getattr(device, key.replace(" ", "_")) is not None:
                findings.add((*path, key), f"a {key} stands here without an area", "add `area: ... m^2`")
        return
    if device.coefficient is None:
        hint = "add `coefficient: ... W/(m^2 K)`"
        findings.add((*path, "area"), "an area stands here without a coefficient", hint)
    levels = extras(case.heat_levels) if case.heat_levels else {}
    names = device.levels_named
    if not (isinstance(names, tuple) and len(names) == 1 and names[0] in levels):
        message = "heat through an area needs the temperature of one level"
        findings.add((*path, device.levels_key), message, "name one heat level")


def check_sides(
    name: str, exchanger: ExchangerWritten, uses: Sequence[Use], case: CaseWritten, findings: Findings
) -> None:
    """One stream is heated and one cooled, or one of both is a feed."""
    where: TreePath = ("exchangers", name)
    feed = exchanger.with_feed
    if feed is not None and case.feeds and feed not in case.feeds:
        hint = one_of(feed, list(case.feeds))
        findings.add((*where, "with feed"), f"there is no feed {shown(feed)}", hint)
    first = {verb: path for path, verb in reversed(uses)}
    for path, verb in uses:
        if path != first[verb]:
            message = f"{name} stands in a second `{verb}` step"
            findings.add(path, message, "give this step an exchanger of its own")
    if feed is not None and len(first) == 2:
        message = f"{name} has two streams of the train and a feed"
        findings.add((*where, "with feed"), message, "leave the feed or one of the steps out")
    elif not first:
        verbs = (
            "`heat: {exchanger: ...}`" if feed else "`heat: {exchanger: ...}` and `cool: {exchanger: ...}`"
        )
        findings.add(where, f"no step uses {name}", f"add {verbs} to the train", True)
    elif feed is None and len(first) == 1:
        other = "cool" if "heat" in first else "heat"
        hint = f"add `{other}: {{exchanger: {name}}}` where its other stream is, or `with feed`"
        findings.add(where, f"{name} has one stream only", hint, True)


def check_size(name: str, exchanger: ExchangerWritten, held: Sequence[TreePath], findings: Findings) -> None:
    """By effectiveness, by area and coefficient, or by what one stream holds; at most one goes round it."""
    where: TreePath = ("exchangers", name)
    for path in held[1:]:
        findings.add(path, f"both streams of {name} fix its heat", "let one of them follow")
    if held:
        check_held_size(name, exchanger, findings)
        return
    by_area = exchanger.area is not None or exchanger.coefficient is not None
    if exchanger.effectiveness is None and not by_area:
        hint = "give `effectiveness`, or `area` and `coefficient`, or let one of its steps hold a temperature"
        findings.add(where, f"nothing says how large {name} is", hint, True)
    elif exchanger.effectiveness is not None and (by_area or exchanger.fouling_resistance is not None):
        message = f"{name} has an effectiveness and an area"
        findings.add((*where, "effectiveness"), message, "keep one way of giving its size")
    elif by_area and (exchanger.area is None or exchanger.coefficient is None):
        missing = "area" if exchanger.area is None else "coefficient"
        findings.add(where, f"{name} has no {missing}", "area and coefficient go together", True)
    if exchanger.cold_bypass is not None and exchanger.hot_bypass is not None:
        message = f"both streams of {name} go round it"
        findings.add((*where, "hot bypass"), message, "keep one bypass", True)
    if exchanger.with_feed is not None and (exchanger.cold_bypass or exchanger.hot_bypass):
        key = "cold bypass" if exchanger.cold_bypass else "hot bypass"
        message = "a bypass is for exchangers between two streams of the train"
        findings.add((*where, key), message, "leave it out", True)


def check_held_size(name: str, exchanger: ExchangerWritten, findings: Findings) -> None:
    """Where a stream fixes the heat, the size follows: no size and no bypass may be given too."""
    for key in ("effectiveness", "area", "cold bypass", "hot bypass"):
        if getattr(exchanger, key.replace(" ", "_")) is not None:
            message = f"one stream of {name} fixes its heat, so its {key} follows"
            findings.add(("exchangers", name, key), message, "leave it out, or let the stream follow")


def check_recycles(parts: Sequence[Part], case: CaseWritten, findings: Findings) -> None:
    """Each recycle is drawn once, from the effluent, and brought back upstream."""
    drawn: dict[str, TreePath] = {}
    injected = {step.inject for part in parts for _, step in part.steps if step.inject}
    for part in parts:
        for path, step in part.steps:
            if step.draw is None:
                continue
            where = (*path, "draw")
            if step.draw not in case.recycles:
                known = list(case.recycles)
                hint = one_of(step.draw, known) if known else "add it under `recycles`"
                findings.add(where, f"there is no recycle {shown(step.draw)}", hint)
            elif part.owner != "effluent":
                findings.add(where, "a recycle is drawn off behind the last bed", "move it to effluent")
            elif step.draw in drawn:
                findings.add(where, f"{step.draw} is drawn off a second time", "keep one `draw`")
            drawn.setdefault(step.draw, where)
    for name in case.recycles:
        if name not in drawn:
            hint = f"add `- draw: {name}` to effluent"
            findings.add(("recycles", name), f"{name} is drawn off nowhere", hint, True)
        if name not in injected:
            hint = f"add `- inject: {name}` to entry or to a gap"
            findings.add(("recycles", name), f"{name} is never injected", hint, True)
        if name in case.feeds:
            findings.add(("recycles", name), f"a feed is called {name} too", "choose another name", True)


def check_out_of_service(parts: Sequence[Part], findings: Findings) -> None:
    """A bed out of service says what becomes of its injection; it can move to a later bed that has a step."""
    served: dict[str, list[str]] = {}
    states: dict[str, str] = {}
    for part in parts:
        if isinstance(part.body, Bed):
            states[part.owner] = part.body.state
        names = [step.inject for _, step in part.steps if step.inject]
        served.setdefault(part.next_bed, []).extend(names)
    for part in parts:
        bed = part.body
        if not isinstance(bed, Bed):
            continue
        wanted = bed.its_injection or ""
        target = wanted.removeprefix("moved to ") if wanted.startswith("moved") else ""
        where = (*part.path, "its injection")
        if bed.state == "out of service" and served.get(part.owner) and not wanted:
            message = f"nothing says what becomes of the injection before {part.owner}"
            hint = "add `its injection: shut`, or `its injection: moved to bed N`"
            findings.add((*part.path, "state"), message, hint)
        if not target:
            continue
        if target not in states or target == part.owner:
            beds = [owner for owner in states if owner != part.owner]
            findings.add(where, f"the injection cannot move to {target}", one_of(target, beds))
        elif set(served.get(part.owner, [])) - set(served.get(target, [])):
            lost = ", ".join(sorted(set(served[part.owner]) - set(served.get(target, []))))
            message = f"no step before {target} injects {lost}"
            findings.add(where, message, f"name a bed before which {lost} is injected")
        elif bed.state == "out of service" == states[target]:
            findings.add(where, f"{target} is out of service too", "name a bed that runs")
