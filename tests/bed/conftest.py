"""The lead case as a tree, to be changed by tests."""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml

from tests.bed.build import Tree


@pytest.fixture
def lead_tree(lead: Path) -> Tree:
    """The lead case without its limits."""
    tree: Tree = yaml.load(lead.read_text(), Loader=yaml.BaseLoader)
    return {**tree, "limits": {}}
