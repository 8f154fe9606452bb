"""How the kernel is compiled and where the machine code is kept: one place for both.

Compiled functions take few, flat arrays: every array that crosses a call costs time in each call and at
compilation, which here decides both.

Machine code is kept in the user's cache folder, under a name that changes with the sources of the kernel, so
that an upgrade never meets code of another version. Where no folder can be written, every process compiles
for itself.
"""

from __future__ import annotations

import functools
import gc
import hashlib
import os
import tempfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from functools import lru_cache
from pathlib import Path
from typing import Any

os.environ.setdefault("NUMBA_OPT", "2")
os.environ.setdefault("NUMBA_LOOP_VECTORIZE", "0")
os.environ.setdefault("NUMBA_SLP_VECTORIZE", "0")

import numba
from numba.extending import overload

from reactorstage.bed.linked import Linked

READ = ("rates.py", "rate_law.py", "law.py", "effectiveness.py", "cubic.py")
"""Modules of the chemistry whose constants are frozen into the machine code."""


@lru_cache(maxsize=1)
def cache_folder() -> Path | None:
    """Folder of this version's machine code, or None where nothing can be written.

    NUMBA_CACHE_DIR, when set, is used as the place for it; else XDG_CACHE_HOME or the user's .cache folder;
    else the system's folder for temporary files.
    """
    name = f"reactorstage-{os.getuid() if hasattr(os, 'getuid') else 'user'}"
    home = os.environ.get("XDG_CACHE_HOME") or os.path.expanduser("~/.cache")
    wanted = os.environ.get("NUMBA_CACHE_DIR")
    places = [Path(wanted)] if wanted else [Path(home) / "reactorstage", Path(tempfile.gettempdir()) / name]
    for place in places:
        folder = place / f"kernel-{_fingerprint()}"
        try:
            folder.mkdir(parents=True, exist_ok=True)
            with tempfile.TemporaryFile(dir=folder):
                return folder
        except OSError:
            continue
    return None


def _fingerprint() -> str:
    """Changes with every source file that machine code depends on, and with Numba's version."""
    here = Path(__file__).parent
    digest = hashlib.sha256(numba.__version__.encode())
    for file in [*sorted(here.glob("*.py")), *(here.parent / "chemistry" / name for name in READ)]:
        digest.update(file.read_bytes())
    return digest.hexdigest()[:16]


def is_compiled(ideal: bool) -> bool:
    """Whether an earlier process left the machine code of the kernel, for ideal gases or other fluids."""
    folder = cache_folder()
    return folder is not None and (folder / _mark("train_pass", ideal)).exists()


def _mark(name: str, ideal: bool) -> str:
    return f"{name} for {'ideal gases' if ideal else 'other fluids'}"


_called: set[str] = set()
"""Marks of what this process has called."""


@contextmanager
def first_call(function: Any, ideal: bool) -> Iterator[None]:
    """Around a call of an entry: while it compiles no garbage is collected, which saves a tenth of time.

    A file in the cache folder tells later processes that the code is there.
    """
    mark = _mark(function.__name__, ideal)
    if mark in _called or not gc.isenabled():
        yield
        return
    gc.disable()
    try:
        yield
    finally:
        gc.enable()
    _called.add(mark)
    folder = cache_folder()
    if folder is not None:
        with suppress(OSError):
            (folder / mark).touch()


OPTIONS = {"nogil": True, "fastmath": False, "error_model": "numpy", "no_cfunc_wrapper": True}
LINKED = {"no_cpython_wrapper": True, "pipeline_class": Linked}


def _compiler(**options: Any) -> Callable[[Any], Any]:
    """A decorator that compiles on first use and keeps the result in `cache_folder`."""
    folder = cache_folder()
    make = numba.njit(cache=folder is not None and "pipeline_class" not in options, **OPTIONS, **options)

    def decorate(function: Any) -> Any:
        before = numba.config.CACHE_DIR
        numba.config.CACHE_DIR = str(folder) if folder is not None else before
        try:
            return make(function)
        finally:
            numba.config.CACHE_DIR = before

    return decorate


compiled = _compiler(**LINKED)
"""Compile a function of the kernel that only other compiled functions call."""

small = _compiler(**LINKED, forceinline=True)
"""For a small function with several callers: LLVM copies it into each."""

entry = _compiler()
"""Compile a function of the kernel that Python calls: releases the GIL, divides as NumPy does."""

inlined = _compiler(**LINKED, inline="always")
"""For a function with one caller: it becomes part of that caller before compilation."""


def for_nonideal(otherwise: int | None) -> Callable[[Any], Any]:
    """Decorator of a compiled function that does its work for nonideal fluids only.

    Machine code for ideal gases, which have a type of chemistry of their own (see `data.Chemistry`), gets
    `otherwise` in its place and is made without reading its body.
    """

    def nothing(*_: Any) -> Any:
        return otherwise

    def decorate(function: Any) -> Any:
        @functools.wraps(function)
        def stub(*_: Any) -> Any:
            raise NotImplementedError("for compiled code only")

        def choose(chemistry: Any, *_: Any) -> Any:
            return function if len(chemistry[chemistry.fields.index("nonideal")]) else nothing

        overload(stub, jit_options=OPTIONS | LINKED, strict=False)(choose)
        return stub

    return decorate
