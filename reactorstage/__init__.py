"""reactorstage: rate and optimise trains of adiabatic catalyst beds with an exothermic reaction.

import reactorstage as rs

case = rs.load("case.yaml")
rating = rs.rate(case)
found = rs.optimise(case)
"""

from typing import TYPE_CHECKING, Any

from reactorstage.case import load
from reactorstage.face import Optimisation, compile, optimise, rate, rate_many, sensitivities

if TYPE_CHECKING:
    from reactorstage.report.comparing import compare

__all__ = [
    "Optimisation",
    "__version__",
    "compare",
    "compile",
    "load",
    "optimise",
    "rate",
    "rate_many",
    "sensitivities",
]

__version__ = "0.1.0"


def __getattr__(name: str) -> Any:
    if name == "compare":
        from reactorstage.report.comparing import compare

        return compare
    raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
