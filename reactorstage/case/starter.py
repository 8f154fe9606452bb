"""The case to start from."""

from __future__ import annotations

from importlib.resources import files


def starter_case() -> str:
    """The text of a small commented case of two beds with invented numbers."""
    return (files("reactorstage.case") / "starter.yaml").read_text(encoding="utf-8")
