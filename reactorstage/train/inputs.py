"""From the numbers x to the inputs u of a pass, with the derivatives du/dx."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.case.model import Number
from reactorstage.train.evaluation import FreeNumber
from reactorstage.train.forms import Linear, at

Array = NDArray[np.float64]


@dataclass(frozen=True)
class InputMap:
    """u = constant + slope @ x, then u[target] = u[a] * u[b] for each product (shares of a free flow)."""

    names: tuple[str, ...]
    constant: Array
    slope: Array
    products: tuple[tuple[int, int, int], ...]

    def values(self, x: Array) -> tuple[Array, Array]:
        """u (U,) and du (U, D) at x (D,)."""
        u = self.constant + self.slope @ x
        if not self.products:
            return u, self.slope
        du = self.slope.copy()
        for target, a, b in self.products:
            u[target] = u[a] * u[b]
            du[target] = du[a] * u[b] + u[a] * du[b]
        return u, du


class InputBuilder:
    """Collects inputs and free numbers while a case is laid out."""

    def __init__(self) -> None:
        self.numbers: list[FreeNumber] = []
        self._names: list[str] = []
        self._forms: list[Linear] = []
        self._products: list[tuple[int, int, int]] = []

    def constant(self, name: str, value: float) -> int:
        """An input that never moves."""
        return self._append(name, Linear(const=value))

    def number(self, name: str, number: Number, factor: float = 1.0, **role: str | int | float) -> int:
        """An input from a number of the case, times a conversion factor; free numbers join x."""
        if not number.free:
            return self.constant(name, factor * number.now)
        return self._append(name, at(self.free(name, number, **role)) * factor)

    def free(self, name: str, number: Number, **role: str | int | float) -> int:
        """A free number without an input of its own; its position in x."""
        assert number.low is not None and number.high is not None
        self.numbers.append(FreeNumber(name, number.now, number.low, number.high, number.kind, **role))  # type: ignore[arg-type]
        return len(self.numbers) - 1

    def combination(self, name: str, form: Linear) -> int:
        """An input that is a linear form of x."""
        return self._append(name, form)

    def form(self, index: int) -> Linear:
        """The linear form of x behind an input."""
        return self._forms[index]

    def product(self, name: str, a: int, b: int) -> int:
        """An input that is the product of two earlier ones."""
        target = self.constant(name, 0.0)
        self._products.append((target, a, b))
        return target

    def build(self, extra: Sequence[FreeNumber] = ()) -> InputMap:
        """The finished map for x made of the collected numbers and `extra` internal ones."""
        size = len(self.numbers) + len(extra)
        slope = np.array([form.row(size) for form in self._forms]).reshape(len(self._forms), size)
        constant = np.array([form.const for form in self._forms])
        return InputMap(tuple(self._names), constant, np.ascontiguousarray(slope), tuple(self._products))

    def _append(self, name: str, form: Linear) -> int:
        self._names.append(name)
        self._forms.append(form)
        return len(self._names) - 1
