"""One reaction in one bed against closed forms: isothermal orders, exhaustion, adiabatic first order."""

from __future__ import annotations

from math import exp, sqrt

import pytest
from scipy.integrate import quad

from reactorstage.train.result import Rating
from tests.bed.build import Tree, one_bed, programme

FLOW = 100.0
K = 0.1
"""mol/(kg s) times mole fractions."""


def isomer(enthalpy: float) -> Tree:
    return {
        "formula": "C4H10",
        "enthalpy of formation": f"{enthalpy!r} J/mol",
        "entropy": "300 J/(mol K)",
        "standard pressure": "1 bar(a)",
        "heat capacity": {"powers of T": ["150 J/(mol K)"]},
    }


def rated(kg: float, order: float, heat: float = 0.0, E_over_R: float = 0.0) -> Rating:
    """A => B with r = K y^order from 600 K; heat in J/mol."""
    reaction = {
        "equation": "A => B",
        "rate per": "catalyst mass",
        "driven by": "mole fraction",
        "orders": {"A": order},
        "constant": {
            "at": "600 K",
            "is": f"{K} mol/(kg s)",
            "activation energy": f"{8.31446261815324 * E_over_R!r} J/mol",
        },
    }
    feed = {"flow": f"{FLOW} mol/s", "temperature": "600 K", "composition": {"A": "100 %"}}
    return programme(
        one_bed({"A": isomer(0.0), "B": isomer(heat)}, {"turn": reaction}, feed, f"{kg!r} kg")
    ).rate()


@pytest.mark.parametrize(
    ("order", "left"),
    [
        (0, lambda t: 1.0 - t),
        (0.5, lambda t: (1.0 - t / 2.0) ** 2),
        (1, lambda t: exp(-t)),
        (1.5, lambda t: 1.0 / (1.0 + t / 2.0) ** 2),
        (2, lambda t: 1.0 / (1.0 + t)),
        (3, lambda t: 1.0 / sqrt(1.0 + 2.0 * t)),
    ],
)
@pytest.mark.parametrize("t", [0.01, 0.5, 0.95])
def test_isothermal_orders(order: float, left: object, t: float) -> None:
    """Closed form of dy/dt = -y^n, t = K W / F."""
    rating = rated(t * FLOW / K, order)
    assert rating.number("bed 1.exit temperature") == pytest.approx(600.0, abs=1e-9)
    assert rating.number("bed 1.exit flow of A") / FLOW == pytest.approx(left(t), abs=1e-7)


@pytest.mark.parametrize("order", [0.5, 0.7])
def test_a_reactant_that_runs_out_inside_the_bed_stays_at_zero(order: float) -> None:
    """y^n with n < 1 reaches zero at a finite depth, here at t = 1/(1 - n)."""
    rating = rated(2.0 / (1.0 - order) * FLOW / K, order, heat=-20e3)
    assert rating.number("bed 1.exit flow of A") / FLOW == pytest.approx(0.0, abs=1e-7)
    assert rating.number("bed 1.rise") == pytest.approx(20e3 / 150.0, rel=1e-7)


@pytest.mark.parametrize("heat", [-30e3, 15e3])
def test_adiabatic_first_order_with_constant_heat_capacity(heat: float) -> None:
    """W = F/K int dX / [(1 - X) exp(E/R (1/T0 - 1/T))], T = T0 - heat X / cp; quadrature to 1e-12."""
    E_over_R, J = 6000.0, -heat / 150.0

    def inverse(X: float) -> float:
        return exp(-E_over_R * (1.0 / 600.0 - 1.0 / (600.0 + J * X))) / (1.0 - X)

    for X in (0.2, 0.8, 0.99):
        W = FLOW / K * quad(inverse, 0.0, X, epsabs=0.0, epsrel=1e-12)[0]
        rating = rated(W, 1, heat, E_over_R)
        assert rating.number("bed 1.conversion of A") == pytest.approx(X, abs=1e-7)
        assert rating.number("bed 1.rise") == pytest.approx(J * X, rel=1e-6)
