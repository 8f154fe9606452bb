"""Hard beds on a frozen step sequence: at the same setting, at settings 1 % away, and their derivatives."""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.train.passing import Outcome
from tests.bed.hard import Hard, exit_rows, run
from tests.bed.hard_beds import BEDS

NAMES = [bed.name for bed in BEDS]

FRONTS = [
    "runaway burnt early",
    "runaway near the end",
    "runaway cut on its front",
    "runaway of order 2",
    "light-off after long waiting",
    "adsorption lets go",
]
"""Beds whose front, far thinner than 1 % of the bed, leaves the steps that resolve it: a new mesh is due."""


def inputs(bed: Hard, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    return bed.train.model.inputs.values(x)


def frozen(bed: Hard, mesh: Outcome, x: np.ndarray) -> Outcome:
    return bed.train.model.passing.frozen(*inputs(bed, x), mesh.stages)


def exits(bed: Hard, outcome: Outcome) -> np.ndarray:
    """Flows by the feed, pressure by that of the inlet, T in 1000 K; derivatives behind (S + 2, 1 + D)."""
    sizes = np.append(np.full(len(bed.species), bed.unit), [bed.p, 1000.0])
    return exit_rows(bed, outcome) / sizes[:, None]


def moved(bed: Hard, d: int, share: float) -> np.ndarray:
    """now with one number changed by a share of itself; a feed's temperature by a fifth of that."""
    x = bed.now
    fifth = 0.2 if bed.train.numbers[d].name.endswith("temperature") else 1.0
    x[d] *= 1.0 + share * fifth
    return x


@pytest.mark.parametrize("bed", BEDS, ids=NAMES)
def test_the_same_setting_gives_the_same_answer(bed: Hard) -> None:
    mesh = run(bed, 1e-5)
    again = frozen(bed, mesh, bed.now)
    assert not again.failure
    within = 1e-4 if bed.name in FRONTS else 1e-8
    assert np.abs(exits(bed, again)[:, 0] - exits(bed, mesh)[:, 0]).max() < within
    assert again.evaluations <= mesh.evaluations


@pytest.mark.parametrize("bed", BEDS, ids=NAMES)
def test_a_setting_one_percent_away(bed: Hard) -> None:
    """Frozen steps give what new ones would, to 1e-4 of the feed; on a front they may say they do not fit."""
    mesh = run(bed, 1e-5)
    for d in range(len(bed.now)):
        for share in (-0.01, 0.01):
            x = moved(bed, d, share)
            fresh = bed.train.model.passing.adaptive(*inputs(bed, x))
            assert not fresh.failure
            found = frozen(bed, mesh, x)
            if found.failure and bed.name in FRONTS:
                continue
            assert not found.failure, bed.train.numbers[d].name
            assert np.abs(exits(bed, found)[:, 0] - exits(bed, fresh)[:, 0]).max() < 1e-4


DIFFERENCED = [bed for bed in BEDS if bed.name != "light-off after long waiting"]
"""All but the bed whose front is so steep (1e-7 of the bed) that a difference small enough is rounding."""


@pytest.mark.parametrize("bed", DIFFERENCED, ids=lambda bed: bed.name)
def test_derivatives_are_central_differences(bed: Hard) -> None:
    """Fourth order, of the frozen steps' own values; named flows relative to themselves."""
    mesh = run(bed, 1e-5)
    centre = exits(bed, frozen(bed, mesh, bed.now))
    h = 1e-6 if bed.name in FRONTS else 1e-4
    named = [s for s, name in enumerate(bed.species) if name in bed.named and centre[s, 0] > 1e-7]
    for d in range(len(bed.now)):
        slopes, difference = centre[:, 1 + d] * bed.now[d], np.zeros(len(centre))
        span = moved(bed, d, h)[d] / bed.now[d] - 1.0
        for shift, weight in ((-2, 1 / 12), (-1, -2 / 3), (1, 2 / 3), (2, -1 / 12)):
            found = frozen(bed, mesh, moved(bed, d, shift * h))
            assert not found.failure
            difference += weight / span * exits(bed, found)[:, 0]
        away = np.abs(difference - slopes)
        within = 2e-5 if bed.name in FRONTS else 1e-6
        assert away.max() < within * max(1.0, np.abs(slopes).max()), bed.train.numbers[d].name
        for s in named:
            assert away[s] < 1e-5 * max(centre[s, 0], abs(slopes[s])), bed.train.numbers[d].name
