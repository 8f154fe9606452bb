"""Settings and fixtures shared by all tests."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from hypothesis import settings

os.environ["MPLBACKEND"] = "Agg"
for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(name, "1")

settings.register_profile("repeatable", deadline=None, derandomize=True, max_examples=40)
settings.load_profile("repeatable")

ROOT = Path(__file__).resolve().parent.parent


@pytest.fixture(scope="session")
def root() -> Path:
    """Top folder of the project."""
    return ROOT


@pytest.fixture(scope="session")
def cases() -> Path:
    """Folder of the shipped cases."""
    return ROOT / "cases"


@pytest.fixture(scope="session")
def lead(cases: Path) -> Path:
    """The lead case: four beds, five species, three reversible reactions."""
    return cases / "selkemouth-ethylation.yaml"
