"""Writing results: each file goes to a temporary name beside its place and is then moved there."""

from __future__ import annotations

import os
from collections.abc import Mapping
from pathlib import Path

from reactorstage.errors import CallError


def write_all(folder: Path, contents: Mapping[str, bytes]) -> list[Path]:
    """Write files into a folder, which is made when it is missing; the paths written.

    Raises CallError with the reason when the folder or a file cannot be written; a file is then either
    the old one or the new one, never half of one.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
        return [_write(folder / name, data) for name, data in contents.items()]
    except OSError as error:
        raise CallError(f"cannot write into {folder}: {error.strerror or error}") from error


def _write(path: Path, data: bytes) -> Path:
    temporary = path.with_name(f".{path.name}.{os.getpid()}")
    try:
        temporary.write_bytes(data)
        os.replace(temporary, path)
    except BaseException:
        temporary.unlink(missing_ok=True)
        raise
    return path


def check_folder(folder: Path) -> None:
    """Raise CallError early when the place for results cannot be a folder."""
    for place in (folder, *folder.parents):
        if place.is_dir():
            return
        if place.exists():
            raise CallError(f"cannot write into {folder}: {place} is a file, not a folder")
