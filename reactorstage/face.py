"""The Python face: load a case, rate it, optimise it. The command line does everything through here."""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from threading import Event

    import numpy as np
    from numpy.typing import ArrayLike, NDArray

    from reactorstage.case.model import Case
    from reactorstage.optimiser.asked import Asked
    from reactorstage.optimiser.result import Optimum
    from reactorstage.train.batch import Batch
    from reactorstage.train.influence import Influence
    from reactorstage.train.parameters import Sensitivities
    from reactorstage.train.programme import TrainProgramme
    from reactorstage.train.result import Rating

Progress = Callable[[int, int, "float | None", str], None]


@dataclass(frozen=True)
class Optimisation:
    """What `optimise` gives: the search, today's rating, the best answer rated, other distinct answers rated.

    best is None when nothing could be evaluated; with status "cannot meet all limits" it is the
    least-violating answer. influences say what moves the best cost, largest first. seconds is wall time.
    """

    case: Case
    programme: TrainProgramme
    optimum: Optimum
    today: Rating
    best: Rating | None
    others: tuple[Rating, ...]
    seconds: float
    seed: int
    influences: tuple[Influence, ...] = ()

    @property
    def status(self) -> str:
        return self.optimum.status

    def _repr_html_(self) -> str:
        """What notebooks show: the tables of the package's face."""
        from reactorstage import tables

        return tables(self)._repr_html_()


def compile(case: Case) -> TrainProgramme:
    """Compile a case into one function of its numbers; raises CaseProblems."""
    from reactorstage.train.programme import compile_case

    return compile_case(case)


def rate(case: Case) -> Rating:
    """Rate the train as the case states it.

    A train without an answer gives a Rating whose `failure` says where and why; raises CaseProblems.
    """
    return compile(case).rate()


def optimise(
    case: Case,
    *,
    starts: int = 20,
    seed: int = 1,
    jobs: int | None = None,
    progress: Progress | None = None,
    stop: Event | None = None,
    explain: bool = True,
) -> Optimisation:
    """Find the cheapest setting inside every limit and explain it.

    starts local searches (today's setting, designed ones, then random ones from seed) in jobs threads (all
    processors when None); the digits do not depend on jobs. progress(done, total, best cost or None,
    text) is called as work goes on; setting stop, or Ctrl-C, keeps the best answer so far.
    Raises CaseProblems for a case that chemistry or quantities find wrong.
    """
    from reactorstage.optimiser import optimise as search
    from reactorstage.optimiser.result import CANNOT

    begun = time.perf_counter()
    programme = compile(case)
    today = programme.rate()
    optimum = search(
        programme,
        starts=starts,
        seed=seed,
        jobs=jobs,
        progress=progress,
        stop=stop,
        explain=explain,
        asked=_asked(programme),
    )
    cannot = optimum.status == CANNOT
    rated = [programme.rate(programme.complete(a.x) if cannot else a.x) for a in optimum.answers]
    return Optimisation(
        case=case,
        programme=programme,
        optimum=optimum,
        today=today,
        best=rated[0] if rated else None,
        others=tuple(rated[1:]),
        seconds=time.perf_counter() - begun,
        seed=seed,
        influences=_influences(programme, optimum) if explain else (),
    )


def rate_many(
    case: Case | TrainProgramme,
    settings: Mapping[str, ArrayLike],
    *,
    quantities: Sequence[str] | None = None,
    jobs: int | None = None,
) -> Batch:
    """Rate at many settings or parameter samples; see `reactorstage.train.batch.rate_many`."""
    from reactorstage.train.batch import rate_many as many

    return many(_programme(case), settings, quantities=quantities, jobs=jobs)


def sensitivities(
    case: Case | TrainProgramme,
    x: NDArray[np.float64] | None = None,
    *,
    parameters: Sequence[str] | None = None,
    quantities: Sequence[str] | None = None,
) -> Sensitivities:
    """Exact derivatives of quantities by parameters; see `reactorstage.train.parameters.sensitivities`."""
    from reactorstage.train.parameters import sensitivities as found

    return found(_programme(case), x, parameters, quantities)


def _programme(case: Case | TrainProgramme) -> TrainProgramme:
    from reactorstage.train.programme import TrainProgramme

    return case if isinstance(case, TrainProgramme) else compile(case)


def _influences(programme: TrainProgramme, optimum: Optimum) -> tuple[Influence, ...]:
    """What moves the best answer; nothing where no answer is inside all limits."""
    from reactorstage.optimiser.result import INSIDE
    from reactorstage.train.influence import influences

    if optimum.status != INSIDE:
        return ()
    return influences(programme, optimum.best.x, optimum.best.multipliers)


def _asked(programme: TrainProgramme) -> Asked:
    """How settings of this case are entered, and which money says nothing."""
    from reactorstage.optimiser.asked import Asked, Sizes

    panel, money = programme.panel, programme.case.aim.quantity == "money.total"

    def sizes(x: NDArray[np.float64], cost: float) -> Sizes:
        size = programme.turnover(x) if money else abs(cost)
        return Sizes(panel.band(size), panel.least_gain(size))

    return Asked(panel.steps, panel.origins, sizes)
