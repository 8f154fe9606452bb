"""Trains of any size: R successive additions A0 + E <=> A1, A1 + E <=> A2, ... in B beds, with inert gases.

Invented numbers of a usual size. The feed of E per bed, and with it the rise, does not depend on the size.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from reactorstage.train.programme import TrainProgramme
from tests.bed.build import EVERY_BED, FLUID, HEAD, Tree, programme

EVERY_NUMBER = "every"


@dataclass(frozen=True)
class Size:
    """beds, species (at least reactions + 2), reactions; stiffness multiplies the rate constants.

    free: six numbers that every train has, or a share and an inlet temperature for every bed.
    """

    beds: int = 4
    species: int = 8
    reactions: int = 3
    stiffness: float = 1.0
    free: str = "six"


def train(size: Size) -> TrainProgramme:
    """The compiled train of a size."""
    return programme(tree(size))


def tree(size: Size) -> Tree:
    every = size.free == EVERY_NUMBER
    adducts = [f"A{k}" for k in range(size.reactions + 1)]
    inert = [f"inert {k}" for k in range(size.species - len(adducts) - 1)]
    species = {name: adduct(k) for k, name in enumerate(adducts)}
    species |= {"E": gas("C2H4", 52.4, 219.0, 70.0)}
    species |= {name: gas("C7H16", -190.0, 430.0, 240.0) for name in inert}
    last = f"bed {size.beds}"
    flow = 965.0
    return {
        **HEAD,
        "aim": "most effluent.flow of A1",
        "species": species,
        "fluid": FLUID,
        "reactions": {f"addition {k + 1}": addition(k, size.stiffness) for k in range(size.reactions)},
        "feeds": {
            "base": {
                "flow": f"{flow} kmol/h" if every else number(flow, 0.9 * flow, 1.1 * flow, "kmol/h"),
                "temperature": "250 degC" if every else number(250, 240, 260, "degC"),
                "composition": {"A0": "rest", **dict.fromkeys(inert, "0.2 %")},
            },
            "E": {
                "flow": f"{67 * size.beds} kmol/h",
                "temperature": "45 degC",
                "composition": {"E": "100 %"},
                "split": {
                    "now": {**{f"bed {k + 1}": "67 kmol/h" for k in range(size.beds - 1)}, last: "rest"},
                    **({"free": "all"} if every else {}),
                },
            },
        },
        "train": list(sections(size, every)),
        "every bed": EVERY_BED,
        "limits": {"hot": {"of": "every bed.exit temperature", "at most": "460 degC"}},
    }


def sections(size: Size, every: bool) -> Any:
    heat = {"heat": {"holds": "bed 1.inlet temperature", "heat from": "unpriced"}}
    yield {"entry": [{"take": "base"}, heat, {"inject": "E"}]}
    for k in range(1, size.beds + 1):
        first = k == 1
        inlet = number(384, 364, 404, "degC") if every or first else "384 degC"
        bed: Tree = {"catalyst": "3 t", "inlet temperature": inlet}
        if first:
            bed["inlet pressure"] = "19.4 bar(a)" if every else number(19.4, 18, 21, "bar(a)")
            if not every:
                bed["catalyst"] = number(3, 2.5, 3.5, "t")
                bed["catalyst activity"] = number(1, 0.8, 1.2, "")
        yield {f"bed {k}": bed}
        if k < size.beds:
            cool = {"cool": {"holds": f"bed {k + 1}.inlet temperature", "heat to": "unpriced"}}
            yield {f"gap {k}": [{"inject": "E"}, cool]}
    yield {"effluent": []}


def adduct(k: int) -> Tree:
    """A0 is like benzene; each addition releases 105 kJ/mol and costs 125 J/(mol K)."""
    return gas(f"C{6 + 2 * k}H{6 + 4 * k}", 82.9 - 52.6 * k, 269.0 + 94.0 * k, 170.0 + 75.0 * k)


def gas(formula: str, enthalpy: float, entropy: float, heat_capacity: float) -> Tree:
    """kJ/mol, J/(mol K), and a heat capacity in J/(mol K) at 600 K."""
    powers = [f"{0.4 * heat_capacity:.6g} J/(mol K)", f"{1e-3 * heat_capacity:.6g} J/(mol K^2)"]
    return {
        "formula": formula,
        "enthalpy of formation": f"{enthalpy:.4f} kJ/mol",
        "entropy": f"{entropy} J/(mol K)",
        "standard pressure": "1 bar(a)",
        "heat capacity": {"powers of T": powers},
    }


def addition(k: int, stiffness: float) -> Tree:
    return {
        "equation": f"A{k} + E <=> A{k + 1}",
        "rate per": "catalyst mass",
        "driven by": "partial pressure",
        "orders": "as written",
        "backward": "from Gibbs energies",
        "constant": {
            "at": "400 degC",
            "is": f"{4.2e-3 * stiffness / (1 + k):.6g} kmol/(kg h bar^2)",
            "activation energy": f"{66 + 5 * k} kJ/mol",
        },
    }


def number(now: float, low: float, high: float, unit: str) -> Tree:
    return {key: f"{value:g} {unit}".strip() for key, value in (("now", now), ("from", low), ("to", high))}
