"""Beds of real gases and liquids: rates, derivatives, balances and exits against outside evaluations.

Independent programs: `reactorstage.chemistry.rates` and `mixture` for rates and enthalpies (themselves held
against Cantera and CoolProp), Cantera's Peng-Robinson phase with SciPy's LSODA for a whole bed.
"""

from __future__ import annotations

import numpy as np
import pytest

from reactorstage.chemistry import basis_factors, rates
from reactorstage.chemistry.equilibrium import adiabatic_equilibrium
from tests.bed.build import Tree, changed, programme
from tests.bed.fluid_cases import CASES, ammonia, dense, liquid
from tests.bed.test_jacobian import Trial, difference

ALL = pytest.mark.parametrize("tree", [make() for make in CASES.values()], ids=list(CASES))


@ALL
def test_rates_along_a_bed_are_those_of_the_readable_form(tree: Tree) -> None:
    train = programme(tree)
    rating = train.rate()
    assert not rating.failure
    chemistry = train.model.chemistry
    for profile in rating.profiles:
        factor = basis_factors(chemistry.laws, 800.0, 0.4)
        rows = zip(profile.F, profile.T, profile.p, strict=True)
        given = chemistry.laws, chemistry.table
        expected = np.array([rates(*given, F, T, p, factor, chemistry.fluid) for F, T, p in rows])
        assert np.abs(profile.r - expected).max() < 1e-11 * np.abs(expected).max()


@ALL
def test_enthalpy_is_constant_along_a_bed(tree: Tree) -> None:
    train = programme(tree)
    mixture = train.model.chemistry.mixture
    for profile in train.rate().profiles:
        states = list(zip(profile.F, profile.T, profile.p, strict=True))
        H = np.array([float(mixture.enthalpy(*state)) for state in states])
        _, capacity = mixture.heats(*states[0])
        assert np.abs(H - H[0]).max() < 1e-8 * capacity


@ALL
def test_derivatives_of_every_limit_and_of_money_are_central_differences_in_fluids(tree: Tree) -> None:
    trial = Trial(tree)
    found = trial.found
    slopes = np.vstack([found.margin_dx, found.cost_dx, found.weight_dx]) * trial.span
    sizes = np.array([trial.size(row.quantity) for row in trial.train.limits])
    scale = np.maximum(np.concatenate([sizes, [0.1], sizes]), np.abs(slopes).max(axis=1, initial=0.0))
    for d, number in enumerate(trial.train.numbers):
        away = np.abs(difference(trial, d) - slopes[:, d]) / scale
        allowed = np.array([1e-6 if ".peak " in name else 1e-7 for name in trial.names])
        assert np.all(away < allowed), (number.name, trial.names[int(np.argmax(away / allowed))])


@ALL
def test_atoms_and_energy_close_in_fluids(tree: Tree) -> None:
    found = programme(tree).rate().quantities
    atoms, energy = (found[f"train.{one} closure"].value for one in ("atom", "energy"))
    assert atoms is not None and energy is not None and atoms < 1e-12 and energy < 1e-9


@pytest.mark.parametrize("make", [ammonia, liquid])
def test_a_long_bed_ends_at_the_equilibrium_of_its_fluid(make: object) -> None:
    tree = make()  # type: ignore[operator]
    tree["every bed"] = {"bulk density": "800 kg/m^3", "pressure drop factor": 0}
    tree = changed(tree, "train", 1, "bed 1", "catalyst", to="5000 t")
    train = programme(tree)
    profile, chemistry = train.rate().profiles[0], train.model.chemistry
    state = profile.F[0], float(profile.T[0]), float(profile.p[0])
    rest = adiabatic_equilibrium(chemistry.table, chemistry.laws.nu, [True], *state, chemistry.fluid)
    assert rest.off < 1e-10
    assert abs(profile.T[-1] - rest.T) < 1e-6 * rest.T
    assert np.abs(profile.F[-1] - rest.F).max() < 1e-6 * profile.F[0].sum()
    factor = basis_factors(chemistry.laws, 800.0, 0.4)
    given = chemistry.laws, chemistry.table
    at_rest = rates(*given, rest.F, rest.T, rest.p, factor, chemistry.fluid)
    assert np.abs(at_rest).max() < 1e-10 * np.abs(profile.r[0]).max()


def test_injected_vapour_dissolves_in_a_liquid_with_its_own_enthalpy() -> None:
    train = programme(dense())
    inlet, mixture = train.rate().profiles[0], train.model.chemistry.mixture
    H = mixture.enthalpy(np.array([600.0, 0.0, 0.0]) / 3.6, 463.15, 42e5)
    H = H + mixture.enthalpy(np.array([0.0, 60.0, 0.0]) / 3.6, 333.15, 60e5, "vapour")
    mixed = mixture.enthalpy(inlet.F[0], inlet.T[0], inlet.p[0])
    assert mixed == pytest.approx(H, rel=1e-12)
