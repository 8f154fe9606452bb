"""Removal, pressure drop, recycles, devices and beds out of use: balances, closed forms, other programs."""

from __future__ import annotations

import cantera as ct
import numpy as np
import pytest

import reactorstage as rs
from reactorstage.optimiser.local import local_solve
from reactorstage.optimiser.scaling import typical_change
from reactorstage.report.gaps import gap_table
from reactorstage.train.result import Rating
from tests.bed.build import FLUID, HEAD, Tree, load, programme
from tests.chemistry.published_laws import COLLINA, SO2


def contact(*absorption: Tree, **more: Tree) -> Tree:
    """Two beds of SO2 converter with what stands between them; the law of Collina and others."""
    feed = {"SO2": "9 %", "O2": "11 %", "N2": "rest"}
    held = {"heat": {"holds": "bed 1.inlet temperature", "heat from": "unpriced"}}
    return {
        **HEAD,
        "aim": "least effluent.flow of SO2",
        "species": SO2,
        "fluid": FLUID,
        "reactions": {"contact": COLLINA},
        "feeds": {"gas": {"flow": "1000 kmol/h", "temperature": "60 degC", "composition": feed}},
        "train": [
            {"entry": [{"take": "gas"}, held]},
            {"bed 1": {"catalyst": "20 t", "inlet pressure": "1.4 bar(a)", "inlet temperature": "440 degC"}},
            {"gap 1": list(absorption)},
            {"bed 2": {"catalyst": "30 t"}},
            {"effluent": []},
        ],
        "every bed": {"pressure drop factor": 0},
        **more,
    }


COOL: Tree = {"cool": {"to": "80 degC", "heat to": "unpriced"}}
HEAT: Tree = {"heat": {"to": "420 degC", "heat from": "unpriced"}}
ABSORB: Tree = {"remove": {"SO3": "99.9 %"}}


def rated(tree: Tree) -> Rating:
    rating = programme(tree).rate()
    assert not rating.failure
    assert rating.atoms < 1e-11 and rating.energy < 1e-11
    return rating


def test_removal_takes_its_share_and_the_rest_reacts_on() -> None:
    """Balances: 0.1 % of SO3 is left; what is removed counts as made; conversion gains."""
    rating = rated(contact(COOL, ABSORB, HEAT))
    before = rating.number("bed 1.exit flow of SO3")
    assert rating.number("bed 2.inlet flow of SO3") == pytest.approx(1e-3 * before, rel=1e-12)
    assert rating.number("gap 1.removed SO3") == pytest.approx(0.999 * before, rel=1e-12)
    converted = rating.number("train.conversion of SO2")
    assert rating.number("train.made SO3") == pytest.approx(converted * 25.0, rel=1e-9)
    without = rated(contact(COOL, HEAT)).number("train.conversion of SO2")
    assert converted > without + 0.02


def test_the_gap_table_tells_what_is_taken_out() -> None:
    [column] = [
        one for one in gap_table(rated(contact(COOL, ABSORB, HEAT))).columns if "taken" in one.heading[0]
    ]
    flow = rated(contact(COOL, ABSORB, HEAT)).number("gap 1.removed SO3") * 3.6
    assert [cell.strip() for cell in column.cells] == ["-", f"{flow:.2f}"]


def test_what_is_removed_leaves_with_its_enthalpy() -> None:
    """Independent program: heat of the reheater is that of the lean gas by Cantera, 1e-8."""
    rating = rated(contact(COOL, ABSORB, HEAT))
    reheat = next(one for one in rating.steps if one.owner == "gap 1" and one.kind == "heat")
    every = {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}
    gas = ct.Solution(thermo="ideal-gas", species=[every[name] for name in SO2])
    F = np.array([rating.number(f"bed 2.inlet flow of {name}") for name in SO2])
    enthalpies = []
    for T in (353.15, 693.15):
        gas.TP = T, ct.one_atm
        enthalpies.append(float(F @ gas.standard_enthalpies_RT * ct.gas_constant / 1e3 * T))
    assert -reheat.heat_removed == pytest.approx(enthalpies[1] - enthalpies[0], rel=1e-8)


def test_removal_by_flow() -> None:
    share = rated(contact(COOL, ABSORB, HEAT))
    flow = share.number("gap 1.removed SO3")
    same = rated(contact(COOL, {"remove": {"SO3": f"{flow!r} mol/s"}}, HEAT))
    assert same.number("effluent.flow of SO2") == pytest.approx(
        share.number("effluent.flow of SO2"), rel=1e-9
    )


def test_more_than_is_there_cannot_be_removed() -> None:
    rating = programme(contact(COOL, {"remove": {"SO3": "900 kmol/h"}}, HEAT)).rate()
    assert rating.status == "no answer"
    assert rating.failure.startswith("gap 1: more is taken out than there is")


def test_pressure_drop_of_a_gap() -> None:
    tree = contact(COOL, {"pressure drop": "0.05 bar"}, HEAT)
    rating = rated(tree)
    assert rating.number("bed 2.inlet pressure") == pytest.approx(1.35e5, rel=1e-12)
    assert rating.number("train.pressure drop") == pytest.approx(0.05e5, rel=1e-9)
    tree = contact({"pressure drop": "1.5 bar"})
    assert "gap 1: the pressure is exhausted" in programme(tree).rate().failure


def steps_free() -> Tree:
    removed = {"remove": {"SO3": {"now": "90 %", "from": "50 %", "to": "99.9 %"}}}
    lost = {"pressure drop": {"now": "0.05 bar", "from": "0.01 bar", "to": "0.2 bar"}}
    cooled = {"cool": {"to": {"now": "80 degC", "from": "60 degC", "to": "200 degC"}, "heat to": "unpriced"}}
    limits = {"made": {"of": "train.made SO3", "at least": "1 kmol/h"}}
    return contact(cooled, removed, lost, HEAT, limits=limits)


def looped(flow: float | str = 30.0, **more: Tree) -> Tree:
    """Ethylation in two beds with a part of the cooled effluent brought back before bed 2."""
    quench: Tree = {"flow": flow if isinstance(flow, dict) else f"{flow!r} mol/s"}
    constant = {"at": "400 degC", "is": "4.2e-3 kmol/(kg h bar^2)", "activation energy": "66 kJ/mol"}
    return {
        **HEAD,
        "aim": "least effluent.flow of ethylene",
        "species": {
            "benzene": {"gas data": "C6H6"},
            "ethylene": {"gas data": "C2H4"},
            "ethylbenzene": {"gas data": "C8H10,ethylbenz"},
        },
        "fluid": FLUID,
        "reactions": {
            "ethylation": {
                "equation": "benzene + ethylene <=> ethylbenzene",
                "rate per": "catalyst mass",
                "driven by": "partial pressure",
                "constant": constant,
            }
        },
        "feeds": {
            "benzene": {"flow": "200 mol/s", "temperature": "380 degC", "composition": {"benzene": "100 %"}},
            "ethylene": {
                "flow": "40 mol/s",
                "temperature": "45 degC",
                "composition": {"ethylene": "100 %"},
                "split": {"now": {"bed 1": "50 %", "bed 2": "rest"}},
            },
        },
        "recycles": {"quench": quench},
        "train": [
            {"entry": [{"take": "benzene"}, {"inject": "ethylene"}]},
            {"bed 1": {"catalyst": "1.5 t", "inlet pressure": "19 bar(a)"}},
            {"gap 1": [{"inject": "quench"}, {"inject": "ethylene"}]},
            {"bed 2": {"catalyst": "1.5 t"}},
            {"effluent": [{"cool": {"to": "150 degC", "heat to": "unpriced"}}, {"draw": "quench"}]},
        ],
        "every bed": {"pressure drop factor": 0},
        **more,
    }


def test_a_recycle_closes_and_is_that_of_an_open_train_fed_with_it() -> None:
    """Independent of the closure: what is drawn, fed as a feed of its own, gives the same effluent; 1e-8."""
    rating = rated(looped())
    assert rating.closed.residuals["recycle quench"] < 1e-10
    names = ("benzene", "ethylene", "ethylbenzene")
    shares = {name: rating.number(f"recycle quench.mole fraction of {name}") for name in names}
    T = rating.number("recycle quench.temperature")
    assert pytest.approx(423.15) == T
    tree = looped()
    del tree["recycles"]
    tree["feeds"]["quench"] = {
        "flow": "30 mol/s",
        "temperature": f"{T!r} K",
        "composition": {**{name: f"{share!r}" for name, share in shares.items()}, "ethylbenzene": "rest"},
    }
    tree["train"][-1]["effluent"].pop()
    alone = rated(tree)
    assert rating.number("bed 2.exit temperature") == pytest.approx(alone.number("bed 2.exit temperature"))
    for name in names:
        whole = rating.number(f"effluent.flow of {name}") + 30.0 * shares[name]
        assert alone.number(f"effluent.flow of {name}") == pytest.approx(whole, rel=1e-8)


def test_a_recycle_quenches() -> None:
    none, some = (rated(looped(flow)).number("bed 2.exit temperature") for flow in (0.0, 60.0))
    assert some < none - 15.0


def test_a_recycle_divided_between_beds() -> None:
    tree = looped()
    tree["recycles"]["quench"]["split"] = {"now": {"bed 1": "40 %", "bed 2": "rest"}}
    tree["train"][0]["entry"].append({"inject": "quench"})
    rating = rated(tree)
    assert rating.number("bed 1.injected quench") == pytest.approx(12.0)
    assert rating.number("bed 2.injected quench") == pytest.approx(18.0)


def free_loop() -> Tree:
    flow = {"now": "30 mol/s", "from": "1 mol/s", "to": "200 mol/s"}
    limits = {"cool": {"of": "bed 2.exit temperature", "at most": "385 degC"}}
    return looped(flow, limits=limits)  # type: ignore[arg-type]


@pytest.mark.parametrize("make", [steps_free, free_loop])
def test_derivatives_by_every_number(make: object) -> None:
    """Central differences on one mesh, 5e-6 of the largest."""
    made = programme(make())  # type: ignore[operator]
    x = made.now
    evaluation, mesh = made.start_mesh(x)
    for k, number in enumerate(made.numbers):
        step = 1e-5 * (number.high - number.low)
        ends = []
        for side in (1.0, -1.0):
            there = x.copy()
            there[k] += side * step
            ends.append(made.evaluate(there, mesh))
        for what in ("cost", "margin", "residual"):
            ahead, back = (np.atleast_1d(getattr(one, what)) for one in ends)
            slopes = np.atleast_2d(getattr(evaluation, f"{what}_dx"))[:, k]
            size = max(float(np.abs(slopes).max(initial=0.0)), 1e-12)
            assert slopes == pytest.approx((ahead - back) / (2.0 * step), abs=5e-6 * size)


def test_a_recycle_as_equalities_of_the_search() -> None:
    """The least flow that keeps the limit (cooler beds slip more ethylene here): a brute scan agrees."""
    outcome = rs.optimise(load(free_loop()), starts=2, explain=False)
    assert outcome.best is not None and outcome.status == "inside all limits"
    best = outcome.best
    assert best.atoms < 1e-11 and max(best.closed.residuals.values()) < 1e-9
    flows = best.number("recycle quench.flow") + np.linspace(-1.0, 1.0, 41)
    wanted = ["bed 2.exit temperature", "effluent.flow of ethylene"]
    batch = rs.rate_many(outcome.programme, {"recycle quench.flow": flows}, quantities=wanted)
    inside = np.where(batch.of(wanted[0]) <= 658.15, batch.of(wanted[1]), np.inf)
    assert best.number(wanted[1]) <= inside.min() * (1.0 + 1e-6)
    assert best.number(wanted[1]) >= 0.995 * inside.min()


def test_local_optimum_of_a_recycle_takes_few_evaluations() -> None:
    """Frozen with half to spare."""
    made = programme(free_loop())
    x = made.now
    evaluation, _ = made.start_mesh(x)
    ending = local_solve(made, x, typical_change(made, evaluation))
    assert ending.optimal and ending.evaluations <= 60


LEAD_OUT = {"bed 2.state": "out of service", "bed 2.its injection": "moved to bed 3"}


def lead(root: object, **changes: str) -> Rating:
    texts = [f"{name}={value}" for name, value in changes.items()]
    return rs.rate(rs.load(f"{root}/cases/selkemouth-ethylation.yaml", texts))


def test_a_bed_out_of_service_moves_or_shuts_its_injection(root: object) -> None:
    """Balances: 67 kmol/h more to bed 3, or 67 less in all; limits on every bed leave bed 2 out."""
    moved = lead(root, **LEAD_OUT)
    assert moved.number("bed 3.injected ethylene") * 3.6 == pytest.approx(134.0)
    assert moved.number("bed 2.injected ethylene") == 0.0
    assert moved.number("feed ethylene.flow") * 3.6 == pytest.approx(268.0)
    assert moved.number("bed 2.exit temperature") == moved.number("bed 2.inlet temperature")
    assert not [one for one in moved.limits if one.owner == "bed 2"]
    shut = lead(root, **{**LEAD_OUT, "bed 2.its injection": "shut"})
    assert shut.number("feed ethylene.flow") * 3.6 == pytest.approx(201.0)
    assert shut.number("bed 3.injected ethylene") * 3.6 == pytest.approx(67.0)
    for rating in (moved, shut):
        assert rating.atoms < 1e-12 and rating.energy < 1e-12


def test_the_bed_that_takes_the_rest_can_be_out_of_service(root: object) -> None:
    rating = lead(root, **{"bed 4.state": "out of service", "bed 4.its injection": "moved to bed 3"})
    assert rating.number("bed 3.injected ethylene") * 3.6 == pytest.approx(134.0)


def test_a_bypassed_cooler_lets_the_inlet_follow(root: object) -> None:
    """Closed form: nothing is removed, so the inlet is that behind the injection."""
    rating = lead(root, **{"gap 2.cooler state": "bypassed"})
    assert rating.number("gap 2.heat removed") == 0.0
    behind = rating.number("gap 2.temperature after injection")
    assert rating.number("bed 3.inlet temperature") == behind
    assert behind > 680.0
    assert rating.energy < 1e-12


def test_a_quench_warmer_than_the_bed_exit_is_warned_about() -> None:
    tree = looped()
    tree["feeds"]["ethylene"]["temperature"] = "600 degC"
    notes = " ".join(rated(tree).notes)
    assert "ethylene enters gap 1 at 600 degC" in notes and "quenches nothing" in notes
    assert "quenches nothing" not in " ".join(rated(looped()).notes)


def everything() -> Tree:
    """A recycle, an exchanger with a bypass and a ladder with a capacity in one train, with a soft limit."""
    tree = free_loop()
    tree["aim"] = "least money.total"
    tree["feeds"]["benzene"]["temperature"] = "300 degC"
    tree["exchangers"] = {
        "X": {"effectiveness": "55 %", "cold bypass": {"now": "5 %", "from": "0 %", "to": "40 %"}}
    }
    tree["train"][0]["entry"].insert(1, {"heat": {"exchanger": "X"}})
    to = {"now": "150 degC", "from": "120 degC", "to": "190 degC"}
    tree["train"][-1]["effluent"] = [
        {"cool": {"exchanger": "X"}},
        {"cool": {"to": to, "heat to": "every cooling level"}},
        {"draw": "quench"},
    ]
    tree["heat levels"] = {
        "minimum approach": "10 K",
        "steam": {"cools down to": "160 degC", "earns": "12 EUR/MWh", "capacity": "3 MW"},
        "water": {"cools down to": "30 degC", "costs": "2 EUR/MWh"},
    }
    tree["prices"] = {"loss": {"of": "effluent.flow of ethylene", "costs": "40 EUR/kmol"}}
    tree["limits"]["cool"]["soft"] = "3 EUR/h per K"
    return tree


def test_closures_beside_the_ladder_and_soft_limits() -> None:
    """Balances, derivatives and an optimum that no re-rating contradicts, with all kinds of numbers in x."""
    test_derivatives_by_every_number(everything)
    outcome = rs.optimise(load(everything()), starts=4, explain=False)
    best = outcome.best
    assert best is not None and outcome.status == "inside all limits"
    assert best.atoms < 1e-11 and best.energy < 1e-11 and max(best.closed.residuals.values()) < 1e-9
    again = outcome.programme.rate(outcome.programme.complete(outcome.optimum.best.x))
    assert again.number("money.total") == pytest.approx(best.number("money.total"), rel=1e-6)
    assert outcome.optimum.best.residual < 1e-4
