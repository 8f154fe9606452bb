"""reactorstage: rate and optimise trains of adiabatic catalyst beds with an exothermic reaction.

import reactorstage as rs

case = rs.load("case.yaml")
rating = rs.rate(case)
found = rs.optimise(case)
rs.tables(found)["beds"].to_pandas()
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from reactorstage.case import load
from reactorstage.face import Optimisation, compile, optimise, rate, rate_many, sensitivities

if TYPE_CHECKING:
    from reactorstage.report.comparing import compare
    from reactorstage.report.notebook import Tables
    from reactorstage.train.result import Rating

__all__ = [
    "Optimisation",
    "__version__",
    "compare",
    "compile",
    "figures",
    "load",
    "optimise",
    "page",
    "rate",
    "rate_many",
    "sensitivities",
    "tables",
]

__version__ = "0.1.0"


def tables(result: Rating | Optimisation, units: str = "trade") -> Tables:
    """Tables of a result by name; see `reactorstage.report.notebook.tables`."""
    from reactorstage.report.notebook import tables as made

    return made(result, units)


def figures(result: Rating | Optimisation, units: str = "trade") -> dict[str, Any]:
    """Matplotlib figures of a result by name; see `reactorstage.report.notebook.figures`."""
    from reactorstage.report.notebook import figures as made

    return made(result, units)


def page(result: Rating | Optimisation, units: str = "trade") -> str:
    """The report as the text of one HTML file; see `reactorstage.report.notebook.page`."""
    from reactorstage.report.notebook import page as made

    return made(result, units)


def __getattr__(name: str) -> Any:
    if name == "compare":
        from reactorstage.report.comparing import compare

        return compare
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
