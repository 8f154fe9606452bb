"""Rating a train at many settings or samples of its parameters, on all processors from one process."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from reactorstage.bed.data import COMPOSITION
from reactorstage.bed.pack import shift_kinetics
from reactorstage.errors import CallError
from reactorstage.train.closing import closed, put
from reactorstage.train.parameters import FormRows, Parameter, pick, quick_forms, shifted
from reactorstage.train.passing import SEARCH
from reactorstage.train.states import states

if TYPE_CHECKING:
    from reactorstage.train.programme import Model, TrainProgramme

Array = NDArray[np.float64]

SHARE = 64
"""Settings that one thread takes at a time."""


@dataclass(frozen=True)
class Batch:
    """values (N, Q) of the quantities `names` in SI units of their `kinds`; not a number where absent.

    failures (N,) are empty or say where and why a train has no answer (its values are then not a number).
    """

    names: tuple[str, ...]
    kinds: tuple[str, ...]
    values: Array
    failures: tuple[str, ...]

    def of(self, name: str) -> Array:
        """All values (N,) of one quantity."""
        return self.values[:, self.names.index(name)]


def rate_many(
    programme: TrainProgramme,
    settings: Mapping[str, ArrayLike],
    *,
    quantities: Sequence[str] | None = None,
    jobs: int | None = None,
    tolerance: float = SEARCH,
) -> Batch:
    """Rate at N settings; equal to N single calls to the last digit, whatever the number of jobs.

    settings gives (N,) values for names: numbers of the case in SI units, or parameters of
    `reactorstage.train.parameters`, for which a value is a shift in SI units. Names that are not given
    stand as in the case. Approaches to equilibrium are found only when asked for by name; internal numbers
    of the heat ladder are found anew where the case has any. A train that is closed on itself is rated at its
    hottest state. jobs are threads (all processors when None).
    Raises CallError for unknown names or unequal lengths.
    """
    columns, count = _columns(programme.model, settings)
    rows = FormRows.of(quick_forms(programme.model, quantities))
    values, failures = np.full((count, len(rows.names)), np.nan), [""] * count

    def work(start: int) -> None:
        for i in range(start, min(start + SHARE, count)):
            shifts = {one: float(column[i]) for one, column in columns.items()}
            values[i], failures[i] = _one(programme, rows, shifts, tolerance)

    jobs = jobs or os.cpu_count() or 1
    with ThreadPoolExecutor(jobs) as pool:
        for _ in pool.map(work, range(0, count, SHARE)):
            pass
    return Batch(rows.names, rows.kinds, values, tuple(failures))


def _columns(model: Model, settings: Mapping[str, ArrayLike]) -> tuple[dict[Parameter, Array], int]:
    columns = {
        one: np.atleast_1d(np.asarray(settings[one.name], dtype=np.float64))
        for one in pick(model, list(settings))
    }
    for one in columns:
        if one.kind == COMPOSITION:
            raise CallError(f"{one.name} can be differentiated by, not set; write it into the case")
    lengths = {len(column) for column in columns.values()}
    if len(lengths) != 1:
        raise CallError(f"settings need columns of one length; these have {sorted(lengths) or 'none'}")
    return columns, lengths.pop()


def _one(
    programme: TrainProgramme, rows: FormRows, shifts: dict[Parameter, float], tolerance: float
) -> tuple[Any, str]:
    """Values (Q,) at one setting and the sentence of its failure."""
    model = programme.model
    moved = {one: amount for one, amount in shifts.items() if one.kind >= 0}
    if any(one.thermal for one in moved):
        programme = programme.with_chemistry(shifted(model.chemistry, moved))
        model, moved = programme.model, {}
        rows = FormRows.of(quick_forms(model, rows.names))
    x = np.array([number.now for number in programme.numbers])
    v = model.inputs.all_numbers(x)
    for one, amount in shifts.items():
        if one.kind < 0:
            v[one.index] = amount
    x[: len(model.inputs.free)] = v[model.inputs.free]
    kinetics = {(one.kind, one.index): amount * one.factor for one, amount in moved.items()}
    packed = shift_kinetics(model.passing.chemistry, kinetics) if moved else None
    if model.layout.closures:
        known = states(model, v, packed)
        if not known.states:
            return np.nan, known.why
        v = (
            known.states[0].v
            if tolerance >= SEARCH
            else closed(model, known.states[0].v, tolerance, packed).v
        )
        x = put(model, x, v)
    if len(x) > len(model.inputs.free):
        x = programme.complete(x)
    u, _ = model.inputs.of_numbers(v)
    nothing = np.zeros((len(u), 0))
    outcome = model.passing.adaptive(u, nothing, tolerance, chemistry=packed)
    if outcome.failure:
        return np.nan, outcome.failure
    base = model.base(outcome.out, u, nothing, x, model.found_in(set(rows.top.used.tolist())))
    return rows.of_base(base)[:, 0], ""
