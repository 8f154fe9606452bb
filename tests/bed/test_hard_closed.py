"""Hard beds with an answer in closed form, or found from thermodynamics alone."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.optimize import brentq

from reactorstage.train.passing import FINAL, SEARCH
from reactorstage.train.result import Rating
from tests.bed.hard import Hard, Model, exit_rows, run
from tests.bed.hard_beds import THIN, autocatalytic, depletion, equilibrium, runaway, self_slowed


def exit_flow(bed: Hard, name: str, tolerance: float = FINAL) -> float:
    outcome = run(bed, tolerance, values_only=True)
    assert not outcome.failure
    return float(exit_rows(bed, outcome)[list(bed.species).index(name), 0])


def rated(bed: Hard) -> Rating:
    rating = bed.train.rate(dense=False)
    assert not rating.failure
    return rating


@pytest.mark.parametrize("decades", [2, 4, 6, 7, 8])
def test_isothermal_depletion_of_a_named_species(decades: int) -> None:
    """Closed form: F = F_in exp(-k W / F_total), right to 1e-6 of itself."""
    bed = depletion("isothermal", decades * np.log(10.0) * 100.0 / 10.0)
    assert exit_flow(bed, "A") == pytest.approx(10.0 * 10.0**-decades, rel=1e-6)


@pytest.mark.parametrize("used", [0.5, 0.9, 0.999, 1.0 - 1e-6])
def test_half_order_up_to_the_end(used: float) -> None:
    """Closed form: sqrt(y) falls by k W / (2 F_total); what is left is right to 1e-6 of itself."""
    left = 0.1 * (1.0 - used)
    W = 2.0 * (np.sqrt(0.1) - np.sqrt(left)) * 100.0 / 10.0
    assert exit_flow(depletion("half order", W, order=0.5), "A") == pytest.approx(100.0 * left, rel=1e-6)


@pytest.mark.parametrize("order", [0.1, 0.3, 0.5, 0.9])
@pytest.mark.parametrize("W", [100.0, 1e6])
def test_broken_orders_end_at_zero_and_stay_there(order: float, W: float) -> None:
    """Every order below one uses its reactant up at a finite depth."""
    for tolerance in (SEARCH, FINAL):
        assert abs(exit_flow(depletion("used up", W, order=order), "A", tolerance)) < 1e-12


def test_product_of_negative_order_absent_at_the_inlet() -> None:
    """Closed form for r = k y_A / y_B, isothermal: y_A0 ln(y_A0 / y_A) - (y_A0 - y_A) = k W / F_total."""
    bed = replace(self_slowed("closed", -1.0, 5.0), species=depletion("x", 1.0).species)
    y = brentq(lambda y: 0.1 * np.log(0.1 / y) - (0.1 - y) - 5.0 / 100.0, 1e-12, 0.1 - 1e-12, xtol=1e-16)
    assert exit_flow(bed, "A") == pytest.approx(100.0 * y, rel=1e-6)


@pytest.mark.parametrize("seed", [1e-3, 1e-6, 1e-9])
def test_autocatalysis_from_a_trace(seed: float) -> None:
    """Closed form, isothermal: y_B / y_A grows as exp(k (y_A + y_B) W / F_total)."""
    bed = replace(autocatalytic("closed", seed, 1.0), species=depletion("x", 1.0).species)
    total, whole = bed.unit, 10.0 + seed
    W = np.log(10.0 / seed) * total / (100.0 * whole / total)
    law = replace(bed.reactions[0], E=0.0)
    bed = replace(bed, W=float(W), reactions=(law,))
    assert exit_flow(bed, "B") == pytest.approx(0.5 * whole, rel=1e-5)
    assert exit_flow(bed, "B", SEARCH) == pytest.approx(0.5 * whole, rel=1e-3)


@pytest.mark.parametrize("times", [100.0, 1000.0, 2e6])
def test_too_much_catalyst_ends_at_equilibrium(times: float) -> None:
    """Equilibrium found independently: the extent at which ln Q = ln K on the line of constant enthalpy."""
    bed = equilibrium("long", 0.5 * times, named=("A",))
    model = Model(bed)
    H = model.F @ model.enthalpy(bed.T)

    def state(xi: float) -> tuple[np.ndarray, float]:
        F = model.F + xi * model.nu[0]
        return F, brentq(lambda T: F @ model.enthalpy(T) - H, 300.0, 1500.0, xtol=1e-12)

    def away(xi: float) -> float:
        F, T = state(xi)
        return float(model.nu[0] @ np.log(np.maximum(F / F.sum(), 1e-300)) - model.ln_K(T, bed.p)[0])

    F, T = state(brentq(away, 1e-6, 8.0 - 1e-6, xtol=1e-14))
    for tolerance in (SEARCH, FINAL):
        found = exit_rows(bed, run(bed, tolerance, values_only=True))[:, 0]
        assert np.abs(found[:-2] - F).max() < 1e-9 * bed.unit
        assert found[-1] == pytest.approx(T, abs=1e-6)
    assert rated(bed).number("bed 1.approach to equilibrium of r0") == pytest.approx(0.0, abs=1e-6)


@pytest.mark.parametrize("bed", [depletion("empty", 1e6, 60e3, -120e3), autocatalytic("no seed", 0.0, 1e6)])
def test_without_a_reactant_nothing_happens(bed: Hard) -> None:
    """Exactly zero stays exactly zero; in either bed one reactant is absent."""
    inlet = {**THIN, "A": 0.0} if bed.name == "empty" else bed.F
    bed = replace(bed, F=inlet)
    for tolerance in (SEARCH, FINAL):
        found = exit_rows(bed, run(bed, tolerance))[:, 0]
        assert found[:-2] == pytest.approx(Model(bed).F, rel=1e-14, abs=0.0)
        assert found[-1] == pytest.approx(600.0, rel=1e-14)


@pytest.mark.parametrize("W", [20.0, 1e6])
def test_light_off_is_found_where_it_is(W: float) -> None:
    """Independent program: depths at which the reference has 10, 50 and 90 % of its rise, to 1e-7 of them."""
    bed = runaway("burnt", W)
    model = Model(bed)
    rise = model.end()[-1] - bed.T
    shares = (0.1, 0.5, 0.9)
    events = [lambda w, z, share=share: z[-1] - bed.T - share * rise for share in shares]
    found = model.solve(events=events, rtol=1e-13)
    rating = rated(bed)
    for share, crossing in zip(shares, found.t_events, strict=True):
        depth = rating.number(f"bed 1.depth at {100.0 * share:g} % of rise")
        assert depth == pytest.approx(crossing[0] / bed.W, rel=1e-7)
    assert rating.number("bed 1.peak temperature") == pytest.approx(bed.T + rise, abs=1e-6)
