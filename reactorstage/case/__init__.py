"""Case files: read, checked, in SI units.

`load` reads a file; the shape of what it gives is in `model`. Heavy libraries load on first use.
"""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from reactorstage.case.model import Case

__all__ = ["json_schema", "load", "starter_case"]


def load(path: str | Path, overrides: Sequence[str] = ()) -> Case:
    """Read and check a case file.

    overrides: texts NAME=VALUE, such as "bed 1.inlet temperature=390 degC". Raises CaseProblems with every
    problem of the file, CallError for a missing file or a wrong override.
    """
    from reactorstage.case.reading import load_file

    return load_file(Path(path), overrides)


def json_schema() -> dict[str, Any]:
    """The JSON Schema (draft 7) of case files."""
    from reactorstage.case.schema import json_schema as made

    return made()


def starter_case() -> str:
    """The text of a small commented case to start from."""
    from reactorstage.case.starter import starter_case as text

    return text()
