"""Derivatives of all quantities by the numbers and parameters of a case, from the same pass as the values.

Names: every number of the case under its own name (`bed 1.catalyst activity`, `feed ethylene.temperature`),
and, in SI units,

    reaction R.ln rate constant             1          shift of ln k at its reference temperature
    reaction R.activation energy            J/mol
    reaction R.ln adsorption constant J     1          J counts the terms of the denominator from 1
    reaction R.adsorption heat J            J/mol
    species S.enthalpy of formation         J/mol
    species S.entropy                       J/(mol K)
    feed F.mole fraction of S               1          the others unchanged, so the feed grows with it
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from difflib import get_close_matches
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from reactorstage.bed import data as kernel
from reactorstage.chemistry.constants import R_GAS
from reactorstage.chemistry.rate_law import RateLaws
from reactorstage.errors import CallError, ComputationError
from reactorstage.train.closures import residuals
from reactorstage.train.forms import Form, Linear, Rows

if TYPE_CHECKING:
    from reactorstage.train.chemistry import CaseChemistry
    from reactorstage.train.programme import Model, TrainProgramme

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Parameter:
    """A number of the case (kind -1, index in v) or a parameter of its chemistry (kind, index, factor).

    factor converts from the kernel's unit of the derivative to SI.
    """

    name: str
    kind: int
    index: int
    factor: float = 1.0

    @property
    def thermal(self) -> bool:
        """Whether it changes enthalpies or entropies, so that more than the kernel depends on it."""
        return self.kind in (kernel.ENTHALPY, kernel.ENTROPY)


@dataclass(frozen=True)
class Sensitivities:
    """values (Q,) of the quantities `names` and their derivatives (Q, P) by `parameters`, all in SI.

    Not a number where a quantity does not exist.
    """

    names: tuple[str, ...]
    kinds: tuple[str, ...]
    values: Array
    parameters: tuple[str, ...]
    derivatives: Array


def parameters_of(model: Model) -> tuple[Parameter, ...]:
    """All numbers and parameters of a case that a pass depends on."""
    return (*_numbers(model), *_kinetics(model), *_thermochemistry(model), *_compositions(model))


def _numbers(model: Model) -> Iterator[Parameter]:
    for index, number in enumerate(model.inputs.numbers):
        if number.internal:
            continue
        yield Parameter(number.name, -1, index)


def _kinetics(model: Model) -> Iterator[Parameter]:
    laws = model.chemistry.laws
    for r, name in enumerate(model.chemistry.reactions):
        yield Parameter(f"reaction {name}.ln rate constant", kernel.LN_K, r)
        yield Parameter(f"reaction {name}.activation energy", kernel.E_OVER_R, r, 1.0 / R_GAS)
        terms = range(laws.term_start[laws.den_start[r]], laws.term_start[laws.den_start[r + 1]])
        for count, term in enumerate(terms, start=1):
            yield Parameter(f"reaction {name}.ln adsorption constant {count}", kernel.LN_K_TERM, term)
            yield Parameter(f"reaction {name}.adsorption heat {count}", kernel.H_TERM, term, 1.0 / R_GAS)


def _thermochemistry(model: Model) -> Iterator[Parameter]:
    for s, name in enumerate(model.chemistry.species):
        yield Parameter(f"species {name}.enthalpy of formation", kernel.ENTHALPY, s)
        yield Parameter(f"species {name}.entropy", kernel.ENTROPY, s)


def _compositions(model: Model) -> Iterator[Parameter]:
    S = model.layout.species
    for f, feed in enumerate(model.layout.feeds):
        for s in np.flatnonzero(model.layout.compositions[f]):
            name = f"feed {feed}.mole fraction of {model.chemistry.species[s]}"
            yield Parameter(name, kernel.COMPOSITION, f * S + int(s))


def pick(model: Model, wanted: Sequence[str] | None) -> tuple[Parameter, ...]:
    """Parameters by name, all when none are asked for; CallError for a name that does not exist."""
    known = {one.name: one for one in parameters_of(model)}
    if wanted is None:
        return tuple(known.values())
    for name in wanted:
        if name not in known:
            near = get_close_matches(name, known, n=3, cutoff=0.5)
            raise CallError(
                f"there is no parameter {name!r}" + (f"; near: {', '.join(near)}" if near else "")
            )
    return tuple(known[name] for name in wanted)


def listed_forms(model: Model, wanted: Sequence[str] | None = None) -> dict[str, Form]:
    """Forms of the quantities by name: those asked for, or all that a result lists and that exist."""
    if wanted is not None:
        try:
            return {name: model.catalogue.find(name) for name in wanted}
        except LookupError as error:
            raise CallError(str(error.args[0])) from error
    forms = {name: model.catalogue.find(name) for name in model.catalogue.names()}
    return {name: form for name, form in forms.items() if not form.absent}


def quick_forms(model: Model, wanted: Sequence[str] | None = None) -> dict[str, Form]:
    """As `listed_forms`, but without equilibrium temperatures unless they are asked for by name."""
    forms = listed_forms(model, wanted)
    if wanted is not None:
        return forms
    slow = {one.index for one in model.catalogue.found}
    return {name: form for name, form in forms.items() if slow.isdisjoint(form.top.terms)}


@dataclass(frozen=True)
class FormRows:
    """Many quantities at once: numerators, denominators, and which of them are ratios."""

    names: tuple[str, ...]
    kinds: tuple[str, ...]
    top: Rows
    bottom: Rows

    @classmethod
    def of(cls, forms: dict[str, Form]) -> FormRows:
        one = Linear(const=1.0)
        return cls(
            tuple(forms),
            tuple(form.kind for form in forms.values()),
            Rows.of([form.top for form in forms.values()]),
            Rows.of([form.bottom or one for form in forms.values()]),
        )

    def of_base(self, base: Array) -> Array:
        """Values and derivatives (Q, 1 + D); not a number where a quantity does not exist."""
        top, bottom = self.top.of_base(base), self.bottom.of_base(base)
        under = np.where(bottom[:, :1] > 1e-12, bottom[:, :1], np.nan)
        out = top / under
        out[:, 1:] -= out[:, :1] * bottom[:, 1:] / under
        return out


def sensitivities(
    programme: TrainProgramme,
    x: Array | None = None,
    parameters: Sequence[str] | None = None,
    quantities: Sequence[str] | None = None,
    tolerance: float | None = None,
) -> Sensitivities:
    """Derivatives of quantities by parameters at x (today's setting without it), numbers x standing still.

    Unknowns of closures move along, so that these stay closed.

    One pass, exact to rounding for its step sequence. Raises CallError for unknown names and
    ComputationError where the train has no answer.
    """
    from reactorstage.train.passing import FINAL

    model = programme.model
    x = programme.now if x is None else x
    picked = pick(model, parameters)
    forms = listed_forms(model, quantities)
    v = model.inputs.all_numbers(x)
    u, du_dv = model.inputs.of_numbers(v)
    du, moved = directions(picked, du_dv)
    if model.layout.closures:
        v = closed_or_raise(model, v, tolerance or FINAL)
        u, du_dv = model.inputs.of_numbers(v)
        du, moved = with_unknowns(model, directions(picked, du_dv), du_dv)
    outcome = model.passing.adaptive(u, du, tolerance or FINAL, moved=moved)
    if outcome.failure:
        raise ComputationError(outcome.failure)
    base = model.base(outcome.out, u, du, x, model.catalogue.found, moved=moved)
    base = eliminated(model, base, len(picked))
    found = FormRows.of(forms).of_base(base)
    factors = np.array([one.factor for one in picked])
    return Sensitivities(
        tuple(forms),
        tuple(form.kind for form in forms.values()),
        found[:, 0],
        tuple(one.name for one in picked),
        found[:, 1:] * factors,
    )


def directions(picked: Sequence[Parameter], du_dv: Array) -> tuple[Array, NDArray[np.int64]]:
    """du (U, P) and moved (P, 2) of the kernel for parameters."""
    du = np.zeros((du_dv.shape[0], len(picked)))
    moved = np.full((len(picked), 2), -1, dtype=np.int64)
    for d, one in enumerate(picked):
        if one.kind < 0:
            du[:, d] = du_dv[:, one.index]
        else:
            moved[d] = one.kind, one.index
    return du, moved


def closed_or_raise(model: Model, v: Array, tolerance: float) -> Array:
    """v (V,) with its closures closed; ComputationError where they cannot be."""
    from reactorstage.train.closing import closed

    solved = closed(model, v, tolerance)
    if solved.failure:
        raise ComputationError(solved.failure)
    return solved.v


def with_unknowns(
    model: Model, given: tuple[Array, NDArray[np.int64]], du_dv: Array
) -> tuple[Array, NDArray[np.int64]]:
    """Directions with those of the unknowns of closures behind them."""
    inputs = model.inputs
    unknown = inputs.free[len(inputs.free) - inputs.unknowns :]
    moved = np.full((len(unknown), 2), -1, dtype=np.int64)
    return np.ascontiguousarray(np.hstack([given[0], du_dv[:, unknown]])), np.vstack([given[1], moved])


def eliminated(model: Model, base: Array, count: int) -> Array:
    """The base vector with derivatives by `count` parameters while the closures stay closed.

    dR = R_p dp + R_y dy = 0 gives what the unknowns y, whose directions stand behind, add.
    """
    if not model.layout.closures:
        return base
    rows = residuals(model.layout.closures, base)
    y_dp = -np.linalg.solve(rows[:, 1 + count :], rows[:, 1 : 1 + count])
    moved = base[:, 1 + count :] @ y_dp
    return np.asarray(base[:, : 1 + count] + np.pad(moved, ((0, 0), (1, 0))))


def shifted(chemistry: CaseChemistry, shifts: dict[Parameter, float]) -> CaseChemistry:
    """The chemistry with parameters shifted by SI amounts (numbers of the case and compositions apart)."""
    laws, table = chemistry.laws, chemistry.table
    arrays = {
        name: getattr(laws, name).copy() for name in ("lnk_ref", "E_over_R", "term_lnK_ref", "term_H_over_R")
    }
    coefficients = table.coefficients.copy()
    rows = {kernel.LN_K: "lnk_ref", kernel.E_OVER_R: "E_over_R"}
    rows |= {kernel.LN_K_TERM: "term_lnK_ref", kernel.H_TERM: "term_H_over_R"}
    for one, amount in shifts.items():
        if one.kind in rows:
            arrays[rows[one.kind]][one.index] += amount * one.factor
        elif one.kind == kernel.ENTHALPY:
            coefficients[one.index, :, 7] += amount / R_GAS
        elif one.kind == kernel.ENTROPY:
            coefficients[one.index, :, 8] += amount / R_GAS
    new_laws: RateLaws = replace(laws, **arrays)
    return replace(chemistry, laws=new_laws, table=replace(table, coefficients=coefficients))
