"""Profiles along the train in display units: what the figures draw and the CSV lists."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from reactorstage.report.display import shown
from reactorstage.report.unit_sets import RATE
from reactorstage.train.result import Array, Profile, Rating

SMALLEST_PART = 1e-9


@dataclass(frozen=True)
class BedProfile:
    """One bed with N points in display units.

    catalyst (N,) counted from the train inlet, bed_catalyst (N,) in this bed, depth (N,) %, T (N,), p (N,),
    F (N, S) flows, r (N, R) rates per catalyst; point and cumulative (N, S) mol made of each species per
    100 mol of the main reactant converted, nan where nothing is converted. T_peak at peak_catalyst.
    """

    owner: str
    catalyst: Array
    bed_catalyst: Array
    depth: Array
    T: Array
    p: Array
    F: Array
    r: Array
    point: Array
    cumulative: Array
    T_peak: float
    peak_catalyst: float


def train_profiles(rating: Rating) -> list[BedProfile]:
    """All beds that were rated; sums run on through the train, gaps change nothing."""
    found: list[BedProfile] = []
    loaded, made = 0.0, np.zeros(len(rating.species))
    for profile in rating.profiles:
        found.append(_bed(rating, profile, loaded, made))
        loaded += float(profile.w[-1])
        made = made + profile.F[-1] - profile.F[0]
    return found


def _bed(rating: Rating, profile: Profile, loaded: float, made_before: Array) -> BedProfile:
    size = float(profile.w[-1])
    return BedProfile(
        owner=profile.owner,
        catalyst=displayed(loaded + profile.w, "mass"),
        bed_catalyst=displayed(profile.w, "mass"),
        depth=100.0 * profile.w / size if size > 0.0 else np.zeros_like(profile.w),
        T=displayed(profile.T, "temperature"),
        p=displayed(profile.p, "pressure"),
        F=displayed(profile.F, "molar flow"),
        r=displayed(profile.r, RATE),
        point=_per_converted(rating, profile.r @ rating.nu),
        cumulative=_per_converted(rating, made_before + profile.F - profile.F[0]),
        T_peak=shown(profile.T_peak, "temperature") or 0.0,
        peak_catalyst=shown(loaded + profile.w_peak, "mass") or 0.0,
    )


def displayed(values: Array, kind: str) -> Array:
    """An array of SI values in the display unit of a kind."""
    zero, one = shown(0.0, kind) or 0.0, shown(1.0, kind) or 0.0
    return values * (one - zero) + zero


def _per_converted(rating: Rating, made: Array) -> Array:
    """Made (N, S) per 100 mol of the main reactant converted; nan where (almost) nothing is converted."""
    if rating.main_reactant not in rating.species:
        return np.full_like(made, np.nan)
    gone = -made[:, rating.species.index(rating.main_reactant)]
    least = SMALLEST_PART * max(float(np.max(np.abs(made))), 1e-300)
    usable = np.where(gone > least, gone, np.nan)
    return 100.0 * made / usable[:, None]
