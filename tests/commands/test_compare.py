"""`compare` and `optimise --explain` on real cases."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from reactorstage.commands import main


@pytest.fixture(autouse=True)
def elsewhere(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("COLUMNS", "80")


def run(*words: object) -> Result:
    return CliRunner().invoke(main, [str(word) for word in words])


def test_two_cases_side_by_side(cases: Path, lead: Path) -> None:
    done = run("compare", lead, cases / "selkemouth-aged-catalyst.yaml")
    assert done.exit_code == 0, done.stderr
    text = " ".join(done.stdout.split())
    assert "Selkemouth Works, aged catalyst costs" in text and "catalyst activity of bed 1" in text
    assert "BROKEN !" in text and "Steady state" in text
    assert max(map(len, done.stdout.splitlines())) <= 80


def test_two_results_side_by_side_as_json(lead: Path) -> None:
    for folder, setting in (("a", "384 degC"), ("b", "370 degC")):
        words = ("--out", folder, "--no-figures", "--set", f"bed 4.inlet temperature={setting}")
        assert run("rate", lead, *words).exit_code == 5
    done = run("compare", "a/result.json", "b/result.json", "--json")
    content = json.loads(done.stdout)
    assert content["settings"]["bed 4.inlet temperature"] == {
        "first": 384.0, "second": 370.0, "change": -14.0, "unit": "degC",
    }  # fmt: skip
    assert content["first"]["name"] == "a/result.json"


def test_a_proposed_setting_against_the_best_with_the_moves_to_it(lead: Path) -> None:
    done = run("compare", lead, "--set", "bed 1.inlet temperature=370 degC", "--quiet")
    assert done.exit_code == 0, done.stderr
    text = " ".join(done.stdout.split())
    assert "The setting proposed costs" in text and "more than the best one" in text
    assert "MOVES" in text and "370 364 degC" in text


def test_a_proposed_setting_outside_its_range_is_told_the_range(lead: Path) -> None:
    done = run("compare", lead, "--set", "bed 1.inlet temperature=480 degC")
    assert done.exit_code == 2
    assert "outside its range 350 degC to 410 degC" in done.stderr and done.stdout == ""


def test_unlike_trains_end_with_2_and_what_differs(cases: Path, lead: Path) -> None:
    done = run("compare", lead, cases / "quernthwaite-butadiene.yaml")
    assert done.exit_code == 2
    assert "cannot be compared" in done.stderr and "4 beds against 2" in done.stderr


@pytest.mark.parametrize(
    ("words", "expected"),
    [
        (("old.json",), "name a second one"),
        (("old.json", "old.json", "--set", "x=1"), "--set changes a case"),
        (("old.json", "old.json", "--best"), "--best optimises a case"),
        (("old.json", "old.json"), "this is not JSON"),
        (("plant.yaml", "--best"), "anyway"),
    ],
)
def test_a_wrong_call_says_what_to_do(words: tuple[str, ...], expected: str) -> None:
    Path("old.json").write_text("not json")
    done = run("compare", *words)
    assert done.exit_code == 2 and expected in done.stderr and "Traceback" not in done.stderr


def test_explain_shows_every_table_within_the_screen(lead: Path) -> None:
    done = run("optimise", lead, "--starts", 6, "--out", "out", "--explain", "--no-figures")
    assert done.exit_code == 0, done.stderr
    assert max(map(len, done.stdout.splitlines())) <= 80
    for title in ("ANSWERS", "HOW FAR RELAXING PAYS", "FLAT WITHIN", "MOVES", "ORDER IN ETHYLENE",
                  "WHAT MOVES THE ANSWER"):  # fmt: skip
        assert title in done.stdout
    content = json.loads(Path("out/result.json").read_text())
    assert content["schema version"] == 2
    assert content["certificate"]["distinct answers"] == 2 and content["certificate"]["starts"] == 6
    gains = [move["gain"] for move in content["moves"]["moves"]]
    assert sum(gains) == pytest.approx(content["moves"]["gain"], abs=1e-6)
    assert content["flatness"]["numbers"]["bed 4.injected ethylene"]["staying as today costs"] is None
    assert {"limits", "together", "alone"} <= content["pairs"][0].keys()
    assert content["influences"][0]["parameter"] == "feed ethylene.flow"
    assert content["worths"][0]["reach"]["then at an end of its range"]


def test_what_cannot_be_met_names_the_conflict_and_what_would_make_it_possible(lead: Path) -> None:
    done = run("optimise", lead, "--starts", 4, "--out", "out", "--no-figures", "--set",
               "every bed.catalyst activity=0.55")  # fmt: skip
    assert done.exit_code == 5
    text = " ".join(done.stdout.split())
    assert "CANNOT MEET ALL LIMITS" in text and "would have to give way" in text
    assert "cannot be met together within the search ranges" in text
    assert "POSSIBLE IF one gives way alone: slip (effluent) by 0.8 kmol/h (to 2.15 kmol/h)." in text
    held = json.loads(Path("out/result.json").read_text())["smallest conflict"]
    assert "slip, effluent" in held["limits"] and held["searches"] >= 8


def test_a_comparison_is_shown_in_the_units_asked_for_and_written_in_trade_units(lead: Path) -> None:
    aged = lead.with_name("selkemouth-aged-catalyst.yaml")
    text = run("compare", lead, aged, "--units", "US").stdout
    assert "degF" in text and "10^6 Btu/h" in text and "degC" not in text and "MW" not in text
    assert max(map(len, text.splitlines())) <= 80
    words = ("compare", lead, aged, "--json")
    assert run(*words, "--units", "US").stdout == run(*words).stdout
