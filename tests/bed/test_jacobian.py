"""Values and derivatives of whole trains on a frozen step sequence, against two outside evaluations.

Independent program: `reference`, the same Radau steps in plain NumPy, differentiated by complex step.
Closed form: central differences of the program's own values.
"""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from numpy.typing import NDArray

from reactorstage.train.evaluation import Evaluation
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import Tree, edges, programme
from tests.bed.random_trees import trees
from tests.bed.reference import Gas, Twin

Floats = NDArray[np.float64]

COARSE = 1e-3
"""Few, long steps: the derivative of the steps must be exact however rough they are."""

TINY = 1e-20

LOOSE = (".depth ", ".peak ", ".approach ")
"""Found by iteration inside the bed or after it: their own rounding limits the differences."""


class Trial:
    """A random train at its `now`, evaluated on a coarse frozen mesh."""

    def __init__(self, tree: Tree):
        self.train: TrainProgramme = programme(tree)
        self.x = np.array([number.now for number in self.train.numbers])
        self.span = np.array([number.high - number.low for number in self.train.numbers])
        passing, inputs = self.train.model.passing, self.train.model.inputs
        self.mesh = passing.adaptive(*inputs.values(self.x), COARSE).stages
        self.found = self.at(self.x)

    def at(self, x: Floats) -> Evaluation:
        found = self.train.evaluate(x, self.mesh)
        assert found.ok, found.failure
        return found

    @property
    def names(self) -> list[str]:
        """Of margins, cost and weights."""
        names = [f"{row.quantity} " for row in self.train.limits]
        return [*names, "cost", *names]

    def size(self, quantity: str) -> float:
        """A sensible scale: 100 K, 0.2 bar, 400 mol/s, their heat through 100 K; else 1."""
        flow = 400.0
        words = {
            "temperature": 100.0,
            "pressure": 2e4,
            "drop": 2e4,
            "removed": 1e4 * flow,
            "exchanger": 100.0,
        }
        if ".approach " in quantity:
            return 100.0
        return (
            flow if " flow of " in quantity or " ratio " in quantity else words.get(quantity.split()[-1], 1.0)
        )

    def twin(self) -> dict[str, NDArray[np.complex128]]:
        """Every quantity of the reference with one complex-step direction for each number."""
        D = max(1, len(self.x))
        moved = self.x[:, None] + 1j * TINY * np.eye(len(self.x), D) * self.span[:, None]
        values = {number.name: row for number, row in zip(self.train.numbers, moved, strict=True)}
        chemistry = self.train.model.chemistry
        return Twin(self.train.case, Gas(chemistry.table, chemistry.laws), values, D, edges(self.mesh)).run()


@settings(max_examples=25)
@given(trees())
def test_frozen_steps_have_the_values_and_derivatives_of_the_numpy_twin(tree: Tree) -> None:
    trial = Trial(tree)
    twin, seen = trial.twin(), 0
    for i, row in enumerate(trial.train.limits):
        if row.implied or row.bound != 0.0 or row.direction != "at least":
            continue
        value, slopes = twin[row.quantity].real[0], twin[row.quantity].imag[: len(trial.x)] / TINY
        scale = max(trial.size(row.quantity), np.abs(slopes).max(initial=0.0))
        assert abs(trial.found.margin[i] - value) < 1e-10 * max(scale, abs(value)), row.quantity
        away = np.abs(trial.found.margin_dx[i] * trial.span - slopes).max(initial=0.0)
        assert away < 1e-10 * scale, row.quantity
        seen += 1
    assert seen >= 10


@settings(max_examples=25)
@given(trees())
def test_derivatives_of_every_limit_and_of_money_are_central_differences(tree: Tree) -> None:
    trial = Trial(tree)
    found = trial.found
    slopes = np.vstack([found.margin_dx, found.cost_dx, found.weight_dx]) * trial.span
    sizes = np.array([trial.size(row.quantity) for row in trial.train.limits])
    scale = np.maximum(np.concatenate([sizes, [0.1], sizes]), np.abs(slopes).max(axis=1, initial=0.0))
    for d, number in enumerate(trial.train.numbers):
        away = np.abs(difference(trial, d) - slopes[:, d]) / scale
        allowed = np.array([1e-6 if any(word in name for word in LOOSE) else 1e-7 for name in trial.names])
        assert np.all(away < allowed), (number.name, trial.names[int(np.argmax(away / allowed))])


def difference(trial: Trial, d: int) -> Floats:
    """Fourth-order central difference of margins, cost and weights by number d, per span."""
    h, total = 1e-3, np.zeros(2 * len(trial.train.limits) + 1)
    for shift, weight in ((-2, 1 / 12), (-1, -2 / 3), (1, 2 / 3), (2, -1 / 12)):
        step = shift * h * trial.span[d] * np.eye(len(trial.x))[d]
        found = trial.at(trial.x + step)
        total += weight / h * np.concatenate([found.margin, [found.cost], found.weight])
    return total
