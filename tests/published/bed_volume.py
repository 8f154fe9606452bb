"""Volume of one bed for a wanted conversion, by rating."""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.optimize import brentq

from reactorstage.train.programme import TrainProgramme
from reactorstage.train.result import Rating
from tests.bed.build import Tree, changed, one_bed, programme

MOST = 1e4
"""m3."""


def isomerising(species: Tree, constant: Tree, T: float, flow: str, volume: str, **more: Any) -> Tree:
    """A <=> B in one bed, r = k (y_A - y_B / K) per bed volume, from pure A unless `composition` says more.

    Liquids become ideal gases: moles do not change, so mole fractions are concentrations over C_A0.
    """
    reaction = {
        "equation": "A <=> B",
        "rate per": "bed volume",
        "driven by": "mole fraction",
        "constant": constant,
    }
    composition = more.pop("composition", {"A": "100 %"})
    feed = {"flow": flow, "temperature": f"{T!r} K", "composition": composition}
    return one_bed(species, {"turn": reaction}, feed, volume, **more)


def of_free_volume(tree: Tree) -> TrainProgramme:
    """The programme of a one-bed case with its bed's volume as the only free number."""
    free = {"now": "1 m^3", "from": "0 m^3", "to": f"{MOST} m^3"}
    return programme(changed(tree, "train", 1, "bed 1", "catalyst", to=free))


def rated_at(train: TrainProgramme, volume: float) -> Rating:
    """Rating with the free volume at a value in m3: `now` is 1 m3, whatever the number counts in."""
    return train.rate(np.array([volume * train.numbers[0].now]))


def volume_for(tree: Tree, X: float, most: float = MOST) -> tuple[float, Rating]:
    """m3 and rating of a bed that converts the fraction X of A."""
    train = of_free_volume(tree)

    def missing(volume: float) -> float:
        converted = rated_at(train, volume).number("bed 1.conversion of A")
        return (converted or 0.0) - X

    volume = float(brentq(missing, 1e-9 * most, most, xtol=1e-12 * most, rtol=1e-10))
    return volume, rated_at(train, volume)
