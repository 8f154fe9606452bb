"""From a file to a checked case: read, merge, change, read into the models, check, build."""

from __future__ import annotations

from collections.abc import Sequence
from copy import deepcopy
from dataclasses import dataclass, replace
from pathlib import Path

from reactorstage.case.build import build
from reactorstage.case.checks import check
from reactorstage.case.marks import Marked, decode, read_file, read_text
from reactorstage.case.model import Case, Source
from reactorstage.case.overrides import OPTION, change, override
from reactorstage.case.resolve import drop_blocks, get, resolve
from reactorstage.case.units import shown
from reactorstage.case.validate import Findings, validate
from reactorstage.case.written import CaseWritten, VariantWritten
from reactorstage.errors import CallError, CaseProblems, Problem

VARIANT = "variant of"


@dataclass(frozen=True)
class Opened:
    """A case file that could be read as YAML, with `every ...` merged and a variant's changes made."""

    marked: Marked
    folder: Path
    problems: tuple[Problem, ...]
    variant: str = ""


def load_file(path: Path, overrides: Sequence[str] = ()) -> Case:
    """See `reactorstage.case.load`."""
    return load_data(read_file(path), path, overrides)


def load_data(data: bytes, path: Path, overrides: Sequence[str] = ()) -> Case:
    """The case whose file holds `data`; messages name it `path`, other files are looked up in its folder."""
    opened = open_case(read_text(decode(data, str(path)), str(path)), path)
    marked = opened.marked
    written, problems = read(marked, opened)
    if problems or written is None:
        raise CaseProblems(problems)
    if overrides:
        marked = deepcopy(marked)
        override(marked, overrides)
        written, problems = read(marked, opened)
        if problems or written is None:
            raise CallError(_blame(problems, overrides))
    drop_blocks(marked)
    return build(written, Source(str(path), marked, tuple(overrides)), opened.folder)


def read(marked: Marked, opened: Opened) -> tuple[CaseWritten | None, list[Problem]]:
    """The models and every problem."""
    findings = Findings()
    written = validate(marked.tree, CaseWritten, findings)
    if written is not None:
        check(written, opened.folder, findings)
    problems = [*opened.problems, *(blame_variant(p, opened.variant) for p in placed(findings, marked))]
    return written, in_order(problems)


def blame_variant(problem: Problem, variant: str) -> Problem:
    """A problem outside the variant says that it stands there with the variant's changes made."""
    if not variant or problem.file == variant or problem.file.startswith(OPTION):
        return problem
    return replace(problem, message=f"{problem.message} (with the changes of {variant})")


def placed(findings: Findings, marked: Marked) -> list[Problem]:
    """Findings as problems at their places."""
    return [marked.mark(path).best(on_key).problem(text, hint) for path, text, hint, on_key in findings.items]


def in_order(problems: Sequence[Problem]) -> list[Problem]:
    """Each problem once, in the order of the files."""
    files = list(dict.fromkeys(problem.file for problem in problems))
    return sorted(dict.fromkeys(problems), key=lambda p: (files.index(p.file), p.line, p.column))


def open_case(marked: Marked, path: Path) -> Opened:
    """The merged tree of a case or of a variant."""
    if get(marked.tree, (VARIANT,)) is not None:
        return open_variant(marked, path)
    if not isinstance(marked.tree, dict):
        problem = marked.mark(()).value.problem("a case is a list of `key: value`", "begin with `case: NAME`")
        raise CaseProblems([*marked.problems, problem])
    resolve(marked)
    return Opened(marked, path.parent, tuple(marked.problems))


def open_variant(variant: Marked, path: Path) -> Opened:
    """The tree of the case that a variant changes, with the changes made. Raises CaseProblems."""
    findings = Findings()
    written = validate(variant.tree, VariantWritten, findings)
    if written is None or not written.variant_of:
        raise CaseProblems(in_order([*variant.problems, *placed(findings, variant)]))
    base = path.parent / written.variant_of
    place = variant.mark((VARIANT,)).value
    try:
        marked = read_text(decode(read_file(base), str(base)), str(base))
    except CallError:
        message = f"there is no file {shown(written.variant_of)}"
        raise CaseProblems([place.problem(message, "it is looked up in the folder of this file")]) from None
    if get(marked.tree, (VARIANT,)) is not None:
        message = f"{shown(written.variant_of)} is a variant itself"
        raise CaseProblems([place.problem(message, "name the case that it changes")])
    opened = open_case(marked, base)
    findings.items += change(marked, variant)
    problems = (*variant.problems, *placed(findings, variant), *opened.problems)
    return Opened(marked, base.parent, problems, str(path))


def _blame(problems: Sequence[Problem], overrides: Sequence[str]) -> str:
    """What is wrong with the overrides of a case that was right without them."""
    texts = []
    for problem in problems:
        if problem.file.startswith(f"{OPTION} "):
            texts.append(
                f"{problem.file}: {problem.message}" + (f" ({problem.hint})" if problem.hint else "")
            )
        else:
            texts.append(f"with {' '.join(f'{OPTION} {text}' for text in overrides)}:\n{problem}")
    return "\n".join(texts)
