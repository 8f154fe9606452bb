"""How the kernel is compiled: one decorator, so that the options stand in one place."""

from __future__ import annotations

import os
from collections.abc import Callable
from typing import Any

os.environ.setdefault("NUMBA_OPT", "2")

import numba

compiled: Callable[[Any], Any] = numba.njit(cache=True, nogil=True, fastmath=False, error_model="numpy")
"""Compile a kernel function: cached on disk, releases the GIL, divides as NumPy does (no exceptions)."""

inlined: Callable[[Any], Any] = numba.njit(
    cache=True, nogil=True, fastmath=False, error_model="numpy", inline="never"
)
