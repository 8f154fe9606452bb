"""Liquid A <=> R: Levenspiel, Chemical Reaction Engineering, 3rd ed. 1999, ch. 9, Ex. 9.1-9.6 (from memory).

    r = C_A0 [k1 (1 - X) - k2 X]     k1 = exp(17.34 - 48900/RT), k2 = exp(42.04 - 124200/RT) 1/min, R = 8.314

C_A0 4 mol/L, 1000 mol/min of A. A and R (called B in the cases) are ideal gases with constant heat capacities
and rates that go with mole fractions: moles do not change, so these are concentrations over C_A0.

`rate` and its derivatives are the published law, kept apart from the package; the rest builds cases.
"""

from __future__ import annotations

from math import exp
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.train.result import Rating
from tests.bed.build import HEAD, Tree
from tests.published.ideal import R, arrhenius, isomers

Array = NDArray[np.float64]

R_BOOK, E1, E2, C_A0, FLOW = 8.314, 48_900.0, 124_200.0, 4.0, 1000.0
HEAT, CHANGE = -(E2 - E1) * R / R_BOOK, (17.34 - 42.04) * R
REACTION: Tree = {
    "equation": "A <=> B",
    "rate per": "bed volume",
    "driven by": "mole fraction",
    "constant": arrhenius(1e3 * C_A0 * exp(17.34), E1 / R_BOOK, "mol/(m^3 min)"),
}


def constants(T: Any) -> tuple[Any, Any]:
    """k1, k2 in 1/min."""
    return np.exp(17.34 - E1 / (R_BOOK * T)), np.exp(42.04 - E2 / (R_BOOK * T))


def rate(X: Any, T: Any) -> Any:
    """mol/(L min)."""
    k1, k2 = constants(T)
    return C_A0 * (k1 * (1.0 - X) - k2 * X)


def inverse_by_T(X: Any, T: Any) -> Any:
    """d(1/r)/dT at constant X."""
    k1, k2 = constants(T)
    slope = C_A0 * (k1 * E1 * (1.0 - X) - k2 * E2 * X) / (R_BOOK * T**2)
    return -slope / rate(X, T) ** 2


def inverse_by_X(X: Any, T: Any) -> Any:
    """d(1/r)/dX at constant T."""
    k1, k2 = constants(T)
    return C_A0 * (k1 + k2) / rate(X, T) ** 2


def species(slope: float) -> Tree:
    """A and B whose adiabatic temperature rise is `slope` K for full conversion."""
    return isomers(HEAT, CHANGE, -HEAT / slope)


SPECIES = species(72.0)


def bed(number: int, volume: str | Tree, T_in: str | Tree | None) -> Tree:
    """One bed of a train; 1000 kg of catalyst are 1 m3, so that kg of results are L."""
    body: Tree = {"catalyst": volume, "bulk density": "1000 kg/m^3", "pressure drop factor": 0}
    if T_in is not None:
        body["inlet temperature"] = T_in
    if number == 1:
        body["inlet pressure"] = "1 bar(a)"
    return {f"bed {number}": body}


def case(slope: float, feed: Tree, train: list[Tree], X: float, **more: Any) -> Tree:
    """Least catalyst for a conversion of at least X."""
    done = {"of": "train.conversion of A", "at least": f"{100.0 * X!r} %"}
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": species(slope),
        "fluid": {"density": "ideal gas", "viscosity": "1e-3 Pa s"},
        "reactions": {"turn": REACTION},
        "feeds": {"fresh": {"flow": f"{FLOW} mol/min", "composition": {"A": "100 %"}, **feed}},
        "train": [*train, {"effluent": []}],
        **more,
        "limits": {"done": done, **more.get("limits", {})},
    }


FREE_VOLUME = {"now": "400 L", "from": "1 L", "to": "3000 L"}
FREE_INLET = {"now": "320 K", "from": "270 K", "to": "370 K"}


def cooled(beds: int, X: float, **more: Any) -> Tree:
    """Beds with a cooler before each but the first; all volumes and inlet temperatures free."""
    train: list[Tree] = []
    for b in range(1, beds + 1):
        holds = f"bed {b}.inlet temperature"
        if b == 1:
            train.append({"entry": [{"take": "fresh"}, {"heat": {"holds": holds, "heat from": "unpriced"}}]})
        else:
            train.append({f"gap {b - 1}": [{"cool": {"holds": holds, "heat to": "unpriced"}}]})
        train.append(bed(b, FREE_VOLUME, FREE_INLET))
    return case(72.0, {"temperature": "260 K"}, train, X, **more)


def cold_shot(beds: int, X: float, slope: float = 40.0, T_cold: float = 293.15) -> Tree:
    """Beds with cold feed between them; volumes, first inlet temperature and division of the feed free."""
    heater = {"heat": {"holds": "bed 1.inlet temperature", "heat from": "unpriced"}}
    train: list[Tree] = [{"entry": [{"take": "fresh"}, heater]}, bed(1, FREE_VOLUME, FREE_INLET_HOT)]
    for b in range(2, beds + 1):
        train += [{f"gap {b - 1}": [{"inject": "fresh"}]}, bed(b, FREE_VOLUME, None)]
    shares = {f"bed {b}": f"{100.0 / beds!r} %" for b in range(1, beds)} | {f"bed {beds}": "rest"}
    feed = {"temperature": f"{T_cold!r} K", "split": {"now": shares, "free": "all"}}
    return case(slope, feed, train, X)


FREE_INLET_HOT = {"now": "325 K", "from": "294 K", "to": "370 K"}


def value(rating: Rating, name: str) -> float:
    found = rating.number(name)
    assert found is not None
    return found


def volumes(rating: Rating) -> Array:
    """L by bed."""
    return np.array([value(rating, f"{one.owner}.catalyst") for one in rating.profiles])


def inlets(rating: Rating) -> Array:
    """K by bed."""
    return np.array([value(rating, f"{one.owner}.inlet temperature") for one in rating.profiles])


def exits(rating: Rating) -> Array:
    """K by bed."""
    return np.array([value(rating, f"{one.owner}.exit temperature") for one in rating.profiles])


def conversions(rating: Rating, end: int) -> Array:
    """Share of B at the inlet (end 0) or exit (end -1) of each bed."""
    return np.array([one.F[end, 1] / one.F[end].sum() for one in rating.profiles])
