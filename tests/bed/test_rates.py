"""Rates inside the compiled bed against the NumPy form of the same law, and their derivatives.

Random laws: every driver, fractional and negative orders, denominators, half turnovers, temperature
functions. Independent program: `reactorstage.chemistry.rates` for values, `reference` for derivatives.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from reactorstage.chemistry import (
    DRIVERS,
    R_GAS,
    Constant,
    Denominator,
    RateLaw,
    Term,
    basis_factors,
    rates,
)
from reactorstage.train.programme import TrainProgramme
from tests.bed.build import FLUID, HEAD, Tree, edges, programme
from tests.bed.laws import with_laws
from tests.bed.reference import Gas, Twin

T_REF, PRESSURE = 700.0, 3e5
TOTALS = {
    "partial pressure": PRESSURE,
    "concentration": PRESSURE / (R_GAS * T_REF),
    "mole fraction": 1.0,
    "fugacity": PRESSURE,
}
EQUATIONS = {
    "oxidation": {"SO2": -1.0, "O2": -0.5, "SO3": 1.0},
    "nitric": {"N2": -0.5, "O2": -0.5, "NO": 1.0},
}


def bed() -> Tree:
    """One bed with pressure drop whose feed holds every species; five numbers are free."""
    every = {
        "diameter": "2 m",
        "bulk density": "640 kg/m^3",
        "void fraction": "42 %",
        "equivalent size": "5 mm",
    }
    constant = {"rate per": "catalyst mass", "driven by": "mole fraction", "constant": "1 mol/(kg s)"}
    shares = {"SO2": "9 %", "O2": "12 %", "SO3": "3 %", "NO": "2 %", "N2": "rest"}
    free = {
        "catalyst": {"now": "900 kg", "from": "700 kg", "to": "1000 kg"},
        "catalyst activity": {"now": 0.9, "from": 0.5, "to": 1.0},
        "inlet pressure": {"now": "3 bar(a)", "from": "2.5 bar(a)", "to": "4 bar(a)"},
    }
    feed = {
        "flow": {"now": "300 kmol/h", "from": "250 kmol/h", "to": "350 kmol/h"},
        "temperature": {"now": "700 K", "from": "690 K", "to": "720 K"},
        "composition": shares,
    }
    return {
        **HEAD,
        "aim": "least train.catalyst",
        "species": {name: {"gas data": name} for name in shares},
        "fluid": FLUID,
        "reactions": {
            "oxidation": {"equation": "SO2 + 0.5 O2 => SO3", "orders": {"O2": 1}, **constant},
            "nitric": {"equation": "0.5 N2 + 0.5 O2 => NO", "orders": {"O2": 1}, **constant},
        },
        "feeds": {"gas": feed},
        "train": [{"entry": [{"take": "gas"}]}, {"bed 1": {**every, **free}}, {"effluent": []}],
        "limits": {name: {"of": name, "at least": zero} for name, zero in SEEN.items()},
    }


SEEN = {
    "bed 1.exit flow of SO3": "0 kmol/h",
    "bed 1.exit flow of NO": "0 kmol/h",
    "bed 1.exit temperature": "0 K",
    "bed 1.exit pressure": "0 bar(a)",
}


@st.composite
def random_laws(draw: Any) -> list[RateLaw]:
    return [_law(draw, label, nu) for label, nu in EQUATIONS.items()]


def _law(draw: Any, label: str, nu: dict[str, float]) -> RateLaw:
    driver = draw(st.sampled_from(list(DRIVERS)))
    reversible, m = draw(st.booleans()), draw(st.sampled_from([1.0, 0.5, 2.0]))
    orders = {name: _order(draw, _least(n, m, reversible)) for name, n in nu.items()}
    return RateLaw(
        label,
        nu,
        orders,
        _constant(draw, 0.15, TOTALS[driver], sum(orders.values())),
        driver,
        reversible,
        m=m,
        denominators=tuple(_factor(draw, driver) for _ in range(draw(st.integers(0, 2)))),
    )


def _least(n: float, m: float, reversible: bool) -> float:
    """Lowest forward order: reactants must run out smoothly, backward orders must not be negative."""
    return max(0.5, -m * n * reversible) if n < 0.0 else -0.5 * (not reversible)


def _order(draw: Any, least: float) -> float:
    return float(
        draw(st.sampled_from([n for n in (-0.5, -0.3, 0.0, 0.5, 0.8, 1.0, 1.5, 2.0, 3.0) if n >= least]))
    )


def _constant(draw: Any, size: float, total: float, n: float) -> Constant:
    """ln of a constant that makes rates of about `size` times mole fractions."""
    ln = float(np.log(size * draw(st.floats(0.3, 3.0))) - n * np.log(total))
    return Constant(ln, T_REF, draw(st.floats(3e3, 1.2e4)), draw(st.sampled_from([0.0, 2.0])), 0.0)


def _factor(draw: Any, driver: str) -> Denominator:
    terms = [Term(Constant(0.0), {})]
    for _ in range(draw(st.integers(1, 2))):
        name, n = (
            draw(st.sampled_from(["SO2", "SO3", "NO", "O2"])),
            draw(st.sampled_from([0.5, 1.0, 2.0, -0.5])),
        )
        ln_K = float(np.log(draw(st.floats(0.3, 10.0))) - n * np.log(TOTALS[driver]))
        terms.append(Term(Constant(ln_K, T_REF, draw(st.floats(-9e3, 2e3))), {name: n}))
    return Denominator(tuple(terms), draw(st.sampled_from([1.0, 2.0, 0.5])))


def train_of(laws: list[RateLaw]) -> TrainProgramme:
    return with_laws(programme(bed()), laws)


@settings(max_examples=40)
@given(random_laws())
def test_rates_along_a_bed_are_those_of_the_law_in_numpy(laws: list[RateLaw]) -> None:
    train = train_of(laws)
    rating = train.rate()
    assert not rating.failure
    chemistry, profile = train.model.chemistry, rating.profiles[0]
    factor = 0.9 * basis_factors(chemistry.laws, 1.0, 1.0)
    rows = zip(profile.F, profile.T, profile.p, strict=True)
    expected = np.array([rates(chemistry.laws, chemistry.table, F, T, p, factor) for F, T, p in rows])
    assert np.abs(profile.r - expected).max() < 1e-11 * np.abs(expected).max()


@settings(max_examples=25)
@given(random_laws())
def test_derivatives_of_random_laws_are_those_of_a_complex_step(laws: list[RateLaw]) -> None:
    train = train_of(laws)
    x = np.array([number.now for number in train.numbers])
    mesh = train.model.passing.adaptive(*train.model.inputs.values(x), 1e-3).stages
    found, twin = train.evaluate(x, mesh), _twin(train, x, edges(mesh))
    for i, (name, scale) in enumerate(zip(SEEN, (10.0, 10.0, 100.0, 1e4), strict=True)):
        slopes = twin[name].imag / 1e-20
        away = np.abs(found.margin_dx[i] * x - slopes).max()
        assert away < 1e-10 * max(scale, np.abs(slopes).max()), name


def _twin(train: TrainProgramme, x: np.ndarray, steps: list[np.ndarray]) -> dict[str, np.ndarray]:
    moved = x[:, None] * (1.0 + 1j * 1e-20 * np.eye(len(x)))
    values = {number.name: row for number, row in zip(train.numbers, moved, strict=True)}
    chemistry = train.model.chemistry
    return Twin(train.case, Gas(chemistry.table, chemistry.laws), values, len(x), steps).run()
