"""What a report is about."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from reactorstage.optimiser.programme import Programme
from reactorstage.optimiser.result import Optimum
from reactorstage.report.display import told
from reactorstage.train.result import Rating

if TYPE_CHECKING:
    from reactorstage.face import Optimisation
    from reactorstage.train.influence import Influence
    from reactorstage.train.programme import TrainProgramme
    from reactorstage.train.understanding import Understanding


@dataclass(frozen=True)
class Search:
    """What optimising adds to a rating: the search, the other distinct answers, the seed of its starts.

    influences say what moves the best cost.
    """

    programme: Programme
    optimum: Optimum
    others: tuple[Rating, ...]
    seed: int
    influences: tuple[Influence, ...] = ()


@dataclass(frozen=True)
class Reference:
    """The setting of another case that the report is compared with."""

    name: str
    rating: Rating


@dataclass(frozen=True)
class Subject:
    """A setting and what there is to say about it.

    now is the setting that the report shows, today the one that is set in the case (None when now is that
    setting itself or today has no answer at all); search is there when now was found by optimising.
    """

    now: Rating
    seen: Understanding
    today: Rating | None = None
    search: Search | None = None
    reference: Reference | None = None
    overrides: tuple[str, ...] = ()

    @property
    def status(self) -> str:
        """The status word: that of the search, else that of the rating."""
        return self.now.status if self.search is None else self.search.optimum.status

    @property
    def currency(self) -> str:
        return self.now.case.currency

    @property
    def behind(self) -> Rating | None:
        """Today's setting where it can be drawn and tabled beside this one."""
        return self.today if self.today is not None and not self.today.failure else None


def of_rating(
    programme: TrainProgramme,
    rating: Rating,
    reference: Reference | None = None,
    overrides: Sequence[str] = (),
) -> Subject:
    """The subject of a rating."""
    return Subject(rating, programme.understanding(told), reference=reference, overrides=tuple(overrides))


def of_optimum(
    outcome: Optimisation, reference: Reference | None = None, overrides: Sequence[str] = ()
) -> Subject:
    """The subject of an optimisation: its best answer or, when nothing was found, today's setting."""
    search = Search(outcome.programme, outcome.optimum, outcome.others, outcome.seed, outcome.influences)
    now, today = (outcome.best, outcome.today) if outcome.best is not None else (outcome.today, None)
    return Subject(now, outcome.programme.understanding(told), today, search, reference, tuple(overrides))
