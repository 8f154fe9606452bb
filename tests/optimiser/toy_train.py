"""A four-bed train of closed formulas: a split feed, inlet temperatures, ratio limits, coolers, money.

Invented numbers, of the size of a vapour-phase alkylation. Derivatives by complex step, so exact.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from reactorstage.optimiser.programme import Array, Evaluation, FreeNumber, LimitRow, SplitGroup

BEDS = 4
ETHYLENE = 268.0 / 3.6
BENZENE = 965.0 / 3.6
CATALYST = np.array([2600.0, 3000.0, 3400.0, 4300.0])
HEAT_FLOW = 68e3


def limit_rows(ratio: float, slip: float, exit_limit: float) -> list[LimitRow]:
    rows = []
    for bed in range(1, BEDS + 1):
        rows.append(temperature("hot exit", bed, "exit temperature", "at most", exit_limit, 3.0))
        rows.append(temperature("light-off", bed, "inlet temperature", "at least", 637.0, 2.0))
        rows.append(
            LimitRow(
                "coking", f"bed {bed}", f"bed {bed}.inlet ratio", "at least", ratio, 0.2, "ratio", 1.0, 0.1
            )
        )
        rows.append(temperature("rise", bed, "rise", "at most", 46.0, 1.0))
    for gap in range(1, BEDS):
        quantity = f"gap {gap}.heat removed"
        rows.append(
            LimitRow("cooler", f"gap {gap}", quantity, "at least", 0.0, 0.0, "power", 1e6, 1e5, implied=True)
        )
        rows.append(LimitRow("cooler", f"gap {gap}", quantity, "at most", 2.2e6, 0.0, "power", 1e6, 1e5))
    for bed in range(1, BEDS + 1):
        what = f"bed {bed}.injected ethylene"
        low, high = 30 / 3.6, 82 / 3.6
        rows.append(LimitRow("nozzle", f"bed {bed}", what, "at least", low, 0.0, "molar flow", 5.0, 0.5))
        rows.append(LimitRow("nozzle", f"bed {bed}", what, "at most", high, 0.0, "molar flow", 5.0, 0.5))
    rows.append(
        LimitRow("slip", "effluent", "effluent.flow of C2H4", "at most", slip, 0.0, "molar flow", 0.1, 0.02)
    )
    return rows


def temperature(label: str, bed: int, what: str, direction: str, bound: float, keep_away: float) -> LimitRow:
    owner = f"bed {bed}"
    return LimitRow(label, owner, f"{owner}.{what}", direction, bound, keep_away, "temperature", 10.0, 1.0)


def share(bed: int) -> FreeNumber:
    name = f"bed {bed}.injected ethylene"
    kind = "molar flow"
    return FreeNumber(name, ETHYLENE / 4, 0.0, ETHYLENE, kind, "split", "ethylene", bed, ETHYLENE)


def inlet_temperature(bed: int) -> FreeNumber:
    name = f"bed {bed}.inlet temperature"
    return FreeNumber(name, 657.0, 623.0, 693.0, "temperature", "inlet temperature", bed=bed)


@dataclass(frozen=True)
class Prices:
    """Per MWh and kmol; mesh_error is what a mesh made elsewhere does to exit temperatures."""

    heat: float = 21.0
    furnace: float = 34.0
    deb: float = 62.0
    mesh_error: float = 0.0


class ToyTrain:
    """Seven numbers: ethylene to beds 1 to 3 (the rest to bed 4) and four inlet temperatures."""

    def __init__(
        self,
        prices: Prices | None = None,
        *,
        ratio: float = 11.6,
        slip: float = 0.35,
        exit_limit: float = 697.0,
        delay: Callable[[], None] = lambda: None,
    ):
        self.prices = prices or Prices()
        self.numbers = (*(share(k) for k in (1, 2, 3)), *(inlet_temperature(k) for k in (1, 2, 3, 4)))
        self.limits = tuple(limit_rows(ratio, slip, exit_limit))
        self.splits = (SplitGroup("ethylene", (0, 1, 2), ETHYLENE, 0.0, 4),)
        self._delay = delay

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        self._delay()
        return self._evaluation(x, x), x.copy()

    def evaluate(self, x: Array, mesh: Any) -> Evaluation:
        self._delay()
        return self._evaluation(x, mesh)

    def final(self, x: Array) -> Evaluation:
        self._delay()
        exact = ToyTrain.__new__(ToyTrain)
        exact.__dict__.update(self.__dict__)
        exact.prices = replace(self.prices, mesh_error=0.0)
        return exact._evaluation(x, x)

    def complete(self, x: Array) -> Array:
        return x

    def begin(self, x: Array) -> Array:
        return x

    def _evaluation(self, x: Array, mesh: Array) -> Evaluation:
        value = self._values(x.astype(complex), mesh)
        columns = []
        for k in range(x.size):
            moved = x.astype(complex)
            moved[k] += 1e-30j
            columns.append(self._values(moved, mesh).imag / 1e-30)
        jacobian = np.array(columns).T
        count = len(self.limits)
        return Evaluation(
            "",
            float(value[0].real),
            jacobian[0],
            value[1 : 1 + count].real,
            jacobian[1 : 1 + count],
            value[1 + count :].real,
            jacobian[1 + count :],
            np.zeros(0),
            np.zeros((0, x.size)),
        )

    def _values(self, x: Array, mesh: Array) -> Array:
        """Cost, margins, weights."""
        split = np.append(x[:3], ETHYLENE - x[:3].sum())
        inlet = x[3:]
        slip, benzene, ethylbenzene, deb = 0.0, BENZENE, 0.0, 0.0
        exits, at_inlet, excess = [], [], []
        for k in range(BEDS):
            ethylene = split[k] + slip
            excess.append(benzene)
            at_inlet.append(ethylene)
            rate = 1.1e-3 * np.exp(-7900.0 * (1 / (inlet[k] + 14.0) - 1 / 673.0))
            converted = ethylene * (1 - np.exp(-rate * CATALYST[k]))
            T = inlet[k] + 2.15 * converted * (1 + 0.001 * excess[k] / BENZENE)
            error = self.prices.mesh_error * (1 + np.sin(0.2 * (T - 1.01 * mesh[3 + k])))
            T = T + error * converted
            made = 1.15e-3 * np.exp(-10500.0 * (1 / (T - 10) - 1 / 673.0)) * (ethylbenzene + 0.5 * converted)
            made = made * converted * 0.6
            deb = deb + made
            slip = ethylene - converted
            benzene = benzene - converted + made
            ethylbenzene = ethylbenzene + converted - 2 * made
            exits.append(T)
        gaps = [HEAT_FLOW * (exits[k] - 0.46 * split[k + 1] - inlet[k + 1]) for k in range(3)]
        furnace = HEAT_FLOW * (inlet[0] - 523.0)
        money = self.prices.heat * sum(gaps) + self.prices.furnace * furnace
        cost = (money / 1e6 + self.prices.deb * 3.6 * deb) / 3600.0
        return np.array([cost, *self._margins(split, inlet, exits, at_inlet, excess, gaps, slip)])

    def _margins(
        self, split: Any, inlet: Any, exits: Any, at_inlet: Any, excess: Any, gaps: Any, slip: Any
    ) -> list[Any]:
        values: dict[str, tuple[Any, Any]] = {"effluent.flow of C2H4": (slip, 1.0)}
        for k in range(BEDS):
            values[f"bed {k + 1}.exit temperature"] = (exits[k], 1.0)
            values[f"bed {k + 1}.inlet temperature"] = (inlet[k], 1.0)
            values[f"bed {k + 1}.rise"] = (exits[k] - inlet[k], 1.0)
            values[f"bed {k + 1}.injected ethylene"] = (split[k], 1.0)
            values[f"bed {k + 1}.inlet ratio"] = (excess[k], at_inlet[k])
        for k in range(BEDS - 1):
            values[f"gap {k + 1}.heat removed"] = (gaps[k], 1.0)
        margins, weights = [], []
        for limit in self.limits:
            value, weight = values[limit.quantity]
            sign = 1.0 if limit.direction == "at least" else -1.0
            margins.append(sign * (value - limit.bound * weight))
            weights.append(weight)
        return margins + weights
