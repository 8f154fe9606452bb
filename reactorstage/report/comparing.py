"""Comparing ratings, optima and result files: the one way to a Comparison."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from reactorstage.errors import ComputationError
from reactorstage.report.comparison import Comparison, compared
from reactorstage.report.read_result import read_result
from reactorstage.report.result_json import optimum_json, plain_content, rating_json

if TYPE_CHECKING:
    from reactorstage.face import Optimisation
    from reactorstage.train.result import Rating

Json = dict[str, Any]


def compare(
    first: Rating | Optimisation | Path | str,
    second: Rating | Optimisation | Path | str,
    names: tuple[str, str] | None = None,
) -> Comparison:
    """Two settings of like trains side by side, second against first.

    Each is a rating, an optimisation (its best answer) or the path of a result file; names are what the
    comparison calls them, by default the names of their cases. Raises CallError for unlike trains and for
    result files that are broken or of another version, ComputationError where there is no answer.
    """
    one, other = content_of(first), content_of(second)
    return compared(one, other, names or (one["case"]["name"], other["case"]["name"]))


def content_of(what: Rating | Optimisation | Path | str) -> Json:
    """The content of a result as its file has it."""
    from reactorstage.face import Optimisation

    if isinstance(what, (str, Path)):
        return read_result(Path(what))
    if isinstance(what, Optimisation):
        if what.best is None:
            raise ComputationError(f"{what.case.name} has no answer to compare")
        content = optimum_json(
            what.programme, what.optimum, what.today, what.best, what.others, what.seed, (), what.influences
        )
        return plain_content(content)
    if what.failure:
        raise ComputationError(f"{what.case.name} has no answer to compare: {what.failure}", what)
    return plain_content(rating_json(what))
