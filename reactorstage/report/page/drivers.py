"""What moves the answer, as a chart: each name over its bar, so that long names need no room beside it."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from reactorstage.report import look
from reactorstage.report.aim import MONEY, Aim
from reactorstage.report.drivers import Driver, aim_change, change_text
from reactorstage.report.page.chart import TOP, Bar, Chart, Curve, Label

ROW = 36.0
LEFT = 6.0
ROOM = 0.17
WORSE, BETTER = look.INK, look.LIMIT


def driver_chart(rows: Sequence[Driver], aim: Aim) -> Chart:
    """Bars to the right where what is aimed at rises, to the left where it falls, largest on top."""
    sizes = [aim_change(row.change, aim) for row in rows]
    most = max(map(abs, sizes))
    low, high = min(0.0, *sizes), max(0.0, *sizes)
    ends = low - ROOM * most * (low < 0.0), high + ROOM * most * (high > 0.0)
    bottom = TOP + ROW * len(rows)
    return Chart(
        key="drivers",
        title=f"Change of the best {'cost' if aim.kind == MONEY else aim.quantity}",
        alt="; ".join(f"{row.words} {change_text(row.change, aim)}" for row in rows) + ".",
        x_name=f"change, {aim.unit or 'its number'}",
        y_name="",
        x_range=ends,
        y_range=(-len(rows) + 0.5, 0.5),
        curves=tuple(_zero(k) for k in range(len(rows))),
        labels=tuple(
            label
            for k, (row, size) in enumerate(zip(rows, sizes, strict=True))
            for label in (_name(k, row, ends[0]), _number(k, size, change_text(row.change, aim)))
        ),
        bars=tuple(_bar(k, row, size) for k, (row, size) in enumerate(zip(rows, sizes, strict=True))),
        legend=(("reach", WORSE, "makes the best worse"), ("reach", BETTER, "makes it better")),
        bare_y=True,
        left=LEFT,
        bottom=bottom,
    )


def _zero(k: int) -> Curve:
    """A stroke at zero beside the bar, so that no line runs through the names."""
    return Curve(np.zeros(2), np.array([-k - 0.42, -k + 0.1]), look.INK, "plain")


def _name(k: int, row: Driver, low: float) -> Label:
    return Label(low, -k + 0.5, row.words, "start", (2.0, 13.0))


def _bar(k: int, row: Driver, size: float) -> Bar:
    return Bar((0.0, size), (-k - 0.34, -k + 0.02), WORSE if row.change > 0.0 else BETTER, "reach")


def _number(k: int, size: float, text: str) -> Label:
    right = size >= 0.0
    return Label(size, -k - 0.16, text, "start" if right else "end", (4.0 if right else -4.0, 4.0))
