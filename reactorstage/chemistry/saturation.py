"""Bubble and dew points of mixtures by a cubic equation of state.

A second phase with the amounts X_i = y_i E_i, E_i = phi_i(y) / phi_i(X), has all fugacities of the mixture
y but for one common factor; it appears where sum X = 1 (the stationary point of the tangent plane distance
of Michelsen (1982), Fluid Phase Equilib. 9, 1, from memory). Slopes of the sum need none of X, because
sum_i X_i d ln phi_i(X) = 0 by Gibbs and Duhem.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import inf, isfinite, log, log1p

import numpy as np

from reactorstage.chemistry.cubic import (
    LIQUID,
    NOT_FINITE,
    OTHER_PHASE,
    VAPOUR,
    CubicFluid,
    Phase,
    cubic_state,
    fugacity_slopes,
)
from reactorstage.chemistry.forms import Floats

_WIDEST_STEP = 0.1
"""Largest relative change of temperature in one step."""


@dataclass(frozen=True, eq=False)
class SaturationSum:
    """sum X - 1, above zero inside the two-phase region, with its slopes.

    F (S,) s/mol, T 1/K, p 1/Pa; ratios (S,) are the E_i.
    """

    excess: float
    F: Floats = field(repr=False)
    T: float
    p: float
    ratios: Floats = field(repr=False)


@dataclass(frozen=True, eq=False)
class SaturationPoint:
    """Temperature of a boundary, K, with its slopes by the flows (S,) and by pressure, K/Pa.

    fractions (S,) are those of the phase that appears, the first drop or bubble.
    """

    temperature: float
    F: Floats = field(repr=False)
    p: float
    fractions: Floats


def dew_temperature(fluid: CubicFluid, F: Floats, p: float) -> SaturationPoint | None:
    """Temperature at which a vapour with the flows F (S,) begins to condense at p Pa, the upper one of two.

    None where no liquid appears at any temperature, as above the highest pressure of the two-phase region,
    and within some kelvin of the mixture's critical point, where the phases are hardly told apart.
    """
    return _boundary(fluid, F, p, VAPOUR)


def bubble_temperature(fluid: CubicFluid, F: Floats, p: float) -> SaturationPoint | None:
    """Temperature at which a liquid with the flows F (S,) begins to boil at p Pa; None where it never does.

    Here too None is given close to the mixture's critical point, where the phases are hardly told apart.
    """
    return _boundary(fluid, F, p, LIQUID)


def saturation_sum(
    fluid: CubicFluid, F: Floats, T: float, p: float, phase: Phase = VAPOUR, ratios: Floats | None = None
) -> SaturationSum | None:
    """Whether a second phase appears in a mixture that is a vapour (dew) or a liquid (bubble) at T and p.

        excess = sum_i y_i phi_i(y) / phi_i(X) - 1, that is sum y/K - 1 of a vapour, sum x K - 1 of a liquid

    F (S,) mol/s, T K, p Pa; ratios of a near point save iterations. Where the mixture has no root of its own
    phase the excess is infinite with slopes of zero. None where no second phase is found: far outside the
    two-phase region, where there is none, and for flows, T or p without meaning.
    """
    own = cubic_state(fluid, F, T, p, phase)
    if own.status == NOT_FINITE:
        return None
    if own.status == OTHER_PHASE:
        return SaturationSum(inf, np.zeros(len(F)), 0.0, 0.0, np.ones(len(F)))
    n = float(np.sum(F))
    other: Phase = LIQUID if phase == VAPOUR else VAPOUR
    ln_E = _wilson(fluid, T, p, phase) if ratios is None else np.log(ratios)
    with np.errstate(over="ignore", invalid="ignore"):
        found = _second_phase(fluid, F / n, own.ln_phi, T, p, other, ln_E)
    if found is None:
        return None
    E, Z = found
    if abs(Z - own.Z) < 1e-5 * own.Z and np.all(np.abs(E - 1.0) < 1e-5):
        return None
    X = F / n * E
    here = fugacity_slopes(fluid, F, T, p, own.Z)
    there = fugacity_slopes(fluid, X / np.sum(X), T, p, Z)
    return SaturationSum(
        excess=float(np.sum(X)) - 1.0,
        F=(E - np.sum(X)) / n + X @ here.F,
        T=float(X @ (here.T - there.T)),
        p=float(X @ (here.p - there.p)),
        ratios=E,
    )


def _wilson(fluid: CubicFluid, T: float, p: float, phase: Phase) -> Floats:
    """First guess of ln E: ln K = ln(pc/p) + 5.373 (1 + omega) (1 - Tc/T) (Wilson 1968, from memory)."""
    ln_K = [
        log(one.pressure / p) + 5.373 * (1.0 + one.acentric_factor) * (1.0 - one.temperature / T)
        for one in fluid.critical
    ]
    within = np.clip(ln_K, -500.0, 500.0)
    return within if phase == LIQUID else -within


def _second_phase(
    fluid: CubicFluid, y: Floats, ln_phi: Floats, T: float, p: float, other: Phase, ln_E: Floats
) -> tuple[Floats, float] | None:
    """E and Z of the second phase: successive substitution, then Newton; None without convergence."""
    for round_ in range(200):
        X = y * np.exp(ln_E)
        x = X / np.sum(X)
        trial = cubic_state(fluid, x, T, p, other)
        if trial.status == NOT_FINITE:
            return None
        gap = ln_E + trial.ln_phi - ln_phi
        largest = float(np.max(np.abs(gap)))
        if largest < 1e-12:
            return np.exp(ln_E), trial.Z
        near = round_ >= 4 and largest < 0.1
        ln_E = ln_E - (_newton_step(fluid, x, T, p, trial.Z, gap) if near else gap)
    return None


def _newton_step(fluid: CubicFluid, x: Floats, T: float, p: float, Z: float, gap: Floats) -> Floats:
    """Correction of ln E that closes the gap; the gap itself where Newton would go astray."""
    try:
        step = np.linalg.solve(np.eye(len(x)) + fugacity_slopes(fluid, x, T, p, Z).F * x, gap)
    except np.linalg.LinAlgError:
        return gap
    if not np.max(np.abs(step)) < 1.0:
        return gap
    return np.asarray(step, dtype=np.float64)


def _boundary(fluid: CubicFluid, F: Floats, p: float, phase: Phase) -> SaturationPoint | None:
    """Newton on T for ln sum X = 0, kept between the nearest temperatures known inside and outside."""
    Tc = [one.temperature for one, flow in zip(fluid.critical, F, strict=True) if flow > 0.0]
    if not (Tc and p > 0.0):
        return None
    low, high, ratios, outwards = 0.25 * min(Tc), 1.5 * max(Tc), None, 1.0 if phase == VAPOUR else -1.0
    T = min(max(_wilson_temperature(fluid, F, p, phase), 1.01 * low), 0.99 * high)
    for _ in range(100):
        now = saturation_sum(fluid, F, T, p, phase, ratios)
        step = _newton_in_T(now, outwards)
        if now is not None and abs(step) <= 1e-11 * T:
            X = F * now.ratios
            return SaturationPoint(T, -now.F / now.T, -now.p / now.T, X / np.sum(X))
        inside = now is not None and now.excess > 0.0
        low, high = (T, high) if inside == (outwards > 0.0) else (low, T)
        if not isfinite(step) and high - low < 1e-6 * T:
            return None
        ratios = now.ratios if now is not None and isfinite(step) else None
        T = _next_temperature(T, step, low, high)
    return None


def _newton_in_T(now: SaturationSum | None, outwards: float) -> float:
    """Step of T towards ln sum X = 0; infinite where no sum falls outwards."""
    if now is None or not -1.0 < now.excess < inf or now.T * outwards >= 0.0:
        return inf
    return -log1p(now.excess) * (1.0 + now.excess) / now.T


def _next_temperature(T: float, step: float, low: float, high: float) -> float:
    """T + step, at most a tenth away; half the way to the open end where that leaves the bracket."""
    wide = _WIDEST_STEP * T
    if isfinite(step) and low < T + step < high:
        return T + min(max(step, -wide), wide)
    return min(T + wide, 0.5 * (T + high)) if low == T else max(T - wide, 0.5 * (T + low))


def _wilson_temperature(fluid: CubicFluid, F: Floats, p: float, phase: Phase) -> float:
    """Temperature at which sum y_i E_i = 1 with E of `_wilson`; its logarithm is convex in 1/T."""
    y = np.maximum(F, 0.0) / np.sum(np.maximum(F, 0.0))
    Tc = np.array([one.temperature for one in fluid.critical])
    slope = 5.373 * Tc * np.array([1.0 + one.acentric_factor for one in fluid.critical])
    slope = -slope if phase == LIQUID else slope
    inverse = 1.0 / (0.7 * float(y @ Tc))
    for _ in range(30):
        X = y * np.exp(_wilson(fluid, 1.0 / inverse, p, phase))
        inverse = max(inverse - log(np.sum(X)) * np.sum(X) / float(X @ slope), 0.5 * inverse)
    return float(1.0 / inverse)
