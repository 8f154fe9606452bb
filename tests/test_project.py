"""The project as a whole: what lies where, floors, and documents that agree with the code."""

from __future__ import annotations

import ast
import re
import subprocess
import sys
import tomllib
from collections.abc import Iterator
from pathlib import Path

import pytest

import reactorstage

TOP_LEVEL = {
    "CHANGELOG.md",
    "DEVELOPERS.md",
    "LICENSE",
    "README.md",
    "cases",
    "figures",
    "pyproject.toml",
    "reactorstage",
    "tests",
}
MADE_BY_TOOLS = ("build", "dist", "reactorstage.egg-info")
FLOORS = ("errors", "case", "chemistry", "bed", "train", "optimiser", "face", "report", "commands")
PHYSICS = ("chemistry", "bed")
HEAVY = ("cantera", "matplotlib", "numba", "pint", "pydantic", "scipy", "yaml")
DISTRIBUTIONS = {"yaml": "pyyaml", "pydantic_core": "pydantic"}
UNWANTED = {
    "a path of one machine": r"/(?:home|root|work|Users)/\w|/tmp/\w|[A-Z]:\\Users",
    "the host of a package registry": r"https?://[\w.-]*(?:pypi|pythonhosted|npmjs|conda|debian)",
    "a word that does not belong here": r"(?i)\btran" r"script|\bseed doc" r"ument|\blec" r"ture\b",
}


def text_files(root: Path) -> Iterator[Path]:
    """Every text file of the project, without what tools and runs leave behind."""
    for name in sorted(TOP_LEVEL | {".ci", ".gitignore"}):
        top = root / name
        for path in sorted(top.rglob("*")) if top.is_dir() else [top]:
            if path.is_file() and "__pycache__" not in path.parts and path.suffix != ".png":
                yield path


def floor_of(module: str) -> str | None:
    """Floor of a dotted name of this package; None for the package itself and other packages."""
    parts = module.split(".")
    return parts[1] if parts[0] == "reactorstage" and len(parts) > 1 else None


def imported_modules(path: Path, root: Path) -> Iterator[str]:
    """Dotted names that a module imports, anywhere in it, relative imports resolved."""
    package = path.relative_to(root).with_suffix("").parts[:-1]
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            start = package[: len(package) - node.level + 1] if node.level else ()
            base = ".".join([*start, *([node.module] if node.module else [])])
            yield from (f"{base}.{alias.name}" for alias in node.names)


def modules(root: Path) -> list[Path]:
    return sorted((root / "reactorstage").rglob("*.py"))


def test_the_top_level_holds_only_what_is_agreed(root: Path) -> None:
    found = {path.name for path in root.iterdir() if not path.name.startswith(".")}
    assert found - set(MADE_BY_TOOLS) == TOP_LEVEL


def test_floors_import_downwards_only(root: Path) -> None:
    upward = []
    for path in modules(root):
        own = floor_of(".".join(path.relative_to(root).with_suffix("").parts))
        if own not in FLOORS:
            continue
        for name in imported_modules(path, root):
            floor = floor_of(name)
            if floor in FLOORS and FLOORS.index(floor) > FLOORS.index(own):
                upward.append(f"{path.relative_to(root)} imports {name}")
    assert upward == []


def test_every_module_stands_on_a_known_floor(root: Path) -> None:
    places = {floor_of(".".join(path.relative_to(root).with_suffix("").parts)) for path in modules(root)}
    assert places - set(FLOORS) <= {"__init__", "__main__"}


def test_physics_knows_no_case_text(root: Path) -> None:
    readers = {"click", "pint", "pydantic", "rich", "yaml"}
    seen = {
        f"{path.relative_to(root)} imports {name}"
        for floor in PHYSICS
        for path in (root / "reactorstage" / floor).rglob("*.py")
        for name in imported_modules(path, root)
        if name.split(".")[0] in readers
    }
    assert seen == set()


@pytest.mark.parametrize("start", ["import reactorstage", "import reactorstage.commands"])
def test_importing_the_package_loads_no_heavy_library(start: str) -> None:
    code = f"{start}; import sys; print(*sorted(set({HEAVY}) & set(sys.modules)))"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.strip() == ""


def test_dependencies_are_what_the_package_imports(root: Path) -> None:
    imported = {name.split(".")[0] for path in modules(root) for name in imported_modules(path, root)}
    foreign = imported - set(sys.stdlib_module_names) - {"reactorstage"}
    assert {DISTRIBUTIONS.get(name, name) for name in foreign} == declared(root)


def declared(root: Path) -> set[str]:
    """Names of the packages that are installed with this one."""
    project = tomllib.loads((root / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    return {re.split(r"[<>=!~\[]", text)[0] for text in project["dependencies"]}


@pytest.mark.parametrize("what", UNWANTED)
def test_no_file_names(root: Path, what: str) -> None:
    found = [
        f"{path.relative_to(root)}:{number}: {match.group()}"
        for path in text_files(root)
        for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), 1)
        for match in re.finditer(UNWANTED[what], line)
        if path != Path(__file__).resolve()
    ]
    assert found == []


def test_version_is_the_same_everywhere(root: Path) -> None:
    project = tomllib.loads((root / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert project["version"] == reactorstage.__version__
    changelog = (root / "CHANGELOG.md").read_text(encoding="utf-8")
    assert re.search(rf"^## {re.escape(reactorstage.__version__)}\b", changelog, re.MULTILINE)
