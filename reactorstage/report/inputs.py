"""Every input of a case as it was given, with the place where it stands."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from reactorstage.case.marks import Place, TreePath
from reactorstage.case.model import Case
from reactorstage.case.overrides import OPTION

TITLES = {"train": "train, in flow order"}
HEAD = "the case"
FREE = {"now", "from", "to"}


@dataclass(frozen=True)
class Given:
    """One input: its group, its name, the text as given, where it stands (`plant.yaml:12`, `--set ...`)."""

    group: str
    name: str
    text: str
    place: str


def given(case: Case) -> list[Given]:
    """Every input in the order of the file, one row for each species, reaction, feed, step, bed and so on."""
    return [
        Given(group, name, text_of(value), _place(case, path))
        for key, whole in case.resolved.items()
        for group, name, value, path in _rows(key, whole)
    ]


def _rows(key: str, whole: Any) -> Iterator[tuple[str, str, Any, TreePath]]:
    if isinstance(whole, dict):
        for name, value in whole.items():
            yield key, name, value, (key, name)
    elif isinstance(whole, list):
        yield from _sections(key, whole)
    else:
        yield HEAD, key, whole, (key,)


def _sections(key: str, train: list[Any]) -> Iterator[tuple[str, str, Any, TreePath]]:
    """Beds, and the steps of entry, gaps and effluent."""
    for index, section in enumerate(train):
        for owner, body in section.items():
            steps = body if isinstance(body, list) and body else [body]
            for number, step in enumerate(steps):
                path: TreePath = (key, index, owner)
                yield TITLES.get(key, key), owner, step, (*path, number) if step is not body else path


def text_of(value: Any) -> str:
    """A value as the file writes it, a mapping in one line: `flow: 12 t/h; temperature: 55 degC`."""
    if not isinstance(value, dict) or set(value) == FREE:
        return _short(value)
    return "; ".join(f"{key}: {_short(inner)}" for key, inner in value.items()) or "nothing"


def _short(value: Any) -> str:
    if isinstance(value, dict):
        if set(value) == FREE:
            return f"{value['now']} (free from {value['from']} to {value['to']})"
        return ", ".join(f"{key} {_short(inner)}" for key, inner in value.items())
    if isinstance(value, list):
        return ", ".join(_short(inner) for inner in value) or "nothing"
    return "" if value is None else str(value)


def _place(case: Case, path: TreePath) -> str:
    """File and line of the key, without the folder; then what a variant or an option set below it."""
    marked = case.source.marked
    own = marked.mark(path).best(on_key=True)
    parts = [mark.value for below, mark in marked.marks.items() if below[: len(path)] == path]
    others = [part for part in parts if part.text.file != own.text.file]
    return ", ".join(dict.fromkeys(map(_place_text, [own, *others])))


def _place_text(place: Place) -> str:
    file = place.text.file
    return file if file.startswith(OPTION) else f"{Path(file).name}:{place.line}"
