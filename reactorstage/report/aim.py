"""What the case makes least or most, and how differences of it read: money as a rule, not always."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from reactorstage.report.display import difference, difference_kind, fixed, readable, shown, told, unit
from reactorstage.train.result import Rating

if TYPE_CHECKING:
    from reactorstage.case.model import Case

MONEY = "money rate"
SAME = 0.05


@dataclass(frozen=True)
class Aim:
    """A quantity with its kind and unit of differences.

    A cost is sign times the quantity in SI: lower is better, whatever the aim.
    """

    quantity: str
    kind: str
    sign: float
    unit: str

    @property
    def heading(self) -> str:
        """`EUR/h`, or the quantity with its unit where it is not money."""
        return self.unit if self.kind == MONEY else f"{self.quantity} in {self.unit or 'its number'}"

    def size(self, cost: float | None) -> float | None:
        """A difference of cost in display units."""
        return difference(cost, self.kind)

    def number(self, cost: float | None) -> str:
        """A difference of cost as tables print it."""
        size = self.size(cost)
        return fixed(size, 1) if self.kind == MONEY else readable(size)

    def worse(self, cost: float) -> str:
        """`costs 7.9 EUR/h more`, `is worse by 0.20 %`, `costs the same`."""
        if self.same(cost):
            return "costs the same"
        size = f"{self.number(cost)} {self.unit}".rstrip()
        return f"costs {size} more" if self.kind == MONEY else f"is worse by {size}"

    def same(self, cost: float) -> bool:
        """Whether a difference of cost is too small to be shown."""
        return self.kind == MONEY and abs(self.size(cost) or 0.0) < SAME

    def value(self, cost: float | None) -> float | None:
        """The quantity, in display units, that belongs to a cost."""
        return None if cost is None else shown(self.sign * cost, self.kind)

    def told(self, cost: float) -> str:
        """What is aimed at, with its unit: `979.8 EUR/h`, `87.1 %`."""
        if self.kind == MONEY:
            return f"{fixed(self.value(cost), 1)} {self.unit}"
        return told(self.sign * cost, self.kind)


def aim_of(rating: Rating) -> Aim:
    """The aim of the case that was rated."""
    known = rating.quantities.get(rating.case.aim.quantity)
    return aim_in(rating.case, MONEY if known is None else known.kind)


def aim_in(case: Case, kind: str) -> Aim:
    """The aim of a case, whose quantity is of this kind."""
    sign = 1.0 if case.aim.direction == "least" else -1.0
    return Aim(case.aim.quantity, kind, sign, unit(difference_kind(kind), case.currency))


def cost_difference(one: Rating, other: Rating) -> float | None:
    """Cost of one rating minus that of another, SI; None where the aim has no value."""
    aim = aim_of(one)
    values = [rating.quantities[aim.quantity].value if aim.quantity in rating.quantities else None
              for rating in (one, other)]  # fmt: skip
    if values[0] is None or values[1] is None:
        return None
    return aim.sign * (values[0] - values[1])
