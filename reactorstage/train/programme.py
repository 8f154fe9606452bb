"""A case compiled into one function of its numbers: quantities with exact derivatives.

`TrainProgramme` is what the optimiser sees (`reactorstage.optimiser.programme.Programme`) and what rates.
"""

from __future__ import annotations

from collections.abc import Callable, Container, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed.data import ENTHALPY, Beds
from reactorstage.bed.integrate import TOO_COLD, TOO_HOT
from reactorstage.bed.pack import ergun_terms, pack_beds, pack_chemistry
from reactorstage.errors import CaseProblems, ComputationError
from reactorstage.train.boundaries import (
    Boundary,
    Residual,
    boundaries_of,
    fill_boundaries,
    fill_residuals,
)
from reactorstage.train.chemistry import CaseChemistry, read_chemistry
from reactorstage.train.closures import residuals
from reactorstage.train.equilibria import Equilibrium, equilibria_of
from reactorstage.train.evaluation import Evaluation, FreeNumber, LimitRow, SplitGroup
from reactorstage.train.forms import Form, Linear, Rows, at, total
from reactorstage.train.heat import Ladder, build_ladder, residuals_of
from reactorstage.train.inputs import InputBuilder, InputMap
from reactorstage.train.layout import Layout, lay_out
from reactorstage.train.limits import Bound, expand_limits
from reactorstage.train.money import money_forms
from reactorstage.train.panel import Panel, read_panel
from reactorstage.train.passing import FINAL, SEARCH, Outcome, Pass
from reactorstage.train.quantities import Catalogue
from reactorstage.train.temperatures import highest_data, lowest_data

if TYPE_CHECKING:
    from reactorstage.bed.data import Stages
    from reactorstage.case.model import Case
    from reactorstage.chemistry.species import SpeciesTable
    from reactorstage.train.result import Rating
    from reactorstage.train.understanding import Understanding

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Model:
    """Everything compiled from a case; the base vector is records, inputs, what is found, x, hinges.

    Found from the records are equilibrium temperatures, dew or bubble temperatures, residual enthalpies.
    """

    case: Case
    chemistry: CaseChemistry
    layout: Layout
    inputs: InputMap
    ladder: Ladder
    residuals: tuple[Residual, ...]
    catalogue: Catalogue
    bounds: tuple[Bound, ...]
    aim: Form
    passing: Pass
    numbers: tuple[FreeNumber, ...]

    @property
    def x_start(self) -> int:
        return self.layout.rows + len(self.inputs.names) + len(self.catalogue.found) + len(self.residuals)

    @property
    def size(self) -> int:
        return self.x_start + len(self.numbers) + len(self.ladder.hinges)

    @cached_property
    def hinge_rows(self) -> tuple[Rows, Rows]:
        hinges = self.ladder.hinges
        return Rows.of([one.form for one in hinges]), Rows.of([one.width for one in hinges])

    @cached_property
    def wanted(self) -> tuple[Equilibrium | Boundary, ...]:
        """Temperatures to be found that a limit or the aim needs; a rating finds all of them."""
        forms = [self.aim.top, *(bound.form.top for bound in self.bounds)]
        return self.found_in({index for form in forms for index in form.terms})

    def found_in(self, used: Container[int]) -> tuple[Equilibrium | Boundary, ...]:
        """Temperatures to be found among positions of the base vector."""
        return tuple(one for one in self.catalogue.found if one.index in used)

    def base(
        self,
        out: Array,
        u: Array,
        du: Array,
        x: Array,
        found: Sequence[Equilibrium | Boundary],
        moved: NDArray[np.int64] | None = None,
    ) -> Array:
        """The base vector and its derivatives (size, 1 + D); D = 0 when out has values only.

        Only the given temperatures are found; the others are left at zero. Directions are those
        of x, or with moved (D, 2) those of the parameters and numbers that du and moved state.
        """
        D = out.shape[1] - 1
        base = np.zeros((self.size, 1 + D))
        rows, end = self.layout.rows, self.x_start + len(x)
        inputs = slice(rows, rows + len(u))
        base[:rows] = out
        base[inputs, 0] = u
        base[self.x_start : end, 0] = x
        if D:
            base[inputs, 1:] = du
            if moved is None:
                base[self.x_start : end, 1:] = np.eye(len(x))
        fill_residuals(self.residuals, self.passing.chemistry, self.layout, base)
        if self.ladder.hinges:
            forms, widths = self.hinge_rows
            above = forms.of_base(base)
            if moved is not None:
                above[:, 1:] -= self._held(base, moved)
            base[end:] = _hinged(above, widths.of_base(base))
        for one in found:
            if isinstance(one, Equilibrium):
                base[one.index] = one.temperature(self.chemistry, self.layout, base, moved)
        edges = [one for one in found if isinstance(one, Boundary)]
        fill_boundaries(edges, self.passing.chemistry, self.chemistry.fluid, self.layout, base)
        return base

    def partial_base(self, out: Array, u: Array, du: Array) -> Array:
        """Records and inputs of the base vector with their derivatives: what closures read."""
        base = np.zeros((self.layout.rows + len(u), out.shape[1]))
        base[: self.layout.rows] = out
        base[self.layout.rows :, 0] = u
        base[self.layout.rows :, 1:] = du
        return base

    def _held(self, base: Array, moved: NDArray[np.int64]) -> Array:
        """What a shift of a formation enthalpy adds to each hinge's stream at the level's temperature."""
        first = np.array([one.operation * self.layout.width for one in self.ladder.hinges])
        held = np.zeros((len(first), len(moved)))
        for d in np.flatnonzero(moved[:, 0] == ENTHALPY):
            held[:, d] = base[first + moved[d, 1], 0]
        return held


def _hinged(y: Array, width: Array) -> Array:
    """max(0, y) with derivatives, rounded by a parabola within +- width of zero."""
    w = np.maximum(np.abs(width[:, :1]), 1e-300)
    inside = np.abs(y[:, :1]) < w
    slope = np.where(inside, (y[:, :1] + w) / (2.0 * w), y[:, :1] > 0.0)
    out = slope * y
    out[:, :1] = np.where(inside, (y[:, :1] + w) ** 2 / (4.0 * w), out[:, :1])
    by_width = np.where(inside, (1.0 - (y[:, :1] / w) ** 2) / 4.0, 0.0)
    out[:, 1:] += by_width * width[:, 1:]
    return out


class TrainProgramme:
    """A compiled train, safe to call from several threads; raises CaseProblems when made of a wrong case."""

    def __init__(self, case: Case, chemistry: CaseChemistry | None = None):
        self.model = compile_model(case, chemistry)
        self.numbers: tuple[FreeNumber, ...] = self.model.numbers
        self.limits: tuple[LimitRow, ...] = tuple(bound.row for bound in self.model.bounds)
        self.splits: tuple[SplitGroup, ...] = self.model.layout.splits
        bounds, aim = self.model.bounds, self.model.aim
        forms = [*(one.margin() for one in bounds), *(one.weight() for one in bounds)]
        self._scales = np.array([bound.row.scale for bound in bounds])
        self._rows = Rows.of([*forms, aim.top, aim.bottom or Linear(const=1.0)])
        self._sign = 1.0 if case.aim.direction == "least" else -1.0
        self.panel: Panel = read_panel(case, self.numbers, aim.kind)

    @property
    def case(self) -> Case:
        return self.model.case

    def with_chemistry(self, chemistry: CaseChemistry) -> TrainProgramme:
        """The same case with other numbers in its chemistry."""
        return TrainProgramme(self.case, chemistry)

    @property
    def now(self) -> Array:
        """x at today's setting, internal numbers at their best."""
        return self.complete(np.array([number.now for number in self.numbers]))

    def start_mesh(self, x: Array, fine: bool = False) -> tuple[Evaluation, Any]:
        """Adaptive steps at search tolerance, or the final one; see `Programme`.

        A limit on what does not exist there is met, by its scale.
        """
        u, du = self.model.inputs.values(x)
        outcome = self.model.passing.adaptive(u, du, FINAL if fine else SEARCH)
        evaluation = self._evaluation(outcome, u, du, x)
        return evaluation, (outcome.stages if evaluation.ok else None)

    def evaluate(self, x: Array, mesh: Stages) -> Evaluation:
        """Values and derivatives on a frozen step sequence; see `Programme`."""
        u, du = self.model.inputs.values(x)
        return self._evaluation(self.model.passing.frozen(u, du, mesh), u, du, x)

    def final(self, x: Array) -> Evaluation:
        """As start_mesh, at the tight final tolerance."""
        return self.start_mesh(x, fine=True)[0]

    def complete(self, x: Array) -> Array:
        """x with its internal numbers at their best: closures closed, as far as they can be, then the books
        (heat above levels, slacks of soft limits)."""
        if self.model.layout.closures:
            from reactorstage.train.closing import closed_from

            x = closed_from(self.model, x)
        return self._with_books(x)

    def begin(self, x: Array) -> Array:
        """As `complete`, but where the train has gone out its closures stand open at the nearest fold: a
        search is free to choose numbers at which it is lit."""
        if self.model.layout.closures:
            from reactorstage.train.closing import begun_from

            x = begun_from(self.model, x)
        return self._with_books(x)

    def _with_books(self, x: Array) -> Array:
        books = [i for i, number in enumerate(self.numbers) if number.book]
        if not books:
            return x
        from reactorstage.train.complete import complete

        return complete(self, x, books)

    def rate(self, x: Array | None = None, dense: bool = True, tolerance: float = FINAL) -> Rating:
        """Rate the train at x (today's setting without it), at the final tolerance."""
        from reactorstage.train.rating import rate

        return rate(self, self.now if x is None else x, dense, tolerance)

    def understanding(self, tell: Callable[[float, str], str] | None = None) -> Understanding:
        """What was understood of the case, and what arithmetic can see to be in conflict.

        tell(value, kind) writes a number with its unit; by default in trade units.
        """
        from reactorstage.train.understanding import understand

        return understand(self, tell)

    def turnover(self, x: Array) -> float:
        """Sum of the absolute money terms at x, money per second: each price, and heat by place."""
        rating = self.rate(x, dense=False)
        return sum(abs(value) for label, value in rating.money.items() if label not in ("total", "heat"))

    def lagrangian_of(self, base: Array, multipliers: Array) -> Array:
        """(D,) derivatives of cost less limits times multipliers (M,), by the directions of a base vector."""
        M = len(self.limits)
        margin, weight, aim = np.split(self._rows.of_base(base), (M, 2 * M))
        cost = aim[0, 0] / aim[1, 0]
        cost_by = self._sign * (aim[0, 1:] - cost * aim[1, 1:]) / aim[1, 0]
        held = np.flatnonzero(multipliers)
        return np.asarray(cost_by - (multipliers[held] / weight[held, 0]) @ margin[held, 1:])

    def _evaluation(self, outcome: Outcome, u: Array, du: Array, x: Array) -> Evaluation:
        if outcome.failure:
            return Evaluation(outcome.failure, work=outcome.evaluations)
        base = self.model.base(outcome.out, u, du, x, self.model.wanted)
        M = len(self.limits)
        margin, weight, aim = np.split(self._rows.of_base(base), (M, 2 * M))
        if not (np.isfinite(aim).all() and aim[1, 0] != 0.0):
            return Evaluation("the aim has no value here", work=outcome.evaluations)
        missing = ~np.isfinite(margin).all(axis=1)
        if missing.any():
            margin[missing], weight[missing] = 0.0, 0.0
            margin[missing, 0], weight[missing, 0] = self._scales[missing], 1.0
        residual = residuals(self.model.layout.closures, base)
        cost = aim[0, 0] / aim[1, 0]
        cost_dx = (aim[0, 1:] - cost * aim[1, 1:]) / aim[1, 0]
        return Evaluation(
            "",
            self._sign * float(cost),
            self._sign * cost_dx,
            margin[:, 0].copy(),
            margin[:, 1:],
            weight[:, 0].copy(),
            weight[:, 1:],
            residual[:, 0].copy(),
            residual[:, 1:],
            outcome.evaluations,
        )


def compile_model(case: Case, chemistry: CaseChemistry | None = None) -> Model:
    """Chemistry, layout, heat, limits and money of a checked case; raises CaseProblems."""
    chemistry = chemistry or read_chemistry(case)
    inputs = InputBuilder()
    layout = lay_out(case, chemistry, inputs)
    return _Draft(case, chemistry, inputs, layout).finish()


@dataclass
class _Draft:
    """Positions are known only when the internal numbers are: built twice, the first time to count them."""

    case: Case
    chemistry: CaseChemistry
    inputs: InputBuilder
    layout: Layout
    residuals: tuple[Residual, ...] = ()

    def finish(self) -> Model:
        users = len(self.inputs.numbers) + len(self.inputs.unknowns)
        first = self.layout.rows + len(self.inputs.build().names)
        equilibria = equilibria_of(self.layout, self.chemistry, first)
        edges = boundaries_of(self.layout, self.chemistry.fluid, first + len(equilibria))
        self.residuals = residuals_of(
            self.case, self.chemistry.fluid, self.layout, first + len(equilibria) + len(edges)
        )
        x_start = first + len(equilibria) + len(edges) + len(self.residuals)
        counted = self._ladder(x_start, users, 0)
        draft = Catalogue(self.layout, self.chemistry, {}, self._levels(counted), equilibria, edges)
        draft = replace(draft, money=money_forms(self.case, draft, counted, Linear()))
        prices = [bound.row.soft_price for bound in expand_limits(self.case, draft, counted)]
        soft = [price for price in prices if price is not None]
        ladder = self._ladder(x_start, users, len(counted.internal) + len(soft))
        internal = [
            FreeNumber(name, 0.0, 0.0, self._most_heat(), "power", role="internal")
            for name in ladder.internal
        ]
        first_slack = x_start + users + len(internal)
        price = total([at(first_slack + k) * one for k, one in enumerate(soft)])
        catalogue = replace(draft, levels=self._levels(ladder))
        catalogue = replace(catalogue, money=money_forms(self.case, catalogue, ladder, price))
        bounds = expand_limits(self.case, catalogue, ladder)
        softened, slack_numbers = _soften(bounds, first_slack)
        numbers = (*self.inputs.numbers, *self.inputs.unknowns, *internal, *slack_numbers)
        return Model(
            case=self.case,
            chemistry=self.chemistry,
            layout=self.layout,
            inputs=self.inputs.build(),
            ladder=ladder,
            residuals=self.residuals,
            catalogue=catalogue,
            bounds=tuple(softened),
            aim=self._aim(catalogue),
            passing=Pass(
                pack_chemistry(self.chemistry.table, self.chemistry.laws, self.chemistry.fluid),
                _beds(self.case, self.chemistry, self.layout),
                self.layout,
                self._named(bounds),
                _data_ends(self.chemistry.table),
            ),
            numbers=numbers,
        )

    def _ladder(self, x_start: int, users: int, internal: int) -> Ladder:
        spans = self._outlet_spans()
        return build_ladder(
            self.case,
            self.chemistry,
            self.layout,
            spans,
            x_start + users + internal,
            x_start + users,
            self.residuals,
        )

    def _outlet_spans(self) -> dict[int, tuple[float, float]]:
        devices = [device for place in self.layout.places for device in place.devices]
        return {one.outlet: self.inputs.span(one.outlet) for one in devices if one.outlet >= 0}

    def _levels(self, ladder: Ladder) -> dict[str, Form]:
        names = self.case.heat_levels.levels if self.case.heat_levels else {}
        return {
            name: Form("power", total([form for (_, level), form in ladder.given.items() if level == name]))
            for name in names
        }

    def _most_heat(self) -> float:
        """A generous end of range for heat numbers: all feeds through 300 K at 300 J/(mol K)."""
        inputs = self.inputs.build()
        u, _ = inputs.of_numbers(np.array([number.high for number in inputs.numbers]))
        return 300.0 * 300.0 * float(sum(u[index] for index in self.layout.feed_flow.values()))

    def _aim(self, catalogue: Catalogue) -> Form:
        try:
            form = catalogue.find(self.case.aim.quantity)
        except LookupError as error:
            raise CaseProblems([self.case.problem(("aim",), str(error.args[0]))]) from error
        if form.absent:
            raise CaseProblems(
                [self.case.problem(("aim",), f"{self.case.aim.quantity} does not exist: {form.reason}")]
            )
        return form

    def _named(self, bounds: list[Bound]) -> Array:
        """1 for species whose flow a limit names: those must be right relative to themselves."""
        named = np.zeros(len(self.chemistry.species))
        for bound in bounds:
            words = bound.row.quantity.partition(".")[2]
            for s, name in enumerate(self.chemistry.species):
                if words.endswith((f" of {name}", f"/{name}", f"from {name}")):
                    named[s] = 1.0
        return named


def _data_ends(table: SpeciesTable) -> dict[int, str]:
    every = range(len(table.names))
    return {TOO_HOT: highest_data(table, every), TOO_COLD: lowest_data(table, every)}


def _soften(bounds: list[Bound], first: int) -> tuple[list[Bound], list[FreeNumber]]:
    """Soft limits get a slack number each, from position `first` on: margin + slack >= 0."""
    numbers: list[FreeNumber] = []
    softened: list[Bound] = []
    for bound in bounds:
        if bound.row.soft_price is None:
            softened.append(bound)
            continue
        slack = at(first + len(numbers))
        name = f"{bound.row.name}, beyond the limit"
        numbers.append(FreeNumber(name, 0.0, 0.0, 100.0 * bound.row.scale, bound.row.kind, role="internal"))
        softened.append(replace(bound, slack=slack))
    return softened, numbers


def _beds(case: Case, chemistry: CaseChemistry, layout: Layout) -> Beds:
    given = [section.bed for section in case.train if section.bed is not None]
    sizes = [
        ergun_terms(
            bed.diameter, bed.bulk_density, bed.void_fraction, bed.equivalent_size, case.fluid.viscosity
        )
        if bed.diameter and bed.bulk_density and bed.void_fraction and bed.equivalent_size
        else (0.0, 0.0)
        for bed in given
    ]
    return pack_beds(
        chemistry.laws,
        [bed.bulk_density or np.nan for bed in given],
        [bed.void_fraction or np.nan for bed in given],
        sizes,
        [[(point.at, point.is_) for point in bed.activity_along_depth or ()] for bed in given],
    )


def compile_case(case: Case) -> TrainProgramme:
    """Compile a case; raises CaseProblems for what the chemistry or the names of quantities find wrong."""
    return TrainProgramme(case)


__all__ = ["ComputationError", "Model", "TrainProgramme", "compile_case"]
