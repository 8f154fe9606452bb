"""Whatever is in a file, the answer is a case or problems of the case, never another exception."""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.case.reading import load_data
from reactorstage.errors import CaseProblems

LEAD = Path(__file__).parent / "data" / "lead.yaml"


@given(st.binary(max_size=300))
def test_any_bytes_give_problems(data: bytes) -> None:
    with pytest.raises(CaseProblems):
        load_data(data, Path("a.yaml"))


@given(st.text(max_size=20), st.integers(0, 4600), st.integers(0, 20))
def test_a_lead_case_with_any_damage_gives_a_case_or_problems(piece: str, at: int, length: int) -> None:
    text = LEAD.read_text(encoding="utf-8")
    try:
        load_data((text[:at] + piece + text[at + length :]).encode("utf-8", "surrogatepass"), LEAD)
    except CaseProblems as found:
        assert all(p.line >= 1 and p.column >= 1 and p.message for p in found.problems)


KEYS = st.sampled_from(["now", "bed 1", "cool", "x"])
TREES = st.recursive(
    st.sampled_from(["1", "1 t", "rest", "all", "benzene", "bed 1", "every cooling level", "5 %", "", "x"]),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(KEYS, inner, max_size=3),
    max_leaves=6,
)


KEYS_OF_A_CASE = sorted(yaml.safe_load(LEAD.read_text(encoding="utf-8")))


@given(tree=TREES, key=st.sampled_from(KEYS_OF_A_CASE))
def test_any_tree_under_a_key_gives_a_case_or_problems(tree: object, key: str) -> None:
    whole = yaml.safe_load(LEAD.read_text(encoding="utf-8"))
    whole[key] = tree
    try:
        load_data(yaml.safe_dump(whole).encode(), LEAD)
    except CaseProblems as found:
        assert found.problems
