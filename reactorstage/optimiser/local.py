"""One start to its end: descend, and where limits stay broken, give way first and descend again."""

from __future__ import annotations

import threading
from dataclasses import replace

from reactorstage.optimiser.elastic import give_way
from reactorstage.optimiser.programme import Array, Programme
from reactorstage.optimiser.solve import Ending, descend

RESTORED = 1e-6
HALVINGS = 5


def local_solve(
    programme: Programme,
    x: Array,
    size: float,
    *,
    home: Array | None = None,
    stop: threading.Event | None = None,
) -> Ending:
    """Local optimum from x; a start that cannot be evaluated is drawn towards home.

    The counts of all the attempts are added up.
    """
    ending = started(programme, x, size, home, stop)
    if ending.feasible or ending.x is None or ending.stopped:
        return ending
    gave, total = give_way(programme, ending, stop)
    gave = with_counts_of(gave, ending)
    if total > RESTORED or gave.x is None:
        return gave
    return with_counts_of(descend(programme, gave.x, size, stop=stop), gave)


def with_counts_of(ending: Ending, earlier: Ending) -> Ending:
    """The ending with the iterations and evaluations of an earlier one added."""
    return replace(
        ending,
        iterations=ending.iterations + earlier.iterations,
        evaluations=ending.evaluations + earlier.evaluations,
    )


def started(
    programme: Programme, x: Array, size: float, home: Array | None, stop: threading.Event | None
) -> Ending:
    """Descend from x, or from the first of the points halfway to home that can be evaluated."""
    ending = descend(programme, x, size, stop=stop)
    for _ in range(HALVINGS):
        if home is None or ending.x is not None or ending.stopped:
            break
        x = 0.5 * (x + home)
        ending = with_counts_of(descend(programme, x, size, stop=stop), ending)
    return ending
