"""Verbs in process with made-up results: exit statuses, options, what goes where."""

from __future__ import annotations

import io
import json
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner, Result

from reactorstage import case as case_floor
from reactorstage import face
from reactorstage.commands import console, main
from reactorstage.commands.layout import screen_width
from reactorstage.commands.verbs import status_of
from reactorstage.errors import CaseProblems, ComputationError, Problem
from reactorstage.optimiser import result as words
from reactorstage.report import cautions
from tests.report import synthetic

Run = Callable[..., Result]


@pytest.fixture
def run(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Run:
    """Runs the command line in an empty folder; COLUMNS is not set."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("COLUMNS", raising=False)
    return lambda *words, **named: CliRunner().invoke(main, [str(word) for word in words], **named)


@pytest.fixture
def called(monkeypatch: pytest.MonkeyPatch) -> dict[str, Any]:
    """Made-up results behind the face; what it was called with."""
    seen: dict[str, Any] = {"rating": synthetic.rating(), "outcome": synthetic.optimisation()}

    def load(path: Path, overrides: Any = ()) -> Any:
        seen["path"], seen["overrides"] = path, overrides
        return synthetic.case(synthetic.Options(), 4)

    def answer(name: str) -> Any:
        if isinstance(seen[name], BaseException):
            raise seen[name]
        return seen[name]

    def optimise(case: Any, **named: Any) -> Any:
        seen["named"] = named
        return answer("outcome")

    monkeypatch.setattr(case_floor, "load", load)
    monkeypatch.setattr(face, "rate", lambda case: answer("rating"))
    monkeypatch.setattr(face, "optimise", optimise)
    return seen


def written(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.rglob("*") if path.is_file())


def test_rate_ends_with_0_inside_all_limits_and_writes_its_files(run: Run, called: dict[str, Any]) -> None:
    done = run("rate", "plant.yaml")
    assert done.exit_code == 0
    assert "INSIDE ALL LIMITS" in done.stdout
    names = ("composition", "heat", "rates", "selectivity", "temperature")
    figures = [f"{name}.{kind}" for name in names for kind in ("png", "svg", "csv")]
    assert written(Path("figures/plant")) == sorted([*figures, "profiles.csv", "result.json"])
    assert str(Path("figures/plant")) in done.stderr


def test_rate_ends_with_5_when_limits_are_broken(run: Run, called: dict[str, Any]) -> None:
    called["rating"] = synthetic.rating(synthetic.TODAY)
    done = run("rate", "plant.yaml", "--no-figures")
    assert done.exit_code == 5
    assert "2 LIMITS BROKEN" in done.stdout and "hot exit, bed 1" in done.stdout


def test_rate_ends_with_4_and_shows_the_beds_before_the_failure(run: Run, called: dict[str, Any]) -> None:
    whole = synthetic.rating()
    called["rating"] = replace(
        whole, status=words.NO_ANSWER, failure="bed 3 at 12 % depth: temperature above 1500 K",
        profiles=whole.profiles[:2], limits=(), money={}, atoms=float("nan"), energy=float("nan"),
    )  # fmt: skip
    done = run("rate", "plant.yaml", "--no-figures")
    assert done.exit_code == 4
    assert "NO ANSWER: bed 3 at 12 % depth" in done.stdout and "410.0" in done.stdout
    assert "2 beds rated before the failure" in done.stdout and "nan" not in done.stdout
    content = json.loads(Path("figures/plant/result.json").read_text())
    assert content["failure"].startswith("bed 3") and content["closure"]["atoms"] is None


def test_optimise_ends_with_0_and_passes_its_options_on(run: Run, called: dict[str, Any]) -> None:
    done = run("optimise", "plant.yaml", "--starts", 7, "--seed", 3, "--jobs", 2, "--no-figures",
               "--set", "bed 1.catalyst=2 t", "--set", "bed 2.catalyst=3 t")  # fmt: skip
    assert done.exit_code == 0
    given = called["named"]
    assert (given["starts"], given["seed"], given["jobs"]) == (7, 3, 2)
    assert called["overrides"] == ("bed 1.catalyst=2 t", "bed 2.catalyst=3 t")
    content = json.loads(Path("figures/plant/result.json").read_text())
    assert content["case"]["set"] == ["bed 1.catalyst=2 t", "bed 2.catalyst=3 t"]


def test_optimise_screen_says_what_the_face_promises(run: Run, called: dict[str, Any]) -> None:
    text = run("optimise", "plant.yaml", "--no-files").stdout
    for expected in (
        "best found, INSIDE ALL LIMITS",
        "24 starts ended, 2 distinct answers | 7 free numbers | 1.1 s | seed 1",
        "LIMITS AT WORK (*)",
        "light-off, beds 1-3",
        "8 limits hold 7 free numbers: up and down differ.",
        "total 1319.7 (-89.6)",
        "EQUAL SPLIT",
        "KEEP AWAY",
        "1 Change first:",
        "2 A second answer",
        "3 Today breaks hot exit (bed 1) and coking (bed 4).",
    ):
        assert expected in text


@pytest.mark.parametrize(("status", "code"), [(words.CANNOT, 5), (words.STOPPED, 130)])
def test_optimise_that_ends_otherwise_still_writes_its_answer(
    run: Run, called: dict[str, Any], status: str, code: int
) -> None:
    called["outcome"] = synthetic.optimisation(status=status)
    done = run("optimise", "plant.yaml", "--no-figures")
    assert done.exit_code == code
    assert json.loads(Path("figures/plant/result.json").read_text())["status"] == status
    assert status.upper() in done.stdout


def test_limits_that_conflict_are_named(run: Run, called: dict[str, Any]) -> None:
    outcome = synthetic.optimisation(status=words.CANNOT)
    conflict = words.Conflict(((0, 2.0),), (1, 2))
    outcome.optimum = replace(outcome.optimum, conflict=conflict)
    called["outcome"] = outcome
    done = run("optimise", "plant.yaml", "--no-figures")
    assert "LIMITS THAT CANNOT ALL BE MET" in done.stdout
    assert "1 Limits that would have to give way: hot exit (bed 1) by 2 K." in done.stdout
    assert "held by: light-off (bed 1), coking (bed 1)" in done.stdout
    content = json.loads(Path("figures/plant/result.json").read_text())
    assert content["conflict"]["broken"] == [{"limit": "hot exit, bed 1", "by": 2.0, "unit": "K"}]


def test_optimise_without_any_answer_tells_how_starts_ended(run: Run, called: dict[str, Any]) -> None:
    outcome = synthetic.optimisation(status=words.NO_ANSWER)
    starts = tuple(words.StartRecord(n, "bed 2 runs away", None, -1, 0, 1) for n in ("today", "all hot"))
    outcome.optimum = replace(outcome.optimum, answers=(), starts=starts)
    outcome.best, outcome.others = None, ()
    called["outcome"] = outcome
    done = run("optimise", "plant.yaml")
    assert done.exit_code == 4
    assert "NO ANSWER" in done.stdout and "today, all hot: bed 2 runs away" in done.stdout
    assert written(Path("figures")) == ["result.json"]


def test_the_other_spelling_is_the_same_verb(run: Run, called: dict[str, Any]) -> None:
    assert run("optimize", "plant.yaml", "--no-files", "--seed", 4).exit_code == 0
    assert called["named"]["seed"] == 4
    assert "optimize" not in run("--help").stdout


@pytest.mark.parametrize("verb", ["rate", "optimise"])
def test_json_is_alone_on_standard_output(run: Run, called: dict[str, Any], verb: str) -> None:
    done = run(verb, "plant.yaml", "--json", "--no-figures")
    content = json.loads(done.stdout)
    assert content["status"] == "inside all limits"
    assert done.stdout == Path("figures/plant/result.json").read_text()


def test_out_no_figures_and_no_files(run: Run, called: dict[str, Any]) -> None:
    assert run("rate", "plant.yaml", "--out", "here/there", "--no-figures").exit_code == 0
    assert written(Path("here/there")) == ["profiles.csv", "result.json"]
    assert run("rate", "plant.yaml", "--no-files").exit_code == 0
    assert not Path("figures").exists()


def test_quiet_leaves_standard_error_empty(run: Run, called: dict[str, Any]) -> None:
    done = run("rate", "plant.yaml", "--quiet", "--no-figures")
    assert done.stderr == "" and "BEDS" in done.stdout


@pytest.mark.parametrize("verb", ["rate", "optimise"])
@pytest.mark.parametrize("width", [80, 100, 160])
def test_lines_fit_the_screen_and_the_main_columns_stay(
    run: Run, called: dict[str, Any], monkeypatch: pytest.MonkeyPatch, verb: str, width: int
) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    lines = run(verb, "plant.yaml", "--no-files").stdout.splitlines()
    assert max(map(len, lines)) <= width
    assert len(lines) <= (46 if width == 80 else 41)
    assert any("410.0" in line and "364.0*" in line for line in lines)


def test_width_stays_between_80_and_160(monkeypatch: pytest.MonkeyPatch) -> None:
    for given, used in (("20", 80), ("120", 120), ("500", 160)):
        monkeypatch.setenv("COLUMNS", given)
        assert screen_width() == used


@pytest.mark.parametrize("verb", ["rate", "optimise"])
def test_the_caution_stands_under_temperatures(run: Run, called: dict[str, Any], verb: str) -> None:
    text = " ".join(run(verb, "plant.yaml", "--no-files").stdout.split())
    assert cautions.SHORT in text


def test_a_wrong_case_ends_with_3_and_nothing_is_written(
    run: Run, called: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    problems = [Problem("plant.yaml", 4, 7, "'9 bar' is not absolute", "  p: 9 bar", "write 9 bar(a)")]

    def load(*_: Any) -> Any:
        raise CaseProblems(problems * 2)

    monkeypatch.setattr(case_floor, "load", load)
    done = run("optimise", "plant.yaml")
    assert done.exit_code == 3
    assert "plant.yaml:4:7: error: '9 bar' is not absolute" in done.stderr
    assert "2 errors in the case; nothing was calculated" in done.stderr
    assert done.stdout == "" and written(Path()) == []


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        (("rate", "plant.yaml", "--speed"), "No such option"),
        (("rate",), "Missing argument"),
        (("fly", "plant.yaml"), "No such command"),
        (("rate", "plant.yaml", "--set", "catalyst 2 t"), "is not NAME=VALUE"),
        (("optimise", "plant.yaml", "--starts", "0"), "--starts"),
        (("rate", "plant.yaml", "--out", "taken"), "is a file, not a folder"),
    ],
)
def test_a_wrong_call_ends_with_2(
    run: Run, called: dict[str, Any], arguments: tuple[str, ...], message: str
) -> None:
    Path("taken").write_text("")
    done = run(*arguments)
    assert done.exit_code == 2
    assert message in done.stderr and done.stdout == ""


def test_a_failed_computation_ends_with_4(run: Run, called: dict[str, Any]) -> None:
    called["rating"] = ComputationError("no state found in bed 2")
    done = run("rate", "plant.yaml")
    assert done.exit_code == 4
    assert done.stderr == "error: no state found in bed 2\n"


def test_a_defect_is_one_line_and_ends_with_1(run: Run, called: dict[str, Any]) -> None:
    called["rating"] = ZeroDivisionError("division\nby zero")
    done = run("rate", "plant.yaml")
    assert done.exit_code == 1
    assert done.stderr.count("\n") == 1
    assert done.stderr.startswith("this is a defect of reactorstage: ZeroDivisionError: division by zero")


def test_a_defect_shows_its_place_when_asked(
    run: Run, called: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("REACTORSTAGE_TRACE", "1")
    called["rating"] = ZeroDivisionError("x")
    assert "Traceback" in run("rate", "plant.yaml").stderr


def test_ctrl_c_before_a_result_ends_with_130(run: Run, called: dict[str, Any]) -> None:
    called["outcome"] = KeyboardInterrupt()
    done = run("optimise", "plant.yaml")
    assert done.exit_code == 130
    assert "stopped by you" in done.stderr and written(Path()) == []


def test_ctrl_c_that_a_library_wraps_is_no_defect(run: Run, called: dict[str, Any]) -> None:
    wrapped = RuntimeError("cannot load")
    wrapped.__cause__ = KeyboardInterrupt()
    called["outcome"] = wrapped
    done = run("optimise", "plant.yaml")
    assert done.exit_code == 130
    assert "defect" not in done.stderr


def test_an_interruption_while_drawing_keeps_the_numbers(
    run: Run, called: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    def stop(*_: Any) -> Any:
        raise KeyboardInterrupt

    monkeypatch.setattr("reactorstage.report.figures.figure_files", stop)
    assert run("optimise", "plant.yaml").exit_code == 130
    assert written(Path("figures/plant")) == ["profiles.csv", "result.json"]


def test_every_status_word_has_an_exit_status() -> None:
    found = {word: status_of(word) for name, word in vars(words).items() if name.isupper()}
    assert found == {
        "inside all limits": 0, "limits broken": 5, "cannot meet all limits": 5, "no answer": 4,
        "partly done": 6, "stopped by you": 130,
    }  # fmt: skip


def test_help_begins_with_an_example_that_parses(run: Run) -> None:
    assert run("--help").stdout.startswith("Example: reactorstage optimise ")
    for name, verb in main.commands.items():
        text = run(name, "--help").stdout
        assert text.startswith(f"Example: reactorstage {name} "), name
        assert verb.help and "\nUsage: " in text
    assert run("--version").stdout.startswith("reactorstage ")


def test_new_writes_a_case_once(run: Run) -> None:
    done = run("new", "fresh.yaml")
    assert done.exit_code == 0 and "reactorstage check fresh.yaml" in done.stderr
    before = Path("fresh.yaml").read_text()
    again = run("new", "fresh.yaml")
    assert again.exit_code == 2 and "exists already" in again.stderr
    assert Path("fresh.yaml").read_text() == before
    assert run("new", "quiet.yaml", "--quiet").stderr == ""


def test_schema_is_json(run: Run) -> None:
    schema = json.loads(run("schema").stdout)
    assert schema["type"] == "object" and schema["$schema"].startswith("http://json-schema.org/")


class Terminal(io.StringIO):
    """A stream that says it is a terminal."""

    def isatty(self) -> bool:
        return True


def test_colour_needs_a_terminal_and_no_no_color(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("NO_COLOR", raising=False)
    assert console.coloured(Terminal()) and not console.coloured(io.StringIO())
    monkeypatch.setenv("NO_COLOR", "1")
    assert not console.coloured(Terminal())


def test_colour_changes_no_word(monkeypatch: pytest.MonkeyPatch) -> None:
    import click

    from reactorstage.commands.screens import rating_lines

    text = "\n".join(rating_lines(synthetic.rating(synthetic.TODAY), 0.1, 100))
    painted = console.painted(text)
    assert painted != text and click.unstyle(painted) == text


def test_progress_is_one_line_that_goes_away(monkeypatch: pytest.MonkeyPatch) -> None:
    stream = Terminal()
    monkeypatch.setattr(console.sys, "stderr", stream)
    progress = console.ProgressLine(quiet=False, best=lambda cost: f"{3600.0 * cost:.1f} EUR/h")
    progress(1, 20, None, "start 1 of 20: today")
    progress(20, 20, 1319.7 / 3600, "start 20 of 20: random 14")
    progress.end()
    text = stream.getvalue()
    assert "start 1 of 20: today" in text and "best 1319.7 EUR/h" in text
    assert "\n" not in text and text.endswith("\r\x1b[K")


@pytest.mark.parametrize(("quiet", "stream"), [(True, Terminal()), (False, io.StringIO())])
def test_progress_is_silent_when_asked_or_piped(
    monkeypatch: pytest.MonkeyPatch, quiet: bool, stream: io.StringIO
) -> None:
    monkeypatch.setattr(console.sys, "stderr", stream)
    progress = console.ProgressLine(quiet)
    progress(1, 1, 1.0, "start")
    progress.end()
    assert stream.getvalue() == ""
