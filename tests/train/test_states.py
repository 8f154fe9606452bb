"""States of a train whose feed is heated by its effluent, against an independent scan; derivatives."""

from __future__ import annotations

from functools import cache
from math import exp, log

import cantera as ct
import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

import reactorstage as rs
from reactorstage.train.batch import rate_many
from reactorstage.train.passing import FINAL
from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.build import Tree, load, programme
from tests.train.gap_cases import T_FEED, ammonia

Floats = NDArray[np.float64]
NAMES = ("N2", "H2", "NH3")
VOLUMES = (6.69, 9.63, 15.2)
"""m3, NH3-5."""

THROUGH, ROUND, SHOTS = 127.0, 58.0, (35.0, 32.0)
"""t/h, NH3-5."""

CONDUCTANCE = 536.0 * 283.0


@cache
def gas() -> ct.Solution:
    every = {one.name: one for one in ct.Species.list_from_file("nasa_gas.yaml")}
    return ct.Solution(thermo="ideal-gas", species=[every[name] for name in NAMES])


def flows(mass: float) -> Floats:
    """mol/s of the feed in t/h."""
    gas().X = {"N2": 0.23957500000000004, "H2": 0.718725, "NH3": 0.0417}
    return np.asarray(mass / 3.6 / gas().mean_molecular_weight * 1e3 * gas().X)


def enthalpy(F: Floats, T: float) -> float:
    gas().TP = T, ct.one_atm
    return float(F @ gas().standard_enthalpies_RT * ct.gas_constant / 1e3 * T)


def temperature(F: Floats, H: float) -> float:
    return float(brentq(lambda T: enthalpy(F, T) - H, 250.0, 2000.0, xtol=1e-9))


def behind_a_bed(F: Floats, T: float, p: float, volume: float, factor: float) -> tuple[Floats, float]:
    """Temkin and Pyzhev (1940) as in Morud and Skogestad (1998), from memory; SciPy's LSODA."""

    def slope(_v: float, y: Floats) -> Floats:
        n, T_here = y[:3], float(y[3])
        gas().TP = T_here, ct.one_atm
        p_N2, p_H2, p_NH3 = p * n / n.sum()
        k, k_back = 1.79e4 * exp(-87_090.0 / 8.314 / T_here), 2.57e16 * exp(-198_464.0 / 8.314 / T_here)
        r = factor * (k * p_N2 * p_H2**1.5 / p_NH3 - k_back * p_NH3 / p_H2**1.5) / 3.6
        nu = np.array([-1.0, -3.0, 2.0])
        heat = nu @ gas().standard_enthalpies_RT * ct.gas_constant / 1e3 * T_here
        return np.array([*(r * nu), -heat * r / (n @ gas().standard_cp_R * ct.gas_constant / 1e3)])

    run = solve_ivp(slope, (0.0, volume), [*F, T], "LSODA", rtol=1e-8, atol=1e-8 * F.sum())
    return run.y[:3, -1], float(run.y[3, -1])


@cache
def needed(T_1: float, p: float, activity: float) -> float:
    """Area times coefficient that the inlet T_1 of bed 1 asks for, over that of NH3-5; log mean by its
    formula.
    """
    through, bed_1 = flows(THROUGH), flows(THROUGH + ROUND)
    T_cold = temperature(through, enthalpy(bed_1, T_1) - enthalpy(flows(ROUND), T_FEED))
    Q = enthalpy(through, T_cold) - enthalpy(through, T_FEED)
    F, T = bed_1, T_1
    for volume, shot in zip(VOLUMES, (*SHOTS, 0.0), strict=True):
        F, T = behind_a_bed(F, T, p, volume, 4.75 * activity)
        if shot:
            H = enthalpy(F, T) + enthalpy(flows(shot), T_FEED)
            F = F + flows(shot)
            T = temperature(F, H)
    T_out = temperature(F, enthalpy(F, T) - Q)
    a, b = T - T_cold, T_out - T_FEED
    if a <= 0.0 or b <= 0.0:
        return np.inf
    return Q / ((a - b) / log(a / b)) / CONDUCTANCE


def scanned(p: float, activity: float) -> list[float]:
    """Inlets of bed 1 (K) of all states, hottest first, by sign changes on a grid of 5 K."""
    grid = np.array([523.2, *np.arange(525.0, 672.5, 5.0)])
    gap = [min(needed(float(T), p, activity), 1e3) - 1.0 for T in grid]
    found = [
        float(brentq(lambda T: min(needed(T, p, activity), 1e3) - 1.0, low, high, xtol=1e-5))
        for low, high, a, b in zip(grid, grid[1:], gap, gap[1:], strict=False)
        if a * b < 0.0
    ]
    return found[::-1]


@cache
def rated(activity: float, pressure: float) -> Rating:
    return programme(ammonia(activity, pressure)).rate()


@pytest.mark.parametrize(
    ("activity", "pressure", "count"), [(1.0, 200.0, 3), (0.5, 200.0, 3), (0.4, 200.0, 1), (1.0, 120.0, 1)]
)
def test_states_are_those_of_an_independent_scan(activity: float, pressure: float, count: int) -> None:
    """Independent program: LSODA with Cantera's properties, 0.02 K; the ignited one is lost by ageing."""
    rating = rated(activity, pressure)
    alone = scanned(pressure, activity)
    assert len(alone) == count
    assert [one.T_first for one in rating.closed.states] == pytest.approx(alone, abs=0.02)
    assert [one.stable for one in rating.closed.states] == [True, False, True][-count:]
    assert [one.shown for one in rating.closed.states] == [True, False, False][:count]
    assert rating.number("bed 1.inlet temperature") == pytest.approx(alone[0], abs=0.02)


def test_NH3_5_ignited_at_200_bar_and_lost_as_pressure_falls() -> None:
    """Published behaviour (Morud & Skogestad 1998): ignited at 200 bar, no longer at far lower pressure."""
    assert rated(1.0, 200.0).number("bed 1.exit temperature") > 773.15
    assert rated(1.0, 120.0).number("bed 3.exit temperature") < 560.0


def test_folds_are_turning_points_of_the_scan() -> None:
    """Independent program: least size of the exchanger over the inlets about the hot states, 1e-3."""
    for activity, pressure, low, high in ((1.0, 200.0, 596.0, 640.0), (1.0, 120.0, 620.0, 664.0)):
        [fold] = [one for one in rated(activity, pressure).closed.folds if one.least]
        inlets = np.linspace(low, high, 15)
        sizes = [needed(float(T), pressure, activity) for T in inlets]
        k = int(np.argmin(sizes))
        finer = np.linspace(inlets[k - 1], inlets[k + 1], 15)
        assert fold.needed == pytest.approx(
            min(needed(float(T), pressure, activity) for T in finer), rel=1e-3
        )


def test_rating_says_how_far_extinction_is_and_what_is_missing() -> None:
    ignited, cold = (" ".join(rated(1.0, p).notes) for p in (200.0, 120.0))
    assert "3 states" in ignited and "UNSTABLE" in ignited and "Extinction" in ignited
    assert "No ignited state" in cold and "nearest fold" in cold


@pytest.mark.parametrize(("activity", "pressure"), [(1.0, 200.0), (0.4, 200.0)])
def test_balances_close_over_the_exchanger(activity: float, pressure: float) -> None:
    """1e-9 asked for; equations of the exchanger likewise."""
    rating = rated(activity, pressure)
    assert rating.atoms < 1e-12 and rating.energy < 1e-12
    assert max(rating.closed.residuals.values()) < 1e-9


def free_train(activity: float = 1.0) -> Tree:
    """NH3-5 with its shares and the bypass free."""
    tree = ammonia(activity, limits={"hot": {"of": "every bed.exit temperature", "at most": "525 degC"}})
    shares = {"bed 1": "185 t/h", "bed 2": "35 t/h", "bed 3": "rest"}
    tree["feeds"]["syngas"]["split"] = {"now": shares, "free": "all"}
    tree["exchangers"]["interchanger"]["cold bypass"] = {"now": "31 %", "from": "0 %", "to": "45 %"}
    return tree


@cache
def aged() -> TrainProgramme:
    """Far enough from equilibrium that kinetics matter."""
    return programme(free_train(0.6))


def test_sensitivities_follow_the_closure() -> None:
    """Central differences of whole ratings, 1e-5."""
    made = aged()
    names = ["exchanger interchanger.area", "feed syngas.temperature", "bed 1.catalyst activity"]
    wanted = ["bed 1.inlet temperature", "train.made NH3", "exchanger interchanger.heat"]
    found = rs.sensitivities(made, parameters=names, quantities=wanted)
    for k, (name, size) in enumerate(zip(names, (283.0, T_FEED, 2.85), strict=True)):
        step = 1e-4 * size
        ends = {name: [size - step, size + step]}
        batch = rate_many(made, ends, quantities=wanted, tolerance=FINAL)
        for q, quantity in enumerate(wanted):
            low, high = batch.of(quantity)
            assert found.derivatives[q, k] == pytest.approx((high - low) / (2.0 * step), rel=2e-4)


def test_sensitivities_to_kinetics_follow_the_closure() -> None:
    made = aged()
    name, wanted = "reaction synthesis.ln rate constant", ["bed 1.inlet temperature"]
    found = rs.sensitivities(made, parameters=[name], quantities=wanted)
    batch = rate_many(made, {name: [-1e-3, 1e-3]}, quantities=wanted, tolerance=FINAL)
    low, high = batch.of(wanted[0])
    assert found.derivatives[0, 0] == pytest.approx((high - low) / 2e-3, rel=2e-4)


def test_closures_are_equalities_of_the_search() -> None:
    """The optimum closes, keeps its limit, and a brute scan of the shares finds nothing better."""
    outcome = rs.optimise(load(free_train(0.6)), starts=4, explain=False)
    best = outcome.best
    assert best is not None and outcome.status == "inside all limits"
    assert best.atoms < 1e-12 and best.energy < 1e-12
    assert max(best.closed.residuals.values()) < 1e-9
    assert best.number("train.made NH3") > outcome.today.number("train.made NH3")
    here = {n.name: float(x) for n, x in zip(outcome.programme.numbers, outcome.optimum.best.x, strict=True)}
    moved = np.linspace(-2.0, 2.0, 9)
    settings = {name: np.full(9, value) for name, value in here.items() if "closure" not in name}
    for name in ("bed 1.injected syngas", "bed 2.injected syngas"):
        around = {**settings, name: here[name] + moved}
        wanted = ["train.made NH3", *(f"bed {bed}.exit temperature" for bed in (1, 2, 3))]
        batch = rs.rate_many(outcome.programme, around, quantities=wanted)
        hottest = np.max([batch.of(one) for one in wanted[1:]], axis=0)
        made = np.where(hottest <= 798.15 + 1e-3, batch.of("train.made NH3"), 0.0)
        assert int(np.argmax(made)) == 4
    assert [one.shown for one in best.closed.states].count(True) == 1


def test_a_converter_that_went_out_is_lit_by_the_search() -> None:
    """Its today has no ignited state; with a smaller bypass there is one, which no step from a cold state
    finds."""
    outcome = rs.optimise(load(free_train(0.4)), starts=4, explain=False)
    assert [one.stable for one in outcome.today.closed.states] == [True]
    best = outcome.best
    assert best is not None and outcome.status == "inside all limits"
    assert outcome.optimum.starts[0].ended == "local optimum"
    assert best.number("train.made NH3") > 20.0 * outcome.today.number("train.made NH3")
    assert [one.shown for one in best.closed.states] == [True, False, False]


def test_a_bypass_can_be_limited() -> None:
    tree = free_train(0.6)
    tree["limits"]["in hand"] = {"of": "exchanger interchanger.cold bypass", "at least": "33 %"}
    outcome = rs.optimise(load(tree), starts=1, explain=False)
    best = outcome.best
    assert best is not None
    assert [one.met for one in outcome.today.limits if one.label == "in hand"] == [False]
    assert best.number("exchanger interchanger.cold bypass") >= 0.33 - 1e-9
    without = best.quantities["exchanger interchanger.hot bypass"]
    assert without.value is None and without.reason == "no hot bypass is given"


def test_work_of_a_local_optimum_is_bounded() -> None:
    """Frozen with half to spare: 40 evaluations from today's setting, 19 iterations."""
    outcome = rs.optimise(load(free_train()), starts=1, explain=False)
    [record] = outcome.optimum.starts
    assert record.evaluations <= 60 and record.iterations <= 30
