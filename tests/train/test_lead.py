"""The lead case: rated independently, compared with an earlier independent model, and frozen."""

from __future__ import annotations

from pathlib import Path

import cantera as ct
import numpy as np
import pytest

import reactorstage as rs
from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.outside import OutsideBed, Reaction
from tests.bed.test_exits import ergun

NAMES = ("benzene", "ethylene", "ethane", "ethylbenzene", "diethylbenzene")
KMOL_PER_H = 3.6
BEDS = (1, 2, 3, 4)


@pytest.fixture(scope="module")
def train(request: pytest.FixtureRequest) -> TrainProgramme:
    return rs.compile(rs.load(request.config.rootpath / "cases" / "selkemouth-ethylation.yaml"))


@pytest.fixture(scope="module")
def rating(train: TrainProgramme) -> Rating:
    return train.rate()


def per_hour_bar2(k: float) -> float:
    """kmol/(kg h bar2) in mol/(kg s Pa2)."""
    return k * 1e3 / 3600.0 / 1e10


KINETICS = (
    Reaction({"benzene": 1, "ethylene": 1}, {"ethylbenzene": 1}, per_hour_bar2(4.2e-3), 66e3),
    Reaction({"ethylbenzene": 1, "ethylene": 1}, {"diethylbenzene": 1}, per_hour_bar2(2.2e-3), 88e3),
    Reaction({"diethylbenzene": 1, "benzene": 1}, {"ethylbenzene": 2}, per_hour_bar2(1.0e-5), 105e3),
)


def test_the_whole_train_is_that_of_lsoda_with_canteras_properties(rating: Rating) -> None:
    """Independent program: SciPy at 1e-12, four beds; 1e-7 of feed, temperature and pressure."""
    outside = OutsideBed(NAMES, KINETICS, ergun(1.8, 640.0, 0.41, 2.4e-3))
    F, p = np.array([965.0, 0.0, 0.0, 0.0, 0.0]) / KMOL_PER_H, 19.4e5
    shot = 67.0 / KMOL_PER_H * np.array([0.0, 0.9985, 0.0015, 0.0, 0.0])
    for bed, W in zip(BEDS, (2600.0, 3000.0, 3400.0, 4300.0), strict=True):
        run = outside.run(F + shot, 657.15, p, W)
        F, T, p = run.y[:-2, -1], run.y[-2, -1], run.y[-1, -1]
        found = np.array([rating.number(f"bed {bed}.exit flow of {name}") for name in NAMES])
        assert np.abs(found - F).max() < 1e-7 * F.sum()
        assert rating.number(f"bed {bed}.exit temperature") == pytest.approx(T, rel=1e-7)
        assert rating.number(f"bed {bed}.exit pressure") == pytest.approx(p, rel=1e-7)
        if bed < 4:
            removed = heat_of_gap(outside.gas, F, float(T), shot)
            assert rating.number(f"gap {bed}.heat removed") == pytest.approx(removed, rel=1e-6)


def heat_of_gap(gas: ct.Solution, F: np.ndarray, T: float, shot: np.ndarray) -> float:
    """W between a bed at T with a cold shot at 45 degC and the next inlet at 384 degC."""

    def enthalpy(flows: np.ndarray, at: float) -> float:
        gas.TP = at, ct.one_atm
        return float(flows @ gas.standard_enthalpies_RT * ct.gas_constant / 1e3 * at)

    return enthalpy(F, T) + enthalpy(shot, 318.15) - enthalpy(F + shot, 657.15)


def test_rating_is_near_an_earlier_independent_model(rating: Rating) -> None:
    """Independent program: a model with other data for diethylbenzene; a few kelvin and per cent.

    Exits 424/423/422/421 degC, diethylbenzene 18.2 and ethylene 0.91 kmol/h out, 4.57 MW between the beds.
    """
    exits = [rating.number(f"bed {bed}.exit temperature") - 273.15 for bed in BEDS]
    assert exits == pytest.approx([424.3, 423.0, 422.0, 421.0], abs=1.0)
    assert rating.number("effluent.flow of diethylbenzene") * KMOL_PER_H == pytest.approx(18.2, rel=0.02)
    assert rating.number("effluent.flow of ethylene") * KMOL_PER_H == pytest.approx(0.91, abs=0.2)
    assert sum(rating.number(f"gap {gap}.heat removed") for gap in (1, 2, 3)) / 1e6 == pytest.approx(
        4.57, rel=0.02
    )
    assert rating.number("bed 4.inlet ratio benzene/ethylene") == pytest.approx(11.4, abs=0.1)
    assert [(one.label, one.owner) for one in rating.limits if not one.met] == [("coking", "bed 4")]


def test_optimum_with_heat_at_cost_is_near_an_earlier_independent_model(cases: Path) -> None:
    """Independent program, other data: ethylene 76.9/74.9/69.1/47.2 kmol/h, inlets 364/364/364/398 degC."""
    case = rs.load(cases / "selkemouth-effluent-unpriced.yaml")
    best = rs.optimise(case, starts=6, explain=False).best
    assert best is not None
    shots = [best.number(f"bed {bed}.injected ethylene") * KMOL_PER_H for bed in BEDS]
    assert shots == pytest.approx([76.9, 74.9, 69.1, 47.2], abs=1.5)
    inlets = [best.number(f"bed {bed}.inlet temperature") - 273.15 for bed in BEDS]
    assert inlets == pytest.approx([364.0, 364.0, 364.0, 398.0], abs=1.0)
    gaps = [best.number(f"gap {gap}.heat removed") / 1e6 for gap in (1, 2, 3)]
    assert gaps == pytest.approx([1.75, 1.79, 0.01], abs=0.05)


FROZEN = {
    "money.total": 0.29056971552,
    "effluent.flow of ethylene": 0.290941962,
    "effluent.flow of ethylbenzene": 64.005485162,
    "effluent.flow of diethylbenzene": 5.018175327,
    "bed 1.exit temperature": 696.861508398,
    "bed 4.exit temperature": 693.558927648,
    "gap 1.heat removed": 1524991.483,
    "effluent.heat removed": 10836435.633,
    "entry.heat removed": -6045970.178,
    "train.pressure drop": 152799.86592,
    "bed 1.depth at 50 % of rise": 0.194481779,
}


@pytest.mark.parametrize("name", list(FROZEN))
def test_rated_values(rating: Rating, name: str) -> None:
    """Frozen: computed with the shipped data; guards against unintended change."""
    assert rating.number(name) == pytest.approx(FROZEN[name], rel=1e-7)


OPTIMUM = {
    "bed 1.injected ethylene": 78.109,
    "bed 2.injected ethylene": 72.920,
    "bed 3.injected ethylene": 59.728,
    **{f"bed {bed}.inlet temperature": 364.0 for bed in BEDS},
}


def test_cost_at_the_optimum(train: TrainProgramme) -> None:
    """Frozen: computed with the shipped data, in kmol/h and degC; guards against unintended change."""
    x = [
        OPTIMUM[n.name] + 273.15 if n.kind == "temperature" else OPTIMUM[n.name] / KMOL_PER_H
        for n in train.numbers
    ]
    best = train.rate(np.array(x))
    assert best.number("money.total") * 3600.0 == pytest.approx(979.8065, rel=1e-5)
    assert best.number("bed 1.rise") == pytest.approx(46.0, abs=1e-3)
    assert best.number("effluent.flow of ethylene") * KMOL_PER_H == pytest.approx(1.35, abs=1e-4)


def test_work_of_a_rating_is_bounded(rating: Rating) -> None:
    """Frozen with a quarter to spare: 187 steps and 1387 right-hand sides at the final tolerance."""
    assert rating.integration_steps <= 235
    assert rating.right_hand_sides <= 1750


def test_work_of_an_evaluation_is_bounded(train: TrainProgramme) -> None:
    """Frozen with a quarter to spare: 61 steps, 787 right-hand sides on new steps, 415 to 604 on old ones."""
    x = train.now
    evaluation, mesh = train.start_mesh(x)
    span = np.array([number.high - number.low for number in train.numbers])
    assert mesh.counts.sum() <= 76
    assert evaluation.work <= 985
    assert train.evaluate(x, mesh).work <= 520
    assert train.evaluate(x + 0.01 * span, mesh).work <= 755
