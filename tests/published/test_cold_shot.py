"""CS: least catalyst of a train with cold feed between the beds instead of coolers.

Kinetics of `liquid`, 40 K of rise for full conversion, cold feed at 293.15 K, final conversion 0.8, 1000
mol/min. With the share lambda_i of the feed in bed i, constant heat capacity, the slope J and

    X_in,i = lambda_(i-1) X_out,i-1 / lambda_i        T_in,i = Tc + (lambda_1/lambda_i) (T1 - Tc) + J X_in,i

an optimum has
    (a) equal rates across every mixing point
    (b) beds 2 ... N-1: integral of X d(1/r)/dX + (T - Tc) d(1/r)/dT, dX = 0
    (c) sum over all beds of the integral of d(1/r)/dT dX = 0
    (d) integral over bed 1 of dX/r - X1/r_out,1 + (T1 - Tc) sum over j >= 2 of the integral of d(1/r)/dT = 0
derived for this purpose; the optimum was recomputed, nothing is published.
"""

from __future__ import annotations

from functools import cache
from itertools import pairwise

import numpy as np
import pytest

import reactorstage
from reactorstage.optimiser.result import INSIDE
from reactorstage.train.result import Rating
from tests.bed.build import load
from tests.published.liquid import (
    FLOW,
    cold_shot,
    conversions,
    exits,
    inlets,
    inverse_by_T,
    inverse_by_X,
    rate,
    value,
    volumes,
)
from tests.published.quadrature import Path

SLOPE, T_COLD = 40.0, 293.15


@cache
def optimum(beds: int) -> Rating:
    outcome = reactorstage.optimise(load(cold_shot(beds, 0.8, SLOPE, T_COLD)), starts=4, explain=False)
    assert outcome.status == INSIDE
    assert outcome.best is not None
    return outcome.best


def shares(rating: Rating) -> np.ndarray:
    """lambda: share of the whole feed in each bed."""
    flows = [value(rating, f"{one.owner}.inlet flow") for one in rating.profiles]
    return 0.06 * np.array(flows) / (FLOW / 1000.0)


def paths(rating: Rating) -> list[Path]:
    """Adiabatic paths from the flows, shares and first inlet temperature alone."""
    lam, X_out, T1 = shares(rating), conversions(rating, -1), inlets(rating)[0]
    beds, X_in = [], 0.0
    for i in range(len(lam)):
        if i > 0:
            X_in = float(lam[i - 1] * X_out[i - 1] / lam[i])
        T_in = T_COLD + float(lam[0] / lam[i]) * (T1 - T_COLD) + SLOPE * X_in
        beds.append(Path(X_in, float(X_out[i]), float(T_in), SLOPE))
    return beds


def test_CS_2_two_beds() -> None:
    """657.2354 L (1e-4): beds 120.172 and 537.063 L, share 0.52090 in bed 1 (recomputed)."""
    rating = optimum(2)
    assert value(rating, "train.catalyst") == pytest.approx(657.2354, rel=1e-4)
    assert volumes(rating) == pytest.approx([120.172, 537.063], rel=1e-4)
    assert shares(rating) == pytest.approx([0.52090, 1.0], abs=1e-4)


def test_CS_2_conversions_and_temperatures() -> None:
    """0 -> 0.59787, 0.31143 -> 0.8 (1e-4); 330.299 -> 354.213, 324.958 -> 344.501 K (0.02 K)."""
    rating = optimum(2)
    assert conversions(rating, 0) == pytest.approx([0.0, 0.31143], abs=1e-4)
    assert conversions(rating, -1) == pytest.approx([0.59787, 0.8], abs=1e-4)
    assert inlets(rating) == pytest.approx([330.299, 324.958], abs=0.02)
    assert exits(rating) == pytest.approx([354.213, 344.501], abs=0.02)


@pytest.mark.parametrize("beds", [2, 3])
def test_mixing_and_beds_are_the_quadrature_of_the_published_law(beds: int) -> None:
    """Independent program: volumes, inlets and exits from the shares and the law alone, 1e-7 and 1e-5 K."""
    rating = optimum(beds)
    alone = paths(rating)
    time = 1000.0 * shares(rating) * np.array([bed.time for bed in alone])
    assert volumes(rating) == pytest.approx(time, rel=1e-6)
    assert inlets(rating) == pytest.approx([bed.T_in for bed in alone], abs=1e-5)
    assert exits(rating) == pytest.approx([bed.T_out for bed in alone], abs=1e-5)


def residuals(beds: list[Path]) -> dict[str, list[float]]:
    """Conditions (a) to (d), (a) relative, the others in L min/mol, L min/(mol K) and L min/mol."""
    by_T = [bed.integral(inverse_by_T) for bed in beds]
    mixing = [rate(one.X_out, one.T_out) / rate(two.X_in, two.T_in) - 1.0 for one, two in pairwise(beds)]
    inner = [
        bed.integral(lambda X, T: X * inverse_by_X(X, T) + (T - T_COLD) * inverse_by_T(X, T))
        for bed in beds[1:-1]
    ]
    first = beds[0]
    last = first.time - first.X_out / rate(first.X_out, first.T_out) + (first.T_in - T_COLD) * sum(by_T[1:])
    return {"a": mixing, "b": inner, "c": [sum(by_T)], "d": [last]}


def worst(beds: list[Path]) -> float:
    return max(abs(one) for several in residuals(beds).values() for one in several)


@pytest.mark.parametrize("beds", [2, 3])
def test_CS_1_conditions_vanish_as_far_as_the_steps_of_the_search_go(beds: int) -> None:
    """1e-5, where the first inlet is right to 1e-4 K; the recomputed optimum has 1e-7."""
    assert worst(paths(optimum(beds))) < 1e-5


@pytest.mark.parametrize("beds", [2, 3])
def test_CS_1_conditions_vanish(beds: int) -> None:
    """1e-6, the tolerance of OPT-4."""
    assert worst(paths(optimum(beds))) < 1e-6


def test_CS_1_conditions_can_fail() -> None:
    """The first inlet 0.02 K warmer breaks them by far more."""
    first, second = paths(optimum(2))
    assert worst([Path(first.X_in, first.X_out, first.T_in + 0.02, SLOPE), second]) > 2e-4


def test_a_third_bed_saves_catalyst() -> None:
    """Three beds contain two (a share of nothing to bed 3): they can only need less."""
    assert value(optimum(3), "train.catalyst") < 0.98 * value(optimum(2), "train.catalyst")


def least_on_a_grid(
    points: int, centre: tuple[float, float, float], half: tuple[float, float, float]
) -> float:
    """Least volume (L) of two beds over shares, inlets and conversions of bed 1, by Gauss quadrature."""
    lam, T1, X1 = np.meshgrid(
        *(np.linspace(c - h, c + h, points) for c, h in zip(centre, half, strict=True)), indexing="ij"
    )
    nodes, weights = np.polynomial.legendre.leggauss(24)
    volume = np.zeros_like(lam)
    T2 = T_COLD + lam * (T1 - T_COLD)
    for share, low, high, T_in in ((lam, 0.0 * lam, X1, T1), (1.0, lam * X1, 0.8, T2)):
        for node, weight in zip(nodes, weights, strict=True):
            X = low + 0.5 * (node + 1.0) * (high - low)
            r = rate(X, T_in + SLOPE * X)
            volume = volume + share * np.where(r > 0.0, 0.5 * weight * (high - low) / r, 1e9)
    return 1000.0 * float(volume.min())


def test_brute_grid_of_two_beds_finds_nothing_better() -> None:
    """Independent program: 41^3 settings over the whole space, then 31^3 about the optimum: within 1e-4 of
    it.
    """
    best = value(optimum(2), "train.catalyst")
    assert least_on_a_grid(41, (0.5, 330.0, 0.55), (0.45, 35.0, 0.25)) > best * (1.0 - 1e-9)
    nearby = least_on_a_grid(31, (0.5209, 330.3, 0.598), (0.02, 1.0, 0.02))
    assert best * (1.0 - 1e-9) < nearby < best * (1.0 + 1e-4)
