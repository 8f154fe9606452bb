"""Changes of the tree before it is read: `every ...` blocks merged, `between` taken apart, values replaced.

Every value keeps the place where it was written, so that a message about bed 3 points at `every bed` when
that is where the value stands.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from copy import deepcopy

from reactorstage.case.marks import Mark, Marked, Tree, TreePath

BED = re.compile(r"bed [1-9][0-9]*")


def get(tree: Tree, path: TreePath) -> Tree:
    """The value at a path; None when there is none."""
    for key in path:
        if isinstance(tree, dict) and isinstance(key, str):
            tree = tree.get(key)
        elif isinstance(tree, list) and isinstance(key, int) and key < len(tree):
            tree = tree[key]
        else:
            return None
    return tree


def put(marked: Marked, path: TreePath, value: Tree, mark: Mark) -> None:
    """Write a value at a path whose parent is there; marks below the path are forgotten."""
    parent = get(marked.tree, path[:-1])
    key = path[-1]
    if (isinstance(parent, dict) and isinstance(key, str)) or (
        isinstance(parent, list) and isinstance(key, int)
    ):
        parent[key] = value  # type: ignore[index]
        for old in below(marked, path) if path in marked.marks else ():
            del marked.marks[old]
        marked.marks[path] = mark


def below(marked: Marked, path: TreePath) -> list[TreePath]:
    """Every marked path at or under a path."""
    return [p for p in marked.marks if p[: len(path)] == path]


def transplant(value: Tree, marks: Iterable[tuple[TreePath, Mark]], marked: Marked, path: TreePath) -> None:
    """Put a copy of a value at a path, with marks given relative to it."""
    found = list(marks)
    put(marked, path, deepcopy(value), dict(found)[()])
    marked.marks.update({(*path, *relative): mark for relative, mark in found})


def branch(marked: Marked, path: TreePath) -> list[tuple[TreePath, Mark]]:
    """Marks at and under a path, relative to it."""
    return [(p[len(path) :], marked.marks[p]) for p in below(marked, path)]


def resolve(marked: Marked) -> None:
    """Merge `every bed` and `every reaction` into those that do not say otherwise; take `between` apart."""
    tree = marked.tree
    reactions = get(tree, ("reactions",))
    names = [name for name in reactions if name != "every reaction"] if isinstance(reactions, dict) else []
    merge(marked, ("reactions", "every reaction"), [("reactions", name) for name in names])
    merge(marked, ("every bed",), [path for path in sections(tree) if BED.fullmatch(str(path[-1]))])
    forget_backward(marked, names)
    for path in sections(tree):
        if get(tree, path) is None:
            put(marked, path, [], marked.mark(path))
    for path in [p for p in marked.marks if p and p[0] == "limits" and p[-1] == "between"]:
        take_apart(marked, path)


def sections(tree: Tree) -> list[TreePath]:
    """Paths of the sections of the train."""
    train = get(tree, ("train",))
    items = enumerate(train) if isinstance(train, list) else []
    return [("train", i, next(iter(item))) for i, item in items if isinstance(item, dict) and len(item) == 1]


def merge(marked: Marked, source: TreePath, targets: list[TreePath]) -> None:
    """Copy each key of the mapping at `source` into the targets that do not have it."""
    block = get(marked.tree, source)
    for key, value in block.items() if isinstance(block, dict) else ():
        marks = branch(marked, (*source, key))
        for target in targets:
            inside = get(marked.tree, target)
            if isinstance(inside, dict) and key not in inside and value is not None:
                transplant(value, marks, marked, (*target, key))


def forget_backward(marked: Marked, names: list[str]) -> None:
    """A `backward` from `every reaction` is not meant for irreversible equations."""
    common = marked.marks.get(("reactions", "every reaction", "backward"))
    for name in names:
        reaction = get(marked.tree, ("reactions", name))
        path = ("reactions", name, "backward")
        if common and isinstance(reaction, dict) and marked.marks.get(path) is common:
            equation = reaction.get("equation")
            if isinstance(equation, str) and "<=>" not in equation:
                del reaction["backward"], marked.marks[path]


def take_apart(marked: Marked, path: TreePath) -> None:
    """Write `between: A and B` as at least A, at most B; anything else is left for the reader to refuse."""
    limit, text = get(marked.tree, path[:-1]), get(marked.tree, path)
    parts = text.split(" and ") if isinstance(text, str) else []
    if not isinstance(limit, dict) or len(parts) != 2 or {"at least", "at most"} & set(limit):
        return
    mark = marked.marks.pop(path)
    del limit["between"]
    for key, part in zip(("at least", "at most"), parts, strict=True):
        limit[key] = part.strip()
        marked.marks[(*path[:-1], key)] = mark


def drop_blocks(marked: Marked) -> None:
    """Remove the `every ...` blocks, once merged and checked."""
    tree = marked.tree
    if isinstance(tree, dict):
        tree.pop("every bed", None)
        reactions = tree.get("reactions")
        if isinstance(reactions, dict):
            reactions.pop("every reaction", None)
