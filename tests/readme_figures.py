"""Makes the pictures that README.md shows, from the shipped cases: python -m tests.readme_figures."""

from __future__ import annotations

from pathlib import Path

import reactorstage
from reactorstage.report.figures import figure_files
from reactorstage.report.files import write_all

ROOT = Path(__file__).resolve().parent.parent
SHOWN = {"selkemouth-ethylation": {"temperature": "lead-temperature.png", "heat": "lead-heat.png"}}


def main() -> None:
    """Optimise each case and write its pictures under the names that README.md uses."""
    for case, pictures in SHOWN.items():
        found = reactorstage.optimise(reactorstage.load(ROOT / "cases" / f"{case}.yaml"))
        assert found.best is not None
        made = figure_files(found.best, found.today, f"best found, {found.status}", found.optimum)
        for path in write_all(ROOT / "figures", {name: made[f"{own}.png"] for own, name in pictures.items()}):
            print(path)


if __name__ == "__main__":
    main()
