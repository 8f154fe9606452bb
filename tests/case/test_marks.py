from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.case.marks import LARGEST, MOST_NODES, decode, read_file, read_text
from reactorstage.errors import CallError, CaseProblems, Problem


def refused(text: str) -> tuple[Problem, ...]:
    """Problems of a YAML text, whether or not a tree could be made of it."""
    try:
        return tuple(read_text(text, "a.yaml").problems)
    except CaseProblems as found:
        return found.problems


def test_plain_values_keep_their_text() -> None:
    text = "a: 1e5\nb: no\nc: 12:30\nd: 010\ne: 0x1F\nf: 2024-01-01\ng: .5\nh: ~\ni:\nj: ''"
    assert read_text(text, "a.yaml").tree == {
        "a": "1e5", "b": "no", "c": "12:30", "d": "010", "e": "0x1F", "f": "2024-01-01", "g": ".5", "h": "~",
        "i": None, "j": "",
    }  # fmt: skip


def test_places_of_keys_and_values() -> None:
    marked = read_text("a:\n  bc: [x, {d: e}]  # note\n", "a.yaml")
    key, value = marked.mark(("a", "bc")).key, marked.mark(("a", "bc", 1, "d")).value
    assert key is not None and (key.line, key.column) == (2, 3)
    assert (value.line, value.column) == (2, 15)
    assert marked.mark(("a", "bc", 1, "nothing", "here")) == marked.mark(("a", "bc", 1))


def test_carets_stand_under_values_and_under_keys_of_mappings() -> None:
    marked = read_text("a:\n  b: text\n", "a.yaml")
    assert marked.mark(("a", "b")).best().column == 6
    assert marked.mark(("a", "b")).best(on_key=True).column == 3
    assert (marked.mark(("a",)).best().line, marked.mark(("a",)).best().column) == (1, 1)


BAD = [
    ("a: 1\nb: 2\na: 3", 3, 1, r"'a' stands here a second time \(first on line 1\)"),
    ("a: {b: 1, b: 2}", 1, 11, "'b' stands here a second time"),
    ("a: &x 1", 1, 4, r"an anchor \(&x\) is not allowed"),
    ("a: *x", 1, 4, r"an alias \(\*x\) is not allowed"),
    ("<<: {a: 1}", 1, 1, "a merge key"),
    ("a: !!float 3", 1, 4, "a tag"),
    ("a: !thing {b: 1}", 1, 4, "a tag"),
    ("a: 1\n---\nb: 1", 2, 1, "a second document"),
    ("{a: 1}: 2", 1, 1, "a key must be plain words"),
    (": 2", 1, 1, "not YAML"),
    ("a:\n\t- b", 2, 1, "not YAML: a tab"),
    ("a: b: c", 1, 5, "not YAML: a second colon"),
    ("a: [1, 2", 1, 9, "the closing ] is missing"),
    ("a: {b: 1\nc: 2", 2, 2, "the closing } is missing"),
    ('a: "x', 1, 6, "a quote is opened and never closed"),
    ("- a\nb: 1", 2, 1, "does not fit what stands above"),
    ("a: @x", 1, 4, "cannot begin with this sign"),
    ('a: "\\q"', 1, 6, "an unknown escape"),
    ("a: \x07", 1, 4, "a character that cannot be typed"),
    ("a\nb\nc: 1", 3, 2, "not YAML"),
    ("[" * 5000, 1, 22, "nesting is too deep"),
    ("{a: " * 5000, 1, 85, "nesting is too deep"),
]


@pytest.mark.parametrize(("text", "line", "column", "message"), BAD)
def test_what_is_not_plain_yaml_is_refused(text: str, line: int, column: int, message: str) -> None:
    with pytest.raises(CaseProblems, match=message) as caught:
        raise CaseProblems(refused(text))
    first = caught.value.problems[0]
    assert (first.line, first.column) == (line, column)
    assert first.hint


def test_several_problems_come_together() -> None:
    assert [p.line for p in refused("a: &x 1\na: 2\nb: !t 3\nc: *x")] == [1, 2, 3, 4]


def test_alias_bomb_is_only_a_list_of_problems() -> None:
    bomb = "a: &a [x, x]\n" + "".join(
        f"{b}: &{b} [*{a}, *{a}]\n" for a, b in zip("abcdefgh", "bcdefghi", strict=True)
    )
    assert len(refused(bomb)) == 9 + 16


def test_too_many_values() -> None:
    (problem,) = refused("- a\n" * (MOST_NODES + 5))
    assert problem.line == MOST_NODES and f"more than {MOST_NODES} values" in problem.message


@pytest.mark.parametrize(
    ("data", "message"),
    [
        (b"", "the file is empty"),
        (b" \n\n", "the file is empty"),
        (b"case: \0x", "binary"),
        (b"case: x\nb: \xff\xfe", r"byte 12 \(line 2\) is not UTF-8"),
        (b"x" * (LARGEST + 1), "larger than 1 MB"),
    ],
)
def test_files_that_are_no_text(data: bytes, message: str) -> None:
    with pytest.raises(CaseProblems, match=message):
        decode(data, "a.yaml")


def test_byte_order_mark_is_taken_off() -> None:
    assert decode("a: 1".encode("utf-8-sig"), "a.yaml") == "a: 1"


def test_a_huge_file_is_refused_without_being_read_whole(tmp_path: Path) -> None:
    path = tmp_path / "huge.yaml"
    with path.open("wb") as stream:
        stream.truncate(10_000_000_000)  # sparse: reading it whole would take minutes and all memory
    with pytest.raises(CaseProblems, match="larger than 1 MB"):
        read_file(path)


def test_missing_file_and_folder(tmp_path: Path) -> None:
    with pytest.raises(CallError, match="no such file"):
        read_file(tmp_path / "none.yaml")
    with pytest.raises(CallError, match="is not a file"):
        read_file(tmp_path)
    with pytest.raises(CallError, match=r"no such file|cannot be read"):
        read_file(Path("a\0b"))


def test_control_characters_do_not_reach_the_terminal() -> None:
    (problem,) = refused("a: \x1b[31m")
    assert "\x1b" not in str(problem)


@given(st.text(alphabet=st.characters(codec="utf-8"), max_size=200))
def test_any_text_gives_a_tree_or_problems(text: str) -> None:
    refused(text)


@given(st.text(alphabet="ab:-[]{}&*!|>'\"#%@,? \n\t", max_size=60))
def test_any_mixture_of_signs_gives_a_tree_or_problems(text: str) -> None:
    refused(text)
