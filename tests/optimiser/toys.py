"""Small programmes with known optima, in the shape of a compiled train."""

from __future__ import annotations

import threading
from collections.abc import Callable, Sequence
from typing import Any

import numpy as np

from reactorstage.optimiser.programme import Array, Evaluation, FreeNumber, LimitRow, SplitGroup

Values = tuple[float, list[float]]


def row(
    label: str,
    owner: str = "here",
    *,
    scale: float = 1.0,
    step: float = 0.1,
    keep_away: float = 0.0,
    quantity: str = "",
    direction: str = "at most",
    bound: float = 0.0,
    soft_price: float | None = None,
) -> LimitRow:
    return LimitRow(
        label, owner, quantity or f"{owner}.{label}", direction, bound, keep_away, "number", scale, step,
        soft_price=soft_price,
    )  # fmt: skip


class Toy:
    """A programme from plain functions: each gives a value and its gradient as lists.

    fails(x) gives the sentence of a failure or an empty text; frozen_fails(x, mesh) the same on a mesh
    (which is the x where it was made); mesh_error(x, mesh) is added to the cost, so that a new mesh has
    something to mend. delay is called before each evaluation.
    """

    def __init__(
        self,
        numbers: Sequence[FreeNumber],
        cost: Callable[[Array], Values],
        limits: Sequence[tuple[LimitRow, Callable[[Array], Values]]] = (),
        equations: Sequence[Callable[[Array], Values]] = (),
        *,
        splits: Sequence[SplitGroup] = (),
        weights: Callable[[Array], tuple[Array, Array]] | None = None,
        fails: Callable[[Array], str] = lambda x: "",
        frozen_fails: Callable[[Array, Array], str] = lambda x, mesh: "",
        mesh_error: Callable[[Array, Array], Values] | None = None,
        complete: Callable[[Array], Array] = lambda x: x,
        delay: Callable[[], None] = lambda: None,
    ):
        self.numbers = tuple(numbers)
        self.limits = tuple(limit for limit, _ in limits)
        self.splits = tuple(splits)
        self._cost = cost
        self._margins = [margin for _, margin in limits]
        self._equations = list(equations)
        self._weights = weights
        self._fails = fails
        self._frozen_fails = frozen_fails
        self._mesh_error = mesh_error
        self._complete = complete
        self._delay = delay
        self._lock = threading.Lock()
        self.calls = {"start_mesh": 0, "evaluate": 0, "final": 0}

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        self._count("start_mesh")
        failure = self._fails(x)
        return (Evaluation(failure), None) if failure else (self._values(x, x), x.copy())

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        self._count("evaluate")
        failure = self._fails(x) or self._frozen_fails(x, mesh)
        return Evaluation(failure) if failure else self._values(x, mesh)

    def final(self, x: Array) -> Evaluation:
        self._count("final")
        failure = self._fails(x)
        return Evaluation(failure) if failure else self._values(x, x)

    def complete(self, x: Array) -> Array:
        return self._complete(x)

    def begin(self, x: Array) -> Array:
        return self._complete(x)

    @property
    def total_calls(self) -> int:
        return sum(self.calls.values())

    def _count(self, name: str) -> None:
        self._delay()
        with self._lock:
            self.calls[name] += 1

    def _values(self, x: Array, mesh: Array) -> Evaluation:
        size = len(self.numbers)
        cost, slope = self._cost(x)
        cost_dx = np.asarray(slope, dtype=float)
        if self._mesh_error is not None:
            error, error_dx = self._mesh_error(x, mesh)
            cost, cost_dx = cost + error, cost_dx + np.asarray(error_dx)
        margins = [margin(x) for margin in self._margins]
        residuals = [equation(x) for equation in self._equations]
        weight, weight_dx = np.ones(len(margins)), np.zeros((len(margins), size))
        if self._weights is not None:
            weight, weight_dx = self._weights(x)
        return Evaluation(
            "",
            float(cost),
            cost_dx,
            np.array([value for value, _ in margins], dtype=float),
            np.array([d for _, d in margins], dtype=float).reshape(-1, size),
            weight,
            weight_dx,
            np.array([value for value, _ in residuals], dtype=float),
            np.array([d for _, d in residuals], dtype=float).reshape(-1, size),
            work=1,
        )


def number(name: str, now: float, low: float, high: float, **more: Any) -> FreeNumber:
    return FreeNumber(name, now, low, high, "number", **more)


def box(now: Sequence[float], low: float, high: float) -> list[FreeNumber]:
    """Numbers x1, x2, ... with one range for all."""
    return [number(f"x{k + 1}", value, low, high) for k, value in enumerate(now)]


def linear(constant: float, *slopes: float) -> Callable[[Array], Values]:
    """constant + slopes @ x."""
    return lambda x: (constant + float(np.dot(slopes, x)), list(slopes))


def rosenbrock(x: Array) -> Values:
    a, b = x
    return 100 * (b - a * a) ** 2 + (1 - a) ** 2, [-400 * a * (b - a * a) - 2 * (1 - a), 200 * (b - a * a)]


def hs35() -> Toy:
    """Hock and Schittkowski 1981, problem 35 (from memory): f = 1/9 at (4/3, 7/9, 4/9)."""
    Q = np.array([[4.0, 2.0, 2.0], [2.0, 4.0, 0.0], [2.0, 0.0, 2.0]])
    c = np.array([-8.0, -6.0, -4.0])
    return Toy(
        box([0.5, 0.5, 0.5], 0.0, 3.0),
        lambda x: (9.0 + c @ x + 0.5 * x @ Q @ x, list(c + Q @ x)),
        [(row("plane"), linear(3.0, -1.0, -1.0, -2.0))],
    )


def hs43() -> Toy:
    """Hock and Schittkowski 1981, problem 43, Rosen-Suzuki (from memory): f = -44 at (0, 1, 2, -1)."""

    def cost(x: Array) -> Values:
        a, b, c, d = x
        value = a * a + b * b + 2 * c * c + d * d - 5 * a - 5 * b - 21 * c + 7 * d
        return value, [2 * a - 5, 2 * b - 5, 4 * c - 21, 2 * d + 7]

    def first(x: Array) -> Values:
        a, b, c, d = x
        value = 8 - a * a - b * b - c * c - d * d - a + b - c + d
        return value, [-2 * a - 1, -2 * b + 1, -2 * c - 1, -2 * d + 1]

    def second(x: Array) -> Values:
        a, b, c, d = x
        value = 10 - a * a - 2 * b * b - c * c - 2 * d * d + a + d
        return value, [-2 * a + 1, -4 * b, -2 * c, -4 * d + 1]

    def third(x: Array) -> Values:
        a, b, c, d = x
        return 5 - 2 * a * a - b * b - c * c - 2 * a + b + d, [-4 * a - 2, -2 * b + 1, -2 * c, 1]

    return Toy(
        box([0.0, 0.0, 0.0, 0.0], -5.0, 5.0),
        cost,
        [(row("g1"), first), (row("g2"), second), (row("g3"), third)],
    )


def hs71() -> Toy:
    """Hock and Schittkowski 1981, problem 71 (from memory): f = 17.0140173 at (1, 4.743, 3.8211, 1.3794)."""

    def cost(x: Array) -> Values:
        a, b, c, d = x
        return a * d * (a + b + c) + c, [d * (2 * a + b + c), a * d, a * d + 1, a * (a + b + c)]

    def product(x: Array) -> Values:
        a, b, c, d = x
        return a * b * c * d - 25, [b * c * d, a * c * d, a * b * d, a * b * c]

    def sphere(x: Array) -> Values:
        return float(x @ x) - 40, list(2 * x)

    return Toy(box([1.0, 5.0, 5.0, 1.0], 1.0, 5.0), cost, [(row("product"), product)], [sphere])


def hs76() -> Toy:
    """Hock and Schittkowski 1981, problem 76 (from memory): f = -4.681818."""
    Q = np.array([[2.0, 0.0, -1.0, 0.0], [0.0, 1.0, 0.0, 0.0], [-1.0, 0.0, 2.0, 1.0], [0.0, 0.0, 1.0, 1.0]])
    c = np.array([-1.0, -3.0, 1.0, -1.0])
    return Toy(
        box([0.5, 0.5, 0.5, 0.5], 0.0, 10.0),
        lambda x: (c @ x + 0.5 * x @ Q @ x, list(c + Q @ x)),
        [
            (row("first"), linear(5.0, -1.0, -2.0, -1.0, -1.0)),
            (row("second"), linear(4.0, -3.0, -1.0, -2.0, 1.0)),
            (row("third"), linear(-1.5, 0.0, 1.0, 4.0, 0.0)),
        ],
    )


def hs100() -> Toy:
    """Hock and Schittkowski 1981, problem 100 (from memory): f = 680.6300573."""

    def cost(x: Array) -> Values:
        a, b, c, d, e, f, g = x
        value = (a - 10) ** 2 + 5 * (b - 12) ** 2 + c**4 + 3 * (d - 11) ** 2 + 10 * e**6 + 7 * f**2 + g**4
        value += -4 * f * g - 10 * f - 8 * g
        return value, [
            2 * (a - 10), 10 * (b - 12), 4 * c**3, 6 * (d - 11), 60 * e**5, 14 * f - 4 * g - 10,
            4 * g**3 - 4 * f - 8,
        ]  # fmt: skip

    def one(x: Array) -> Values:
        a, b, c, d, e, _, _ = x
        return 127 - 2 * a**2 - 3 * b**4 - c - 4 * d**2 - 5 * e, [-4 * a, -12 * b**3, -1, -8 * d, -5, 0, 0]

    def two(x: Array) -> Values:
        a, b, c, d, e, _, _ = x
        return 282 - 7 * a - 3 * b - 10 * c**2 - d + e, [-7, -3, -20 * c, -1, 1, 0, 0]

    def three(x: Array) -> Values:
        a, b, _, _, _, f, g = x
        return 196 - 23 * a - b**2 - 6 * f**2 + 8 * g, [-23, -2 * b, 0, 0, 0, -12 * f, 8]

    def four(x: Array) -> Values:
        a, b, c, _, _, f, g = x
        value = -4 * a**2 - b**2 + 3 * a * b - 2 * c**2 - 5 * f + 11 * g
        return value, [-8 * a + 3 * b, -2 * b + 3 * a, -4 * c, 0, 0, -5, 11]

    scales = [100.0, 100.0, 100.0, 10.0]
    limits = [(row(f"g{k + 1}", scale=scales[k]), g) for k, g in enumerate((one, two, three, four))]
    return Toy(box([1.0, 2.0, 0.0, 4.0, 0.0, 1.0, 1.0], -10.0, 10.0), cost, limits)


def corner() -> Toy:
    """Least -x1 - x2 under x1 <= 1, x2 <= 1, x1 + x2 <= 2: three limits meet in (1, 1)."""
    limits = [
        (row("first"), linear(1.0, -1.0, 0.0)),
        (row("second"), linear(1.0, 0.0, -1.0)),
        (row("sum"), linear(2.0, -1.0, -1.0)),
    ]
    return Toy(box([0.2, 0.5], 0.0, 3.0), linear(0.0, -1.0, -1.0), limits)


def hump(x: Array) -> Values:
    """Two basins: near 0.195 (lower) and near 0.895 in x1."""
    a, b = x
    value = 1 + 10 * (a - 0.2) ** 2 * (a - 0.9) ** 2 + 0.05 * a + (b - 0.5) ** 2
    slope = 20 * ((a - 0.2) * (a - 0.9) ** 2 + (a - 0.2) ** 2 * (a - 0.9)) + 0.05
    return value, [slope, 2 * (b - 0.5)]


def contradiction() -> Toy:
    """x1 + x2 >= 1.5 against x2 <= 0.5 and x1 <= 0.6, whose scales are small: short by 0.4 at (0.6, 0.5)."""
    limits = [
        (row("enough"), linear(-1.5, 1.0, 1.0)),
        (row("top", scale=0.01), linear(0.5, 0.0, -1.0)),
        (row("side", scale=0.01), linear(0.6, -1.0, 0.0)),
        (row("idle"), linear(5.0, -1.0, 0.0)),
    ]
    return Toy(box([0.2, 0.2], 0.0, 1.0), linear(0.0, 1.0, 1.0), limits)
