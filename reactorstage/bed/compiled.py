"""How the kernel is compiled: one place for the options.

Compiled functions take few, flat arrays: every array that crosses a call costs time in each call and at
compilation, which here decides both.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from typing import Any

os.environ.setdefault("NUMBA_OPT", "2")
os.environ.setdefault("NUMBA_LOOP_VECTORIZE", "0")
os.environ.setdefault("NUMBA_SLP_VECTORIZE", "0")

import numba

_OPTIONS: dict[str, Any] = {"cache": True, "nogil": True, "fastmath": False, "error_model": "numpy"}

compiled: Callable[[Any], Any] = numba.njit(no_cpython_wrapper=True, no_cfunc_wrapper=True, **_OPTIONS)
"""Compile a function of the kernel that only other compiled functions call."""

entry: Callable[[Any], Any] = numba.njit(no_cfunc_wrapper=True, **_OPTIONS)
"""Compile a function of the kernel that Python calls: cached on disk, releases the GIL, divides as NumPy does."""

inlined: Callable[[Any], Any] = numba.njit(
    inline="always", no_cpython_wrapper=True, no_cfunc_wrapper=True, **_OPTIONS
)
"""For a function with one caller: it becomes part of that caller before compilation, which halves its cost."""
