"""Wrong fluids from the command line: file, line, column, what was found, what to do; never a traceback."""

from __future__ import annotations

from copy import deepcopy
from pathlib import Path
from typing import Any

import pytest
import yaml
from click.testing import CliRunner

from reactorstage.commands.main import main
from tests.bed.build import FLUID, Tree, _Plain, changed
from tests.bed.fluid_cases import ammonia, dense, liquid


def without(tree: Tree, *path: str) -> Tree:
    copy = deepcopy(tree)
    inner: Any = copy
    for key in path[:-1]:
        inner = inner[key]
    del inner[path[-1]]
    return copy


def driven(tree: Tree, reaction: str, driver: str) -> Tree:
    return changed(tree, "reactions", reaction, "driven by", to=driver)


WRONG = {
    "no critical constants": (
        without(ammonia(), "species", "NH3", "critical data"),
        ["no critical constants of 'NH3'", "give the critical temperature, the critical pressure"],
    ),
    "unknown name of critical constants": (
        changed(ammonia(), "species", "N2", "critical data", to="nitrogn"),
        ["no critical constants of 'nitrogn'"],
    ),
    "no phase": (without(ammonia(), "fluid", "phase"), ["needs the phase", "add `phase: vapour`"]),
    "no pressure of a feed": (
        without(ammonia(), "feeds", "shot", "pressure"),
        ["the pressure of shot is missing", "add `pressure: VALUE bar(a)`"],
    ),
    "a pair with a stranger": (
        changed(ammonia(), "fluid", "binary parameters", to={"N2/NH9": 0.1}),
        ["there is no species 'NH9'", "did you mean NH3?"],
    ),
    "a pair of one": (
        changed(ammonia(), "fluid", "binary parameters", to={"N2": 0.1}),
        ["'N2' is no pair of species", "write it as"],
    ),
    "unknown equation": (
        changed(ammonia(), "fluid", "density", to="Peng Robinson"),
        ["'Peng Robinson' is not a choice here", "did you mean Peng-Robinson 19"],
    ),
    "backward rate by partial pressures": (
        driven(ammonia(), "synthesis", "partial pressure"),
        ["which does not say where a real fluid is at equilibrium", "write driven by: fugacity"],
    ),
    "fugacity of an ideal gas": (
        changed(driven(dense(), "alkylation", "fugacity"), "fluid", to=FLUID),
        ["an ideal gas has no fugacities", "write driven by: partial pressure"],
    ),
    "fugacity of a liquid": (
        driven(liquid(), "addition", "fugacity"),
        ["a liquid of given densities has no fugacity", "write driven by: concentration"],
    ),
    "phase of a plain liquid": (
        changed(liquid(), "fluid", "phase", to="liquid"),
        ["`phase` has no meaning with density: liquid", "leave it out"],
    ),
    "phase of a feed of ideal gas": (
        changed(liquid(), "feeds", "mix", "phase", to="vapour"),
        ["`phase` has no meaning with density: liquid"],
    ),
    "no density": (
        without(liquid(), "species", "B", "density"),
        ["the density of B as a liquid is missing", "add `density: {powers of T:"],
    ),
    "unit of a density": (
        changed(liquid(), "species", "B", "density", "powers of T", to=["850 mol/m^3"]),
        ["kg/m^3"],
    ),
    "a feed between two phases": (
        changed(dense(), "feeds", "benzene", "temperature", to="280 degC"),
        ["benzene is above its bubble point", "at its pressure", "state its `phase`"],
    ),
}  # fmt: skip


@pytest.mark.parametrize(("tree", "words"), WRONG.values(), ids=WRONG)
def test_a_wrong_fluid_is_one_clear_message(tree: Tree, words: list[str], tmp_path: Path) -> None:
    path = tmp_path / "case.yaml"
    path.write_text(yaml.dump(tree, Dumper=_Plain, sort_keys=False, width=10_000))
    done = CliRunner().invoke(main, ["check", str(path)])
    said = done.stderr
    assert done.exit_code == 3 and "Traceback" not in said
    first = said.splitlines()[0]
    assert first.startswith(f"{path}:") and ": error: " in first
    assert all(word in said for word in words), said
    assert said.count(": error: ") <= 3


def test_a_stream_that_leaves_its_phase_has_no_answer_and_says_where(tmp_path: Path) -> None:
    tree = changed(dense(), "train", 1, "bed 1", "inlet pressure", to="8 bar(a)")
    tree = changed(tree, "feeds", "ethylene", "flow", to="120 kmol/h")
    path = tmp_path / "case.yaml"
    path.write_text(yaml.dump(tree, Dumper=_Plain, sort_keys=False, width=10_000))
    done = CliRunner().invoke(main, ["rate", str(path), "--no-figures", "--out", str(tmp_path / "out")])
    assert done.exit_code == 4
    assert "the stream cannot be a liquid there" in done.stdout and "NO ANSWER: bed 1 at " in done.stdout


def test_a_bed_that_boils_breaks_the_limit_that_the_tool_adds(tmp_path: Path) -> None:
    tree = changed(dense(), "train", 1, "bed 1", "inlet pressure", to="12 bar(a)")
    path = tmp_path / "case.yaml"
    path.write_text(yaml.dump(tree, Dumper=_Plain, sort_keys=False, width=10_000))
    done = CliRunner().invoke(main, ["rate", str(path), "--no-figures", "--out", str(tmp_path / "out")])
    assert done.exit_code == 5
    assert "stays liquid, bed 1" in done.stdout
