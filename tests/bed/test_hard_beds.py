"""Error and work of the program on every hard bed, against SciPy's integration of an independent model.

Independent program: `hard.Model`. Frozen: the work, as measured, since more of it is a change for the worse.
"""

from __future__ import annotations

from dataclasses import replace
from functools import cache

import numpy as np
import pytest

from reactorstage.train.passing import FINAL, SEARCH
from tests.bed.hard import Hard, Model, compare
from tests.bed.hard_beds import BEDS, HOT, autocatalytic, chain, depletion, equilibrium, runaway, self_slowed

NAMES = [bed.name for bed in BEDS]
HEATS = 2000.0
"""K per feed turned over, about the most there is: an error of temperature that goes with one of flow."""

WORK = {
    "plain": (17, 233, 50, 426),
    "runaway burnt early": (104, 1594, 305, 2233),
    "runaway near the end": (26, 473, 74, 534),
    "runaway cut on its front": (62, 1061, 189, 1339),
    "runaway of order 2": (146, 2310, 425, 3229),
    "light-off after long waiting": (89, 1865, 271, 1913),
    "equilibrium, just": (21, 288, 63, 523),
    "equilibrium x 100": (29, 387, 76, 611),
    "equilibrium x 1000": (30, 394, 77, 618),
    "equilibrium, 1000 t": (34, 419, 80, 642),
    "equilibrium, 1 g": (3, 15, 3, 18),
    "isothermal to 1e-6": (41, 287, 128, 896),
    "isothermal to 1e-8": (55, 385, 170, 1190),
    "isothermal to 1e-8, not named": (15, 105, 40, 280),
    "hot to 1e-7": (62, 627, 193, 1406),
    "order 2 x 1000": (94, 957, 276, 1987),
    "order 2 x 1e6": (144, 1307, 421, 3002),
    "order 1.5 to 1e-8": (109, 1026, 325, 2331),
    "order 0.5, 90 % used": (3, 27, 3, 24),
    "order 0.5, used up": (24, 510, 31, 487),
    "order 0.5, used up, hot": (56, 967, 128, 1262),
    "order 0.1, used up": (62, 1004, 145, 1837),
    "order 0.1, used up, not named": (62, 1004, 145, 1837),
    "autocatalytic from 1e-5": (46, 656, 134, 1036),
    "autocatalytic from 1e-8": (47, 558, 136, 990),
    "autocatalytic from 1e-11": (64, 698, 189, 1388),
    "autocatalytic, named": (74, 693, 232, 1689),
    "autocatalytic, cut half way": (30, 334, 82, 594),
    "autocatalytic from nothing": (3, 12, 3, 12),
    "autocatalytic after a slow seed": (76, 797, 224, 1684),
    "branching from 1e-9": (47, 454, 137, 979),
    "product order -0.5": (117, 2053, 316, 3094),
    "product order -1": (163, 2248, 441, 3904),
    "product -1, reactant 0.5": (188, 2732, 482, 4500),
    "reactant order -0.5": (6, 78, 17, 142),
    "adsorption lets go": (24, 504, 70, 506),
    "traces at zero": (5, 35, 13, 112),
    "rates 1e6 apart": (39, 979, 108, 1144),
    "rates 1e6 apart, not named": (20, 380, 61, 564),
    "fast equilibrium before": (67, 785, 192, 1528),
    "endothermic": (56, 619, 164, 1196),
    "endothermic to equilibrium": (44, 442, 116, 828),
    "half the pressure": (33, 622, 96, 857),
    "20 species side by side": (12, 167, 35, 336),
    "40 species side by side": (10, 156, 30, 313),
    "network of 20 species": (43, 599, 142, 1200),
    "network of 40 species": (82, 893, 261, 1871),
}
"""Steps and right-hand sides at search tolerance, then at the final one, with derivatives."""


@cache
def right(name: str) -> np.ndarray:
    return Model(BEDS[NAMES.index(name)]).end()


@pytest.mark.parametrize("values_only", [False, True], ids=["derivatives", "values"])
@pytest.mark.parametrize("bed", BEDS, ids=NAMES)
def test_errors_stay_near_the_tolerance(bed: Hard, values_only: bool) -> None:
    """Where a bed ends on a steep front, an error of flow or temperature may be one of the front's place."""
    for tolerance in (SEARCH, FINAL):
        row = compare(bed, right(bed.name), tolerance, values_only)
        assert not row.outcome.failure
        well_placed = row.place < 0.1 * tolerance
        assert row.flow < tolerance or well_placed, row
        assert HEATS * tolerance > row.T or well_placed, row
        assert row.named < 10.0 * tolerance, row


@pytest.mark.parametrize("bed", BEDS, ids=NAMES)
def test_work_stays_within_bounds(bed: Hard) -> None:
    runs = [compare(bed, right(bed.name), tolerance).outcome for tolerance in (SEARCH, FINAL)]
    work = [count for outcome in runs for count in (outcome.steps, outcome.evaluations)]
    assert all(count <= 1.5 * usual + 3 for count, usual in zip(work, WORK[bed.name], strict=True)), work


@pytest.mark.parametrize(
    "bed",
    [
        runaway("runaway", 1.0),
        equilibrium("equilibrium", 1.0, named=("A",)),
        depletion("first order", 1.0, **HOT),
        depletion("half order", 1.0, **HOT, order=0.5),
        chain("rates 1e6 apart", 1.0, 1e6, 1.0),
        autocatalytic("autocatalytic", 1e-6, 1.0),
        self_slowed("slowed by its product", -0.5, 1.0),
    ],
    ids=lambda bed: bed.name,
)
def test_catalyst_from_one_gram_to_a_thousand_tonnes(bed: Hard) -> None:
    for W in (1e-3, 0.1, 1.0, 10.0, 100.0, 1e4, 1e6):
        one = replace(bed, W=W)
        for tolerance in (SEARCH, FINAL):
            row = compare(one, Model(one).end(), tolerance, values_only=True)
            assert not row.outcome.failure
            assert row.flow < tolerance, row
            assert row.named < 10.0 * tolerance, row
            assert row.outcome.evaluations < 5000


@pytest.mark.slow
@pytest.mark.parametrize("bed", BEDS, ids=NAMES)
def test_the_reference_agrees_with_a_second_integrator(bed: Hard) -> None:
    """Backward differences instead of LSODA's own choice, at 1e-11: flows to 1e-8 of the feed."""
    model = Model(bed)
    floor = {"atol": 1e-16} if "used up" in bed.name else {}
    other = model.solve("BDF", rtol=1e-11, **floor).y[:, -1]
    steepness = abs(model.slope(bed.W, other)[-1]) * bed.W
    away = np.abs(other - right(bed.name))
    assert away[:-2].max() < 1e-8 * bed.unit or away[-1] < 1e-8 * steepness
