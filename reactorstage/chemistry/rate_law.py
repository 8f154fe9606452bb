"""Rate laws: one general form, held as the arrays that the compiled kernel reads.

    rate = factor * k(T) * [ prod a_i^alpha_i - prod a_i^beta_i / Ka(T, p)^m ]
           / prod_n ( sum_j K_j(T) prod a_i^gamma_ij )^q_n

with beta = alpha + m nu, derived and never given, so that the rate is zero at equilibrium by
construction (the form of Hougen and Watson, Chemical Process Principles III, 1947, and of Temkin
and Pyzhev, 1940, in one).

    ln k(T)   = lnk_ref + E/R (1/T_ref - 1/T) + c ln(T/T_ref) + d (T - T_ref)
    ln K_j(T) = term_lnK_ref + H/R (1/T_ref - 1/T)
    Ka        = K(T) (p0 a/p)^(sum nu),  a/p = 1/(R T), 1, 1/p  for the three drivers

Powers near and below zero. Whole orders of zero and above are plain multiplications. For the others,
with delta = 1e-12 * (p/(R T), p, 1) in the unit of the driver,

    n > 0:  a (a^2 + delta^2)^((n-1)/2)        n < 0:  (a^2 + delta^2)^(n/2)

which is smooth for every real a, and a^n to rounding wherever a is above 1e-4 of the total.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from math import inf, isfinite, isinf, log
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.forms import Floats

Ints = NDArray[np.int64]

DRIVERS = {"concentration": 0, "partial pressure": 1, "mole fraction": 2}
"""What rates are driven by -> code in `RateLaws.driver`; units mol/m3, Pa, -."""

BASES = {"catalyst mass": 0, "bed volume": 1, "void volume": 2}
"""What rates are per -> code in `RateLaws.basis`; units mol/(kg s), mol/(m3 s), mol/(m3 s)."""

T_STORED = 500.0
"""Reference temperature, K, that replaces an infinite one (a pre-exponential factor) in the arrays."""


@dataclass(frozen=True)
class Constant:
    """ln of a constant at T_ref and its temperature dependence; see the module's formulas.

    With T_ref infinite, ln_ref is the ln of the pre-exponential factor, and the whole reads
    ln k = ln_ref - E_over_R/T + c ln T + d T (K).
    """

    ln_ref: float
    T_ref: float = inf
    E_over_R: float = 0.0
    c: float = 0.0
    d: float = 0.0

    def at_finite_reference(self) -> Constant:
        if not isinf(self.T_ref):
            return self
        ln_ref = self.ln_ref - self.E_over_R / T_STORED + self.c * log(T_STORED) + self.d * T_STORED
        return Constant(ln_ref, T_STORED, self.E_over_R, self.c, self.d)


@dataclass(frozen=True)
class Term:
    """One term of a denominator, K_j(T) prod a_i^gamma_i; E_over_R of its constant is heat over R."""

    constant: Constant
    orders: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class Denominator:
    """One factor of the denominator: a sum of terms, raised to a power."""

    terms: tuple[Term, ...]
    power: float = 1.0


@dataclass(frozen=True)
class RateLaw:
    """The law of one reaction, in words and SI units of its driver and basis.

    stoichiometry: species -> nu; orders: species -> alpha; driver and basis: keys of `DRIVERS` and
    `BASES`; m: how many times the equation as written turns over in the step that sets the rate.
    """

    label: str
    stoichiometry: Mapping[str, float]
    orders: Mapping[str, float]
    constant: Constant
    driver: str
    reversible: bool
    basis: str = "catalyst mass"
    m: float = 1.0
    denominators: tuple[Denominator, ...] = ()


@dataclass(frozen=True, eq=False)
class RateLaws:
    """The laws of R reactions of S species: float64 or int64 arrays in C order.

    Denominator factors of reaction r are den_start[r]:den_start[r + 1] (of ND); the terms of factor n
    are term_start[n]:term_start[n + 1] (of NT).
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
    """(R,) 0 concentration mol/m3, 1 partial pressure Pa, 2 mole fraction."""
    reversible: Ints
    """(R,) 1 with a backward rate, 0 without."""
    m: Floats
    """(R,) power of the equilibrium constant."""
    basis: Ints
    """(R,) 0 catalyst mass, 1 bed volume, 2 void volume."""
    alpha: Floats
    """(R, S) forward orders."""
    beta: Floats
    """(R, S) backward orders, alpha + m nu."""
    nu: Floats
    """(R, S) stoichiometric matrix."""
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
    gamma: Floats
    """(NT, S) orders of each term."""


def rate_laws(laws: Sequence[RateLaw], names: Sequence[str]) -> RateLaws:
    """The arrays of several laws for species in the order of `names`.

    Raises ValueError, which begins with the reaction's label, for an unknown word or species, a
    constant that is not a finite number above zero, or a backward rate that would be singular where a
    reactant is absent.
    """
    for law in laws:
        _check(law, names)
    constants = [law.constant.at_finite_reference() for law in laws]
    factors = [factor for law in laws for factor in law.denominators]
    terms = [term for factor in factors for term in factor.terms]
    term_constants = [term.constant.at_finite_reference() for term in terms]
    return RateLaws(
        lnk_ref=_floats(one.ln_ref for one in constants),
        T_ref=_floats(one.T_ref for one in constants),
        E_over_R=_floats(one.E_over_R for one in constants),
        c=_floats(one.c for one in constants),
        d=_floats(one.d for one in constants),
        driver=_ints(DRIVERS[law.driver] for law in laws),
        reversible=_ints(law.reversible for law in laws),
        m=_floats(law.m for law in laws),
        basis=_ints(BASES[law.basis] for law in laws),
        alpha=_rows((law.orders for law in laws), names),
        beta=_rows((_backward_orders(law) for law in laws), names),
        nu=_rows((law.stoichiometry for law in laws), names),
        den_start=_offsets(len(law.denominators) for law in laws),
        den_power=_floats(factor.power for factor in factors),
        term_start=_offsets(len(factor.terms) for factor in factors),
        term_lnK_ref=_floats(one.ln_ref for one in term_constants),
        term_T_ref=_floats(one.T_ref for one in term_constants),
        term_H_over_R=_floats(one.E_over_R for one in term_constants),
        gamma=_rows((term.orders for term in terms), names),
    )


def basis_factors(laws: RateLaws, bulk_density: float, void_fraction: float) -> Floats:
    """What turns each rate into one per kg of catalyst (R,); bulk_density in kg/m3.

    1 for a rate per catalyst mass, 1/rho per bed volume, eps/rho per void volume.
    """
    return np.array([1.0, 1.0 / bulk_density, void_fraction / bulk_density])[laws.basis]


def _backward_orders(law: RateLaw) -> dict[str, float]:
    """beta = alpha + m nu, whole where it is whole to rounding."""
    names = {**law.orders, **law.stoichiometry}
    orders = {name: law.orders.get(name, 0.0) + law.m * law.stoichiometry.get(name, 0.0) for name in names}
    return {name: round(n) if abs(n - round(n)) < 1e-9 else n for name, n in orders.items()}


def _check(law: RateLaw, names: Sequence[str]) -> None:
    _check_words(law)
    _check_species(law, names)
    _check_numbers(law)
    singular = [name for name, order in _backward_orders(law).items() if order < 0.0]
    if law.reversible and singular:
        raise ValueError(
            f"{law.label}: the backward rate would be of negative order in {', '.join(singular)}, "
            "singular where that is absent; raise its forward order to what the equation consumes "
            "or write '=>'"
        )


def _check_words(law: RateLaw) -> None:
    for what, word, known in (("driven by", law.driver, DRIVERS), ("rate per", law.basis, BASES)):
        if word not in known:
            raise ValueError(f"{law.label}: {what} {word!r} is not one of {', '.join(known)}")


def _check_species(law: RateLaw, names: Sequence[str]) -> None:
    terms = [term for factor in law.denominators for term in factor.terms]
    for orders in (law.stoichiometry, law.orders, *(term.orders for term in terms)):
        unknown = [name for name in orders if name not in names]
        if unknown:
            raise ValueError(
                f"{law.label}: no species {', '.join(map(repr, unknown))} among {', '.join(names)}"
            )


def _check_numbers(law: RateLaw) -> None:
    if not any(law.stoichiometry.values()):
        raise ValueError(f"{law.label}: the reaction changes nothing")
    if not (isfinite(law.m) and law.m > 0.0):
        raise ValueError(f"{law.label}: m is {law.m:g}; it must be above zero")
    _check_constant(law.constant, f"{law.label}: the rate constant")
    for factor in law.denominators:
        if not factor.terms or not isfinite(factor.power) or factor.power == 0.0:
            raise ValueError(f"{law.label}: a denominator needs terms and a power other than zero")
        for term in factor.terms:
            _check_constant(term.constant, f"{law.label}: the constant of a denominator's term")
            if term.constant.c or term.constant.d:
                raise ValueError(f"{law.label}: the constant of a denominator's term takes no c or d")


def _check_constant(constant: Constant, what: str) -> None:
    if not constant.T_ref > 0.0:
        raise ValueError(f"{what} has the reference temperature {constant.T_ref:g} K; it must be above zero")
    if not all(map(isfinite, (constant.ln_ref, constant.E_over_R, constant.c, constant.d))):
        raise ValueError(f"{what} must be above zero and finite")


def _floats(values: Any) -> Floats:
    return np.array(list(values), dtype=np.float64)


def _ints(values: Any) -> Ints:
    return np.array(list(values), dtype=np.int64)


def _offsets(lengths: Any) -> Ints:
    return np.concatenate([[0], np.cumsum(_ints(lengths))]).astype(np.int64)


def _rows(orders: Any, names: Sequence[str]) -> Floats:
    rows = [[one.get(name, 0.0) for name in names] for one in orders]
    return np.array(rows, dtype=np.float64).reshape(len(rows), len(names))
