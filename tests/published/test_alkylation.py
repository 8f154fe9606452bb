"""Ethylbenzene and cumene: Turton, Bailie, Whiting, Shaeiwitz, Analysis, Synthesis and Design of Chemical
Processes, 3rd ed. 2009, App. B.2 and B.8, all inputs from memory; and an exact invariant of the first.

Heat capacities and formation enthalpies of the open data package `chemicals` 1.5.2 (TRC), table TH-1 of the
recomputation: parabolas through 300, 500 and 700 K. R = 1.987 kcal/(kmol K).
"""

from __future__ import annotations

from math import exp

import pytest

from reactorstage.chemistry.rates import ln_k
from reactorstage.train.result import Rating
from tests.bed.build import FLUID, HEAD, Tree, one_bed, programme
from tests.published.ideal import arrhenius, powers, through

TH_1 = {
    "ethylene": ("C2H4", 52.56e3, 219.3, (43.0, 62.6, 77.6)),
    "propylene": ("C3H6", 20.37e3, 266.7, (64.7, 95.1, 119.1)),
    "benzene": ("C6H6", 83.18e3, 269.2, (83.1, 139.1, 176.9)),
    "toluene": ("C7H8", 50.41e3, 321.1, (104.5, 170.6, 217.3)),
    "ethylbenzene": ("C8H10", 29.90e3, 360.6, (128.3, 206.3, 261.9)),
    "diethylbenzene": ("C10H14", -20.37e3, 433.9, (177.3, 274.7, 345.5)),
    "cumene": ("C9H12", 4.00e3, 386.5, (160.7, 251.9, 312.2)),
    "diisopropylbenzene": ("C12H18", -77.60e3, 489.0, (238.3, 364.7, 447.5)),
}
"""The heat capacity of diisopropylbenzene is twice cumene less benzene (TH-1 has none)."""

RATES = {
    "first": ("benzene + ethylene => ethylbenzene", 1.00e6, 22_500.0, 2),
    "second": ("ethylbenzene + ethylene => diethylbenzene", 6.00e5, 22_500.0, 2),
    "third": ("diethylbenzene + benzene => 2 ethylbenzene", 7.80e6, 25_000.0, 2),
    "fourth": ("toluene + 2 ethylene => ethylbenzene + propylene", 3.80e8, 20_000.0, 3),
}
AT_673 = {"first": 4.9474e-2, "second": 2.9685e-2, "third": 5.9530e-2, "fourth": 121.87}


def species(*names: str) -> Tree:
    found: Tree = {"ethane": {"gas data": "C2H6"}, "propane": {"gas data": "C3H8"}}
    for name, (formula, enthalpy, entropy, cp) in TH_1.items():
        capacity = through(dict(zip((300.0, 500.0, 700.0), cp, strict=True)))
        found[name] = powers(formula, enthalpy, entropy, capacity)
    return {name: found[name] for name in names}


def reactions(*names: str) -> Tree:
    per = {"rate per": "bed volume", "driven by": "concentration"}
    return {
        name: {
            "equation": RATES[name][0],
            "constant": arrhenius(
                RATES[name][1], RATES[name][2] / 1.987, f"kmol/(m^3 s (kmol/m^3)^{RATES[name][3]})"
            ),
            **per,
        }
        for name in names
    }


def three_beds(
    volumes: list[float], T_in: list[float], ethylene: list[float], names: list[str], **more: Tree
) -> Tree:
    """Ethylene shots (kmol/h of C2H4) in front of the beds; pressure drop off, 1985 kPa."""
    train: list[Tree] = []
    for b, (volume, T) in enumerate(zip(volumes, T_in, strict=True), start=1):
        verb, way = ("heat", "heat from") if b == 1 else ("cool", "heat to")
        holds = {verb: {"holds": f"bed {b}.inlet temperature", way: "unpriced"}}
        steps = [{"take": "benzene"}] if b == 1 else []
        train.append({"entry" if b == 1 else f"gap {b - 1}": [*steps, {"inject": "ethylene"}, holds]})
        bed: Tree = {"catalyst": f"{volume!r} m^3", "inlet temperature": f"{T!r} degC"}
        bed |= {"inlet pressure": "1985 kPa(a)"} if b == 1 else {}
        train.append({f"bed {b}": {**bed, "bulk density": "1000 kg/m^3", "pressure drop factor": 0}})
    shots = {f"bed {b}": f"{shot!r} kmol/h" for b, shot in enumerate(ethylene, start=1)}
    feeds = {
        "benzene": {"flow": "226.51 kmol/h", "temperature": "380 degC", "composition": {"benzene": "100 %"}},
        "ethylene": {
            "flow": f"{sum(ethylene)!r} kmol/h",
            "temperature": "380 degC",
            "composition": {"ethylene": "100 %"},
            "split": {"now": shots},
        },
    }
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": species("benzene", "ethylene", "ethylbenzene", "diethylbenzene"),
        "fluid": FLUID,
        "reactions": reactions(*names),
        "feeds": {**feeds, **more},
        "train": [*train, {"effluent": []}],
    }


def test_EB_1_rate_constants_at_673_K() -> None:
    """k(673.15 K) recomputed from inputs from memory, 0.1 %; m3/kmol/s and m6/kmol2/s."""
    laws = programme(turton()).model.chemistry.laws
    found = dict(zip(RATES, ln_k(laws, 673.15), strict=True))
    for name, expected in AT_673.items():
        to_kmol = 1e3 ** (RATES[name][3] - 1)
        assert exp(found[name]) * to_kmol == pytest.approx(expected, rel=1e-3), name


def turton() -> Tree:
    """EB-2: 226.51 kmol/h benzene, 2 toluene, 0.17 ethylbenzene; 30 + 35 + 35 kmol/h of 93 % ethylene."""
    tree = three_beds([20.0, 25.0, 30.0], [383.3, 380.0, 380.0], [30.0, 35.0, 35.0], list(RATES))
    total = 226.51 + 2.0 + 0.17
    aromatics = {"toluene": f"{200.0 / total!r} %", "ethylbenzene": f"{17.0 / total!r} %", "benzene": "rest"}
    feeds = tree["feeds"]
    names = ("benzene", "toluene", "ethylene", "ethane", "propylene", "ethylbenzene", "diethylbenzene")
    return {
        **tree,
        "species": species(*names),
        "feeds": {
            "benzene": {**feeds["benzene"], "flow": f"{total!r} kmol/h", "composition": aromatics},
            "ethylene": {**feeds["ethylene"], "composition": {"ethylene": "93 %", "ethane": "rest"}},
        },
    }


def test_EB_2_exit_temperatures_of_the_published_train() -> None:
    """Book (from memory) 444.1, 453.4, 449.2 degC, 3 K; recomputed 443.4, 455.1, 449.9 degC.

    The book lets the pressure fall from 1985 to 1960 and 1935 kPa between beds; here it stays at 1985.
    """
    rating = programme(turton()).rate()
    for bed, (book, recomputed) in enumerate(EB_2, start=1):
        T = celsius(rating, f"bed {bed}.exit temperature")
        assert pytest.approx(book, abs=3.0) == T
        assert pytest.approx(recomputed, abs=0.5) == T


EB_2 = ((444.1, 443.4), (453.4, 455.1), (449.2, 449.9))


def test_EB_2d_flows_behind_the_last_bed_at_the_published_pressures() -> None:
    """Recomputed: E 0.897, B 139.2, EB 88.67, DEB 0.80 kmol/h, 0.5 kmol/h each; bed by bed."""
    flows = {"benzene": 226.51, "toluene": 2.0, "ethylbenzene": 0.17}
    stages = ((20.0, 383.3, 1985.0, 30.0), (25.0, 380.0, 1960.0, 35.0), (30.0, 380.0, 1935.0, 35.0))
    for (volume, T, p, shot), (_, recomputed) in zip(stages, EB_2, strict=True):
        flows["ethylene"] = flows.get("ethylene", 0.0) + 0.93 * shot
        flows["ethane"] = flows.get("ethane", 0.0) + 0.07 * shot
        rating = programme(turton_bed(flows, volume, T, p)).rate()
        assert celsius(rating, "bed 1.exit temperature") == pytest.approx(recomputed, abs=0.5)
        flows = {name: per_hour(rating, f"bed 1.exit flow of {name}") for name in rating.species}
    expected = {"ethylene": 0.897, "benzene": 139.2, "ethylbenzene": 88.67, "diethylbenzene": 0.80}
    for name, flow in expected.items():
        assert flows[name] == pytest.approx(flow, abs=0.5), name


def turton_bed(flows: dict[str, float], volume: float, T: float, p: float) -> Tree:
    """One bed of the published train: flows in kmol/h, m3, degC, kPa."""
    total = sum(flows.values())
    shares = {name: f"{100.0 * flow / total!r} %" for name, flow in flows.items() if name != "benzene"}
    feed = {
        "flow": f"{total!r} kmol/h",
        "temperature": f"{T!r} degC",
        "composition": {**shares, "benzene": "rest"},
    }
    names = ("benzene", "toluene", "ethylene", "ethane", "propylene", "ethylbenzene", "diethylbenzene")
    return one_bed(species(*names), reactions(*RATES), feed, f"{volume!r} m^3", f"{p!r} kPa(a)")


def celsius(rating: Rating, name: str) -> float:
    value = rating.number(name)
    assert value is not None
    return value - 273.15


def per_hour(rating: Rating, name: str) -> float:
    """kmol/h."""
    value = rating.number(name)
    assert value is not None
    return value * 3.6


KAPPA = 0.6


@pytest.mark.parametrize("split", [[27.9, 32.55, 32.55], [60.0, 20.0, 13.0], [10.0, 10.0, 73.0]])
def test_AL_1_ethylbenzene_follows_from_benzene_alone(split: list[float]) -> None:
    """Closed form, relative 1e-6: EB = B0/(1-k) [(B/B0)^k - B/B0], DEB = B0 - B - EB with k = k2/k1 = 0.6.

    It holds behind every bed for any temperatures, volumes and ethylene split.
    """
    rating = programme(
        three_beds([20.0, 25.0, 30.0], [383.3, 380.0, 380.0], split, ["first", "second"])
    ).rate()
    B0 = 226.51
    for bed in (1, 2, 3):
        B, EB, DEB = (per_hour(rating, f"bed {bed}.exit flow of {name}") for name in PRODUCTS)
        expected = B0 / (1.0 - KAPPA) * ((B / B0) ** KAPPA - B / B0)
        assert pytest.approx(expected, rel=1e-6) == EB
        assert pytest.approx(B0 - B - expected, rel=1e-6) == DEB
        assert B < 0.97 * B0


PRODUCTS = ("benzene", "ethylbenzene", "diethylbenzene")


@pytest.mark.parametrize(
    ("ratio", "EB", "DEB", "conversion"),
    [(3, 0.808260, 0.095870, 0.301377), (5, 0.883061, 0.058469, 0.188306), (8, 0.926216, 0.036892, 0.120388)],
)
def test_AL_2_ethylene_fully_converted(ratio: float, EB: float, DEB: float, conversion: float) -> None:
    """Recomputed from the closed form, as printed, for an overall benzene/ethylene ratio."""
    ethylene = 226.51 / ratio
    split = [0.3 * ethylene, 0.3 * ethylene, 0.4 * ethylene]
    tree = three_beds([20.0, 25.0, 3000.0], [383.3, 380.0, 380.0], split, ["first", "second"])
    rating = programme(tree).rate()
    assert per_hour(rating, "bed 3.exit flow of ethylbenzene") / ethylene == pytest.approx(EB, abs=1.1e-6)
    assert per_hour(rating, "bed 3.exit flow of diethylbenzene") / ethylene == pytest.approx(DEB, abs=1.1e-6)
    assert rating.number("train.conversion of benzene") == pytest.approx(conversion, abs=1.1e-6)


def test_split_moves_volume_but_not_selectivity() -> None:
    """The consequence of AL-1: at equal conversion of benzene the products are equal."""
    made = []
    for split in ([31.0, 31.0, 31.0], [60.0, 20.0, 13.0]):
        rating = programme(three_beds([20.0, 25.0, 3000.0], [380.0] * 3, split, ["first", "second"])).rate()
        made.append(per_hour(rating, "bed 3.exit flow of ethylbenzene"))
    assert made[0] == pytest.approx(made[1], rel=1e-6)


CUMENE = {
    "cumene": ("benzene + propylene => cumene", 3.5e4, 24_900.0),
    "second": ("cumene + propylene => diisopropylbenzene", 2.9e6, 35_080.0),
}


def cumene_bed(T: float, known: Tree) -> Tree:
    """CU-3, CU-4: 9.36 m3, 25 bar, P 105, propane 5.5, B 207 kmol/h; 800 kg catalyst per m3."""
    per = {"rate per": "catalyst mass", "driven by": "concentration"}
    kinetics = {
        name: {"equation": eq, "constant": arrhenius(k, E / 1.987, "mol/(g s (mol/L)^2)"), **per}
        for name, (eq, k, E) in CUMENE.items()
    }
    shares = {"propylene": f"{10500.0 / 317.5!r} %", "propane": f"{550.0 / 317.5!r} %", "benzene": "rest"}
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": known,
        "fluid": FLUID,
        "reactions": kinetics,
        "feeds": {"all": {"flow": "317.5 kmol/h", "temperature": f"{T!r} degC", "composition": shares}},
        "train": [
            {"entry": [{"take": "all"}]},
            {"bed 1": {"catalyst": "9.36 m^3", "inlet pressure": "25 bar(a)", "pressure drop factor": 0}},
            {"effluent": []},
        ],
        "every bed": {"bulk density": "800 kg/m^3"},
    }


def without_heats() -> Tree:
    """Species whose reactions neither give nor take heat: an isothermal bed."""
    carbon = {
        "benzene": ("C6H6", 6),
        "propylene": ("C3H6", 3),
        "cumene": ("C9H12", 9),
        "propane": ("C3H8", 3),
    }
    carbon["diisopropylbenzene"] = ("C12H18", 12)
    return {name: powers(formula, 0.0, 300.0, [20.0 * n]) for name, (formula, n) in carbon.items()}


def test_CU_3_isothermal_cumene_bed() -> None:
    """Recomputed, 0.5 %: P 32.1936, B 134.6152, C 71.9632, DIPB 0.4216 kmol/h at 360 degC."""
    rating = programme(cumene_bed(360.0, without_heats())).rate()
    assert celsius(rating, "bed 1.exit temperature") == pytest.approx(360.0, abs=1e-6)
    expected = {"propylene": 32.1936, "benzene": 134.6152, "cumene": 71.9632, "diisopropylbenzene": 0.4216}
    for name, flow in expected.items():
        assert per_hour(rating, f"bed 1.exit flow of {name}") == pytest.approx(flow, rel=5e-3), name


def test_CU_4_adiabatic_cumene_bed() -> None:
    """Recomputed: propylene fully converted, 522.9 degC, DIPB 3.2475 kmol/h; property data matter."""
    names = ("propylene", "propane", "benzene", "cumene", "diisopropylbenzene")
    rating = programme(cumene_bed(330.0, species(*names))).rate()
    assert per_hour(rating, "bed 1.exit flow of propylene") < 1e-3
    assert celsius(rating, "bed 1.exit temperature") == pytest.approx(522.9, abs=3.0)
    assert per_hour(rating, "bed 1.exit flow of diisopropylbenzene") == pytest.approx(3.2475, rel=2e-2)
