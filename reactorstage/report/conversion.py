"""What the conversion-temperature diagram shows: the way through the train; equilibrium and rates behind it.

Key conversion of the main reactant is the part that has reacted of all that was fed up to there,
X = 1 - F/(sum of what came in with feeds). An exchanger leaves it as it is, an injection mixes it with that
of the feed, which is zero.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from reactorstage.chemistry.equilibrium import equilibrium
from reactorstage.chemistry.rate_law import basis_factors
from reactorstage.chemistry.rates import rates
from reactorstage.chemistry.reaction import independent_count
from reactorstage.train.at_rest import at_rest
from reactorstage.train.chemistry import CaseChemistry
from reactorstage.train.layout import mole_fractions
from reactorstage.train.result import Array, Profile, Rating, StepState

POINTS_T, POINTS_X = 56, 60


@dataclass(frozen=True)
class Leg:
    """A bed, an exchanger or an injection: temperatures K and key conversions along it, (N,)."""

    owner: str
    kind: str
    T: Array
    X: Array


@dataclass(frozen=True)
class Feed:
    """All that was fed to the train: flows (S,) mol/s, those of the main reactant alone, mean pressure Pa."""

    F: Array
    main: float
    p: float


@dataclass(frozen=True)
class Rates:
    """Rate (M, N) in mol/(kg s) at which fresh catalyst uses the main reactant at key conversions X (M,).

    nan where a species would be below zero; best (M,) K is the temperature of the greatest rate, nan where
    that lies outside.
    """

    X: Array
    rate: Array
    best: Array


@dataclass(frozen=True)
class Background:
    """Lines behind the way, for the whole feed at its mean pressure, over temperatures T (N,) K.

    equilibrium (N,) are key conversions by the key reaction alone, by its law's own constant where own_K
    says that it has one; rates are there when it is the only one.
    """

    reaction: str
    T: Array
    equilibrium: Array
    rates: Rates | None
    own_K: bool = False


def has_conversion(rating: Rating) -> bool:
    """Whether there is a main reactant to count conversion of, and something fed of it."""
    return (
        rating.chemistry is not None
        and rating.main_reactant in rating.species
        and bool(rating.profiles)
        and whole_feed(rating).main > 0.0
    )


def way(rating: Rating) -> list[Leg]:
    """Beds and the steps of gaps in flow order, from the first bed that the main reactant enters."""
    s = rating.species.index(rating.main_reactant)
    legs: list[Leg] = []
    fed = 0.0
    for before, profile in zip([None, *rating.profiles[:-1]], rating.profiles, strict=True):
        if before is not None:
            legs += _gap(rating, before, float(before.F[-1, s]), fed)
        fed += max(float(profile.F[0, s]) - (float(before.F[-1, s]) if before is not None else 0.0), 0.0)
        if fed > 0.0:
            legs.append(Leg(profile.owner, "bed", profile.T, 1.0 - profile.F[:, s] / fed))
    return legs


def _gap(rating: Rating, before: Profile, F: float, fed: float) -> list[Leg]:
    """Steps behind a bed that leaves F of the fed main reactant unconverted."""
    owner = f"gap {before.owner.removeprefix('bed ')}"
    legs = []
    for step in rating.steps:
        if step.owner != owner or step.T_before is None:
            continue
        came = step.flow * _share(rating, step) if step.kind in ("inject", "recycle") else 0.0
        ends = [1.0 - F / fed if fed > 0.0 else np.nan, np.nan]
        F, fed = F + came, fed + came
        ends[1] = 1.0 - F / fed if fed > 0.0 else np.nan
        kind = "injection" if step.kind in ("inject", "recycle") else "exchanger"
        legs.append(Leg(owner, kind, np.array([step.T_before, step.T_after]), np.array(ends)))
    return legs


def _share(rating: Rating, step: StepState) -> float:
    """Mole fraction of the main reactant in a feed or a recycle."""
    assert rating.chemistry is not None
    if step.kind == "recycle":
        return rating.number(f"recycle {step.what}.mole fraction of {rating.main_reactant}") or 0.0
    fractions = mole_fractions(rating.case, rating.chemistry, rating.case.feeds[step.what])
    return float(fractions[rating.species.index(rating.main_reactant)])


def whole_feed(rating: Rating) -> Feed:
    """What entered before the rated beds, and the mean of their inlet and exit pressures."""
    profiles = rating.profiles
    F = profiles[0].F[0] + sum(after.F[0] - one.F[-1] for one, after in pairwise(profiles))
    p = float(np.mean([one.p[[0, -1]] for one in profiles]))
    F = np.maximum(F, 0.0)
    return Feed(F, float(F[rating.species.index(rating.main_reactant)]), p)


def background(rating: Rating, low: float, high: float) -> Background | None:
    """Equilibrium and rates between two temperatures, K; None if only irreversible reactions use the key."""
    chemistry = rating.chemistry
    assert chemistry is not None
    s = rating.species.index(rating.main_reactant)
    nu = chemistry.laws.nu
    keys = [r for r, row in enumerate(nu) if row[s] < 0.0 and chemistry.equations[r].reversible]
    if not keys:
        return None
    feed, T = whole_feed(rating), np.linspace(low, high, POINTS_T)
    line = _equilibrium(chemistry, keys[0], feed, s, T)
    single = independent_count(nu) == 1 and len(keys) == len(nu)
    found = _rates(rating, chemistry, keys[0], feed, s, T) if single else None
    own = chemistry.own_K(keys[0]) is not None
    return Background(rating.reactions[keys[0]], T, line, found, own)


def _equilibrium(chemistry: CaseChemistry, key: int, feed: Feed, s: int, T: Array) -> Array:
    """Key conversion at equilibrium of the key reaction alone, as its law sees it."""
    if chemistry.own_K(key) is not None:
        return np.array([1.0 - at_rest(chemistry, key, feed.F, float(t), feed.p)[s] / feed.main for t in T])
    nu, F = chemistry.laws.nu[key : key + 1], feed.F
    line = np.empty(len(T))
    for n, t in enumerate(T):
        F = equilibrium(chemistry.table, nu, [True], F, float(t), feed.p, chemistry.fluid).F
        line[n] = 1.0 - F[s] / feed.main
    return line


def _rates(rating: Rating, chemistry: CaseChemistry, key: int, feed: Feed, s: int, T: Array) -> Rates:
    laws, nu, X = chemistry.laws, chemistry.laws.nu, np.linspace(0.0, 1.0, POINTS_X)
    F = feed.F[:, None] + np.outer(nu[key] / -nu[key, s], X * feed.main)
    factor = basis_factors(laws, *_packing(rating))
    used = [
        -(nu[:, s] @ rates(laws, chemistry.table, F, float(t), feed.p, factor, chemistry.fluid)) for t in T
    ]
    there = np.all(-1e-9 * feed.main <= F, axis=0)
    grid = np.where(there, np.array(used), np.nan).T
    return Rates(X, grid, best_temperature(T, grid))


def _packing(rating: Rating) -> tuple[float, float]:
    """Bulk density and void fraction of the first bed; not used by rates per catalyst mass."""
    bed = next(section.bed for section in rating.case.train if section.bed is not None)
    return bed.bulk_density or 1.0, bed.void_fraction or 1.0


def best_temperature(T: Array, rate: Array) -> Array:
    """Temperature of the greatest rate in every row of rate (M, N), nan where it lies at or beyond an end.

    T (N,) evenly spaced; between points by the parabola through the greatest value and its neighbours.
    """
    best = np.full(len(rate), np.nan)
    for m, row in enumerate(rate):
        n = int(np.argmax(np.where(np.isfinite(row), row, -np.inf)))
        if n in range(1, len(T) - 1) and row[n] > 0.0:
            below, at, above = row[n - 1 : n + 2]
            best[m] = T[n] + 0.5 * (T[1] - T[0]) * (below - above) / (below - 2.0 * at + above)
    return best


def round_rates(rate: Array, most: int) -> list[float]:
    """Round values (1, 2, 5 times a power of ten) below the greatest rate, rising, at most so many."""
    top = float(np.nanmax(rate, initial=0.0))
    if top <= 0.0:
        return []
    decade = np.floor(np.log10(top))
    steps = [part * 10.0 ** (decade - d) for d in range(4) for part in (5.0, 2.0, 1.0)]
    return sorted([float(step) for step in steps if step < 0.95 * top][:most])
