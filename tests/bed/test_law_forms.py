"""Every form of a rate law inside the compiled bed, with activities by reaction and along depth.

Independent programs: `reactorstage.chemistry.rates` for values, `reference` by complex step for slopes.
"""

from __future__ import annotations

from copy import deepcopy
from dataclasses import replace
from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from reactorstage.chemistry import (
    Constant,
    Denominator,
    Polynomial,
    RateLaw,
    Term,
    Thiele,
    basis_factors,
    rates,
)
from reactorstage.chemistry.orders import singular
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import Tree, edges, programme
from tests.bed.laws import with_laws
from tests.bed.reference import Gas, Twin
from tests.bed.test_rates import EQUATIONS, SEEN, T_REF, TOTALS, bed

RANGE = {"from": 0.5, "to": 1.0}
ACTIVITY = {"every reaction": {"now": 0.9, **RANGE}, "nitric": {"now": 0.7, **RANGE}}
DEPTHS = (
    [(0.0, 0.2), (0.3, 1.0)],
    [(0.0, 1.0), (0.2, 0.4), (0.55, 0.4), (1.0, 0.9)],
    [(0.1, 0.0), (0.4, 1.2)],
)


@st.composite
def random_cases(draw: Any) -> tuple[Tree, list[RateLaw]]:
    """A bed whose feed may lack what the laws make, with laws of every form."""
    tree = deepcopy(bed())
    shares = tree["feeds"]["gas"]["composition"]
    for name in ("SO3", "NO"):
        shares[name] = draw(st.sampled_from(["0 %", "0.02 %", "3 %"]))
    inner = tree["train"][1]["bed 1"]
    if draw(st.booleans()):
        inner["catalyst activity"] = ACTIVITY
    if draw(st.booleans()):
        points = draw(st.sampled_from(DEPTHS))
        inner["activity along depth"] = [{"at": at, "is": share} for at, share in points]
    return tree, [_law(draw, label, nu) for label, nu in EQUATIONS.items()]


def _law(draw: Any, label: str, nu: dict[str, float]) -> RateLaw:
    driver, reversible = draw(st.sampled_from(list(TOTALS))), draw(st.booleans())
    made = next(name for name, n in nu.items() if n > 0.0)
    used = next(name for name, n in nu.items() if n < 0.0)
    m = draw(st.sampled_from([1.0, 2.0]))
    orders = {name: 1.0 if reversible else draw(st.sampled_from([1.0, 1.5])) for name in nu if nu[name] < 0.0}
    orders |= {used: draw(st.sampled_from([0.5, 1.0, -0.5])), made: draw(st.sampled_from([-1.0, -0.5, 0.3]))}
    size = float(np.log(0.02 * draw(st.floats(0.3, 3.0))) - sum(orders.values()) * np.log(TOTALS[driver]))
    law = RateLaw(
        label,
        nu,
        orders,
        Constant(size, T_REF, draw(st.floats(3e3, 1.2e4)), draw(st.sampled_from([0.0, -3.0])), 1e-3),
        driver,
        reversible,
        m=m,
        denominators=(_factor(draw, driver, made),) if draw(st.booleans()) else (),
        K=_own_K(draw, label) if draw(st.booleans()) else None,
        effectiveness=_effectiveness(draw, used, made),
    )
    return replace(law, floors={name: draw(st.sampled_from([1e-3, 1e-2])) for name in singular(law)})


def _factor(draw: Any, driver: str, made: str) -> Denominator:
    terms = [Term(Constant(0.0), {})]
    for name in (made, "O2"):
        n = draw(st.sampled_from([0.5, 1.0, -0.3])) if name == made else 1.0
        ln_K = float(np.log(draw(st.floats(0.3, 5.0))) - n * np.log(TOTALS[driver]))
        terms.append(Term(Constant(ln_K, T_REF, draw(st.floats(-5e3, 2e3)), 1.5, -2e-3), {name: n}))
    return Denominator(tuple(terms), draw(st.sampled_from([1.0, 2.0, 0.5])))


def _own_K(draw: Any, label: str) -> Constant:
    ln_K, heat = {"oxidation": (5.0, -11e3), "nitric": (-14.0, 11e3)}[label]
    return Constant(ln_K + draw(st.floats(-1.0, 1.0)), 700.0, heat, 0.3, 1e-4)


def _effectiveness(draw: Any, used: str, made: str) -> Polynomial | Thiele | None:
    return draw(
        st.sampled_from(
            [
                None,
                Polynomial((0.6,)),
                Polynomial((-1.0, 3e-3, -1e-6), (0.4, -0.3), used, made),
                Thiele(2e-3, 2e-6, used, "slab", 1300.0),
                Thiele(3e-3, 1e-6, used, "sphere", 1300.0),
            ]
        )
    )


def train_of(case: tuple[Tree, list[RateLaw]]) -> TrainProgramme:
    tree, laws = case
    return with_laws(programme(tree), laws)


@settings(max_examples=60)
@given(random_cases())
def test_rates_along_a_bed_are_those_of_the_law_in_numpy(case: tuple[Tree, list[RateLaw]]) -> None:
    train = train_of(case)
    rating = train.rate()
    assert not rating.failure, rating.failure
    chemistry, profile = train.model.chemistry, rating.profiles[0]
    inner = case[0]["train"][1]["bed 1"]
    each = np.array([0.9, 0.7 if inner["catalyst activity"] is ACTIVITY else 0.9])
    points = inner.get("activity along depth", [{"at": 0, "is": 1.0}])
    shares = [one["is"] for one in points]
    depth = np.interp(profile.w / profile.w[-1], [one["at"] for one in points], shares)
    rows = zip(profile.F, profile.T, profile.p, depth, strict=True)
    factors = each * basis_factors(chemistry.laws, 1.0, 1.0)
    expected = np.array([rates(chemistry.laws, chemistry.table, F, T, p, factors * d) for F, T, p, d in rows])
    assert np.abs(profile.r - expected).max() < 1e-10 * np.abs(expected).max()


@settings(max_examples=40)
@given(random_cases())
def test_derivatives_of_every_form_are_those_of_a_complex_step(case: tuple[Tree, list[RateLaw]]) -> None:
    train = train_of(case)
    x = np.array([number.now for number in train.numbers])
    mesh = train.model.passing.adaptive(*train.model.inputs.values(x), 1e-3).stages
    found, twin = train.evaluate(x, mesh), _twin(train, x, edges(mesh))
    for i, (name, scale) in enumerate(zip(SEEN, (10.0, 10.0, 100.0, 1e4), strict=True)):
        slopes = twin[name].imag / 1e-20
        away = np.abs(found.margin_dx[i] * x - slopes).max()
        assert away < 1e-9 * max(scale, np.abs(slopes).max()), name


def _twin(train: TrainProgramme, x: np.ndarray, steps: list[np.ndarray]) -> dict[str, np.ndarray]:
    moved = x[:, None] * (1.0 + 1j * 1e-20 * np.eye(len(x)))
    values = {number.name: row for number, row in zip(train.numbers, moved, strict=True)}
    chemistry = train.model.chemistry
    return Twin(train.case, Gas(chemistry.table, chemistry.laws), values, len(x), steps).run()
