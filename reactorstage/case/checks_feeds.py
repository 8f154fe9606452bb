"""Checks of feeds: compositions and splits that close."""

from __future__ import annotations

from collections.abc import Mapping

from reactorstage.case.build import free_beds, rest_of
from reactorstage.case.fields import Number
from reactorstage.case.marks import TreePath
from reactorstage.case.units import display_unit, shown, to_display
from reactorstage.case.validate import Findings
from reactorstage.case.word_fields import one_of
from reactorstage.case.written import CaseWritten, FeedWritten, SplitWritten
from reactorstage.case.written_gaps import RecycleSplitWritten

CLOSES = 1e-6  # relative: how nearly shares written out must sum to the whole
ROUNDING = 1e-9


def check_feeds(case: CaseWritten, findings: Findings) -> None:
    for name, feed in case.feeds.items():
        check_composition(name, feed, case, findings)
        if feed.split and feed.split.now:
            check_split(name, feed.split, feed.flow, findings)
    for name, recycle in case.recycles.items():
        if recycle.split and recycle.split.now:
            check_split(name, recycle.split, recycle.flow, findings, "recycles")


def check_composition(name: str, feed: FeedWritten, case: CaseWritten, findings: Findings) -> None:
    path: TreePath = ("feeds", name, "composition")
    for species in feed.composition:
        if case.species and species not in case.species:
            hint = one_of(species, list(case.species))
            findings.add((*path, species), f"there is no species {shown(species)}", hint, True)
    if not feed.composition or not one_rest(feed.composition, path, findings):
        return
    known = sum(share for share in feed.composition.values() if share is not None)
    check_sum(f"the composition of {name}", feed.composition, known, 1.0, "fraction", path, findings)


def one_rest(entries: Mapping[str, object | None], path: TreePath, findings: Findings) -> bool:
    """False, and reported, when `rest` is written more than once."""
    rests = [name for name, entry in entries.items() if entry is None]
    for name in rests[1:]:
        findings.add((*path, name), f"`rest` is already taken by {rests[0]}", "write `rest` once in a sum")
    return len(rests) <= 1


def check_sum(
    what: str,
    entries: Mapping[str, object | None],
    known: float,
    whole: float,
    kind: str,
    path: TreePath,
    findings: Findings,
) -> None:
    """The entries must make the whole, or leave room for the rest."""
    rest = next((name for name, entry in entries.items() if entry is None), None)
    sums, should = (f"{to_display(v, kind):.10g} {display_unit(kind)}" for v in (known, whole))
    if rest is None and abs(known - whole) > CLOSES * abs(whole):
        hint = f"change a number, or write `rest` for one, as in {list(entries)[-1]}: rest"
        findings.add(path, f"{what} sums to {sums}, not {should}", hint, True)
    elif rest is not None and known - whole > ROUNDING * abs(whole):
        findings.add(
            (*path, rest), f"nothing is left for the rest: the others sum to {sums} of {should}", "lower one"
        )


def check_split(
    name: str,
    split: SplitWritten | RecycleSplitWritten,
    flow: Number,
    findings: Findings,
    group: str = "feeds",
) -> None:
    path: TreePath = (group, name, "split", "now")
    entries = {bed: entry for bed, entry in split.now.items() if entry is not None}
    check_free(name, split, flow, findings, group)
    if not one_rest(split.now, path, findings):
        return
    wrong = [bed for bed, entry in entries.items() if entry.kind not in (flow.kind, "fraction")]
    mixed = [bed for bed, entry in entries.items() if entry.kind != next(iter(entries.values())).kind]
    for bed in wrong or mixed:
        if entries[bed].now == entries[bed].now and flow.now == flow.now:
            message = (
                f"this entry is not a {flow.kind} like the flow, and not a share"
                if wrong
                else "entries differ in kind"
            )
            findings.add((*path, bed), message, "write all of them in the unit of the flow, or all in %")
    if entries and not wrong and not mixed:
        kind = next(iter(entries.values())).kind
        whole = 1.0 if kind == "fraction" else flow.now
        known = sum(entry.now for entry in entries.values())
        check_sum(f"the split of {name}", split.now, known, whole, kind, path, findings)


def check_free(
    name: str, split: SplitWritten | RecycleSplitWritten, flow: Number, findings: Findings, group: str
) -> None:
    """What `free` names must be there, and something must take what is left."""
    path: TreePath = (group, name, "split")
    named, rest = free_beds(split), rest_of(split)
    for bed in named:
        if bed not in split.now:
            findings.add((*path, "free"), f"{shown(bed)} is not in this split", one_of(bed, list(split.now)))
        elif split.now[bed] is None and split.free != "all":
            findings.add(
                (*path, "free"), f"{bed} takes the rest, so it is not free", "leave it out of `free`"
            )
    ranged = [bed for bed, entry in split.now.items() if entry is not None and entry.free]
    if (named or ranged) and rest is None:
        message = f"entries of the split of {name} are free, but no bed takes what is left"
        findings.add(
            (*path, "now"), message, f"write `rest` for one, as in {list(split.now)[-1]}: rest", True
        )
    shares = [entry for entry in split.now.values() if entry is not None and entry.kind == "fraction"]
    if flow.free and rest is None and not shares:
        message = f"the flow of {name} is free, but its split is of fixed flows"
        findings.add((*path, "now"), message, "write shares in %, or `rest` for one bed", True)
    if rest in ranged:
        message = f"{rest} takes what is left, so it has no range of its own"
        findings.add(
            (*path, "now", str(rest)), message, f"write {rest}: rest, or `rest` for another bed", True
        )
