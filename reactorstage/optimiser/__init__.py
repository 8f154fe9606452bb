"""Optimising a train: numbers and scaling, starts, local solves, explanation.

`optimise(programme)` is the door; `programme.py` says what it needs, `result.py` what it gives.
"""

from __future__ import annotations

from typing import Any

__all__ = ["optimise"]


def __getattr__(name: str) -> Any:
    if name == "optimise":
        from reactorstage.optimiser.search import optimise

        return optimise
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
