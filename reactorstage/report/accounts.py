"""Money per hour by label, against today, and how heat is priced, in words."""

from __future__ import annotations

from dataclasses import dataclass

from reactorstage.report.display import fixed, money, owners_text
from reactorstage.train.result import Rating

TOTAL = "total"
HEAT_OF = "heat of "
SUBTOTALS = ("heat",)
SILENT_WHEN_ZERO = ("soft limits",)


@dataclass(frozen=True)
class Account:
    """One line of money: currency per hour now and today (None: not compared)."""

    label: str
    now: float
    was: float | None

    @property
    def text(self) -> str:
        """`gap heat 74.3 (-21.7)`: now, and in brackets now minus today."""
        head = f"{self.label} {fixed(self.now, 1)}"
        return head if self.was is None else f"{head} ({signed(self.now - self.was)})"


def accounts(now: Rating, was: Rating | None = None) -> list[Account]:
    """Prices in the order of the case, heat by place (all gaps together), the total last."""
    new, old = _grouped(now), _grouped(was) if was is not None else {}
    rows = [
        Account(label, value, old.get(label, 0.0) if was is not None else None)
        for label, value in new.items()
    ]
    kept = [row for row in rows if row.now or row.was or row.label not in SILENT_WHEN_ZERO]
    return sorted(kept, key=lambda row: row.label == TOTAL)


def _grouped(rating: Rating) -> dict[str, float]:
    sums: dict[str, float] = {}
    for label, value in rating.money.items():
        if label not in SUBTOTALS:
            shown = money(value) or 0.0
            sums[_label(label)] = sums.get(_label(label), 0.0) + shown
    return sums


def _label(label: str) -> str:
    place = label.removeprefix(HEAT_OF)
    if place == label:
        return label
    return "gap heat" if place.startswith("gap ") else f"{place} heat"


def signed(value: float, decimals: int = 1) -> str:
    """A difference with its sign; a difference that rounds to nothing has none."""
    text = fixed(value, decimals)
    return text if text.startswith("-") or float(text) == 0.0 else f"+{text}"


def heat_words(rating: Rating) -> str:
    """How removed heat is priced, for the first line of every result."""
    levels = rating.case.heat_levels
    coolers = [level for level in levels.levels.values() if level.heats_up_to is None] if levels else []
    if not coolers:
        words = "no heat levels"
    elif all(level.earns is None for level in coolers):
        words = "heat at cost"
    elif all(level.costs is None for level in coolers):
        words = "heat earns"
    else:
        words = f"heat on {len(coolers)} levels"
    if not rating.unpriced:
        return words
    return f"{words}, {owners_text(rating.unpriced)} unpriced (!)" if coolers else "heat unpriced (!)"
