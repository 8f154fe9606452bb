"""reactorstage: rate and optimise trains of adiabatic catalyst beds with an exothermic reaction.

import reactorstage as rs

case = rs.load("case.yaml")
rating = rs.rate(case)
found = rs.optimise(case)
"""

from reactorstage.case import load
from reactorstage.face import Optimisation, compile, optimise, rate, rate_many, sensitivities

__all__ = ["Optimisation", "__version__", "compile", "load", "optimise", "rate", "rate_many", "sensitivities"]

__version__ = "0.1.0"
