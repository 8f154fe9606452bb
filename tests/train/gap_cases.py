"""Trains that are closed on themselves, for the tests of exchangers and recycles."""

from __future__ import annotations

from typing import Any

from tests.bed.build import FLUID, HEAD, Tree
from tests.chemistry.published_laws import NH3, temkin

T_FEED = 523.15
"""K, NH3-5."""


def ammonia(activity: float = 1.0, pressure: float = 200.0, size: Tree | None = None, **more: Any) -> Tree:
    """NH3-5: three beds with two cold shots, the feed of bed 1 heated by the effluent, a part going round.

    Morud & Skogestad, AIChE J. 44 (1998) 888, inputs from memory: feed 250 degC with 4.17 mol % NH3, rest
    H2:N2 3:1; 127 t/h through the exchanger and 58 t/h round it, quenches 35 and 32 t/h, catalyst 6.69, 9.63
    and 15.2 m3, 536 W/(m2 K) on 283 m2, countercurrent; rates times 4.75. Heat capacities here are Cantera's.
    """
    exchanger = size or {
        "area": "283 m^2",
        "coefficient": "536 W/(m^2 K)",
        "cold bypass": f"{58.0 / 185.0!r}",
    }
    shares = {"bed 1": "185 t/h", "bed 2": "35 t/h", "bed 3": "32 t/h"}
    feed = {
        "flow": "252 t/h",
        "temperature": f"{T_FEED!r} K",
        "composition": {"NH3": "4.17 %", "H2": "71.8725 %", "N2": "rest"},
        "split": {"now": shares},
    }
    entry = [{"take": "syngas"}, {"heat": {"exchanger": "interchanger"}}]
    beds = {"bed 1": "6.69 m^3", "bed 2": "9.63 m^3", "bed 3": "15.2 m^3"}
    train: list[Tree] = [{"entry": entry}]
    for number, (owner, volume) in enumerate(beds.items(), start=1):
        body: Tree = {"catalyst": volume}
        if number == 1:
            body["inlet pressure"] = f"{pressure!r} bar(a)"
        else:
            train.append({f"gap {number - 1}": [{"inject": "syngas"}]})
        train.append({owner: body})
    return {
        **HEAD,
        "aim": "most train.made NH3",
        "species": {name: NH3[name] for name in ("N2", "H2", "NH3")},
        "fluid": FLUID,
        "reactions": {"synthesis": {**temkin(), "valid": {"temperature": "350 degC to 550 degC"}}},
        "feeds": {"syngas": feed},
        "exchangers": {"interchanger": exchanger},
        "train": [*train, {"effluent": [{"cool": {"exchanger": "interchanger"}}]}],
        "every bed": {
            "bulk density": "2200 kg/m^3",
            "pressure drop factor": 0,
            "catalyst activity": 4.75 * activity,
        },
        **more,
    }
