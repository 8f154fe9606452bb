"""README and its companions: commands, cases, quantities, options and output agree with the code."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

import reactorstage
from reactorstage.commands.main import main
from reactorstage.commands.screens import optimum_lines
from reactorstage.train.quantities import PATTERNS, Pattern

WORDS_OF_README = {
    "<reaction>": "<R>",
    "<boundary>": "dew point",
    "at 50 %": "at 10 %",
    "at 90 %": "at 10 %",
    "<term>": "total",
}


def shipped_cases() -> list[Path]:
    return sorted((Path(__file__).resolve().parent.parent / "cases").glob("*.yaml"))


@pytest.mark.parametrize("path", shipped_cases(), ids=lambda path: path.stem)
def test_shipped_case_loads_and_says_what_it_shows(path: Path) -> None:
    opening = path.read_text(encoding="utf-8").split("\n\n")[0]
    assert all(line.startswith("#") for line in opening.splitlines())
    assert "What it shows" in opening and "What to try" in opening and "never use" in opening
    assert reactorstage.load(path).name


def readme_commands(root: Path) -> list[str]:
    """The lines of README.md that set up an environment of their own."""
    return [
        line
        for line in (root / "README.md").read_text(encoding="utf-8").splitlines()
        if line.startswith("python3 -m venv")
    ]


def test_readme_has_two_commands_and_the_second_is_what_ci_runs(root: Path) -> None:
    commands = readme_commands(root)
    assert len(commands) == 2
    assert "reactorstage optimise cases/selkemouth-ethylation.yaml" in commands[0]
    assert all(word in commands[1] for word in ("[test]", "ruff check", "mypy", "pytest"))
    ci_lines = (root / ".ci" / "run").read_text(encoding="utf-8").splitlines()
    assert ci_lines[-1] == commands[1]


def blocks(root: Path, language: str) -> list[str]:
    """Fenced blocks of README.md in one language."""
    text = (root / "README.md").read_text(encoding="utf-8")
    return re.findall(rf"^```{language}\n(.*?)^```$", text, re.MULTILINE | re.DOTALL)


def plain_lines(text: str) -> list[str]:
    """Lines of YAML without comments and with single spaces."""
    bare = (re.sub(r"(^|\s)#.*", "", line) for line in text.splitlines())
    return [" ".join(line.split()) for line in bare if line.strip()]


def test_yaml_in_readme_is_that_of_the_shipped_cases(root: Path) -> None:
    shipped = {line for path in shipped_cases() for line in plain_lines(path.read_text(encoding="utf-8"))}
    shown = [line for block in blocks(root, "yaml") for line in plain_lines(block)]
    assert [line for line in shown if line not in shipped] == []


def test_python_in_readme_runs(root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(root)
    names: dict[str, object] = {}
    for block in blocks(root, "python"):
        exec(compile(block, "README.md", "exec"), names)
    found = names["found"]
    assert isinstance(found, reactorstage.Optimisation) and found.status == "inside all limits"


def test_readme_shows_what_the_lead_case_says(root: Path, lead: Path) -> None:
    said = optimum_lines(reactorstage.optimise(reactorstage.load(lead)), 100)
    shown = blocks(root, "text")[0].splitlines()
    assert (shown[0], shown[2:]) == (said[0], "\n".join(said[2:]).splitlines())


def test_readme_names_every_quantity(root: Path) -> None:
    readme = (root / "README.md").read_text(encoding="utf-8")
    assert [words for words in map(in_readme, PATTERNS) if f"`{words}`" not in readme] == []


def in_readme(pattern: Pattern) -> str:
    """A quantity's words as README.md writes them."""
    words = pattern.words.replace("<species>", "<X>", 1).replace("<species>", "<Y>")
    for ours, written in WORDS_OF_README.items():
        words = words.replace(ours, written)
    return words


def test_readme_names_every_command_and_option(root: Path) -> None:
    readme = (root / "README.md").read_text(encoding="utf-8")
    options = {
        option for verb in main.commands.values() for parameter in verb.params for option in parameter.opts
    }
    wanted = {f"`reactorstage {name}" for name, verb in main.commands.items() if not verb.hidden}
    wanted |= {f"`{option}" for option in options if option.startswith("--")}
    assert sorted(words for words in wanted if words not in readme) == []


def test_documents_point_at_files_that_exist(root: Path) -> None:
    missing = [
        f"{document.name}: {target}"
        for document in root.glob("*.md")
        for target in named_files(document.read_text(encoding="utf-8"))
        if not (root / target).exists()
    ]
    assert missing == []


def named_files(markdown: str) -> set[str]:
    """Targets of links within the project, and paths in code marks."""
    links = re.findall(r"\]\(([^)#:]+)\)", markdown)
    return {*links, *re.findall(r"`((?:cases|figures|reactorstage|tests|\.ci)/[\w./-]+)`", markdown)}


def test_readme_names_every_shipped_case(root: Path) -> None:
    readme = (root / "README.md").read_text(encoding="utf-8")
    assert [path.name for path in shipped_cases() if path.name not in readme] == []
