"""profiles.csv: one row per point along the beds."""

from __future__ import annotations

import numpy as np

from reactorstage.report.display import unit
from reactorstage.report.profiles import BedProfile, train_profiles
from reactorstage.report.sheet import Cell, sheet
from reactorstage.report.unit_sets import RATE
from reactorstage.train.result import Rating


def profiles_csv(rating: Rating) -> bytes:
    """The profiles with a heading line; numbers with 10 figures, an empty field where there is no value.

    The last column, `note`, holds the caution in the first row and nothing below.
    """
    return sheet(
        headings(rating), [row for bed in train_profiles(rating) for row in _rows(rating, bed)]
    ).csv()


def headings(rating: Rating) -> list[str]:
    """Names of the columns, each with its unit."""
    flow, mass = unit("molar flow"), unit("mass")
    selectivity = [
        f"{kind} selectivity to {rating.product} from {rating.main_reactant}, mol %"
        for kind in ("point", "cumulative")
        if has_selectivity(rating)
    ]
    return [
        "bed",
        "depth, %",
        f"catalyst in bed, {mass}",
        f"catalyst from train inlet, {mass}",
        f"temperature, {unit('temperature')}",
        f"pressure, {unit('pressure')}",
        *(f"flow of {species}, {flow}" for species in rating.species),
        *(f"rate of {reaction}, {unit(RATE)}" for reaction in rating.reactions),
        *selectivity,
    ]


def has_selectivity(rating: Rating) -> bool:
    """Whether the case has a product and a reactant that selectivity can be counted on."""
    return rating.product in rating.species and rating.main_reactant in rating.species


def _rows(rating: Rating, bed: BedProfile) -> list[list[Cell]]:
    columns = [bed.depth, bed.bed_catalyst, bed.catalyst, bed.T, bed.p, *bed.F.T, *bed.r.T]
    if has_selectivity(rating):
        product = rating.species.index(rating.product)
        columns += [bed.point[:, product], bed.cumulative[:, product]]
    name = bed.owner.removeprefix("bed ")
    return [[name, *map(float, row)] for row in np.column_stack(columns)]
