"""What limits at work are worth: bars of saving and cost for one step, re-solved."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from matplotlib.figure import Figure

from reactorstage.optimiser.result import Optimum, Worth
from reactorstage.report import look
from reactorstage.report.aim import aim_of
from reactorstage.report.bounds import step_text, worth_rows
from reactorstage.report.display import owners_text
from reactorstage.report.reach import size_text
from reactorstage.train.result import Rating

ROW, BOTTOM, TOP = 0.44, 0.62, 0.72
NAME_ROOM = 0.3
THICK = 0.34
BEYOND = 1.02


@dataclass(frozen=True)
class WorthBar:
    """A limit with its step in words; what relaxing saves and tightening costs, display units, or None.

    pays_for says how far relaxing goes on paying (`14 K`), where that is known and beyond the step.
    """

    name: str
    step: str
    saves: float | None
    costs: float | None
    pays_for: str = ""


def worth_bars(optimum: Optimum, rating: Rating) -> list[WorthBar]:
    """One per label, dearest first."""
    told = {index for index, state in enumerate(rating.limits) if state.quantity in rating.quantities}
    rows = worth_rows([worth for worth in optimum.worths if told.intersection(worth.limits)])
    aim = aim_of(rating)
    bars = [
        WorthBar(
            f"{row.together.label}, {owners_text(row.together.owners)}",
            step_text(row.together),
            aim.size(row.together.saves),
            aim.size(row.together.costs),
            _pays_for(row.together),
        )
        for row in rows
    ]
    return sorted(bars, key=lambda bar: -max(bar.saves or 0.0, bar.costs or 0.0))


def _pays_for(worth: Worth) -> str:
    """How far the saving of the first step goes on; empty where not beyond the step."""
    known = worth.reach is not None and worth.reach.holds > BEYOND * worth.step
    return size_text(worth.reach.holds, worth.kind) if known and worth.reach is not None else ""


def worths_figure(bars: Sequence[WorthBar], rating: Rating, title: str, status: str) -> Figure:
    """Two bars a limit: dark for what relaxing saves, light for what tightening costs."""
    height = TOP + BOTTOM + ROW * len(bars)
    figure = look.new_figure(height, title, status)
    axes = figure.add_axes((NAME_ROOM, BOTTOM / height, 0.93 - NAME_ROOM, ROW * len(bars) / height))
    top = max([*(bar.saves or 0.0 for bar in bars), *(bar.costs or 0.0 for bar in bars), 1e-12])
    for place, bar in enumerate(bars):
        for value, shift, colour in ((bar.saves, -0.19, look.MONEY), (bar.costs, 0.19, look.MONEY_LIGHT)):
            axes.barh(place + shift, value or 0.0, THICK, color=colour, edgecolor=look.MONEY, linewidth=0.6)
            axes.annotate(
                number_text(rating, value),
                (value or 0.0, place + shift),
                (3, 0),
                textcoords="offset points",
                va="center",
                fontsize=look.SMALL,
            )
    axes.set_yticks(range(len(bars)), [f"{bar.name}\nby {bar.step}" for bar in bars], fontsize=look.SMALL)
    axes.set_ylim(len(bars) - 0.5, -0.5)
    axes.set_xlim(0.0, 1.1 * top)
    axes.tick_params(axis="x", labelsize=look.TEXT - 0.5)
    axes.tick_params(axis="y", length=0)
    axes.set_xlabel(aim_of(rating).heading)
    look.key(
        figure,
        [
            look.KeyRow("one step more freedom saves", 6.0, look.SOLID, look.MONEY),
            look.KeyRow("one step less costs", 6.0, look.SOLID, look.MONEY_LIGHT),
        ],
        look.MONEY,
    )
    return figure


def number_text(rating: Rating, value: float | None) -> str:
    """A bar's number; words where re-solving found nothing inside the limits."""
    from reactorstage.report.aim import MONEY
    from reactorstage.report.display import fixed, readable

    if value is None:
        return "nothing found inside the limits"
    return fixed(value, 1) if aim_of(rating).kind == MONEY else readable(value)
