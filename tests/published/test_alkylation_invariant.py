"""An exact invariant of parallel-consecutive alkylation, behind every bed.

Two reactions of first order in ethylene with k2/k1 = kappa at every temperature, and nothing but ethylene
injected. Dividing the balances leaves dEB/dB = -1 + kappa EB/B, whatever T, volume, density or split:

    EB = B0/(1 - kappa) [(B/B0)^kappa - B/B0]        DEB = B0 - B - EB

Closed form; kappa = 0.6 and the constants from Turton et al. 2009, App. B.2 (from memory).
"""

from __future__ import annotations

from functools import cache

import pytest

from reactorstage.train.result import Rating
from tests.bed.build import FLUID, HEAD, Tree, programme
from tests.published.aromatics import divided, ethylations, fed, injected_train, species

KAPPA, B0 = 0.6, 226.51
SPECIES = ("benzene", "ethylene", "ethylbenzene", "diethylbenzene")
SPLITS = {"even": (27.9, 32.55, 32.55), "front": (60.0, 20.0, 13.0), "back": (10.0, 10.0, 73.0)}


def train(shots: list[float], last: float = 30.0) -> Tree:
    """Beds of 20, 25 and `last` m3, ethylene shots in kmol/h."""
    shot = {**fed({"ethylene": sum(shots)}, 380.0), "split": divided(shots)}
    parts = injected_train(
        fed({"benzene": B0}, 380.0), shot, [20.0, 25.0, last], [383.3, 380.0, 380.0], "1985 kPa(a)"
    )
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": species(*SPECIES),
        "fluid": FLUID,
        "reactions": ethylations("first", "second"),
        **parts,
    }


def closed(B: float) -> float:
    """Ethylbenzene for benzene left, kmol/h."""
    return float(B0 / (1.0 - KAPPA) * ((B / B0) ** KAPPA - B / B0))


@cache
def rated(split: str) -> Rating:
    return programme(train(list(SPLITS[split]))).rate()


def behind(rating: Rating, bed: int) -> list[float]:
    """Benzene, ethylene, ethylbenzene, diethylbenzene in kmol/h."""
    values = [rating.number(f"bed {bed}.exit flow of {name}") for name in SPECIES]
    return [3.6 * value for value in values if value is not None]


@pytest.mark.parametrize("bed", [1, 2, 3])
@pytest.mark.parametrize("split", list(SPLITS))
def test_AL_1_invariant_behind_every_bed(split: str, bed: int) -> None:
    """Relative 1e-6 on both products."""
    B, _, EB, DEB = behind(rated(split), bed)
    assert pytest.approx(closed(B), rel=1e-6) == EB
    assert pytest.approx(B0 - B - closed(B), rel=1e-6) == DEB


def test_AL_1_splits_differ_where_they_may() -> None:
    """The runs above are not one run: exit temperatures and conversions differ widely between splits."""
    first = [rated(split).number("bed 1.exit temperature") for split in SPLITS]
    assert max(first) - min(first) > 50.0  # type: ignore[type-var, operator]
    assert behind(rated("back"), 1)[0] / behind(rated("front"), 1)[0] > 1.15


@pytest.mark.parametrize(
    ("ratio", "EB_per_E", "DEB_per_E", "conversion"),
    [
        pytest.param(3.0, 0.808260, 0.095870, 0.301377, id="AL-2a"),
        pytest.param(5.0, 0.883061, 0.058469, 0.188306, id="AL-2b"),
        pytest.param(8.0, 0.926216, 0.036892, 0.120388, id="AL-2c"),
    ],
)
def test_AL_2_ethylene_fully_converted(
    ratio: float, EB_per_E: float, DEB_per_E: float, conversion: float
) -> None:
    """Recomputed from the closed form, as printed (one unit of the last digit); a last bed of 3000 m3."""
    E = B0 / ratio
    B, left, EB, DEB = behind(programme(train([0.3 * E, 0.3 * E, 0.4 * E], 3000.0)).rate(), 3)
    assert left < 1e-7 * E
    assert pytest.approx(EB_per_E, abs=1e-6) == EB / E
    assert pytest.approx(DEB_per_E, abs=1e-6) == DEB / E
    assert pytest.approx(conversion, abs=1e-6) == 1.0 - B / B0
