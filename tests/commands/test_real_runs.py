"""The command line on real cases, in process and in processes of their own."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner, Result

from reactorstage.commands import console, main

CASES = sorted((Path(__file__).resolve().parents[2] / "cases").glob("*.yaml"))


@pytest.fixture(autouse=True)
def elsewhere(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("COLUMNS", raising=False)


def run(*words: object) -> Result:
    return CliRunner().invoke(main, [str(word) for word in words])


def process(root: Path, *words: object, **named: Any) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "PYTHONPATH": str(root)}
    command = [sys.executable, "-m", "reactorstage", *map(str, words)]
    return subprocess.run(command, capture_output=True, text=True, env=environment, check=False, **named)


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
@pytest.mark.parametrize("width", [80, 100, 160])
def test_every_shipped_case_is_understood_and_rated_on_a_screen(
    path: Path, width: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    checked, rated = run("check", path), run("rate", path, "--no-files")
    assert checked.exit_code == 0 and rated.exit_code in (0, 5)
    assert max(len(line) for line in (checked.stdout + rated.stdout).splitlines()) <= width
    assert "understood" in checked.stdout and "FREE NUMBERS" in checked.stdout
    assert "BEDS" in rated.stdout and "LIMITS" in rated.stdout


WHOLE = [path for path in CASES if "variant of" not in path.read_text(encoding="utf-8")]


FEW = ("quernthwaite-butadiene", "selkemouth-ethylation")
"""Cases that are searched and explained here; the others among the slow tests."""


@pytest.mark.parametrize(
    "path",
    [pytest.param(path, marks=() if path.stem in FEW else pytest.mark.slow) for path in WHOLE],
    ids=lambda path: path.stem,
)
def test_every_case_of_its_own_gives_an_optimum_with_files(path: Path) -> None:
    done = run("optimise", path, "--starts", 6, "--out", "out")
    assert done.exit_code == 0, done.stderr
    assert "best found, INSIDE ALL LIMITS" in done.stdout and "Steady state" in done.stdout
    content = json.loads(Path("out/result.json").read_text())
    assert content["money"]["per label"]["total"] <= content["today"]["money"]["per label"][
        "total"
    ] + 1e-6 or (content["today"]["status"] == "limits broken")
    assert all(limit["state"] != "broken" for limit in content["limits"] if not limit["soft"])
    assert Path("out/temperature.png").stat().st_size > 20_000


def test_check_as_json_has_limits_one_by_one(lead: Path) -> None:
    content = json.loads(run("check", lead, "--json").stdout)
    exits = [limit for limit in content["limits"] if limit["limit"] == "hot exit"]
    assert [limit["of"] for limit in exits] == [f"bed {n}.exit temperature" for n in (1, 2, 3, 4)]
    assert content["reactions"]["ethylation"]["at"][0]["heat of reaction"] < -80.0
    assert content["split reactant"] == "ethylene"


def test_check_says_what_the_split_can_do(lead: Path) -> None:
    text = " ".join(run("check", lead).stdout.split())
    assert "Every reaction of ethylene is of order 1 in it" in text
    assert "hot exit exit temperature of beds 1-4 at most 424 degC" in text


def test_results_do_not_depend_on_jobs(lead: Path) -> None:
    texts = [run("optimise", lead, "--starts", 6, "--jobs", n, "--json", "--no-files").stdout for n in (1, 2)]
    assert texts[0].partition('"times"')[0] == texts[1].partition('"times"')[0]
    assert len(texts[0]) > 10_000


def test_set_changes_the_result_and_the_hash(lead: Path) -> None:
    plain = json.loads(run("rate", lead, "--json", "--no-files").stdout)
    changed = json.loads(
        run("rate", lead, "--json", "--no-files", "--set", "bed 1.inlet temperature=390 degC").stdout
    )
    assert changed["quantities"]["bed 1.inlet temperature"]["value"] == pytest.approx(390.0)
    assert changed["case"]["hash"] != plain["case"]["hash"]


def test_ctrl_c_keeps_and_writes_the_best_answer(lead: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupting(self: console.ProgressLine, done: int, *_: object) -> None:
        if done == 3:
            signal.raise_signal(signal.SIGINT)

    monkeypatch.setattr(console.ProgressLine, "__call__", interrupting)
    done = run("optimise", lead, "--starts", 40, "--out", "out", "--no-figures")
    assert done.exit_code == 130
    assert "STOPPED BY YOU" in done.stdout
    assert json.loads(Path("out/result.json").read_text())["status"] == "stopped by you"


def test_the_starter_case_can_be_used_at_once() -> None:
    assert run("new", "mine.yaml").exit_code == 0
    assert run("check", "mine.yaml").exit_code == 0
    assert run("rate", "mine.yaml", "--no-files").exit_code in (0, 5)


def test_a_wrong_case_names_its_place_and_writes_nothing(root: Path, lead: Path) -> None:
    wrong = lead.read_text().replace("19.4 bar(a)", "19.4 bar")
    Path("wrong.yaml").write_text(wrong)
    line = 1 + next(i for i, text in enumerate(wrong.splitlines()) if "19.4 bar," in text)
    done = process(root, "rate", "wrong.yaml")
    assert done.returncode == 3
    assert done.stdout == "" and "Traceback" not in done.stderr
    assert f"wrong.yaml:{line}:" in done.stderr and "bar(a)" in done.stderr
    assert os.listdir() == ["wrong.yaml"]


def test_a_missing_case_is_a_wrong_call(root: Path) -> None:
    done = process(root, "rate", "nowhere.yaml")
    assert done.returncode == 2 and "nowhere.yaml" in done.stderr


def test_a_reader_that_goes_away_is_no_error(root: Path, lead: Path) -> None:
    words = [sys.executable, "-m", "reactorstage", "check", str(lead)]
    environment = {**os.environ, "PYTHONPATH": str(root)}
    with subprocess.Popen(words, stdout=subprocess.PIPE, stderr=subprocess.PIPE, env=environment) as running:
        assert running.stdout is not None and running.stderr is not None
        running.stdout.close()
        error = running.stderr.read()
    assert running.returncode == 0 and error == b""


def test_help_needs_no_library_but_click(root: Path) -> None:
    code = (
        "import sys\nfrom reactorstage.commands import main\n"
        "try: main(['--help'])\nexcept SystemExit: pass\n"
        "heavy = {'numpy', 'scipy', 'numba', 'cantera', 'matplotlib', 'rich', 'yaml'}\n"
        "print(sorted(heavy & set(sys.modules)))"
    )
    environment = {**os.environ, "PYTHONPATH": str(root)}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, env=environment)
    assert done.stdout.splitlines()[-1] == "[]"
