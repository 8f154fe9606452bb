"""Dew or bubble temperatures of records, and residual enthalpies at heat levels, of a cubic equation."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.boundary import boundaries, residual_enthalpies
from reactorstage.bed.compiled import first_call
from reactorstage.bed.data import Chemistry
from reactorstage.chemistry.fluid import CubicStream, Fluid
from reactorstage.train.layout import Layout

Array = NDArray[np.float64]

WORDS = {"vapour": "dew point", "liquid": "bubble point"}
"""What a stream of a phase is to keep away from."""


@dataclass(frozen=True)
class Boundary:
    """The temperature at which a second phase appears in the record of an operation; index in the base."""

    index: int
    operation: int


@dataclass(frozen=True)
class Residual:
    """Residual enthalpy flow of the record of an operation at temperature T; index in the base vector."""

    index: int
    operation: int
    T: float


def boundaries_of(layout: Layout, fluid: Fluid | None, first: int) -> tuple[Boundary, ...]:
    """One for every operation, from position `first` of the base vector on; none but in a cubic equation."""
    if not isinstance(fluid, CubicStream):
        return ()
    return tuple(Boundary(first + k, k) for k in range(len(layout.operations)))


def fill_boundaries(
    wanted: Sequence[Boundary], chem: Chemistry, fluid: Fluid | None, layout: Layout, base: Array
) -> None:
    """Write boundary temperatures with derivatives into the base vector; not a number without a boundary."""
    if not wanted or not isinstance(fluid, CubicStream):
        return
    critical = np.array(
        [[one.temperature, one.pressure, one.acentric_factor] for one in fluid.equation.critical]
    )
    rows = np.array([one.operation * layout.width for one in wanted], dtype=np.int64)
    found = np.zeros((len(wanted), base.shape[1]))
    with first_call(boundaries, ideal=False):
        boundaries(chem, critical, 1.0 if fluid.phase == "liquid" else -1.0, rows, base, found)
    base[[one.index for one in wanted]] = found


def fill_residuals(wanted: Sequence[Residual], chem: Chemistry, layout: Layout, base: Array) -> None:
    """Write residual enthalpies with derivatives into the base vector."""
    if not wanted:
        return
    rows = np.array([one.operation * layout.width for one in wanted], dtype=np.int64)
    found = np.zeros((len(wanted), base.shape[1]))
    with first_call(residual_enthalpies, ideal=False):
        residual_enthalpies(chem, np.array([one.T for one in wanted]), rows, base, found)
    base[[one.index for one in wanted]] = found
