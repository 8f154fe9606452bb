"""A YAML text as a tree of mappings, lists and texts, with the place of every key and value.

Only the plain core of YAML is read: no tags, anchors, aliases, merge keys, equal keys or second documents.
Plain values keep their text (1e5, no, 12:30, 010); the field that needs a number reads it.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, TypeAlias

import yaml

from reactorstage.errors import CallError, CaseProblems, Problem

LARGEST = 1_000_000  # bytes of a file
MOST_NODES = 20_000
DEEPEST = 20


class Unreadable:
    """Stands in a tree for a value already reported, so that everything else can still be checked."""

    def __deepcopy__(self, memory: object) -> Unreadable:
        return self


UNREADABLE = Unreadable()
Tree: TypeAlias = "dict[str, Tree] | list[Tree] | str | Unreadable | None"
TreePath: TypeAlias = "tuple[str | int, ...]"


@dataclass(frozen=True)
class Text:
    """A text with the name under which it is shown in messages."""

    file: str
    lines: tuple[str, ...]


@dataclass(frozen=True)
class Place:
    """A line and column, both from 1, of a text."""

    text: Text
    line: int = 1
    column: int = 1

    def problem(self, message: str, hint: str = "") -> Problem:
        lines = self.text.lines
        source = lines[self.line - 1] if self.line <= len(lines) else ""
        clean = "".join(c if c.isprintable() or c == "\t" else "?" for c in source)
        return Problem(self.text.file, self.line, self.column, message, clean, hint)


@dataclass(frozen=True)
class Mark:
    """Places of a value and of the key before it (None in lists); `scalar` when the value is a text."""

    value: Place
    key: Place | None = None
    scalar: bool = True

    def best(self, on_key: bool = False) -> Place:
        return self.key if self.key and (on_key or not self.scalar) else self.value


@dataclass
class Marked:
    """A tree with its marks (by path) and the problems met while reading it."""

    tree: Tree
    marks: dict[TreePath, Mark]
    problems: list[Problem] = field(default_factory=list)

    def mark(self, path: TreePath) -> Mark:
        """The mark of a path or, when the path is not in the file, of the nearest one above it."""
        while path not in self.marks:
            path = path[:-1]
        return self.marks[path]


def read_file(path: Path) -> bytes:
    """The bytes of a case file, at most LARGEST. Raises CallError or CaseProblems."""
    try:
        if not path.is_file():
            raise CallError(f"{path}: no such file" if not path.exists() else f"{path} is not a file")
        with path.open("rb") as stream:
            data = stream.read(LARGEST + 1)
    except (OSError, ValueError) as error:
        raise CallError(f"{path} cannot be read: {getattr(error, 'strerror', None) or error}") from None
    if len(data) > LARGEST:
        raise _refused(
            str(path), f"the file is larger than {LARGEST // 1_000_000} MB", "a case is a short text"
        )
    return data


def decode(data: bytes, file: str) -> str:
    """The text of a case file. Raises CaseProblems when it is empty or not UTF-8 text."""
    if len(data) > LARGEST:
        raise _refused(file, f"the file is larger than {LARGEST // 1_000_000} MB", "a case is a short text")
    if b"\0" in data:
        raise _refused(file, "this is a binary file, not a text", "give a case in YAML, saved as UTF-8")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        message = f"byte {error.start + 1} (line {line}) is not UTF-8 text"
        raise _refused(file, message, "save the file as UTF-8") from None
    if not text.strip():
        raise _refused(file, "the file is empty", "`reactorstage new` writes a case to start from")
    return text


def _refused(file: str, message: str, hint: str) -> CaseProblems:
    return CaseProblems([Problem(file, 1, 1, message, "", hint)])


def read_text(text: str, file: str) -> Marked:
    """The tree of a YAML text. Raises CaseProblems when the text is not YAML at all."""
    reader = _Reader(Text(file, tuple(re.split("\r\n|[\n\r\x85\u2028\u2029]", text))), text)
    try:
        return reader.whole()
    except yaml.MarkedYAMLError as error:
        raise CaseProblems([*reader.problems, _syntax(error, reader.text)]) from None
    except yaml.reader.ReaderError as error:
        before = text[: error.position]
        place = Place(reader.text, before.count("\n") + 1, error.position - before.rfind("\n"))
        message = f"a character that cannot be typed (code {error.character}) stands here"
        raise CaseProblems([*reader.problems, place.problem(message, "delete it")]) from None
    except _TooMuch as error:
        raise CaseProblems([*reader.problems, error.problem]) from None


class _TooMuch(Exception):
    def __init__(self, problem: Problem):
        self.problem = problem
        super().__init__(problem.message)


class _Reader:
    """Builds the tree from PyYAML's events, which come lazily, so that a huge text stops early."""

    def __init__(self, text: Text, content: str):
        self.text, self.content = text, content
        self.problems: list[Problem] = []
        self.marks: dict[TreePath, Mark] = {}
        self.events: Iterator[Any] = iter(())

    def whole(self) -> Marked:
        self.events = yaml.parse(self.content, Loader=yaml.SafeLoader)
        tree: Tree = None
        documents = 0
        for event in self.events:
            if isinstance(event, yaml.DocumentStartEvent):
                documents += 1
                if documents > 1:
                    self.report(event, "a second document begins here", "keep one case per file")
                    break
            elif isinstance(event, yaml.NodeEvent):
                tree = self.node(event, (), None)
        self.marks.setdefault((), Mark(Place(self.text)))
        return Marked(tree, self.marks, self.problems)

    def place(self, event: Any) -> Place:
        return Place(self.text, event.start_mark.line + 1, event.start_mark.column + 1)

    def report(self, event: Any, message: str, hint: str) -> None:
        self.problems.append(self.place(event).problem(message, hint))

    def node(self, event: Any, path: TreePath, key: Place | None) -> Tree:
        scalar = isinstance(event, yaml.ScalarEvent | yaml.AliasEvent)
        if path not in self.marks:
            self.marks[path] = Mark(self.place(event), key, scalar)
        if len(path) > DEEPEST or len(self.marks) > MOST_NODES:
            message = "nesting is too deep" if len(path) > DEEPEST else f"more than {MOST_NODES} values"
            raise _TooMuch(self.place(event).problem(message, "a case is far smaller than this"))
        self.refuse_cleverness(event)
        if isinstance(event, yaml.MappingStartEvent):
            return self.mapping(path)
        if isinstance(event, yaml.SequenceStartEvent):
            return self.sequence(path)
        return self.scalar(event)

    def scalar(self, event: Any) -> Tree:
        if isinstance(event, yaml.AliasEvent):
            return UNREADABLE
        text: str = event.value
        return None if text == "" and event.style is None else text

    def refuse_cleverness(self, event: Any) -> None:
        if isinstance(event, yaml.AliasEvent):
            self.report(
                event, f"an alias (*{event.anchor}) is not allowed", "write the value out where it is needed"
            )
        elif event.anchor:
            self.report(
                event, f"an anchor (&{event.anchor}) is not allowed", "write the value out where it is needed"
            )
        if getattr(event, "tag", None):
            self.report(event, "a tag (!) is not allowed", "write the plain value")

    def mapping(self, path: TreePath) -> dict[str, Tree]:
        tree: dict[str, Tree] = {}
        for event in self.events:
            if isinstance(event, yaml.MappingEndEvent):
                break
            place, key = self.place(event), self.key(event, tree, path)
            value = next(self.events)
            if key is None:
                self.node(value, (*path, f"\0{len(self.marks)}"), place)
            else:
                tree[key] = self.node(value, (*path, key), place)
        return tree

    def key(self, event: Any, tree: dict[str, Tree], path: TreePath) -> str | None:
        """The text of a key; None (and a report) when the entry cannot be used."""
        if not isinstance(event, yaml.ScalarEvent):
            self.report(event, "a key must be plain words", "write `key: value`")
            self.node(event, (*path, f"\0{len(self.marks)}"), None)
            return None
        self.refuse_cleverness(event)
        key: str = event.value
        if key == "<<":
            self.report(event, "a merge key (<<) is not allowed", "write the keys out, or use `every bed`")
        elif not key:
            self.report(event, "a key is missing before the colon", "write `key: value`")
        elif key in tree:
            first = self.marks[(*path, key)].key
            line = f" (first on line {first.line})" if first else ""
            self.report(event, f"'{_short(key)}' stands here a second time{line}", "keep one of the two")
        else:
            return key
        return None

    def sequence(self, path: TreePath) -> list[Tree]:
        tree: list[Tree] = []
        for event in self.events:
            if isinstance(event, yaml.SequenceEndEvent):
                break
            tree.append(self.node(event, (*path, len(tree)), None))
        return tree


def _short(text: str) -> str:
    clean = "".join(c if c.isprintable() else "?" for c in text)
    return clean if len(clean) <= 60 else clean[:57] + "..."


_OPEN, _QUOTE = "close the bracket that was opened before", "put the value in quotes"
_PLAIN_WORDS = (
    ("'\\t'", "a tab stands where only spaces may", "indent with spaces"),
    ("mapping values are not allowed", "a second colon in one value", f"{_QUOTE}, or begin a new line"),
    ("could not find expected ':'", "a key without its colon", "write `key: value`"),
    ("expected ',' or '}'", "a comma or the closing } is missing", _OPEN),
    ("expected ',' or ']'", "a comma or the closing ] is missing", _OPEN),
    (
        "expected <block end>",
        "this does not fit what stands above it",
        "align it with the keys it belongs to",
    ),
    ("found unexpected end of stream", "a quote is opened and never closed", "close the quote"),
    ("sequence entries are not allowed", "a list entry (- ) cannot begin here", "begin it on its own line"),
    ("expected the node content", "a value is missing here", f"write one; {_QUOTE} if it begins with a sign"),
    ("found unknown escape", "an unknown escape in double quotes", "use single quotes"),
    ("that cannot start any token", "a value cannot begin with this sign", _QUOTE),
)


def _syntax(error: yaml.MarkedYAMLError, text: Text) -> Problem:
    mark = error.problem_mark or error.context_mark
    place = Place(text, mark.line + 1, mark.column + 1) if mark else Place(text)
    found = f"{error.problem or error.context or 'unreadable'}"
    for sign, message, hint in _PLAIN_WORDS:
        if sign in found:
            return place.problem(f"not YAML: {message}", hint)
    return place.problem(f"not YAML: {found}", "look at this line and the one before it")
