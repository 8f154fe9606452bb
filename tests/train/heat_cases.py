"""Trains in which nothing reacts, so that heat and money can be found by hand, and Cantera's enthalpies."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import Any

import cantera as ct
import numpy as np
from scipy.optimize import linprog

from tests.bed.build import FLUID, HEAD, Tree
from tests.bed.outside import species

FLOW = 200.0
"""mol/s of benzene."""

APPROACH = 15.0
MWH = 3.6e9

LEVELS: Tree = {
    "steam 28 bar": {"cools down to": "500 K", "earns": "19 EUR/MWh"},
    "steam 9 bar": {"cools down to": "445 K", "earns": "13 EUR/MWh"},
    "air": {"cools down to": "330 K", "costs": "4 EUR/MWh"},
}
RUNGS = {"steam 28 bar": (515.0, -19.0), "steam 9 bar": (460.0, -13.0), "air": (345.0, 4.0)}
"""Coldest stream temperature of each level (K) and its price (EUR/MWh, cost positive)."""


def still_train(
    effluent: list[Tree], entry: Sequence[Tree] = (), levels: Tree = LEVELS, T: str = "700 K", **more: Any
) -> Tree:
    """Benzene through one bypassed bed and the steps of an effluent."""
    constant = {
        "rate per": "catalyst mass",
        "driven by": "partial pressure",
        "constant": "1e-9 mol/(kg s Pa^2)",
    }
    feed = {"flow": f"{FLOW} mol/s", "temperature": T, "composition": {"benzene": "100 %"}}
    return {
        **HEAD,
        "species": {"benzene": {"gas data": "C6H6"}, "ethylene": {"gas data": "C2H4"}, "product": PRODUCT},
        "fluid": FLUID,
        "reactions": {"none": {"equation": "benzene + ethylene => product", **constant}},
        "feeds": {"fresh": feed},
        "train": [
            {"entry": [{"take": "fresh"}, *entry]},
            {
                "bed 1": {
                    "catalyst": "1 t",
                    "inlet pressure": "19 bar(a)",
                    "state": "bypassed",
                    "pressure drop factor": 0,
                }
            },
            {"effluent": effluent},
        ],
        "heat levels": {"minimum approach": f"{APPROACH} K", **levels},
        **more,
    }


PRODUCT: Tree = {"gas data": "C8H10,ethylbenz"}


def heat_between(T_hot: float, T_cold: float) -> float:
    """W given off by the stream, by Cantera's enthalpies."""
    gas = ct.Solution(thermo="ideal-gas", species=[species("benzene")])
    found = []
    for T in (T_hot, T_cold):
        gas.TP = T, ct.one_atm
        found.append(gas.enthalpy_mole / 1e3 * FLOW)
    return found[0] - found[1]


def best_cost(T_hot: float, T_cold: float, rungs: dict[str, tuple[float, float]]) -> float:
    """EUR/s when each slice of heat goes to the level that pays best among those cold enough for it."""
    inside = [reach for reach, _ in rungs.values() if T_cold < reach < T_hot]
    cost = 0.0
    for low, high in pairwise(sorted({T_cold, T_hot, *inside})):
        price = min(price for reach, price in rungs.values() if reach <= low)
        cost += heat_between(high, low) * price / MWH
    return cost


def best_cost_with_capacities(
    streams: Sequence[tuple[float, float]], rungs: dict[str, tuple[float, float, float]]
) -> float:
    """EUR/s by a linear programme over slices of heat and levels; rungs: reach, price, capacity (W)."""
    edges = sorted({reach for reach, _, _ in rungs.values()})
    slices: list[tuple[float, float]] = []
    for hot, cold in streams:
        ends = sorted({cold, hot, *[e for e in edges if cold < e < hot]})
        slices += [(low, heat_between(high, low)) for low, high in pairwise(ends)]
    prices = np.array(
        [[price if reach <= low else 1e6 for reach, price, _ in rungs.values()] for low, _ in slices]
    )
    n, m = prices.shape
    each_slice, each_level = np.kron(np.eye(n), np.ones(m)), np.kron(np.ones(n), np.eye(m))
    found = linprog(
        prices.ravel(),
        A_ub=each_level,
        b_ub=[most / 1e6 for _, _, most in rungs.values()],
        A_eq=each_slice,
        b_eq=[heat / 1e6 for _, heat in slices],
    )
    return float(found.fun) * 1e6 / MWH
