"""Reading a tree into the models of `written`, with every error as a finding in plain words."""

from __future__ import annotations

from copy import deepcopy
from dataclasses import dataclass, field
from typing import Any, TypeVar, get_args, get_origin

from pydantic import ValidationError

from reactorstage.case.fields import OWN_ERROR
from reactorstage.case.marks import UNREADABLE, Tree, TreePath
from reactorstage.case.resolve import get
from reactorstage.case.units import shown
from reactorstage.case.word_fields import one_of
from reactorstage.case.words import Words

Model = TypeVar("Model", bound=Words)


@dataclass
class Findings:
    """Problems by path, collected; `add` is what the checks call."""

    items: list[tuple[TreePath, str, str, bool]] = field(default_factory=list)

    def add(self, path: TreePath, message: str, hint: str = "", on_key: bool = False) -> None:
        self.items.append((path, message, hint, on_key))


def validate(tree: Tree, model: type[Model], findings: Findings) -> Model | None:
    """The model read from a tree; what cannot be read is reported and replaced by a stand-in.

    None when even so nothing can be made of the tree.
    """
    try:
        return model.model_validate(tree)
    except ValidationError as error:
        errors = error.errors(include_url=False, include_input=False)
    errors = [item for item in errors if not _follows(item, errors)]
    salvaged = deepcopy(tree)
    for item in errors:
        report(item, tree, model, findings)
        stand_in(item, salvaged, model)
    for _ in range(2):
        try:
            return model.model_validate(salvaged)
        except ValidationError as error:
            for item in error.errors():
                if isinstance(salvaged, dict) and item["loc"]:
                    salvaged[str(item["loc"][0])] = UNREADABLE
    return None


def _follows(item: Any, errors: list[Any]) -> bool:
    """Whether a list is too short only because its entries could not be read."""
    loc = item["loc"]
    return item["type"] == "too_short" and any(
        len(other["loc"]) > len(loc) and other["loc"][: len(loc)] == loc for other in errors
    )


def report(item: Any, tree: Tree, model: type[Words], findings: Findings) -> None:
    """Put one error of pydantic into our words."""
    path, kind = path_of(item["loc"]), item["type"]
    if kind == OWN_ERROR:
        said = item["ctx"]
        findings.add(path, said["message"], said["hint"], said.get("on_key", False))
    elif kind == "missing":
        if not is_misspelt(path, tree, model):
            findings.add(path[:-1], f"{path[-1]} is missing{_where(path[:-1])}", meaning(path, model))
    elif kind == "extra_forbidden":
        keys = keys_at(path[:-1], model) + (["variant of"] if len(path) == 1 else [])
        findings.add(path, f"{shown(str(path[-1]))} is not a key here", one_of(str(path[-1]), keys), True)
    elif kind in ("too_short", "too_long"):
        least, found = item.get("ctx", {}).get("min_length", 1), get(tree, path)
        message = f"{path[-1]} has at least {least} entries" if found else f"nothing stands in {path[-1]}"
        findings.add(path, message, meaning(path, model))
    else:
        wanted = "a list" if kind in ("tuple_type", "list_type") else "a mapping (key: value)"
        found = get(tree, path)
        what = (
            shown(found) if isinstance(found, str) else "a list" if isinstance(found, list) else "a mapping"
        )
        findings.add(path, f"{wanted} is expected here, not {what}", meaning(path, model))


def path_of(loc: tuple[str | int, ...]) -> TreePath:
    """The path in the file of pydantic's location: without the tags of alternatives."""
    return tuple(part for part in loc if not (isinstance(part, str) and part.startswith("#")))


def _where(path: TreePath) -> str:
    names = [str(part) for part in path if isinstance(part, str)]
    return f" in {names[-1]}" if names else ""


def stand_in(item: Any, tree: Tree, model: type[Words]) -> None:
    """Replace what an error is about by UNREADABLE, so that the rest can be read."""
    path = path_of(item["loc"])
    while path and not isinstance(get(tree, path[:-1]), dict | list):
        path = path[:-1]
    parent = get(tree, path[:-1])
    if not path or not isinstance(parent, dict | list):
        return
    key: Any = path[-1]
    if item["type"] == "extra_forbidden" and isinstance(parent, dict):
        parent.pop(key, None)
        meant = nearest(key, keys_at(path[:-1], model))
        if meant:
            parent.setdefault(meant, UNREADABLE)
    else:
        parent[key] = UNREADABLE


def nearest(word: str, words: list[str]) -> str:
    from difflib import get_close_matches

    return (get_close_matches(word, words, 1, 0.6) or [""])[0]


def is_misspelt(path: TreePath, tree: Tree, model: type[Words]) -> bool:
    """True when the missing key stands there in a wrong spelling, which is reported by itself."""
    parent, keys = get(tree, path[:-1]), keys_at(path[:-1], model)
    wrong = [key for key in parent if key not in keys] if isinstance(parent, dict) else []
    return any(nearest(key, keys) == path[-1] for key in wrong)


def keys_at(path: TreePath, model: type[Words]) -> list[str]:
    """The keys that may stand in the mapping at a path."""
    found = type_at(path, model)
    return [str(f.alias) for f in found.model_fields.values()] if found else []


def meaning(path: TreePath, model: type[Words]) -> str:
    """The description of the field at a path; empty when there is none."""
    found = type_at(path[:-1], model)
    fields = found.model_fields.values() if found else ()
    return next((f"{f.alias}: {f.description}" for f in fields if f.alias == path[-1]), "")


def type_at(path: TreePath, model: type[Words]) -> type[Words] | None:
    """The model of the mapping at a path."""
    kinds: list[Any] = [model]
    for key in path:
        kinds = [step for kind in kinds for step in _step(kind, key)]
    models = [m for kind in kinds for m in _models(kind)]
    return models[0] if models else None


def _models(kind: Any) -> list[Any]:
    """The models among the alternatives of an annotation."""
    if isinstance(kind, type) and issubclass(kind, Words):
        return [kind]
    if get_origin(kind) in (dict, tuple) or not get_args(kind):
        return []
    return [m for part in get_args(kind) for m in _models(part)]


def _step(kind: Any, key: str | int) -> list[Any]:
    """Annotations one key further down."""
    if isinstance(kind, type) and issubclass(kind, Words):
        named = [f.annotation for f in kind.model_fields.values() if f.alias == key]
        extra = kind.__annotations__.get("__pydantic_extra__")
        return named or ([_extra(kind)] if extra else [])
    if get_origin(kind) is dict:
        return _of_key(kind, key)
    if get_origin(kind) is tuple:
        return [get_args(kind)[0]]
    return [step for part in get_args(kind) for step in _step(part, key)]


def _of_key(kind: Any, key: str | int) -> list[Any]:
    """The value type of a mapping, when its keys may look like this one."""
    import re

    words, value = get_args(kind)
    patterns = [m.pattern for m in getattr(words, "__metadata__", ()) if getattr(m, "pattern", None)]
    return [value] if all(re.fullmatch(pattern, str(key)) for pattern in patterns) else []


def _extra(kind: Any) -> Any:
    from typing import get_type_hints

    return get_args(get_type_hints(kind)["__pydantic_extra__"])[1]
