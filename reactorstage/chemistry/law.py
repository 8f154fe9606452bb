"""One rate law in words: constants, orders, what stands below the line, floors, effectiveness.

    rate = eta * factor * k(T) * [ prod a_i^alpha_i - prod a_i^beta_i / Ka(T, p)^m ]
           / prod_n ( sum_j K_j(T) prod a_i^gamma_ij )^q_n

with beta = alpha + m nu, derived and never given, so that the rate is zero at equilibrium by
construction (the form of Hougen and Watson, Chemical Process Principles III, 1947, and of Temkin
and Pyzhev, 1940, in one). Every constant, K of the reaction included, has the form

    ln k(T) = ln_ref + E/R (1/T_ref - 1/T) + c ln(T/T_ref) + d (T - T_ref)
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from math import inf, isfinite, isinf, log
from typing import Any

import numpy as np

from reactorstage.chemistry.constants import R_GAS

DRIVERS = {"concentration": 0, "partial pressure": 1, "mole fraction": 2, "fugacity": 3}
"""What rates are driven by -> code in `RateLaws.driver`; units mol/m3, Pa, -, Pa."""

BASES = {"catalyst mass": 0, "bed volume": 1, "void volume": 2}
"""What rates are per -> code in `RateLaws.basis`; units mol/(kg s), mol/(m3 s), mol/(m3 s)."""

SHAPES = {"slab": 2, "sphere": 3}
"""Shapes of a particle -> code in `RateLaws.eta_kind`."""

T_STORED = 500.0
"""Reference temperature, K, that replaces an infinite one (a pre-exponential factor) in the arrays."""

MOST_POWERS_OF_T, MOST_POWERS_OF_Z = 5, 4
"""Terms of an effectiveness polynomial: 1, T ... T^4 and Z ... Z^4."""

LARGEST_FLOOR = 0.1


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

    def ln(self, T: Any) -> Any:
        """ln of the constant at T in K, which may be complex or an array."""
        one = self.at_finite_reference()
        away = one.E_over_R * (1.0 / one.T_ref - 1.0 / T)
        return one.ln_ref + away + one.c * np.log(T / one.T_ref) + one.d * (T - one.T_ref)

    def heat(self, T: Any) -> Any:
        """R T^2 d ln k/dT at T in K, J/mol: heat of reaction when this is an equilibrium constant."""
        return R_GAS * (self.E_over_R + self.c * T + self.d * T * T)


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
class Polynomial:
    """Effectiveness sum_k by_T[k] T^k + sum_k by_Z[k] Z^(k+1), T in K; a fixed number has one entry.

    Z is the part of `key` that has become `into`: with mole fractions y and |nu| of the equation,
    Z = w y_into/(y_key + w y_into), w = |nu_key/nu_into| (the form of Dyson and Simon, Ind. Eng.
    Chem. Fundam. 7 (1968) 605, from memory). A polynomial that falls towards zero outside its
    range is kept above it: eta = (P + sqrt(P^2 + 4e-8))/2.
    """

    by_T: tuple[float, ...]
    by_Z: tuple[float, ...] = ()
    key: str = ""
    into: str = ""


@dataclass(frozen=True)
class Thiele:
    """Effectiveness of a first-order reaction in a porous particle (Thiele, Ind. Eng. Chem. 31 (1939) 916).

    phi = size sqrt(|nu_key r| density/(diffusivity C_key)), r per kg without pore limitation; a slab has
    eta = tanh(phi)/phi with half its thickness as size, a sphere 3 (phi coth(phi) - 1)/phi^2 with its
    radius. size m, diffusivity m2/s (effective), density kg/m3 of the particle.
    """

    size: float
    diffusivity: float
    key: str
    shape: str
    density: float


@dataclass(frozen=True)
class RateLaw:
    """The law of one reaction, in words and SI units of its driver and basis.

    stoichiometry: species -> nu; orders: species -> alpha; driver and basis: keys of `DRIVERS` and
    `BASES`; m: how many times the equation as written turns over in the step that sets the rate.
    K: the law's own equilibrium constant (standard pressure 1e5 Pa), None for that of the Gibbs energies.
    floors: species -> mole fraction, see `orders`.
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
    K: Constant | None = None
    floors: Mapping[str, float] = field(default_factory=dict)
    effectiveness: Polynomial | Thiele | None = None


def backward_orders(law: RateLaw) -> dict[str, float]:
    """beta = alpha + m nu, whole where it is whole to rounding."""
    names = {**law.orders, **law.stoichiometry}
    orders = {name: law.orders.get(name, 0.0) + law.m * law.stoichiometry.get(name, 0.0) for name in names}
    return {name: round(n) if abs(n - round(n)) < 1e-9 else n for name, n in orders.items()}


def check_law(law: RateLaw, names: Sequence[str]) -> None:
    """Raises ValueError, which begins with the label, for what cannot be a law of the species `names`."""
    _check_words(law)
    _check_species(law, names)
    _check_numbers(law)
    _check_effectiveness(law)


def _check_words(law: RateLaw) -> None:
    for what, word, known in (("driven by", law.driver, DRIVERS), ("rate per", law.basis, BASES)):
        if word not in known:
            raise ValueError(f"{law.label}: {what} {word!r} is not one of {', '.join(known)}")


def _check_species(law: RateLaw, names: Sequence[str]) -> None:
    terms = [term for factor in law.denominators for term in factor.terms]
    used: list[Mapping[str, float]] = [law.stoichiometry, law.orders, law.floors]
    for orders in [*used, *(term.orders for term in terms)]:
        unknown = [name for name in orders if name not in names]
        if unknown:
            raise ValueError(
                f"{law.label}: no species {', '.join(map(repr, unknown))} among {', '.join(names)}"
            )


def _check_numbers(law: RateLaw) -> None:
    if not any(law.stoichiometry.values()):
        raise ValueError(f"{law.label}: the reaction changes nothing")
    if not (isfinite(law.m) and law.m > 0.0):
        raise ValueError(f"{law.label}: the power of K is {law.m:g}; it must be above zero")
    _check_constant(law.constant, f"{law.label}: the rate constant")
    if law.K is not None:
        _check_constant(law.K, f"{law.label}: the equilibrium constant")
    for name, floor in law.floors.items():
        if not 0.0 < floor <= LARGEST_FLOOR:
            raise ValueError(
                f"{law.label}: the floor of {name} must lie above 0 and at most {LARGEST_FLOOR:g}"
            )
    for factor in law.denominators:
        if not factor.terms or not isfinite(factor.power) or factor.power == 0.0:
            raise ValueError(f"{law.label}: a denominator needs terms and a power other than zero")
        for term in factor.terms:
            _check_constant(term.constant, f"{law.label}: the constant of a denominator's term")


def _check_constant(constant: Constant, what: str) -> None:
    if not constant.T_ref > 0.0:
        raise ValueError(f"{what} has the reference temperature {constant.T_ref:g} K; it must be above zero")
    if not all(map(isfinite, (constant.ln_ref, constant.E_over_R, constant.c, constant.d))):
        raise ValueError(f"{what} must be above zero and finite")


def _check_effectiveness(law: RateLaw) -> None:
    eta, nu = law.effectiveness, law.stoichiometry
    if isinstance(eta, Thiele):
        if eta.shape not in SHAPES:
            raise ValueError(f"{law.label}: shape {eta.shape!r} is not one of {', '.join(SHAPES)}")
        if not nu.get(eta.key, 0.0) < 0.0:
            raise ValueError(f"{law.label}: {eta.key} is not consumed, so it cannot be the key species")
        if not all(isfinite(n) and n > 0.0 for n in (eta.size, eta.diffusivity, eta.density)):
            raise ValueError(f"{law.label}: size, diffusivity and density of the particle must be above zero")
    elif eta is not None:
        if not 1 <= len(eta.by_T) <= MOST_POWERS_OF_T or len(eta.by_Z) > MOST_POWERS_OF_Z:
            raise ValueError(
                f"{law.label}: an effectiveness takes one to {MOST_POWERS_OF_T} powers of T and up to "
                f"{MOST_POWERS_OF_Z} of the conversion"
            )
        if eta.by_Z and not (nu.get(eta.key, 0.0) < 0.0 < nu.get(eta.into, 0.0)):
            raise ValueError(
                f"{law.label}: a conversion is that of a species that is consumed into one that is made, "
                f"not of {eta.key!r} into {eta.into!r}"
            )
