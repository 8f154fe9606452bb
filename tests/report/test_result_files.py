"""result.json, profiles.csv and how files are put in place."""

from __future__ import annotations

import csv
import io
import json
import os
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from reactorstage.errors import CallError
from reactorstage.report import files
from reactorstage.report.cautions import SHORT
from reactorstage.report.profiles import train_profiles
from reactorstage.report.profiles_csv import profiles_csv
from reactorstage.report.result_json import as_text, optimum_json, rating_json, rounded
from reactorstage.train.result import Value
from tests.report import synthetic


def optimum_content() -> dict[str, Any]:
    outcome = synthetic.optimisation()
    return optimum_json(
        outcome.programme, outcome.optimum, outcome.today, outcome.best, outcome.others, outcome.seed
    )


def refuse(constant: str) -> float:
    raise AssertionError(f"{constant} in the JSON")


def test_json_has_what_provenance_needs() -> None:
    content = json.loads(as_text(rating_json(synthetic.rating(), ["bed 1.catalyst=2 t"]), 0.5))
    assert content["schema version"] == 2
    assert content["case"]["hash"] == "0" * 64
    assert content["case"]["set"] == ["bed 1.catalyst=2 t"]
    assert {"python", "reactorstage", "numpy", "scipy", "numba", "cantera"} <= set(content["versions"])
    assert list(content)[-1] == "times"
    assert len(content["cautions"]) >= 4


def test_json_is_in_display_units() -> None:
    content = optimum_content()
    assert content["decisions"]["bed 1.inlet temperature"] == {
        "now": pytest.approx(364.0), "was": pytest.approx(384.0), "unit": "degC",
        "from": pytest.approx(350.0), "to": pytest.approx(410.0),
    }  # fmt: skip
    assert content["quantities"]["gap 1.heat removed"] == {"value": pytest.approx(1.75), "unit": "MW"}
    assert content["money"]["per label"]["total"] == pytest.approx(1319.7)
    assert content["worths"][0]["relaxing saves"] == pytest.approx(2.2)
    assert content["worths"][0]["unit"] == "K"
    assert content["limits"][0]["margin"] == pytest.approx(14.0)
    assert len(content["answers"]) == 2 and len(content["starts"]) == 24


def test_json_never_holds_nan_but_null_and_a_reason() -> None:
    rating = synthetic.rating((synthetic.LEAD[0], replace(synthetic.LEAD[1], ratio=None)))
    spoiled = {**rating.quantities, "bed 1.rise": Value(float("nan"), "temperature difference", "")}
    text = as_text(rating_json(replace(rating, quantities=spoiled)))
    content = json.loads(text, parse_constant=refuse)
    missing = content["quantities"]["bed 2.inlet ratio benzene/ethylene"]
    assert missing == {"value": None, "unit": "mol/mol", "reason": "no ethylene"}
    assert content["quantities"]["bed 1.rise"]["value"] is None
    assert content["quantities"]["bed 1.rise"]["reason"]


def test_json_is_byte_equal_but_for_its_times() -> None:
    first, second = as_text(optimum_content(), 1.0), as_text(optimum_content(), 2.0)
    assert first != second
    assert first.partition('"times"')[0] == second.partition('"times"')[0]


def test_rounding_keeps_twelve_digits_and_hides_the_last_ones() -> None:
    assert rounded(1.0 / 3.0) == 0.333333333333
    assert rounded(0.1 + 0.2) == 0.3
    assert rounded(float("inf")) is None
    assert str(rounded(-0.0)) == "0.0"


def test_csv_has_one_row_per_point_with_units_in_the_heading() -> None:
    rating = synthetic.rating()
    rows = list(csv.DictReader(io.StringIO(profiles_csv(rating).decode())))
    assert len(rows) == sum(len(profile.w) for profile in rating.profiles)
    last = rows[-1]
    assert last["bed"] == "4"
    assert float(last["depth, %"]) == pytest.approx(100.0)
    assert float(last["catalyst from train inlet, t"]) == pytest.approx(13.3)
    assert float(last["temperature, degC"]) == pytest.approx(424.0)
    assert float(last["catalyst in bed, t"]) == pytest.approx(4.3)
    assert {"pressure, bar(a)", "flow of ethane, kmol/h", "rate of ethylation, kmol/(t h)"} <= set(last)
    assert rows[0]["cumulative selectivity to ethylbenzene from ethylene, mol %"] == ""


def test_cumulative_selectivity_runs_on_through_the_gaps() -> None:
    rating = synthetic.rating()
    product, main = rating.species.index(rating.product), rating.species.index(rating.main_reactant)
    made = sum(p.F[-1, product] - p.F[0, product] for p in rating.profiles)
    gone = sum(p.F[0, main] - p.F[-1, main] for p in rating.profiles)
    last = train_profiles(rating)[-1].cumulative[-1, product]
    assert last == pytest.approx(100.0 * made / gone)


def test_point_selectivity_follows_the_rates() -> None:
    rating = synthetic.rating()
    bed, profile = train_profiles(rating)[1], rating.profiles[1]
    r1, r2 = profile.r[20]
    product = rating.species.index(rating.product)
    assert bed.point[20, product] == pytest.approx(100.0 * (r1 - r2) / (r1 + r2))


def test_csv_of_a_case_without_product_has_no_selectivity() -> None:
    rating = replace(synthetic.rating(), product="")
    assert b"selectivity" not in profiles_csv(rating)
    assert np.isfinite(train_profiles(rating)[0].T).all()


def test_files_are_moved_into_place(tmp_path: Path) -> None:
    paths = files.write_all(tmp_path / "a" / "b", {"x.txt": b"one", "y.txt": b"two"})
    assert [path.read_bytes() for path in paths] == [b"one", b"two"]
    assert sorted(p.name for p in paths[0].parent.iterdir()) == ["x.txt", "y.txt"]


def test_a_write_that_fails_leaves_the_old_file_and_no_rest(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    files.write_all(tmp_path, {"x.txt": b"old"})

    def fail(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", fail)
    with pytest.raises(CallError, match=r"cannot write into .*No space left"):
        files.write_all(tmp_path, {"x.txt": b"new"})
    assert [p.name for p in tmp_path.iterdir()] == ["x.txt"]
    assert (tmp_path / "x.txt").read_bytes() == b"old"


def test_an_interrupted_write_leaves_no_rest(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def stop(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(os, "replace", stop)
    with pytest.raises(KeyboardInterrupt):
        files.write_all(tmp_path, {"x.txt": b"new"})
    assert list(tmp_path.iterdir()) == []


def test_a_folder_that_is_a_file_is_refused_before_work(tmp_path: Path) -> None:
    (tmp_path / "taken").write_text("")
    with pytest.raises(CallError, match="is a file, not a folder"):
        files.check_folder(tmp_path / "taken" / "results")
    files.check_folder(tmp_path / "new" / "results")


def test_csv_carries_the_caution_once() -> None:
    rows = list(csv.DictReader(io.StringIO(profiles_csv(synthetic.rating()).decode())))
    assert rows[0]["note"] == SHORT
    assert all(row["note"] == "" for row in rows[1:])
