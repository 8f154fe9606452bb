"""Exceptions, each with the exit status that the command line gives for it.

ReactorstageError            1  a defect of ours
├── CallError                2  the call is wrong (option, name, path)
├── CaseProblems             3  the case is wrong; carries every problem found
└── ComputationError         4  the computation failed; carries the partial result
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any


@dataclass(frozen=True)
class Problem:
    """One thing wrong with a case: where it stands and what to do.

    line and column count from 1; source_line is the text of that line; hint may be empty.
    """

    file: str
    line: int
    column: int
    message: str
    source_line: str = ""
    hint: str = ""

    def __str__(self) -> str:
        head = f"{self.file}:{self.line}:{self.column}: error: {self.message}"
        shown = self.source_line.rstrip("\n").expandtabs(1)
        caret = " " * (self.column - 1) + "^"
        parts = [head] + ([f"    {shown}", f"    {caret}"] if shown.strip() else [])
        return "\n".join([*parts, f"    {self.hint}"] if self.hint else parts)


class ReactorstageError(Exception):
    """Base of every exception of this package."""

    exit_status = 1


class CallError(ReactorstageError):
    """The call is wrong: an unknown option value, name or path."""

    exit_status = 2


class CaseProblems(ReactorstageError):
    """A case that cannot be understood, with every problem found in one pass."""

    exit_status = 3

    def __init__(self, problems: Sequence[Problem]):
        self.problems = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class ComputationError(ReactorstageError):
    """The computation failed; `partial` holds what was finished before."""

    exit_status = 4

    def __init__(self, message: str, partial: Any = None):
        self.partial = partial
        super().__init__(message)
