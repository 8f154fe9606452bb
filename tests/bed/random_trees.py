"""Random trains for Hypothesis: one to four beds, two chemistries, all kinds of gap, split, free number."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from hypothesis import strategies as st

from tests.bed.build import ALKYLATION_SPECIES, FLUID, HEAD, Tree

Draw = Any
R = 8.31446261815324


@dataclass(frozen=True)
class Family:
    """A chemistry with typical flows: main feed (kmol/h), side feed per bed, inlet temperature (K), p (bar).

    molar: roughly the molar masses of both feeds (kg/mol); named: a reaction that is always there.
    """

    species: Tree
    main: Tree
    side: Tree
    main_flow: float
    side_flow: float
    T: float
    p: float
    catalyst: float
    bed: Tree
    ratio: str
    named: str
    molar: tuple[float, float]


ALKYLATION = Family(
    ALKYLATION_SPECIES,
    {"benzene": "98 %", "ethylbenzene": "rest"},
    {"ethylene": "95 %", "ethane": "rest"},
    950.0,
    65.0,
    650.0,
    19.0,
    3000.0,
    {"diameter": "1.8 m", "equivalent size": "2.4 mm"},
    "benzene/ethylene",
    "ethylation",
    (0.079, 0.028),
)
OXIDATION = Family(
    {name: {"gas data": name} for name in ("SO2", "O2", "SO3", "N2")},
    {"SO2": "9 %", "O2": "11 %", "SO3": "0.5 %", "N2": "rest"},
    {"SO2": "15 %", "O2": "15 %", "N2": "rest"},
    2200.0,
    220.0,
    695.0,
    2.0,
    20_000.0,
    {"diameter": "5 m", "equivalent size": "8 mm"},
    "O2/SO2",
    "oxidation",
    (0.032, 0.034),
)


@st.composite
def trees(draw: Draw, most_beds: int = 4, plain: bool = False) -> Tree:
    """A whole case; `plain` leaves out free numbers and limits."""
    family = draw(st.sampled_from([ALKYLATION, OXIDATION]))
    beds = draw(st.integers(1, most_beds))
    some = Some(draw, plain)
    feeds = _feeds(some, family, beds)
    train = _train(some, family, feeds, beds)
    tree: Tree = {
        **HEAD,
        "percent": draw(st.sampled_from(["mol", "mass"])),
        "species": family.species,
        "fluid": FLUID,
        "reactions": _reactions(some, family),
        "feeds": feeds,
        "train": train,
        "every bed": {**family.bed, "bulk density": "640 kg/m^3", "void fraction": "42 %"},
    }
    return {**tree, **MONEY, "limits": {} if plain else _limits(family, train)}


@dataclass
class Some:
    """Draws of numbers as the file writes them, some of them free."""

    draw: Draw
    plain: bool

    def real(self, low: float, high: float) -> float:
        return float(self.draw(st.floats(low, high)))

    def choice(self, *options: Any) -> Any:
        return self.draw(st.sampled_from(options))

    def number(self, now: float, spread: float, unit: str, low: float = 0.0) -> Any:
        """now (1 +- spread), free in one of three draws."""
        value = now * (1.0 + spread * self.real(-1.0, 1.0))
        if self.plain or self.draw(st.integers(0, 2)):
            return _text(value, unit)
        ends = max(low, value - 0.5 * spread * now), value + 0.5 * spread * now
        return {"now": _text(value, unit), "from": _text(ends[0], unit), "to": _text(ends[1], unit)}


def _text(value: float, unit: str) -> str | float:
    return f"{value:.9g} {unit}" if unit else float(f"{value:.9g}")


def _reactions(some: Some, family: Family) -> Tree:
    if family is OXIDATION:
        orders = some.choice("as written", {"SO2": 1, "O2": 1}, {"SO2": 1.2, "O2": 0.5})
        return {"oxidation": _reaction(some, family, "SO2 + 0.5 O2", "SO3", 0.25, 90.0, orders, 1.5)}
    found = {
        "ethylation": _reaction(
            some, family, "benzene + ethylene", "ethylbenzene", 0.4, 66.0, "as written", 2.0
        )
    }
    if some.choice(True, False):
        found["ethylation"] |= {"orders": some.choice({"benzene": 1, "ethylene": 2}, {"ethylene": 1.3})}
        found["ethylation"]["equation"] = "benzene + ethylene => ethylbenzene"
        orders = found["ethylation"]["orders"]
        found["ethylation"] |= _constant(some, family, found["ethylation"], 0.4, 66.0, sum(orders.values()))
    if some.choice(True, False):
        found["second ethylation"] = _reaction(
            some, family, "ethylbenzene + ethylene", "diethylbenzene", 0.2, 88.0, "as written", 2.0
        )
        found["transalkylation"] = _reaction(
            some, family, "diethylbenzene + benzene", "2 ethylbenzene", 0.02, 105.0, "as written", 2.0
        )
    return found


def _reaction(
    some: Some, family: Family, left: str, right: str, size: float, E: float, orders: Any, order_sum: float
) -> Tree:
    total = sum(orders.values()) if isinstance(orders, dict) else order_sum
    found = {
        "equation": f"{left} {some.choice('<=>', '=>')} {right}",
        "rate per": some.choice("catalyst mass", "bed volume", "void volume"),
        "driven by": some.choice("partial pressure", "concentration", "mole fraction"),
        "orders": orders,
    }
    return found | _constant(some, family, found, size, E, total)


def _constant(some: Some, family: Family, given: Tree, size: float, E: float, n: float) -> Tree:
    """A constant that makes rates of about `size` mol/(kg s) times mole fractions at T and p."""
    base = {
        "partial pressure": family.p * 1e5,
        "concentration": family.p * 1e5 / (R * family.T),
        "mole fraction": 1.0,
    }
    per = {"catalyst mass": 1.0, "bed volume": 640.0, "void volume": 640.0 / 0.42}[given["rate per"]]
    driver = {"partial pressure": f" Pa^{n:g}", "concentration": f" (mol/m^3)^{n:g}", "mole fraction": ""}
    unit = f"mol/({'kg' if per == 1.0 else 'm^3'} s{driver[given['driven by']]})"
    k = size * some.real(0.4, 2.0) * per / base[given["driven by"]] ** n
    energy = f"{E * some.real(0.8, 1.1):.6g} kJ/mol"
    if some.choice(True, False):
        return {"constant": {"at": f"{family.T:g} K", "is": f"{k:.9g} {unit}", "activation energy": energy}}
    return {"constant": f"{k:.9g} {unit}"}


def _feeds(some: Some, family: Family, beds: int) -> Tree:
    main, side = (_flow(some, molar) for molar in family.molar)
    first = {
        "flow": some.number(family.main_flow * main[0], 0.1, main[1]),
        "temperature": some.number(family.T - 15.0, 0.01, "K"),
        "composition": family.main,
    }
    second = {
        "flow": some.number(family.side_flow * beds * side[0], 0.1, side[1]),
        "temperature": some.number(330.0, 0.05, "K"),
        "composition": family.side,
    }
    if beds > 1:
        second["split"] = _split(some, family.side_flow * beds, [1.0 / beds] * beds, side)
    if beds > 1 and some.choice(True, False, False):
        first["split"] = _split(some, family.main_flow, [0.7] + [0.3 / (beds - 1)] * (beds - 1), main)
    return {"main": first, "side": second}


def _flow(some: Some, molar: float) -> tuple[float, str]:
    """Factor from kmol/h and unit of a flow, by moles or by mass."""
    found: tuple[float, str] = some.choice((1.0, "kmol/h"), (molar, "t/h"))
    return found


def _split(some: Some, flow: float, parts: list[float], unit: tuple[float, str]) -> Tree:
    """Shares or flows, the rest to one of the beds."""
    rest, shares = some.choice(*range(len(parts))), some.choice(True, False)
    now: Tree = {}
    for b, part in enumerate(parts):
        value, text = (100.0 * part, "%") if shares else (part * flow * unit[0], unit[1])
        now[f"bed {b + 1}"] = "rest" if b == rest else some.number(value, 0.1, text)
    return {"now": now}


def _train(some: Some, family: Family, feeds: Tree, beds: int) -> list[Tree]:
    train: list[Tree] = []
    for b in range(1, beds + 1):
        if b == 1:
            steps, held = _entry(some, family)
        else:
            steps, held = _gap(some, family, [name for name, feed in feeds.items() if "split" in feed], b)
        train.append({"entry" if b == 1 else f"gap {b - 1}": steps})
        bed: Tree = {
            "catalyst": some.choice(
                some.number(family.catalyst, 0.4, "kg"), some.number(family.catalyst / 640.0, 0.4, "m^3")
            ),
            "catalyst activity": some.number(0.9, 0.2, ""),
            "pressure drop factor": some.choice(0, some.number(1.0, 0.3, "")),
        }
        if b == 1:
            bed["inlet pressure"] = some.number(family.p, 0.1, "bar(a)")
        if held:
            bed["inlet temperature"] = some.number(family.T, 0.03, "K")
        if beds > 1 and not some.draw(st.integers(0, 5)):
            bed["state"] = "bypassed"
        train.append({f"bed {b}": bed})
    return [*train, {"effluent": _effluent(some)}]


def _entry(some: Some, family: Family) -> tuple[list[Tree], bool]:
    take, inject = {"take": "main"}, {"inject": "side"}
    holds = {"heat": {"holds": "bed 1.inlet temperature", "heat from": "furnace"}}
    to = {"heat": {"to": some.number(family.T + 15.0, 0.02, "K"), "heat from": "furnace"}}
    adds = {"heat": {"heat added": some.number(2.0, 0.3, "MW"), "heat from": "furnace"}}
    arrangements = [
        ([take, holds, inject], True),
        ([take, inject, holds], True),
        ([take, to, inject], False),
        ([take, inject, adds], False),
        ([take, inject], False),
    ]
    found: tuple[list[Tree], bool] = some.choice(*arrangements)
    return found


def _gap(some: Some, family: Family, injected: list[str], b: int) -> tuple[list[Tree], bool]:
    shots = [{"inject": name} for name in injected]
    levels = {"heat to": some.choice("every cooling level", ["steam", "air"], "unpriced")}
    holds = {"cool": {"holds": f"bed {b}.inlet temperature", **levels}}
    to = {"cool": {"to": some.number(family.T, 0.02, "K"), **levels}}
    removes = {"cool": {"heat removed": some.number(1.0, 0.5, "MW"), **levels}}
    arrangements = [
        ([*shots, holds], True),
        ([holds, *shots], True),
        ([*shots, to], False),
        ([to, *shots], False),
        ([removes, *shots], False),
        ([holds, *shots, removes], True),
        (shots, False),
    ]
    found: tuple[list[Tree], bool] = some.choice(*arrangements)
    return found


def _effluent(some: Some) -> list[Tree]:
    levels = {"heat to": "every cooling level"}
    to = {"cool": {"to": some.number(480.0, 0.1, "K"), **levels}}
    removes = {"cool": {"heat removed": some.number(3.0, 0.5, "MW"), **levels}}
    found: list[Tree] = some.choice([], [to], [removes])
    return found


MONEY: Tree = {
    "heat levels": {
        "minimum approach": "10 K",
        "furnace": {"heats up to": "900 K", "costs": "34 EUR/MWh"},
        "steam": {"cools down to": "500 K", "earns": "19 EUR/MWh"},
        "air": {"cools down to": "330 K", "costs": "4 EUR/MWh"},
    },
    "prices": {
        "feed": {"of": "feed main.flow", "costs": "3 EUR/kmol"},
        "load": {"of": "train.catalyst", "costs": "0.2 EUR/(kg h)"},
        "warmth": {"of": "every bed.exit temperature", "costs": "0.05 EUR/(K h)"},
    },
}


def _limits(family: Family, train: list[Tree]) -> Tree:
    """Every quantity of the reference, bounded below by zero, and some that only the program gives."""
    names = [f"{place}.{what}" for place in PLACES for what in AT_PLACES]
    names += ["every gap.temperature after exchanger"]
    names += [f"every bed.{what}" for what in AT_BEDS]
    names += [f"every bed.exit flow of {name}" for name in family.species]
    zero = {name: {"of": name, "at least": _zero(name)} for name in names}
    running = [owner for section in train for owner, bed in section.items() if _runs(owner, bed)]
    middle = {f"middle {bed}": {"of": f"{bed}.depth at 50 % of rise", "at most": "50 %"} for bed in running}
    approach = {"of": f"every bed.approach to equilibrium of {family.named}", "at least": "1 K"}
    return (
        zero
        | middle
        | {
            "approach": approach,
            "ratio": {"of": f"every bed.inlet ratio {family.ratio}", "at least": "3 mol/mol"},
            "peak": {"of": "every bed.peak temperature", "at most": "800 K"},
            "drop": {"of": "train.pressure drop", "at most": "1 bar"},
        }
    )


def _runs(owner: str, bed: Tree) -> bool:
    return owner.startswith("bed") and bed.get("state") != "bypassed"


PLACES = ("entry", "every gap", "effluent")
AT_PLACES = ("heat removed", "exit temperature")
AT_BEDS = ("inlet temperature", "exit temperature", "exit pressure")


def _zero(name: str) -> str:
    if name.endswith("heat removed"):
        return "0 MW"
    if "exit flow of" in name:
        return "0 kmol/h"
    return "0 bar(a)" if name.endswith("pressure") else "0 K"
