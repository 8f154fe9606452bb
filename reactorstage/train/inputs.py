"""From the numbers of a case to the inputs u of a pass, with derivatives.

v (V,) are all numbers of the case that a pass depends on, with the unknowns of its closures; x (D,) are those
of them that are free, then the unknowns, followed by internal numbers, which no input depends on.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.case.model import Number
from reactorstage.train.evaluation import FreeNumber
from reactorstage.train.forms import Linear, at

Array = NDArray[np.float64]


@dataclass(frozen=True)
class InputMap:
    """u = constant + slope @ v, then u[target] = u[a] * u[b] for each product (shares of a flow).

    names (U,) are those of the inputs, numbers (V,) the numbers of the case (fixed ones with low = high),
    free the positions in v of the first numbers of x, of which the last `unknowns` are those of closures.
    """

    names: tuple[str, ...]
    numbers: tuple[FreeNumber, ...]
    free: NDArray[np.intp]
    constant: Array
    slope: Array
    products: tuple[tuple[int, int, int], ...]
    unknowns: int = 0

    def all_numbers(self, x: Array) -> Array:
        """v (V,) with the free numbers taken from x and the others as the case states them."""
        v = np.array([number.now for number in self.numbers])
        v[self.free] = x[: len(self.free)]
        return v

    def values(self, x: Array) -> tuple[Array, Array]:
        """u (U,) and du/dx (U, D) at x (D,)."""
        u, du = self.of_numbers(self.all_numbers(x))
        slope = np.zeros((len(u), len(x)))
        slope[:, : len(self.free)] = du[:, self.free]
        return u, slope

    def of_numbers(self, v: Array) -> tuple[Array, Array]:
        """u (U,) and du/dv (U, V) at v (V,)."""
        u = self.constant + self.slope @ v
        if not self.products:
            return u, self.slope
        du = self.slope.copy()
        for target, a, b in self.products:
            u[target] = u[a] * u[b]
            du[target] = du[a] * u[b] + u[a] * du[b]
        return u, du


class InputBuilder:
    """Collects numbers and inputs while a case is laid out; forms are linear in v."""

    def __init__(self) -> None:
        self.all: list[FreeNumber] = []
        self._free: list[int] = []
        self._unknown: list[int] = []
        self._names: list[str] = []
        self._forms: list[Linear] = []
        self._products: list[tuple[int, int, int]] = []

    @property
    def numbers(self) -> list[FreeNumber]:
        """The free numbers, in the order of x."""
        return [self.all[index] for index in self._free]

    @property
    def unknowns(self) -> list[FreeNumber]:
        """The unknowns of closures, which follow the free numbers in x."""
        return [self.all[index] for index in self._unknown]

    @property
    def unknown_count(self) -> int:
        return len(self._unknown)

    def unknown(self, name: str, now: float, low: float, high: float, kind: str) -> int:
        """An input that is an unknown of a closure."""
        self.all.append(FreeNumber(name, now, low, high, kind, role="closure"))
        self._unknown.append(len(self.all) - 1)
        return self._append(name, at(len(self.all) - 1))

    def constant(self, name: str, value: float) -> int:
        """An input that never moves."""
        return self._append(name, Linear(const=value))

    def number(self, name: str, number: Number, factor: float = 1.0, **role: str | int | float) -> int:
        """An input from a number of the case, times a conversion factor; free numbers join x."""
        low = number.now if number.low is None else number.low
        high = number.now if number.high is None else number.high
        name = self._unlike_others(name)
        self.all.append(FreeNumber(name, number.now, low, high, number.kind, **role))  # type: ignore[arg-type]
        if number.free:
            self._free.append(len(self.all) - 1)
        return self._append(name, at(len(self.all) - 1) * factor)

    def _unlike_others(self, name: str) -> str:
        """The name, with a count behind it where several devices of one place are given alike."""
        known, count = {one.name for one in self.all}, 2
        if name not in known:
            return name
        while f"{name} ({count})" in known:
            count += 1
        return f"{name} ({count})"

    def combination(self, name: str, form: Linear) -> int:
        """An input that is a linear form of v."""
        return self._append(name, form)

    def form(self, index: int) -> Linear:
        """The linear form of v behind an input."""
        return self._forms[index]

    def span(self, index: int) -> tuple[float, float]:
        """Lowest and highest value of an input within the ranges of the numbers behind it."""
        form = self._forms[index]
        ends = [
            form.const + sum(c * (self.all[i].low, self.all[i].high)[k] for i, c in form.terms.items())
            for k in (0, 1)
        ]
        return min(ends), max(ends)

    def product(self, name: str, a: int, b: int) -> int:
        """An input that is the product of two earlier ones."""
        target = self.constant(name, 0.0)
        self._products.append((target, a, b))
        return target

    def scaled(self, name: str, index: int, factor: float) -> int:
        """An input that is a multiple of an earlier one, which may be a product."""
        return self.product(name, index, self.constant(f"{name}, factor", factor))

    def build(self) -> InputMap:
        """The finished map."""
        size = len(self.all)
        slope = np.array([form.row(size) for form in self._forms]).reshape(len(self._forms), size)
        return InputMap(
            names=tuple(self._names),
            numbers=tuple(self.all),
            free=np.array([*self._free, *self._unknown], dtype=np.intp),
            constant=np.array([form.const for form in self._forms]),
            slope=np.ascontiguousarray(slope),
            products=tuple(self._products),
            unknowns=len(self._unknown),
        )

    def _append(self, name: str, form: Linear) -> int:
        self._names.append(name)
        self._forms.append(form)
        return len(self._names) - 1
