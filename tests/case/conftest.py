from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path

import pytest

from reactorstage.case.model import Case
from reactorstage.case.reading import load_data
from reactorstage.errors import CaseProblems, Problem

LEAD = Path(__file__).parent / "data" / "lead.yaml"


def changed(text: str, changes: Sequence[tuple[str, str]]) -> str:
    """The text with the first occurrence of each old piece replaced; the piece must be there."""
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text


@pytest.fixture(scope="session")
def lead_text() -> str:
    return LEAD.read_text(encoding="utf-8")


@pytest.fixture
def read_lead(lead_text: str) -> Callable[..., Case]:
    """Reads the lead case with pieces of its text replaced."""

    def read(*changes: tuple[str, str], overrides: Sequence[str] = ()) -> Case:
        return load_data(changed(lead_text, changes).encode(), LEAD, overrides)

    return read


@pytest.fixture
def problems(read_lead: Callable[..., Case]) -> Callable[..., tuple[Problem, ...]]:
    """The problems of the lead case with pieces of its text replaced."""

    def find(*changes: tuple[str, str]) -> tuple[Problem, ...]:
        with pytest.raises(CaseProblems) as caught:
            read_lead(*changes)
        return caught.value.problems

    return find
