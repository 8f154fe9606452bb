"""What the optimiser knows of a train: numbers, limits and one evaluation with exact derivatives."""

from __future__ import annotations

from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from reactorstage.train.evaluation import Evaluation, FreeNumber, LimitRow, SplitGroup

__all__ = ["Array", "Evaluation", "FreeNumber", "LimitRow", "Programme", "SplitGroup"]

Array = NDArray[np.float64]


class Programme(Protocol):
    """A train compiled for the optimiser. Safe to call from several threads at once."""

    @property
    def numbers(self) -> tuple[FreeNumber, ...]:
        """The D numbers, in the order of x."""

    @property
    def limits(self) -> tuple[LimitRow, ...]:
        """The M limits, in the order of the margins."""

    @property
    def splits(self) -> tuple[SplitGroup, ...]:
        """The feeds whose division over the beds is free."""

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        """Integrate with adaptive steps at search tolerance, or the final one; evaluation and step sequence.

        A failure comes as a value: Evaluation.failure is set and the mesh is None.
        """

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        """Values and derivatives on a frozen step sequence (a smooth function of x)."""

    def final(self, x: Array) -> Evaluation:
        """As start_mesh, at the tight final tolerance."""

    def complete(self, x: Array) -> Array:
        """x with its internal numbers set to their best values for the user numbers of x."""

    def begin(self, x: Array) -> Array:
        """As `complete`, but where a search does well to begin, which may leave equations open."""
