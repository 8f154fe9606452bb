"""Cases written as plain trees of YAML, so that every test goes through the front door: the case file."""

from __future__ import annotations

from copy import deepcopy
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import numpy as np
import yaml
from numpy.typing import NDArray

import reactorstage as rs
from reactorstage.bed.data import Stages
from reactorstage.case.model import Case
from reactorstage.train.programme import TrainProgramme

Tree = dict[str, Any]

ALKYLATION_SPECIES: Tree = {
    "benzene": {"gas data": "C6H6"},
    "ethylene": {"gas data": "C2H4"},
    "ethane": {"gas data": "C2H6"},
    "ethylbenzene": {"gas data": "C8H10,ethylbenz"},
    "diethylbenzene": {
        "formula": "C10H14",
        "enthalpy of formation": "-22.0 kJ/mol",
        "entropy": "435 J/(mol K)",
        "standard pressure": "1 bar(a)",
        "heat capacity": {
            "powers of T": [
                "-37.4 J/(mol K)",
                "0.8671 J/(mol K^2)",
                "-5.56e-4 J/(mol K^3)",
                "1.411e-7 J/(mol K^4)",
            ]
        },
    },
}
"""The species of the lead case; the inline numbers are invented, only consistency is tested with them."""

EVERY_BED: Tree = {
    "diameter": "1.8 m",
    "bulk density": "640 kg/m^3",
    "void fraction": "41 %",
    "equivalent size": "2.4 mm",
}

HEAD: Tree = {"case": "test", "format": 1, "aim": "least money.total", "percent": "mol", "currency": "EUR"}
FLUID: Tree = {"density": "ideal gas", "viscosity": "1.7e-5 Pa s"}


class _Plain(yaml.SafeDumper):
    """Writes a value that occurs twice twice: the case file allows no aliases."""

    def ignore_aliases(self, data: Any) -> bool:
        return True


def load(tree: Tree) -> Case:
    """The case of a tree, through a file."""
    with TemporaryDirectory() as folder:
        path = Path(folder) / "case.yaml"
        path.write_text(yaml.dump(tree, Dumper=_Plain, sort_keys=False, width=10_000))
        return rs.load(path)


def programme(tree: Tree) -> TrainProgramme:
    """The compiled train of a tree."""
    return rs.compile(load(tree))


def edges(mesh: Stages) -> list[NDArray[np.float64]]:
    """Depths (0 to 1) at which the steps of each bed begin and end."""
    steps = [mesh.steps[b, :count, :2] for b, count in enumerate(mesh.counts)]
    return [np.append(one[:, 0], one[-1, 0] + one[-1, 1]) if len(one) else np.zeros(1) for one in steps]


def changed(tree: Tree, *path: str | int, to: Any) -> Tree:
    """A copy of a tree with one value replaced."""
    copy = deepcopy(tree)
    inner = copy
    for key in path[:-1]:
        inner = inner[key]  # type: ignore[index]
    inner[path[-1]] = to  # type: ignore[index]
    return copy


def one_bed(
    species: Tree,
    reactions: Tree,
    feed: Tree,
    catalyst: str,
    pressure: str = "10 bar(a)",
    bed: Tree | None = None,
    **more: Any,
) -> Tree:
    """A train of one feed and one bed; pressure drop is off unless `bed` gives geometry."""
    every = bed if bed is not None else {"bulk density": "1000 kg/m^3", "pressure drop factor": 0}
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": species,
        "fluid": FLUID,
        "reactions": reactions,
        "feeds": {"fresh": feed},
        "train": [
            {"entry": [{"take": "fresh"}]},
            {"bed 1": {"catalyst": catalyst, "inlet pressure": pressure, **every}},
            {"effluent": []},
        ],
        **more,
    }
