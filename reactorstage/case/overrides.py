"""Values set by name: `--set NAME=VALUE` and the `changes` of a variant.

Names are those of quantities that are inputs of the case, and of bounds and prices. Spaces, hyphens and
capitals do not matter. Setting a free number changes what it is now and keeps its range.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from difflib import get_close_matches

from reactorstage.case.checks import plain_name
from reactorstage.case.marks import Mark, Marked, Place, Text, Tree, TreePath
from reactorstage.case.resolve import BED, branch, get, put, sections, transplant
from reactorstage.case.units import shown
from reactorstage.case.word_fields import EVERY_REACTION, REST
from reactorstage.case.written import EveryBed
from reactorstage.case.written_gaps import ExchangerWritten
from reactorstage.errors import CallError

OPTION = "--set"
LIMIT_KEYS = ("at most", "at least", "keep away", "soft")
OTHER_PRICE = {"costs": "earns", "earns": "costs"}
DEVICES = {"heat": "heater", "cool": "cooler"}
AREA_KEYS = ("area", "coefficient", "fouling resistance")
EXCHANGER_KEYS = tuple(str(one.alias) for one in ExchangerWritten.model_fields.values())
Targets = dict[str, list[TreePath]]


class CannotSet(ValueError):
    """A name or a value that cannot be set; `hint` may be empty."""

    def __init__(self, message: str, hint: str = ""):
        self.message, self.hint = message, hint
        super().__init__(message)


def settable(tree: Tree) -> Targets:
    """Every name that can be set in a case, with the paths that it writes to."""
    targets: Targets = {}
    beds = [path for path in sections(tree) if BED.fullmatch(str(path[-1]))]
    for key in (str(field.alias) for field in EveryBed.model_fields.values()):
        for path in beds:
            targets[f"{path[-1]}.{key}"] = [(*path, key)]
        if key != "inlet pressure":
            targets[f"every bed.{key}"] = [(*path, key) for path in beds]
    for path in beds:
        targets |= activity_names(tree, path)
    if beds:
        targets["every bed.catalyst activity"] = [
            target for path in beds for target in targets[f"{path[-1]}.catalyst activity"]
        ]
    for path in sections(tree):
        targets |= device_names(tree, path)
    for name in keys(tree, "feeds"):
        targets |= feed_names(tree, name)
    targets |= entry_names(tree, "limits", "limit", LIMIT_KEYS)
    targets |= entry_names(tree, "prices", "price", tuple(OTHER_PRICE))
    targets |= level_names(tree) | closure_names(tree)
    return targets


def keys(tree: Tree, *path: str | int) -> list[str]:
    found = get(tree, path)
    return list(found) if isinstance(found, dict) else []


def activity_names(tree: Tree, path: TreePath) -> Targets:
    """Catalyst activities of a bed where they are given by reaction."""
    key: TreePath = (*path, "catalyst activity")
    names = keys(tree, *key)
    if not names or "now" in names:
        return {}
    others = [name for name in names if name != EVERY_REACTION]
    each: Targets = {f"{path[-1]}.catalyst activity of {name}": [(*key, name)] for name in others}
    return each | {f"{path[-1]}.catalyst activity": [(*key, EVERY_REACTION)]}


def device_names(tree: Tree, path: TreePath) -> Targets:
    """Heat and exit temperature of the heaters and coolers of one section, where the case gives them."""
    targets: Targets = {}
    steps = get(tree, path)
    for i, step in enumerate(steps if isinstance(steps, list) else ()):
        for verb in step if isinstance(step, dict) else ():
            device = (*path, i, verb)
            for key, name in (("to", "temperature after exchanger"), ("heat removed", "heat removed")):
                if get(tree, (*device, key)) is not None:
                    targets[f"{path[-1]}.{name}"] = [(*device, key)]
            if get(tree, (*device, "to")) is not None and isinstance(steps, list) and i == len(steps) - 1:
                targets[f"{path[-1]}.exit temperature"] = [(*device, "to")]
            if verb in DEVICES:
                targets.setdefault(f"{path[-1]}.{DEVICES[verb]} state", []).append((*device, "state"))
            targets |= step_names(tree, device, verb)
            if get(tree, (*device, "heat added")) is not None:
                targets[f"{path[-1]}.heat added"] = [(*device, "heat added")]
    return targets


def step_names(tree: Tree, path: TreePath, verb: str) -> Targets:
    """Area and fouling of a device, what a removal takes and a pressure drop."""
    owner = path[-3]
    if verb == "pressure drop":
        return {f"{owner}.pressure drop": [path]}
    if verb == "remove":
        words = {name: removal_words(get(tree, (*path, name))) for name in keys(tree, *path)}
        return {f"{owner}.{words[name]} {name}": [(*path, name)] for name in words}
    if verb not in DEVICES or get(tree, (*path, "area")) is None:
        return {}
    return {f"{owner}.{DEVICES[verb]} {key}": [(*path, key)] for key in AREA_KEYS}


def removal_words(value: Tree) -> str:
    """How the number of a removal is called: a share or a flow."""
    text = str(get(value, ("now",)) if isinstance(value, dict) else value)
    return "flow removed of" if "/" in text else "share removed of"


def feed_names(tree: Tree, feed: str) -> Targets:
    """A feed's own numbers, and its entry for each bed as a flow or as a share."""
    split = keys(tree, "feeds", feed, "split", "now")
    entries: Targets = {
        f"{bed}.{words} {feed}": [("feeds", feed, "split", "now", bed)]
        for bed in split
        for words in ("injected", "share of")
    }
    own = ("flow", "temperature", "composition")
    return entries | {f"feed {feed}.{key}": [("feeds", feed, key)] for key in own}


def closure_names(tree: Tree) -> Targets:
    """Everything of exchangers, and flow and division of recycles."""
    targets: Targets = {}
    for name in keys(tree, "exchangers"):
        for key in EXCHANGER_KEYS:
            targets[f"exchanger {name}.{key}"] = [("exchangers", name, key)]
    for name in keys(tree, "recycles"):
        targets[f"recycle {name}.flow"] = [("recycles", name, "flow")]
        for bed in keys(tree, "recycles", name, "split", "now"):
            for words in ("injected", "share of"):
                targets[f"{bed}.{words} {name}"] = [("recycles", name, "split", "now", bed)]
    return targets


def entry_names(tree: Tree, group: str, owner: str, names: Sequence[str]) -> Targets:
    return {f"{owner} {label}.{key}": [(group, label, key)] for label in keys(tree, group) for key in names}


def level_names(tree: Tree) -> Targets:
    """Prices and capacity of every level, and the temperature that it has."""
    levels = [name for name in keys(tree, "heat levels") if name != "minimum approach"]
    return {
        f"level {name}.{key}": [("heat levels", name, key)]
        for name in levels
        for key in (*OTHER_PRICE, "capacity", "cools down to", "heats up to")
        if key in (*OTHER_PRICE, "capacity") or get(tree, ("heat levels", name, key)) is not None
    }


def find(name: str, targets: Targets) -> list[TreePath]:
    """The paths for a name. Raises CannotSet with the nearest names."""
    plain = {plain_name(known): known for known in targets}
    if plain_name(name) in plain:
        return targets[plain[plain_name(name)]]
    near = [plain[word] for word in get_close_matches(plain_name(name), plain, 3, 0.6)]
    raise CannotSet(
        f"nothing that can be set is called {shown(name)}", f"nearest: {', '.join(near)}" if near else ""
    )


def write(marked: Marked, path: TreePath, value: Tree, marks: Sequence[tuple[TreePath, Mark]]) -> None:
    """Put a value at a path, into `now` when a free number stands there. Raises CannotSet."""
    old = get(marked.tree, path)
    if old == REST:
        raise CannotSet(f"{path[-1]} takes the rest of this split", "set the flow or the other entries")
    if isinstance(value, str) and isinstance(old, Mapping) and "now" in old:
        path = (*path, "now")
    transplant(value, marks, marked, path)
    other = OTHER_PRICE.get(str(path[-1]))
    parent = get(marked.tree, path[:-1])
    if other and isinstance(parent, dict):
        parent.pop(other, None)


def override(marked: Marked, overrides: Sequence[str]) -> None:
    """Apply texts NAME=VALUE. Raises CallError."""
    targets = settable(marked.tree)
    seen: set[str] = set()
    for text in overrides:
        name, equals, value = text.partition("=")
        if not equals or not value.strip():
            raise CallError(
                f"{OPTION} {text}: NAME=VALUE is expected, as in bed-1.inlet-temperature='390 degC'"
            )
        if plain_name(name) in seen:
            raise CallError(f"{OPTION} {text}: {name.strip()} is set twice")
        seen.add(plain_name(name))
        mark = Mark(Place(Text(f"{OPTION} {text}", (text,)), 1, len(name) + 2))
        try:
            for path in find(name, targets):
                write(marked, path, value.strip(), [((), mark)])
        except CannotSet as error:
            hint = f" ({error.hint})" if error.hint else ""
            raise CallError(f"{OPTION} {text}: {error.message}{hint}") from None


def change(marked: Marked, variant: Marked) -> list[tuple[TreePath, str, str, bool]]:
    """Apply the `changes` of a variant; what cannot be applied comes back as findings in the variant."""
    targets = settable(marked.tree)
    findings: list[tuple[TreePath, str, str, bool]] = []
    changes = get(variant.tree, ("changes",))
    for name, value in changes.items() if isinstance(changes, dict) else ():
        path: TreePath = ("changes", name)
        try:
            for target in find(name, targets):
                write(marked, target, value, branch(variant, path))
        except CannotSet as error:
            findings.append((path, error.message, error.hint, True))
    title = get(variant.tree, ("case",))
    if isinstance(title, str):
        put(marked, ("case",), title, variant.mark(("case",)))
    return findings
