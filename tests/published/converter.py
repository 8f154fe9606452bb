"""SO2 converters with the law of Collina, Corbetta and Cappelli, as cases; the law on its own beside them.

Collina, Corbetta, Cappelli (1971), as in Froment & Bischoff, Chemical Reactor Analysis and Design, ch. 11,
from memory; kmol/(kg h), p in atm:

    r = k1 pO2 pSO2 [1 - pSO3/(Kp pSO2 pO2^1/2)] / {22.414 (1 + K2 pSO2 + K3 pSO3)^2}
"""

from __future__ import annotations

from math import log
from typing import Any

import numpy as np

from tests.bed.build import FLUID, HEAD, Tree
from tests.chemistry.published_laws import COLLINA
from tests.published.ideal import R, constant

ATM = 101325.0
FEED = {"SO2": 0.078, "O2": 0.108, "SO3": 0.0, "N2": 0.814}
SLOPE = 235.2
"""K for full conversion of FEED."""

FREE_INLET = {"now": "700 K", "from": "640 K", "to": "780 K"}


def rate(X: Any, T: Any) -> Any:
    """The published law at conversion X of FEED and 1 atm, kmol/(kg h): no package code."""
    so2, o2, so3 = (n / (1.0 - 0.039 * X) for n in (0.078 * (1.0 - X), 0.108 - 0.039 * X, 0.078 * X))
    k1, K2, K3 = (np.exp(a + b / T) for a, b in ((12.160, -5473.0), (-9.953, 8619.0), (-71.745, 52596.0)))
    away = 1.0 - so3 / (np.exp(11300.0 / T - 10.68) * so2 * np.sqrt(o2))
    return k1 * o2 * so2 * away / (22.414 * (1.0 + K2 * so2 + K3 * so3) ** 2)


def constant_slope() -> Tree:
    """Heat and Gibbs energies of Kp, heat capacities that make the slope 235.2 K whatever is converted."""
    cp = 11300.0 * R * FEED["SO2"] / SLOPE
    entropy = 300.0 - 10.68 * R - 0.5 * R * log(ATM / 1e5)
    return {
        "SO2": constant("SO2", 0.0, 200.0, cp),
        "O2": constant("O2", 0.0, 200.0, cp),
        "SO3": constant("SO3", -11300.0 * R, entropy, 1.5 * cp),
        "N2": constant("N2", 0.0, 200.0, cp),
    }


def converted(X: float, flow: float = 1.0 / FEED["SO2"], T: str = "600 K") -> Tree:
    """`flow` kmol/h of FEED of which X was converted before."""
    moles = {
        "SO2": FEED["SO2"] * (1.0 - X),
        "O2": FEED["O2"] - 0.5 * FEED["SO2"] * X,
        "SO3": FEED["SO2"] * X,
        "N2": FEED["N2"],
    }
    total = sum(moles.values())
    shares = {name: f"{100.0 * n / total!r} %" for name, n in moles.items() if name != "N2"}
    return {
        "flow": f"{flow * total!r} kmol/h",
        "temperature": T,
        "composition": {**shares, "N2": "rest"},
    }


def converter(species: Tree, feed: Tree, beds: list[tuple[Any, Any]], pressure: str, **more: Any) -> Tree:
    """Beds (catalyst, inlet temperature) with a cooler before each but the first, which has a heater."""
    train: list[Tree] = []
    for b, (catalyst, inlet) in enumerate(beds, start=1):
        device = {"holds": f"bed {b}.inlet temperature"}
        if b == 1:
            heater = {"heat": {**device, "heat from": "unpriced"}}
            train.append({"entry": [{"take": "gas"}, heater]})
        else:
            train.append({f"gap {b - 1}": [{"cool": {**device, "heat to": "unpriced"}}]})
        first = {"inlet pressure": pressure} if b == 1 else {}
        train.append({f"bed {b}": {"catalyst": catalyst, "inlet temperature": inlet, **first}})
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": species,
        "fluid": FLUID,
        "reactions": {"oxidation": COLLINA},
        "feeds": {"gas": feed},
        "train": [*train, {"effluent": []}],
        "every bed": {"bulk density": "600 kg/m^3", "pressure drop factor": 0},
        **more,
    }


def least_catalyst(X: float, catalysts: list[float]) -> Tree:
    """Least catalyst of cooled beds for a conversion X, all weights and inlet temperatures free."""
    free = [({"now": f"{now} kg", "from": "1 kg", "to": "3000 kg"}, FREE_INLET) for now in catalysts]
    done = {"of": "train.conversion of SO2", "at least": f"{100.0 * X!r} %"}
    return converter(constant_slope(), converted(0.0), free, "1 atm(a)", limits={"done": done})
