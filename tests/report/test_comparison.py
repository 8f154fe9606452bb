"""Two settings side by side, and reading result files again."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

import reactorstage
from reactorstage.errors import CallError, ComputationError
from reactorstage.report.compared import comparison_json, comparison_tables, limits_sentences, verdict
from reactorstage.report.comparison import compared, differs
from reactorstage.report.read_result import read_result
from reactorstage.report.result_json import as_text, rating_json

CASES = Path(__file__).parents[2] / "cases"
LEAD = CASES / "selkemouth-ethylation.yaml"
OTHER = CASES / "quernthwaite-butadiene.yaml"


@pytest.fixture(scope="module")
def today() -> Any:
    return reactorstage.rate(reactorstage.load(LEAD))


@pytest.fixture(scope="module")
def cooler() -> Any:
    return reactorstage.rate(reactorstage.load(LEAD, ["bed 4.inlet temperature=370 degC"]))


def written(folder: Path, rating: Any, **changed: Any) -> Path:
    path = folder / "result.json"
    path.write_text(as_text({**rating_json(rating), **changed}), encoding="utf-8")
    return path


def test_differences_are_second_less_first(today: Any, cooler: Any) -> None:
    found = reactorstage.compare(today, cooler, ("as it is", "bed 4 cooler"))
    (setting,) = found.decisions
    assert (setting.name, setting.first, setting.second) == ("bed 4.inlet temperature", 384.0, 370.0)
    total = next(row for row in found.money if row.name == "total")
    expected = 3600.0 * (cooler.money["total"] - today.money["total"])
    assert total.change == pytest.approx(expected) == found.worse
    parts = [row.change for row in found.money if row.name != "total"]
    assert sum(parts) == pytest.approx(total.change)
    assert verdict(found).startswith(f"Bed 4 cooler costs {abs(expected):.1f} EUR/h less than as it is: ")
    assert found.broken[0] == 1
    assert "As it is breaks coking, bed 4 (11.44 mol/mol, at least 11.6 mol/mol)." in limits_sentences(found)


def test_the_same_setting_twice_differs_in_nothing(today: Any) -> None:
    found = reactorstage.compare(today, today)
    assert found.decisions == () and found.quantities == () and found.worse == 0.0
    assert not any(differs(row) for row in found.money)
    assert "costs the same" in verdict(found)


def test_a_file_and_the_rating_behind_it_compare_equal(tmp_path: Path, today: Any, cooler: Any) -> None:
    path = written(tmp_path, today)
    assert reactorstage.compare(path, cooler) == reactorstage.compare(today, cooler)


def test_tables_show_what_changed_per_bed_and_gap(today: Any, cooler: Any) -> None:
    found = reactorstage.compare(today, cooler)
    tables = {table.title: table for table in comparison_tables(found, today.by_products)}
    assert set(tables) == {"SETTINGS", "LIMITS", "BEDS", "HEAT REMOVED", "MONEY EUR/h"}
    assert tables["BEDS"].columns[0].cells == ("4",)
    assert tables["HEAT REMOVED"].columns[0].cells == ("gap 3", "effluent")


def test_json_of_a_comparison_names_both(today: Any, cooler: Any) -> None:
    content = comparison_json(reactorstage.compare(today, cooler, ("one", "two")))
    assert content["first"] == {"name": "one", "status": "limits broken", "limits broken": 1}
    assert content["settings"]["bed 4.inlet temperature"]["change"] == pytest.approx(-14.0)
    assert content["aim"]["worse by"] < 0.0


def test_unlike_trains_are_refused_with_what_differs(today: Any) -> None:
    other = reactorstage.rate(reactorstage.load(OTHER))
    with pytest.raises(CallError) as caught:
        reactorstage.compare(today, other)
    text = str(caught.value)
    assert "cannot be compared" in text and "4 beds against 2" in text
    assert "benzene, ethylene, ethane" in text and "feeds: " in text


def test_other_steps_in_a_gap_are_told_and_compared(today: Any, cooler: Any) -> None:
    one, other = (json.loads(as_text(rating_json(rating))) for rating in (today, cooler))
    other["train"]["steps"]["gap 2"] = ["inject ethylene"]
    (note,) = compared(one, other, ("a", "b")).notes
    assert note == "Gap 2 is inject ethylene, cool in the first, inject ethylene in the second."


def test_a_setting_without_an_answer_is_no_comparison(today: Any) -> None:
    from dataclasses import replace

    failed = replace(today, failure="bed 2 at 40 % depth: hotter than 1500 K")
    with pytest.raises(ComputationError, match="bed 2 at 40 % depth"):
        reactorstage.compare(today, failed)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ('{"a":\n ,}', ":2:2: this is not JSON"),
        ("[1, 2]", "this is no result file: it has no 'schema version'"),
        ('{"schema version": 1, "result": "rating"}', "schema version 1, this program reads 2"),
        ('{"schema version": 99}', "schema version 99, this program reads 2"),
        ('{"schema version": 2, "result": "comparison"}', "a result of `rate` or `optimise` is expected"),
        ('{"schema version": 2, "result": "rating"}', "status, quantities, limits, money missing"),
        ("[" * 100_000, "nested too deeply"),
    ],
)  # fmt: skip
def test_a_broken_or_old_result_says_what_is_wrong(tmp_path: Path, text: str, expected: str) -> None:
    path = tmp_path / "old.json"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(CallError) as caught:
        read_result(path)
    assert expected in str(caught.value) and str(path) in str(caught.value)


@pytest.mark.parametrize(
    ("key", "value"),
    [
        ("quantities", {"bed 1.rise": {"value": "hot", "unit": "K"}}),
        ("quantities", []),
        ("limits", [{"limit": "hot exit"}]),
        ("money", {"unit": "EUR/h"}),
        ("case", {"hash": "0"}),
    ],
)
def test_a_result_with_a_part_of_another_form_is_refused(
    tmp_path: Path, today: Any, key: str, value: Any
) -> None:
    with pytest.raises(CallError, match="not whole"):
        read_result(written(tmp_path, today, **{key: value}))


def test_a_result_that_is_no_text_or_not_there_is_refused(tmp_path: Path) -> None:
    (tmp_path / "bytes.json").write_bytes(b"\xff\xfe{}")
    with pytest.raises(CallError, match="not text"):
        read_result(tmp_path / "bytes.json")
    with pytest.raises(CallError, match="cannot be read"):
        read_result(tmp_path / "nowhere.json")


def test_a_result_of_a_failure_has_nothing_to_compare(tmp_path: Path, today: Any) -> None:
    with pytest.raises(CallError, match="no answer to compare"):
        read_result(written(tmp_path, today, failure="bed 2: hotter than 1500 K"))
