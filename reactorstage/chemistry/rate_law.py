"""Rate laws as the arrays that the compiled kernel reads; the form of a law stands at the top of `law`.

    Ka = K(T) (p0 a/p)^(sum nu),  a/p = 1/(R T), 1, 1/p, 1  for the four drivers

Powers near and below zero. Whole orders of zero and above are plain multiplications. For the others,
with delta = 1e-12 * (p/(R T), p, 1, p) in the unit of the driver,

    n > 0:  a (a^2 + delta^2)^((n-1)/2)        n < 0:  (a^2 + delta^2)^(n/2)

which is smooth for every real a, and a^n to rounding wherever a is above 1e-4 of the total. Floors, where a
law has them, are wider: see `orders`.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.law import (
    BASES,
    DRIVERS,
    MOST_POWERS_OF_T,
    MOST_POWERS_OF_Z,
    SHAPES,
    Constant,
    RateLaw,
    Thiele,
    backward_orders,
    check_law,
)
from reactorstage.chemistry.orders import Split, backward, below, forward, useless_floors

Ints = NDArray[np.int64]

NO_ETA, POLYNOMIAL = 0, 1
"""Codes in `RateLaws.eta_kind` besides those of `SHAPES`."""

ETA = MOST_POWERS_OF_T + MOST_POWERS_OF_Z + 1
"""Numbers of one effectiveness: powers of T, powers of Z, weight of Z; or the modulus."""


@dataclass(frozen=True, eq=False)
class RateLaws:
    """The laws of R reactions of S species: float64 or int64 arrays in C order.

    Denominator factors of reaction r are den_start[r]:den_start[r + 1] (of ND); the terms of factor n
    are term_start[n]:term_start[n + 1] (of NT). Powers are given for the drivers of all species and then
    for their floored drivers (2 S); `alpha`, `beta` and `gamma` are the orders that they make together.
    """

    lnk_ref: Floats
    """(R,) ln of the rate constant at T_ref, in SI units of driver and basis."""
    T_ref: Floats
    """(R,) K, finite."""
    E_over_R: Floats
    """(R,) activation energy over the gas constant, K."""
    c: Floats
    """(R,) factor of ln(T/T_ref)."""
    d: Floats
    """(R,) factor of T - T_ref, 1/K."""
    driver: Ints
    """(R,) 0 concentration mol/m3, 1 partial pressure Pa, 2 mole fraction, 3 fugacity Pa."""
    reversible: Ints
    """(R,) 1 with a backward rate, 0 without."""
    own_K: Ints
    """(R,) 1 with an equilibrium constant of its own, 0 with that of the Gibbs energies."""
    K_form: Floats
    """(R, 5) ln K at T_ref (standard pressure 1e5 Pa), T_ref K, heat over R K, c, d 1/K; for own_K only."""
    m: Floats
    """(R,) power of the equilibrium constant."""
    basis: Ints
    """(R,) 0 catalyst mass, 1 bed volume, 2 void volume."""
    forward: Floats
    """(R, 2 S) powers of the forward rate."""
    backward: Floats
    """(R, 2 S) powers of the backward rate."""
    floor: Floats
    """(R, S) mole fractions, 0 without a floor."""
    nu: Floats
    """(R, S) stoichiometric matrix."""
    beta: Floats
    """(R, S) backward orders, alpha + m nu."""
    den_start: Ints
    """(R + 1,) offsets into the denominator factors."""
    den_power: Floats
    """(ND,) q of each factor."""
    term_start: Ints
    """(ND + 1,) offsets into the terms."""
    term_lnK_ref: Floats
    """(NT,) ln K_j at term_T_ref, in SI units of the driver."""
    term_T_ref: Floats
    """(NT,) K, finite."""
    term_H_over_R: Floats
    """(NT,) heat of the term over the gas constant, K."""
    term_c: Floats
    """(NT,) factor of ln(T/T_ref)."""
    term_d: Floats
    """(NT,) factor of T - T_ref, 1/K."""
    below: Floats
    """(NT, 2 S) powers of each term."""
    eta_kind: Ints
    """(R,) 0 no effectiveness factor, 1 polynomial, 2 slab, 3 sphere."""
    eta: Floats
    """(R, ETA) powers of T, of Z, weight of Z; or size^2 |nu_key| density/diffusivity in the first place."""
    eta_species: Ints
    """(R, 2) the key species and what it becomes, -1 for none."""

    @property
    def alpha(self) -> Floats:
        """(R, S) forward orders."""
        return _together(self.forward)

    @property
    def gamma(self) -> Floats:
        """(NT, S) orders of each term."""
        return _together(self.below)


def _together(powers: Floats) -> Floats:
    S = powers.shape[1] // 2
    return powers[:, :S] + powers[:, S:]


def rate_laws(laws: Sequence[RateLaw], names: Sequence[str]) -> RateLaws:
    """The arrays of several laws for species in the order of `names`.

    Raises ValueError, which begins with the reaction's label, for an unknown word or species, a constant that
    is not a finite number above zero, or a floor that changes nothing.
    """
    for law in laws:
        check_law(law, names)
        _check_floors(law)
    constants = [law.constant.at_finite_reference() for law in laws]
    factors = [factor for law in laws for factor in law.denominators]
    terms = [(law, factor, term) for law in laws for factor in law.denominators for term in factor.terms]
    term_constants = [term.constant.at_finite_reference() for _, _, term in terms]
    return RateLaws(
        lnk_ref=_floats(one.ln_ref for one in constants),
        T_ref=_floats(one.T_ref for one in constants),
        E_over_R=_floats(one.E_over_R for one in constants),
        c=_floats(one.c for one in constants),
        d=_floats(one.d for one in constants),
        driver=_ints(DRIVERS[law.driver] for law in laws),
        reversible=_ints(law.reversible for law in laws),
        own_K=_ints(law.K is not None for law in laws),
        K_form=_floats(_form(law.K or Constant(0.0)) for law in laws).reshape(-1, 5),
        m=_floats(law.m for law in laws),
        basis=_ints(BASES[law.basis] for law in laws),
        forward=_powers((forward(law) for law in laws), names),
        backward=_powers((backward(law) for law in laws), names),
        floor=_rows((law.floors for law in laws), names),
        nu=_rows((law.stoichiometry for law in laws), names),
        beta=_rows((backward_orders(law) for law in laws), names),
        den_start=_offsets(len(law.denominators) for law in laws),
        den_power=_floats(factor.power for factor in factors),
        term_start=_offsets(len(factor.terms) for factor in factors),
        term_lnK_ref=_floats(one.ln_ref for one in term_constants),
        term_T_ref=_floats(one.T_ref for one in term_constants),
        term_H_over_R=_floats(one.E_over_R for one in term_constants),
        term_c=_floats(one.c for one in term_constants),
        term_d=_floats(one.d for one in term_constants),
        below=_powers((below(law, factor, term.orders) for law, factor, term in terms), names),
        eta_kind=_ints(_eta_kind(law) for law in laws),
        eta=_floats(_eta(law) for law in laws).reshape(-1, ETA),
        eta_species=_ints(_eta_species(law, names) for law in laws).reshape(-1, 2),
    )


def basis_factors(laws: RateLaws, bulk_density: float, void_fraction: float) -> Floats:
    """What turns each rate into one per kg of catalyst (R,); bulk_density in kg/m3.

    1 for a rate per catalyst mass, 1/rho per bed volume, eps/rho per void volume.
    """
    return np.array([1.0, 1.0 / bulk_density, void_fraction / bulk_density])[laws.basis]


def _check_floors(law: RateLaw) -> None:
    for name in useless_floors(law):
        raise ValueError(
            f"{law.label}: a floor of {name} changes nothing: its orders are whole and not below zero"
        )


def _form(constant: Constant) -> list[float]:
    one = constant.at_finite_reference()
    return [one.ln_ref, one.T_ref, one.E_over_R, one.c, one.d]


def _eta_kind(law: RateLaw) -> int:
    eta = law.effectiveness
    if isinstance(eta, Thiele):
        return SHAPES[eta.shape]
    return NO_ETA if eta is None else POLYNOMIAL


def _eta(law: RateLaw) -> list[float]:
    eta, nu = law.effectiveness, law.stoichiometry
    if isinstance(eta, Thiele):
        modulus = eta.size**2 * abs(nu[eta.key]) * eta.density / eta.diffusivity
        return [modulus, *[0.0] * (ETA - 1)]
    by_T, by_Z = ((1.0,), ()) if eta is None else (eta.by_T, eta.by_Z)
    weight = abs(nu[eta.key] / nu[eta.into]) if eta and eta.by_Z else 1.0
    padded_T = [*by_T, *[0.0] * (MOST_POWERS_OF_T - len(by_T))]
    return [*padded_T, *by_Z, *[0.0] * (MOST_POWERS_OF_Z - len(by_Z)), weight]


def _eta_species(law: RateLaw, names: Sequence[str]) -> list[int]:
    eta = law.effectiveness
    if isinstance(eta, Thiele):
        return [names.index(eta.key), -1]
    if eta is None or not eta.by_Z:
        return [-1, -1]
    return [names.index(eta.key), names.index(eta.into)]


def _floats(values: Any) -> Floats:
    return np.array(list(values), dtype=np.float64)


def _ints(values: Any) -> Ints:
    return np.array(list(values), dtype=np.int64)


def _offsets(lengths: Any) -> Ints:
    return np.concatenate([[0], np.cumsum(_ints(lengths))]).astype(np.int64)


def _rows(orders: Iterable[Mapping[str, float]], names: Sequence[str]) -> Floats:
    rows = [[one.get(name, 0.0) for name in names] for one in orders]
    return np.array(rows, dtype=np.float64).reshape(len(rows), len(names))


def _powers(splits: Iterable[Split], names: Sequence[str]) -> Floats:
    pairs = list(splits)
    plain, floored = (_rows((pair[i] for pair in pairs), names) for i in (0, 1))
    return np.concatenate([plain, floored], axis=1)
