"""Names beside the rows of a chart: how much room they take, and names that are too long over two lines."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

from reactorstage.report.page.chart import LINE, WIDTH, Label

LETTER, BESIDE = 6.3, 14.0
LEAST, MOST = 60.0, 0.46 * WIDTH
MOST_LINES = 2


def room_for(names: Sequence[str]) -> float:
    """Pixels from the left edge to where the rows begin."""
    longest = max((len(name) for name in names), default=0)
    return min(max(LETTER * longest + BESIDE, LEAST), MOST)


def lines_of(name: str, room: float) -> list[str]:
    """A name in the lines that fit into the room; what is longer than two ends in dots."""
    letters = int((room - BESIDE) / LETTER)
    return textwrap.wrap(name, letters, max_lines=MOST_LINES, placeholder=" ...") or [name[:letters]]


def name_labels(x: float, y: float, name: str, room: float, middle: float = 4.0) -> list[Label]:
    """Labels that end left of x, their lines about the given pixels below y."""
    lines = lines_of(name, room)
    first = middle - LINE * (len(lines) - 1) / 2
    return [Label(x, y, line, "end", (-BESIDE / 2, first + LINE * k)) for k, line in enumerate(lines)]
