"""Floors: where they act, that laws stay as they are elsewhere, and that equilibrium does not move."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.chemistry import (
    Constant,
    Denominator,
    RateLaw,
    SpeciesTable,
    Term,
    ln_K,
    rate_laws,
    rates,
)
from reactorstage.chemistry.orders import empty_sums, singular
from reactorstage.chemistry.smooth import floored

T, P = 700.0, 2e5
NU = {"SO2": -1.0, "O2": -0.5, "SO3": 1.0}
FLOW = np.array([0.05, 0.09, 0.04, 0.82])


def law(orders: dict[str, float], reversible: bool = True, **other: Any) -> RateLaw:
    plain: dict[str, Any] = {"label": "one", "stoichiometry": NU, "driver": "mole fraction"}
    return RateLaw(orders=orders, constant=Constant(0.0), reversible=reversible, **{**plain, **other})


def rate(table: SpeciesTable, one: RateLaw, F: np.ndarray) -> Any:
    return rates(rate_laws([one], table.names), table, F, T, P, np.ones(1))[0]


@pytest.mark.parametrize("f", [1e-4, 0.02])
def test_a_smooth_floor(f: float) -> None:
    """Closed form: the floor itself at 0, product of the values at a and -a is f^2, derivative 1/2 at 0."""
    assert floored(0.0, f) == f
    assert floored(0.3, f) * floored(-0.3, f) == pytest.approx(f * f, rel=1e-9)
    assert floored(1e-30j, f).imag == pytest.approx(0.5e-30, rel=1e-12)
    assert floored(1.0, f) == pytest.approx(1.0 + f * f, abs=2 * f**4)


# orders, reversible, m, the law with floors of SO3 and SO2 (mole fractions a, floored A): closed forms
EKLUND = {"SO2": 0.5, "SO3": -0.5, "O2": 1.0}
FORMS = [
    (EKLUND, True, 2.0, lambda a, A, K: A[0] ** -1.5 * A[2] ** -0.5 * (a[0] ** 2 * a[1] - a[2] ** 2 / K**2)),
    (EKLUND, False, 1.0, lambda a, A, K: a[0] * A[0] ** -0.5 * a[1] * A[2] ** -0.5),
    ({"SO2": 0.0, "SO3": -1.0}, False, 1.0, lambda a, A, K: a[0] / A[0] / A[2]),
    ({"SO2": -0.4, "SO3": -1.0}, False, 1.0, lambda a, A, K: a[0] * A[0] ** -1.4 / A[2]),
    (
        {"SO2": 0.5, "SO3": -0.5, "O2": 0.5},
        True,
        1.0,
        lambda a, A, K: (A[0] * A[2]) ** -0.5 * (a[0] * a[1] ** 0.5 - a[2] / K),
    ),
]


@pytest.mark.parametrize(("orders", "reversible", "m", "closed"), FORMS)
@pytest.mark.parametrize("so3", [0.04, 1e-4, 0.0, -1e-4])
def test_what_a_floored_law_is(
    oxidation: SpeciesTable, orders: dict[str, float], reversible: bool, m: float, closed: Any, so3: float
) -> None:
    a = np.array([0.05, 0.09, so3, 0.86 - so3])
    K = np.exp(ln_K(oxidation, np.array([[-1.0, -0.5, 1.0, 0.0]]), T)[0]) * (P / 1e5) ** 0.5
    floors = {"SO2": 0.01, "SO3": 0.002}
    found = rate(oxidation, law(orders, reversible, m=m, floors=floors), a)
    held = floored(a, np.array([0.01, 0.0, 0.002, 0.0]))
    assert found == pytest.approx(closed(a, held, K), rel=1e-9)


@given(floor=st.floats(1e-8, 1e-4), y=st.floats(0.02, 0.2))
def test_far_above_its_floor_a_law_is_what_it_is_without(
    oxidation: SpeciesTable, floor: float, y: float
) -> None:
    F = np.array([0.1, 0.1, y, 0.8 - y])
    plain = rate(oxidation, law(EKLUND, m=2.0), F)
    held = rate(oxidation, law(EKLUND, m=2.0, floors={"SO3": floor}), F)
    assert held == pytest.approx(plain, rel=0.6 * (floor / y) ** 2 + 1e-12)


@pytest.mark.parametrize("floor", [1e-6, 1e-3, 0.1])
@pytest.mark.parametrize(
    ("m", "so3"), [(0.5, 0.3), (0.5, 1e-3), (1.0, 0.3), (1.0, 1e-5), (2.0, 0.3), (2.0, 1e-3), (2.0, 1e-5)]
)
def test_a_floor_moves_no_equilibrium(oxidation: SpeciesTable, floor: float, m: float, so3: float) -> None:
    """At Q = K, also where the floor is far above what is there."""
    orders = {"SO2": 0.5, "SO3": -0.5, "O2": 1.0}
    one = law(orders, m=m, floors=dict.fromkeys(("SO3",) if m == 0.5 else ("SO2", "SO3"), floor))
    K = np.exp(ln_K(oxidation, np.array([[-1.0, -0.5, 1.0, 0.0]]), T)[0])
    so2 = so3 / (K * (0.1 * P / 1e5) ** 0.5)
    F = np.array([so2, 0.1, so3, 0.9 - so2 - so3])
    assert abs(rate(oxidation, one, F)) < 1e-10 * abs(rate(oxidation, one, F * np.array([1, 1, 1.1, 1])))


def test_below_the_line_only_negative_and_broken_orders_are_floored(oxidation: SpeciesTable) -> None:
    """Closed form: 1 + 2 SO3 + 3 SO3^-1/2 with SO3 absent."""
    terms = (
        Term(Constant(0.0)),
        Term(Constant(np.log(2.0)), {"SO3": 1.0}),
        Term(Constant(np.log(3.0)), {"SO3": -0.5}),
    )
    one = law({"SO2": 1.0}, False, denominators=(Denominator(terms),), floors={"SO3": 1e-4})
    F = np.array([0.1, 0.1, 0.0, 0.8])
    assert rate(oxidation, one, F) == pytest.approx(0.1 / (1.0 + 3.0 * 1e-4**-0.5), rel=1e-12)
    F = np.array([0.1, 0.1, 0.2, 0.6])
    assert rate(oxidation, one, F) == pytest.approx(0.1 / (1.4 + 3.0 * 0.2**-0.5), rel=1e-6)


def test_rates_with_floors_are_smooth_through_zero(oxidation: SpeciesTable) -> None:
    """Complex step against central differences, from below zero to far above the floor."""
    laws = rate_laws([law(EKLUND, m=2.0, floors={"SO2": 1e-3, "SO3": 1e-3})], oxidation.names)

    def found(F: np.ndarray) -> Any:
        return rates(laws, oxidation, F, T, P, np.ones(1))[0]

    for so3 in (-1e-3, 0.0, 1e-6, 1e-3, 0.1):
        F = np.array([0.05, 0.09, so3, 0.8])
        for i, unit in enumerate(np.eye(4)):
            slope = found(F + 1e-30j * unit).imag / 1e-30
            step = 1e-6
            central = (found(F + step * unit) - found(F - step * unit)) / (2 * step)
            assert slope == pytest.approx(central, rel=1e-4, abs=1e-6), (so3, i)


@pytest.mark.parametrize(
    ("orders", "reversible", "other", "expected"),
    [
        ({"SO2": 1.0, "O2": 0.5}, True, {}, {}),
        ({"SO2": 1.0, "O2": 1.0}, True, {}, {"O2": "in the backward rate is 0.5, with an infinite slope"}),
        (
            EKLUND,
            True,
            {"m": 2.0},
            {"SO2": "in the backward rate is -1.5", "SO3": "in the forward rate is -0.5"},
        ),
        (
            {"SO2": 0.5},
            True,
            {},
            {"SO2": "in the backward rate is -0.5", "O2": "in the backward rate is -0.5"},
        ),
        ({"SO2": 0.5}, False, {}, {}),
        ({"SO2": 1.5, "SO3": 2.0}, False, {}, {}),
        ({"SO2": 1.0, "SO3": 0.5}, False, {}, {"SO3": "is 0.5, with an infinite slope there"}),
    ],
)
def test_what_is_singular(
    orders: dict[str, float], reversible: bool, other: dict[str, Any], expected: dict[str, str]
) -> None:
    found = singular(law(orders, reversible, **other))
    assert set(found) == set(expected)
    assert all(words in found[name] for name, words in expected.items())


def test_what_is_singular_below_the_line() -> None:
    terms = (Term(Constant(0.0)), Term(Constant(0.0), {"SO3": 0.5, "N2": -1.0}))
    found = singular(law({"SO2": 1.0, "O2": 0.5}, denominators=(Denominator(terms),)))
    assert found == {
        "SO3": "its order below the line is 0.5, with an infinite slope there",
        "N2": "its order below the line is -1",
    }


SUM = (Term(Constant(np.log(2.0)), {"SO3": 1.0}), Term(Constant(np.log(3.0)), {"SO2": 1.0, "N2": -1.0}))


@pytest.mark.parametrize(
    ("terms", "absent", "floors", "expected"),
    [
        (SUM, {"SO3"}, (), set()),
        (SUM, {"SO3", "SO2"}, (), {"SO3"}),
        (SUM, {"SO3", "SO2"}, ("SO2",), set()),
        (SUM[:1], {"SO3"}, (), {"SO3"}),
        (SUM[:1], {"SO3"}, ("SO3",), set()),
        ((*SUM, Term(Constant(0.0))), {"SO3", "SO2"}, (), set()),
        ((*SUM, Term(Constant(0.0), {"N2": -1.0})), {"SO3", "SO2"}, (), set()),
    ],
)
def test_sums_below_the_line_that_nothing_is_left_of(
    terms: tuple[Term, ...], absent: set[str], floors: tuple[str, ...], expected: set[str]
) -> None:
    one = law({"SO2": 1.0}, denominators=(Denominator(terms),), floors=dict.fromkeys(floors, 1e-3))
    assert set(empty_sums(one, absent)) == expected


def test_a_floor_holds_a_sum_that_would_be_zero(oxidation: SpeciesTable) -> None:
    """Closed form: SO2/(2 SO3)^2, SO3 held at its floor where there is none; a term of 1 needs no floor."""
    denominators = (Denominator(SUM[:1], 2.0),)
    one = law({"SO2": 1.0}, False, denominators=denominators, floors={"SO3": 1e-3})
    assert rate(oxidation, one, np.array([0.1, 0.1, 0.0, 0.8])) == pytest.approx(0.1 / (2e-3) ** 2, rel=1e-12)
    assert rate(oxidation, one, np.array([0.1, 0.1, 0.2, 0.6])) == pytest.approx(0.1 / 0.16, rel=1e-4)
    stays = (Denominator((*SUM[:1], Term(Constant(0.0)))),)
    with pytest.raises(ValueError, match="a floor of SO3 changes nothing"):
        rate(oxidation, law({"SO2": 1.0}, False, denominators=stays, floors={"SO3": 1e-3}), FLOW)
