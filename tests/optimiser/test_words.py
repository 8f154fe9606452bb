"""Answers told apart in words."""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.optimiser.words import called, loading, told_apart
from tests.optimiser.toy_train import ETHYLENE, ToyTrain
from tests.optimiser.toys import Toy, box, linear, number


def setting(shares: list[float], inlets: list[float]) -> np.ndarray:
    return np.array([*(ETHYLENE * share for share in shares), *(T + 273.15 for T in inlets)])


BEST = setting([0.25, 0.25, 0.25], [364.0, 364.0, 364.0, 398.0])


def test_an_inlet_that_differs() -> None:
    other = setting([0.25, 0.25, 0.25], [364.0, 364.1, 364.0, 364.0])
    assert told_apart(ToyTrain(), BEST, other) == ("inlet of bed 4 at 364 instead of 398 degC",)


def test_a_split_that_differs_comes_with_its_character_and_in_order_of_size() -> None:
    other = setting([0.4, 0.3, 0.2], [364.0, 366.0, 364.0, 398.0])
    split, inlet = told_apart(ToyTrain(), BEST, other)
    assert split == "ethylene front-loaded, 107/80/54/27 instead of 67/67/67/67 kmol/h"
    assert inlet == "inlet of bed 2 at 366 instead of 364 degC"


def test_equal_answers_need_no_words() -> None:
    assert told_apart(ToyTrain(), BEST, BEST.copy()) == ()


def test_at_most_four_phrases() -> None:
    toy = Toy(box([0.0] * 6, 0.0, 1.0), linear(0.0, *[0.0] * 6))
    show = {"to_display": lambda value, kind: value, "unit_of": lambda kind: ""}
    found = told_apart(toy, np.zeros(6), np.linspace(0.1, 0.6, 6), **show)
    assert found[0] == "x6 at 0.600 instead of 0.000" and len(found) == 4


def test_numbers_in_words() -> None:
    assert called(number("gap 2.heat removed", 0, 0, 1)) == "heat removed of gap 2"
    inlet = number("bed 3.inlet temperature", 0, 0, 1, role="inlet temperature", bed=3)
    assert called(inlet) == "inlet of bed 3"


@pytest.mark.parametrize(
    ("values", "word"),
    [
        ([4, 3, 2, 1], "front-loaded"),
        ([1, 2, 3, 4], "back-loaded"),
        ([1, 1, 1, 1], "evenly split"),
        ([1, 2, 2, 1], ""),
        ([1.05, 1, 1, 0.95], ""),
        ([0, 0], ""),
        ([3], ""),
    ],
)
def test_character_of_a_split(values, word) -> None:
    assert loading(np.array(values, dtype=float)) == word
