"""`report` on the command line."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from click.testing import CliRunner, Result

from reactorstage.commands import main

CASES = sorted((Path(__file__).resolve().parents[2] / "cases").glob("*.yaml"))


@pytest.fixture(autouse=True)
def elsewhere(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("COLUMNS", raising=False)


def run(*words: object) -> Result:
    return CliRunner().invoke(main, [str(word) for word in words])


FEW = ("quernthwaite-butadiene", "selkemouth-aged-catalyst")
"""Cases whose page is made of the best setting; of every other one among the slow tests."""


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_every_shipped_case_gives_a_small_page_of_its_setting(path: Path) -> None:
    done = run("report", path, "--as-set", "--out", "out")
    assert done.exit_code in (0, 5), done.stderr
    assert max(map(len, done.stdout.splitlines())) <= 100
    assert len(Path("out/report.html").read_text(encoding="utf-8")) < 1_500_000


@pytest.mark.parametrize(
    "path",
    [pytest.param(path, marks=() if path.stem in FEW else pytest.mark.slow) for path in CASES],
    ids=lambda path: path.stem,
)
def test_every_shipped_case_gives_a_small_page(path: Path) -> None:
    done = run("report", path, "--starts", 4, "--out", "out")
    assert done.exit_code == 0, done.stderr
    assert "Inside its limits?\n  Yes" in done.stdout and "What to change first?" in done.stdout
    assert max(map(len, done.stdout.splitlines())) <= 100
    assert os.listdir("out") == ["report.html"] and "out/report.html" in done.stderr
    page = Path("out/report.html").read_text(encoding="utf-8")
    assert len(page) < 1_500_000 and "inside all limits" in page


def test_the_setting_of_the_case_ends_with_5_when_it_breaks_limits(lead: Path) -> None:
    done = run("report", lead, "--as-set", "--quiet")
    assert done.exit_code == 5 and done.stderr == ""
    assert "Broken: 1 limit." in done.stdout and "coking, bed 4: 11.44" in done.stdout
    assert Path("figures", lead.stem, "report.html").is_file()


def test_a_reference_and_units_reach_page_and_screen(lead: Path, cases: Path) -> None:
    aged = cases / "selkemouth-aged-catalyst.yaml"
    done = run("report", lead, "--as-set", "--against", aged, "--units", "US", "--out", "out")
    page = Path("out/report.html").read_text(encoding="utf-8")
    assert "Reference: Selkemouth Works, aged catalyst" in page and "Inputs that differ" in page
    assert "degF" in done.stdout and "degC" not in done.stdout


def test_a_missing_reference_is_a_wrong_call_and_writes_nothing(lead: Path) -> None:
    done = run("report", lead, "--against", "nowhere.yaml")
    assert done.exit_code == 2 and "nowhere.yaml: no such file" in done.stderr
    assert os.listdir() == []


def test_an_unknown_set_of_units_names_those_that_there_are(lead: Path) -> None:
    done = run("report", lead, "--units", "nautical")
    assert done.exit_code == 2
    assert "'trade', 'gauge', 'SI', 'US'" in done.stderr


def test_units_reach_the_screens_of_check_and_rate(lead: Path) -> None:
    checked = run("check", lead, "--units", "SI").stdout
    rated = run("rate", lead, "--units", "SI", "--no-files").stdout
    assert "mol/s" in checked and "kW" in rated
    assert "degC" not in checked + rated and "MW" not in rated.replace("EUR/MWh", "")
