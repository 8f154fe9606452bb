"""Species and rates of the alkylation examples, as case trees.

Species: table TH-1, the defaults of the open data package `chemicals` 1.5.2 (formation enthalpies, entropies,
TRC heat capacities), as printed there; each heat capacity is the parabola through 300, 500 and 700 K. Ethane
and propane: NASA polynomials. Rates: Turton, Bailie, Whiting, Shaeiwitz, Analysis, Synthesis and Design of
Chemical Processes, 3rd ed. 2009, App. B.2, from memory, with R = 1.987 kcal/(kmol K).
"""

from __future__ import annotations

from tests.bed.build import Tree
from tests.published.ideal import arrhenius, powers, through

R_BOOK = 1.987
CUMENE, BENZENE = (160.7, 251.9, 312.2), (83.1, 139.1, 176.9)

TABLE = {
    "ethylene": ("C2H4", 52.56e3, 219.3, (43.0, 62.6, 77.6)),
    "propylene": ("C3H6", 20.37e3, 266.7, (64.7, 95.1, 119.1)),
    "benzene": ("C6H6", 83.18e3, 269.2, BENZENE),
    "toluene": ("C7H8", 50.41e3, 321.1, (104.5, 170.6, 217.3)),
    "ethylbenzene": ("C8H10", 29.90e3, 360.6, (128.3, 206.3, 261.9)),
    "diethylbenzene": ("C10H14", -20.37e3, 433.9, (177.3, 274.7, 345.5)),
    "cumene": ("C9H12", 4.00e3, 386.5, CUMENE),
    "diisopropylbenzene": (
        "C12H18",
        -77.60e3,
        489.0,
        tuple(2.0 * c - b for c, b in zip(CUMENE, BENZENE, strict=True)),
    ),
}
"""Formula, J/mol, J/(mol K), J/(mol K) at 300, 500, 700 K; p-isomers.

TH-1 has no heat capacity of diisopropylbenzene: here benzene and twice the step from benzene to cumene.
"""

ETHYLATIONS = {
    "first": ("benzene + ethylene => ethylbenzene", 1.00e6, 22_500.0, 2),
    "second": ("ethylbenzene + ethylene => diethylbenzene", 6.00e5, 22_500.0, 2),
    "third": ("diethylbenzene + benzene => 2 ethylbenzene", 7.80e6, 25_000.0, 2),
    "fourth": ("toluene + 2 ethylene => ethylbenzene + propylene", 3.80e8, 20_000.0, 3),
}
"""EB-1: equation, k0 for kmol/(m3 s) of reactor and kmol/m3 of gas, E in kcal/kmol, sum of orders."""


def species(*names: str) -> Tree:
    found: Tree = {"ethane": {"gas data": "C2H6"}, "propane": {"gas data": "C3H8"}}
    for name, (formula, enthalpy, entropy, cp) in TABLE.items():
        capacity = through(dict(zip((300.0, 500.0, 700.0), cp, strict=True)))
        found[name] = powers(formula, enthalpy, entropy, capacity)
    return {name: found[name] for name in names}


def ethylations(*names: str) -> Tree:
    return {name: _ethylation(*ETHYLATIONS[name]) for name in names}


def _ethylation(equation: str, k0: float, E: float, order: int) -> Tree:
    unit = f"kmol/(m^3 s (kmol/m^3)^{order})"
    constant = arrhenius(k0, E / R_BOOK, unit)
    return {
        "equation": equation,
        "rate per": "bed volume",
        "driven by": "concentration",
        "constant": constant,
    }


def fed(flows: dict[str, float], T: float) -> Tree:
    """A feed of flows in kmol/h at T in degC; the first species takes the rest of the composition."""
    total = sum(flows.values())
    first, *others = flows
    shares = {name: f"{100.0 * flows[name] / total!r} %" for name in others}
    return {
        "flow": f"{total!r} kmol/h",
        "temperature": f"{T!r} degC",
        "composition": {first: "rest", **shares},
    }


def injected_train(base: Tree, shot: Tree, volumes: list[float], T_in: list[float], p: str) -> Tree:
    """Beds (m3) with inlet temperatures (degC), fed with `base`, and with `shot` before each by its split."""
    train: list[Tree] = []
    for b, (volume, T) in enumerate(zip(volumes, T_in, strict=True), start=1):
        first = b == 1
        held = {"holds": f"bed {b}.inlet temperature", "heat from" if first else "heat to": "unpriced"}
        steps = [{"take": "base"}] if first else []
        place = "entry" if first else f"gap {b - 1}"
        train.append({place: [*steps, {"inject": "shot"}, {"heat" if first else "cool": held}]})
        bed = {"catalyst": f"{volume!r} m^3", "inlet temperature": f"{T!r} degC"}
        train.append({f"bed {b}": bed | ({"inlet pressure": p} if first else {})})
    return {
        "feeds": {"base": base, "shot": shot},
        "train": [*train, {"effluent": []}],
        "every bed": {"bulk density": "1000 kg/m^3", "pressure drop factor": 0},
    }


def divided(shares: list[float]) -> Tree:
    """A split in kmol/h."""
    return {"now": {f"bed {b}": f"{share!r} kmol/h" for b, share in enumerate(shares, start=1)}}
