"""Rate laws made in Python, put into a compiled train."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from reactorstage.bed.pack import pack_beds, pack_chemistry
from reactorstage.chemistry import RateLaw, rate_laws
from reactorstage.train.programme import TrainProgramme


def with_laws(train: TrainProgramme, laws: Sequence[RateLaw]) -> TrainProgramme:
    """The train with other laws for its reactions (same number of them, rates per catalyst mass)."""
    chemistry = train.model.chemistry
    arrays = rate_laws(laws, chemistry.table.names)
    old = train.model.passing.beds
    profiles = [list(zip(row[::2], row[1::2], strict=True)) for row in old.profile.tolist()]
    beds = pack_beds(arrays, [1.0] * len(old.viscous), [1.0] * len(old.viscous), _ergun(old), profiles)
    passing = replace(train.model.passing, chemistry=pack_chemistry(chemistry.table, arrays), beds=beds)
    train.model = replace(train.model, chemistry=replace(chemistry, laws=arrays), passing=passing)
    return train


def _ergun(beds) -> list[tuple[float, float]]:
    return list(zip(beds.viscous.tolist(), beds.inertial.tolist(), strict=True))
