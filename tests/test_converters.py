"""The contact process and the ammonia converter as shipped: what their files claim, against other ways.

An independent model gave the first numbers of both: another program, with its own thermochemistry and, for
ammonia, with published fugacity correlations.
"""

from __future__ import annotations

from copy import deepcopy
from functools import cache
from math import exp, log
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml
from scipy.optimize import brentq

import reactorstage as rs
from reactorstage.chemistry.mixture import Mixture
from reactorstage.chemistry.reaction import ln_K
from reactorstage.face import Optimisation
from reactorstage.optimiser.asked import Asked
from reactorstage.optimiser.moves import moves_to
from reactorstage.optimiser.resolve import Base
from reactorstage.report.cascade import cascades
from reactorstage.train.batch import rate_many
from reactorstage.train.passing import FINAL
from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.build import load
from tests.chemistry.test_effectiveness import DYSON_SIMON
from tests.published.test_ammonia import Kp
from tests.test_cases import solved as shipped

FOLDER = Path(__file__).parent.parent / "cases"
CONTACT, WEAK = "hathermoor-contact", "hathermoor-weak-gas"
AMMONIA, AGED, INERTS = "quillmere-ammonia", "quillmere-aged-catalyst", "quillmere-inerts"
KELVIN, PER_HOUR, KMOL_PER_H = 273.15, 3600.0, 3.6

Tree = dict[str, Any]


def rated(name: str, *overrides: str) -> Rating:
    return rs.rate(rs.load(FOLDER / f"{name}.yaml", overrides))


def solved(name: str) -> Optimisation:
    """The search that `test_cases` makes of the case."""
    return shipped(f"{name}.yaml")


def best(name: str) -> Rating:
    found = solved(name).best
    assert found is not None
    return found


def celsius(rating: Rating, quantity: str, beds: int) -> list[float]:
    return [float(rating.number(f"bed {bed}.{quantity}") or 0.0) - KELVIN for bed in range(1, beds + 1)]


def held(rating: Rating) -> set[tuple[str, str]]:
    return {(one.label, one.owner) for one in rating.limits if one.at_work}


def with_inlets(*inlets: float) -> Rating:
    settings = [f"bed {bed}.inlet temperature={T} degC" for bed, T in enumerate(inlets, start=1)]
    return rated(CONTACT, *settings, "gap 3.pressure drop=0 bar")


def converted(rating: Rating) -> list[float]:
    """% of all SO2 behind each bed."""
    fed = rating.number("bed 1.inlet flow of SO2")
    return [100.0 * (1.0 - rating.number(f"bed {bed}.exit flow of SO2") / fed) for bed in range(1, 5)]


@pytest.mark.parametrize(
    ("inlets", "exits", "conversions"),
    [
        ((416.0, 440.0, 428.0, 420.0), (613.0, 498.0, 430.0, 438.0), (72.5, 93.8, 94.6, 99.71)),
        ((410.0, 439.0, 447.0, 444.0), None, (73.4, 93.9, 97.1, 99.90)),
    ],
)
def test_contact_process_is_that_of_an_independent_model(
    inlets: tuple[float, ...], exits: tuple[float, ...] | None, conversions: tuple[float, ...]
) -> None:
    """Independent model of the same law, where beds lose 30 mbar each and the absorber none; 0.15 %, 1 K."""
    rating = with_inlets(*inlets)
    assert converted(rating)[:3] == pytest.approx(conversions[:3], abs=0.15)
    assert converted(rating)[3] == pytest.approx(conversions[3], abs=0.03)
    if exits:
        assert celsius(rating, "exit temperature", 4) == pytest.approx(exits, abs=1.0)


def test_contact_process_today_has_an_unlit_bed_that_the_optimum_lights() -> None:
    today = solved(CONTACT).today
    assert [note for note in today.notes if "unlit" in note] == [
        "Bed 3 is practically unlit: it rises 0.9 K of a possible 16 K."
    ]
    assert [one.label for one in today.limits if not one.met] == ["stack"]
    assert not [note for note in best(CONTACT).notes if "unlit" in note]
    assert best(CONTACT).number("bed 3.rise") > 10.0 * today.number("bed 3.rise")


def test_optimum_of_the_contact_process() -> None:
    """Frozen: computed with the shipped data; exits of the beds lie in the ranges of practice.

    Practice (no source): bed 1 leaves at 590-640, bed 2 at 500-530, bed 3 at 450-475 degC.
    """
    rating = best(CONTACT)
    assert celsius(rating, "inlet temperature", 4) == pytest.approx([410.0, 464.2, 445.0, 444.1], abs=0.3)
    assert rating.number("effluent.flow of SO2") * KMOL_PER_H == pytest.approx(0.828, abs=0.002)
    assert rating.number("money.total") * PER_HOUR == pytest.approx(30.29, abs=0.05)
    assert held(rating) == {("light-off", "bed 1"), ("reheat area", "exchanger reheater")}
    for T, low, high in zip(
        celsius(rating, "exit temperature", 4), (590.0, 500.0, 450.0), (640.0, 530.0, 475.0), strict=False
    ):
        assert low < T < high


def test_converter_heats_its_own_gas() -> None:
    """Balance: the entry takes up the heat of the two preheaters; the lean gas that of the reheaters."""
    rating = best(CONTACT)
    heat = {one.name: one.heat for one in rating.closed.exchanges}
    taken = -rating.number("entry.heat removed")
    assert heat["preheater"] + heat["hot preheater"] == pytest.approx(taken, rel=1e-9)
    [lean] = [one for one in rating.steps if one.owner == "gap 3" and one.what == "reheater"]
    assert heat["reheater"] == pytest.approx(-lean.heat_removed, rel=1e-9)
    assert {one.to for one in rating.closed.exchanges} == {"entry", "gap 3"}


def test_heat_beside_levels_is_that_which_goes_to_them() -> None:
    """Heat between two streams is left out: what is drawn is what the levels take, at a distance."""
    [removed] = cascades(best(CONTACT))
    assert sum(rung.heat for rung in removed.rungs) == pytest.approx(removed.total, rel=1e-9)
    start = 0.0
    for rung in removed.rungs:
        assert float(np.interp(start, removed.heat, removed.T)) > rung.T
        start += rung.heat


def test_weak_gas_holds_heat_and_not_the_permit() -> None:
    """Frozen: what holds it; bed 2 runs hot to carry heat to the lean gas."""
    outcome = solved(WEAK)
    assert [one.label for one in outcome.today.limits if not one.met] == ["reheat area"]
    assert held(best(WEAK)) == {("light-off", "bed 1"), ("reheat area", "exchanger reheater")}
    assert celsius(best(WEAK), "inlet temperature", 2)[1] == pytest.approx(496.2, abs=0.5)


@cache
def tree() -> Tree:
    """The shipped ammonia case as plain YAML."""
    found = yaml.safe_load((FOLDER / f"{AMMONIA}.yaml").read_text(encoding="utf-8"))
    assert isinstance(found, dict)
    return found


@cache
def mixture() -> Mixture:
    return rs.compile(rs.load(FOLDER / f"{AMMONIA}.yaml")).model.chemistry.mixture


@pytest.mark.parametrize("T", [643.0, 700.0, 760.0, 803.0])
def test_rate_constant_is_that_of_dyson_and_simon(T: float) -> None:
    """k Ka^2 (1968, with Gillespie and Beattie 1930, from memory), 2e-4 for the fitted T^2."""
    form = tree()["reactions"]["synthesis"]["constant"]["exp of"]
    a, b, c, d = (float(str(form[key]).split(" ")[0]) for key in "abcd")
    k = 1.7698e15 * exp(-40_765.0 / (1.987 * T))
    assert exp(a + b / T + c * log(T) + d * T) == pytest.approx(k * Kp(T) ** 2, rel=2e-4)


def test_effectiveness_is_that_between_two_published_pressures() -> None:
    """Linear between 150 and 225 atm at 184 atm, to the digits written."""
    given = tree()["reactions"]["synthesis"]["effectiveness"]
    by_T = [float(text.split(" ")[0]) for text in given["powers of T"]]
    written = [by_T[0], by_T[1], given["powers of conversion"][0], by_T[2], given["powers of conversion"][1]]
    written += [by_T[3], given["powers of conversion"][2]]
    share = (184.0 - 150.0) / (225.0 - 150.0)
    between = [
        low + share * (high - low) for low, high in zip(DYSON_SIMON[150], DYSON_SIMON[225], strict=True)
    ]
    assert written == pytest.approx(between, rel=2e-6)


@pytest.mark.parametrize(("P", "measured"), [(100.0, 16.43), (200.0, 27.4), (300.0, 35.82)])
def test_ammonia_at_equilibrium_is_near_the_measured_table(P: float, measured: float) -> None:
    """450 degC, H2:N2 3:1, mole %: Larson and Dodge (1923-24), from memory, 2 %; Ka would be 3 to 5 % low."""
    T, names = 723.15, mixture().table.names
    nu = np.array([[{"nitrogen": -1.0, "hydrogen": -3.0, "ammonia": 2.0}.get(one, 0.0) for one in names]])
    ln_K_T = float(ln_K(mixture().table, nu, T)[0])

    def away(y: float) -> float:
        part = {"nitrogen": 0.25 * (1.0 - y), "hydrogen": 0.75 * (1.0 - y), "ammonia": y}
        F = np.array([part.get(one, 0.0) for one in names])
        here = np.log(np.where(F > 0.0, F, 1.0)) + mixture().ln_coefficients(F, T, 101_325.0 * P)
        return float(nu[0] @ here) - ln_K_T

    assert 100.0 * brentq(away, 1e-4, 0.9) == pytest.approx(measured, rel=0.02)


@cache
def open_train(activity: float) -> TrainProgramme:
    """The shipped converter with its inlet held by a heater and its effluent left as it is."""
    cut = deepcopy(tree())
    del cut["exchangers"], cut["limits"]
    cut["aim"], cut["prices"] = "most train.made ammonia", {}
    cut["train"][0]["entry"][1] = {"heat": {"holds": "bed 1.inlet temperature", "heat from": "unpriced"}}
    cut["train"][1]["bed 1"]["inlet temperature"] = "370 degC"
    cut["train"][-1] = {"effluent": []}
    cut["every bed"]["catalyst activity"] = activity
    return rs.compile(load(cut))


@cache
def effluent(activity: float) -> tuple[np.ndarray, np.ndarray]:
    """Inlets of bed 1 and temperatures behind bed 3, K."""
    inlets = np.arange(474.0, 700.0, 2.0)
    exit_ = "bed 3.exit temperature"
    batch = rs.rate_many(open_train(activity), {"bed 1.inlet temperature": inlets}, quantities=[exit_])
    return inlets, batch.of(exit_)


def needed(T_1: float, activity: float, bypass: float) -> float:
    """Effectiveness that an inlet asks for: by hand, from enthalpies of the feed and the open train."""
    feed = tree()["feeds"]["syngas"]["composition"]
    given = {name: float(text.split(" ")[0]) / 100.0 for name, text in feed.items() if text != "rest"}
    y = np.array([given.get(name, 1.0 - sum(given.values())) for name in mixture().table.names])
    before = mixture().molar(y, 473.15, 189e5)[0]
    after = before + (mixture().molar(y, T_1, 186e5)[0] - before) / (1.0 - bypass)
    T_in, T_out = (
        float(brentq(lambda T, h=h: mixture().molar(y, T, 186e5)[0] - h, 400.0, 1000.0))
        for h in (before, after)
    )
    return (T_out - T_in) / (float(np.interp(T_1, *effluent(activity))) - T_in)


def scanned(activity: float, bypass: float) -> list[float]:
    """Inlets of bed 1 at which the interchanger passes what is asked for, hottest first, degC."""
    grid = effluent(activity)[0]
    off = [needed(float(T), activity, bypass) - 0.64 for T in grid]
    found = [
        float(brentq(lambda T: needed(T, activity, bypass) - 0.64, low, high, xtol=1e-4))
        for low, high, a, b in zip(grid, grid[1:], off, off[1:], strict=False)
        if a * b < 0.0
    ]
    return [T - KELVIN for T in reversed(found)]


@pytest.mark.parametrize(("activity", "bypass", "count"), [(1.0, 0.06, 3), (0.75, 0.06, 1), (0.75, 0.0, 3)])
def test_states_of_the_ammonia_converter_are_those_of_a_scan(
    activity: float, bypass: float, count: int
) -> None:
    """Scan of the open train, supplied against required heat; 0.2 K (linear between points 2 K apart).

    The ignited state is lost as catalyst ages and comes back when the bypass is closed.
    """
    rating = rated(
        AMMONIA,
        f"every bed.catalyst activity={activity}",
        f"exchanger interchanger.cold bypass={100.0 * bypass} %",
    )
    states = rating.closed.states
    alone = scanned(activity, bypass)
    assert len(alone) == count
    assert [one.T_first - KELVIN for one in states] == pytest.approx(alone, abs=0.2)
    assert [one.stable for one in states] == [True, False, True][-count:]
    assert [one.least for one in rating.closed.folds] == [False, True]


def test_ammonia_converter_today_is_near_an_independent_model() -> None:
    """Independent model: beds 370 to 512, 409 to 490, 426 to 482 degC, 1210 t/d at 52/26/22 %; 5 K, 3 %."""
    today = solved(AMMONIA).today
    assert celsius(today, "inlet temperature", 3) == pytest.approx([370.0, 409.0, 426.0], abs=5.0)
    assert celsius(today, "exit temperature", 3) == pytest.approx([512.0, 490.0, 482.0], abs=5.0)
    per_day = today.number("train.made ammonia") * 17.031e-6 * 86_400.0
    assert per_day == pytest.approx(1210.0, rel=0.03)
    assert [one.label for one in today.limits if not one.met] == ["reserve"]


def test_optimum_of_the_ammonia_converter() -> None:
    """Frozen; every start ends there, and none of the settings about it is better (a scan of shares)."""
    outcome, rating = solved(AMMONIA), best(AMMONIA)
    assert [one.answer for one in outcome.optimum.starts] == [0] * 5
    assert rating.number("money.total") * PER_HOUR == pytest.approx(-12_389.3, abs=0.5)
    assert celsius(rating, "inlet temperature", 3) == pytest.approx([365.0, 389.7, 424.4], abs=0.2)
    assert held(rating) == {("light-off", "bed 1"), ("reserve", "exchanger interchanger")}
    shares = [float(x) for x in outcome.optimum.best.x[1:3]]
    moved = {
        "exchanger interchanger.cold bypass": [0.08] * 8,
        "bed 1.share of syngas": [shares[0] + 0.01 * step for step in (-1, -1, -1, 0, 0, 1, 1, 1)],
        "bed 2.share of syngas": [shares[1] + 0.01 * step for step in (-1, 0, 1, -1, 1, -1, 0, 1)],
    }
    wanted = ["money.total", "bed 1.inlet temperature"]
    around = rs.rate_many(outcome.programme, moved, quantities=wanted)
    lit = around.of("bed 1.inlet temperature") >= 365.0 + KELVIN - 1e-3
    assert lit.any()
    assert (around.of("money.total")[lit] > rating.number("money.total")).all()


def test_aged_catalyst_has_gone_out_and_is_lit_by_less_bypass() -> None:
    """Frozen: 373 degC into bed 1 at 98 % of extinction."""
    outcome, rating = solved(AGED), best(AGED)
    assert len(outcome.today.closed.states) == 1
    assert [note for note in outcome.today.notes if note.startswith("No ignited state")]
    assert outcome.today.number("bed 1.rise") < 1.0
    assert held(rating) == {("reserve", "exchanger interchanger")}
    assert celsius(rating, "inlet temperature", 1) == pytest.approx([373.5], abs=0.2)
    [fold] = [one for one in rating.closed.folds if one.least]
    assert fold.needed == pytest.approx(0.977, abs=0.002)


def test_no_moves_are_told_from_a_converter_that_is_out() -> None:
    outcome = solved(AGED)
    programme, answer = outcome.programme, outcome.optimum.best
    asked = Asked(programme.panel.steps, programme.panel.origins)
    base = Base(programme, (answer.x,), answer.cost, 1.0)
    found = moves_to(base, asked, 1e-4, programme.now)
    assert found.moves == () and "another state" in found.note


def test_inerts_leave_less_to_extinction() -> None:
    """Frozen: today is nearer to its fold than with clean gas, and the inlet falls below its limit."""
    clean, inert = (
        [fold.needed for fold in solved(name).today.closed.folds if fold.least] for name in (AMMONIA, INERTS)
    )
    assert clean == pytest.approx([0.876], abs=0.002)
    assert inert == pytest.approx([0.971], abs=0.002)
    assert [one.label for one in solved(INERTS).today.limits if not one.met] == ["light-off"]


@pytest.mark.parametrize(
    ("name", "parameter", "quantity", "size"),
    [
        (CONTACT, "bed 3.catalyst activity", "effluent.flow of SO2", 1.0),
        (AMMONIA, "feed syngas.temperature", "bed 1.inlet temperature", 473.15),
    ],
)
def test_sensitivities_of_the_closed_trains(name: str, parameter: str, quantity: str, size: float) -> None:
    """Central differences of whole ratings, closures solved anew, 1e-3."""
    programme = rs.compile(rs.load(FOLDER / f"{name}.yaml"))
    found = rs.sensitivities(programme, parameters=[parameter], quantities=[quantity])
    ends = {parameter: [size * (1.0 - 1e-4), size * (1.0 + 1e-4)]}
    low, high = rate_many(programme, ends, quantities=[quantity], tolerance=FINAL).of(quantity)
    assert found.derivatives[0, 0] == pytest.approx((high - low) / (2e-4 * size), rel=1e-3)
