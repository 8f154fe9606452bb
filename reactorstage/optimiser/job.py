"""What every phase of a search shares."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import dataclass

from reactorstage.optimiser.merge import Sameness, sameness
from reactorstage.optimiser.wrappers import Counted

Progress = Callable[[int, int, "float | None", str], None]


@dataclass(frozen=True)
class Job:
    """The programme, the number of threads, the stop, a listener and a typical change of cost.

    progress(done, total, best cost or None, text) is called from the thread that called the search.
    """

    programme: Counted
    jobs: int | None
    stop: threading.Event
    progress: Progress
    size: float = 1.0

    @property
    def rule(self) -> Sameness:
        """What makes two answers the same."""
        return sameness(self.programme.numbers, self.size)
