"""Runs the compiled pass for one train: work space, tolerances, sentences for what went wrong."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed import integrate as status
from reactorstage.bed.compiled import first_call
from reactorstage.bed.cubic import VAPOUR_MARK
from reactorstage.bed.data import KIND, LAW, Beds, Chemistry, Index, Stages, Tolerance
from reactorstage.bed.gap_steps import MORE_THAN_THERE
from reactorstage.bed.sample import sample_bed
from reactorstage.bed.train_pass import train_pass
from reactorstage.train.layout import BedPlace, Layout

Array = NDArray[np.float64]

SEARCH, FINAL = 1e-5, 1e-7
"""Error per step relative to the feed of a bed while searching and for what is reported."""

ROOM = (80, 600, 4000)
"""Steps that a bed may take: more room is made only when the first does not do; the last caps the work."""

SENTENCES = {
    status.TOO_MANY_STEPS: "more integration steps would be needed than allowed",
    status.STEP_TOO_SMALL: "the integration cannot go on (steps become too small)",
    status.NO_PRESSURE: "the pressure is exhausted; less flow, a wider bed or larger particles would pass",
    status.TOO_HOT: "the temperature rises above the range of the species data",
    status.TOO_COLD: "the temperature falls below the range of the species data",
    status.NO_FLOW: "nothing flows into it",
    status.USED_UP: "a reactant is used up but its reaction runs on (an order of zero or below)",
    status.OTHER_PHASE: "the stream cannot be a {phase} there",
    MORE_THAN_THERE: "more is taken out than there is; lower what is removed or drawn off",
    status.FROZEN_FAILED: "the step sequence of another setting does not fit here",
}

WITHIN_DATA = {
    status.TOO_HOT: "a stream kept colder, or data that hold there, would pass",
    status.TOO_COLD: "a stream kept warmer, or data that hold there, would pass",
}


@dataclass(frozen=True)
class Outcome:
    """One pass: records and derivatives `out`, the step sequences, and how it ended.

    failure is empty, or a sentence with the place; code is the kernel's status.
    """

    out: Array
    stages: Stages
    code: int
    failure: str
    reached: int
    evaluations: int
    steps: int


@dataclass(frozen=True)
class Pass:
    """The compiled train of one case; data_ends says by status whose data end where."""

    chemistry: Chemistry
    beds: Beds
    layout: Layout
    named: Array
    data_ends: Mapping[int, str]

    def stages(self, most: int) -> Stages:
        """Empty step sequences of up to `most` steps."""
        n = self.chemistry.R + 1
        B = len(self.layout.beds)
        return Stages(np.zeros(B, np.int64), np.empty((B, most, 2 + 4 * n + 3)))

    def tolerance(self, flow: float, values_only: bool = False) -> Tolerance:
        """Newton goes to rounding where derivatives are taken, else well below the error of a step."""
        newton = min(1e-3 * flow, 1e-8) if values_only else min(1e-6 * flow, 1e-12)
        return Tolerance(flow, 100.0 * flow, newton, self.followed)

    @cached_property
    def followed(self) -> Array:
        """(S,) 1 for species that must be right relative to themselves, else 0.

        Those that a limit names, and those that a reaction of an order between 0 and 1 uses up for good.
        """
        S, R, L = self.chemistry.S, self.chemistry.R, self.chemistry.L
        start = 30 * S + R * (S + LAW)
        nu = self.chemistry.real[30 * S : 30 * S + R * S].reshape(R, S)
        order = self.chemistry.real[start : start + 2 * R * L].reshape(R, 2, L)
        whole = self.chemistry.whole[: R * (KIND + L)].reshape(R, KIND + L)
        found = self.named.copy()
        for r in np.flatnonzero(whole[:, 1] == 0):
            for s, n in zip(whole[r, KIND:], order[r, 0], strict=True):
                if s >= 0 and 0.0 < n < 1.0 and nu[r, s] < 0.0:
                    found[s] = 1.0
        return found

    def adaptive(
        self,
        u: Array,
        du: Array,
        flow: float = SEARCH,
        most: int | None = None,
        places: bool = True,
        moved: Index | None = None,
        chemistry: Chemistry | None = None,
    ) -> Outcome:
        """Integrate with steps chosen by error control at tolerance `flow`.

        moved (D, 2) names a parameter of the chemistry for each direction (see `reactorstage.bed.data`);
        chemistry replaces that of the case.
        """
        tolerance = self.tolerance(flow, values_only=du.shape[1] == 0)
        for room in ROOM if most is None else (most,):
            stages = self.stages(room)
            outcome = self._run(u, du, tolerance, False, places, stages, stages, moved, chemistry)
            if outcome.code != status.TOO_MANY_STEPS:
                break
        return outcome

    def frozen(
        self, u: Array, du: Array, mesh: Stages, places: bool = True, chemistry: Chemistry | None = None
    ) -> Outcome:
        """Integrate on the step sequences of an earlier pass; chemistry replaces that of the case."""
        stages = self.stages(max(1, int(mesh.counts.max())))
        tolerance = self.tolerance(SEARCH)
        return self._run(u, du, tolerance, True, places, stages, mesh, chemistry=chemistry)

    def _run(
        self,
        u: Array,
        du: Array,
        tolerance: Tolerance,
        frozen: bool,
        places: bool,
        stages: Stages,
        mesh: Stages,
        moved: Index | None = None,
        chemistry: Chemistry | None = None,
    ) -> Outcome:
        layout = self.layout
        out = np.empty((layout.rows, 1 + du.shape[1]))
        if moved is None:
            moved = np.full((du.shape[1], 2), -1, dtype=np.int64)
        with first_call(train_pass, not self.chemistry.nonideal):
            code, reached, depth, evaluations, steps = train_pass(
                chemistry or self.chemistry,
                self.beds,
                layout.operations,
                layout.compositions,
                u,
                du,
                moved,
                tolerance,
                frozen,
                places,
                stages,
                mesh,
                out,
            )
        failure = "" if code == status.DONE else f"{self._place(reached, depth)}: {self._sentence(code)}"
        return Outcome(out, stages, code, failure, reached, evaluations, steps)

    def _sentence(self, code: int) -> str:
        ends = self.data_ends.get(code)
        of_vapour = len(self.chemistry.state) > VAPOUR_MARK and self.chemistry.state[VAPOUR_MARK] == 1.0
        said = SENTENCES[code].format(phase="vapour" if of_vapour else "liquid")
        return f"{said} ({ends}); {WITHIN_DATA[code]}" if ends else said

    def _place(self, operation: int, depth: float) -> str:
        bed = next((bed for bed in self.layout.beds if bed.exit == operation), None)
        if bed is not None:
            percent = 100.0 * depth
            return f"{bed.owner} at {percent:{'.0f' if percent >= 1.0 else '.2g'}} % of its depth"
        place = next((p for p in self.layout.places if p.first <= operation <= p.last), None)
        return place.owner if place is not None else "the train"

    def sample(
        self, outcome: Outcome, bed: BedPlace, u: Array, points: int
    ) -> tuple[Array, Array, Array, Array, Array]:
        """w, T, p (N,), F (N, S), r (N, R) along a bed, N about `points`."""
        b = bed.number - 1
        count = int(outcome.stages.counts[b])
        R, S = self.chemistry.R, self.chemistry.S
        per_step = max(1, -(-points // max(count, 1)))
        N = count * per_step + 1
        w, T, p, F, r = np.zeros(N), np.zeros(N), np.zeros(N), np.zeros((N, S)), np.zeros((N, R))
        row = bed.inlet * self.layout.width
        if count == 0:
            record = outcome.out[row : row + self.layout.width, 0]
            F[0], p[0], T[0] = record[:S], record[S + 1], record[S + 2]
            return w, T, p, F, r
        with first_call(sample_bed, not self.chemistry.nonideal):
            sample_bed(
                self.chemistry,
                self.beds,
                b,
                row,
                outcome.out,
                u,
                bed.inputs,
                int(self.layout.operations[bed.exit][3]),
                outcome.stages,
                per_step,
                w,
                T,
                p,
                F,
                r,
            )
        return w, T, p, F, r
