"""Reaction rates in plain NumPy, the readable twin of the compiled kernel.

Everything takes complex flows, temperature and pressure, so that derivatives can be checked by
complex step. The formulas stand at the top of `law`, `rate_law` and `orders`.
"""

from __future__ import annotations

import numpy as np

from reactorstage.chemistry.constants import P_STANDARD, R_GAS
from reactorstage.chemistry.effectiveness import effectiveness
from reactorstage.chemistry.fluid import Fluid, PlainLiquid
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.law import DRIVERS
from reactorstage.chemistry.mixture import Mixture
from reactorstage.chemistry.rate_law import RateLaws
from reactorstage.chemistry.reaction import ln_K
from reactorstage.chemistry.smooth import floored
from reactorstage.chemistry.species import SpeciesTable
from reactorstage.chemistry.thermo import Array, Scalar

CONCENTRATION, MOLE_FRACTION, FUGACITY = (
    DRIVERS[word] for word in ("concentration", "mole fraction", "fugacity")
)

DELTA = 1e-12
"""Width of the smooth extension of powers around zero, as a fraction of the total of the driver."""


def rates(
    laws: RateLaws,
    table: SpeciesTable,
    F: Array,
    T: Scalar,
    p: Scalar,
    factor: Floats,
    fluid: Fluid | None = None,
) -> Array:
    """Rates of the reactions (R,), mol/(kg s) with factors that make them so.

    F (S,) molar flows, mol/s, only their ratios matter; T K; p Pa; factor (R,) catalyst activity
    times `basis_factors`; fluid None for an ideal gas. Several compositions at once, F (S, N), give rates
    (R, N). Not a number where the fluid has no root.
    """
    if fluid is not None and F.ndim > 1:
        columns = [rates(laws, table, column, T, p, factor, fluid) for column in F.T]
        return np.stack(columns, axis=-1)
    y = F / np.sum(F, axis=0)
    k = np.exp(ln_k(laws, T))
    mixture = Mixture(table, fluid)
    density = np.sum(F, axis=0) / mixture.volume(F, T, p)
    phi = np.exp(mixture.ln_coefficients(F, T, p)) * (P_STANDARD / p)
    ln_Ka = ln_K_of_driver(laws, table, T, p, fluid, density)
    found = []
    for r in range(len(laws.m)):
        driver = laws.driver[r]
        total = density if driver == CONCENTRATION else driver_total(driver, T, p)
        z = y * phi if driver == FUGACITY and fluid is not None else y
        a = np.concatenate([z, _floored(z, laws.floor[r])]) * total
        drive = product(a, laws.forward[r], total)
        if laws.reversible[r]:
            drive = drive - product(a, laws.backward[r], total) * np.exp(-laws.m[r] * ln_Ka[r])
        rate = factor[r] * k[r] * drive / _denominator(laws, r, a, T, total)
        found.append(rate * effectiveness(laws, r, rate, y, T, density))
    return np.array(found)


def ln_k(laws: RateLaws, T: Scalar) -> Array:
    """ln of the rate constants at T in K, (R,)."""
    away = laws.E_over_R * (1.0 / laws.T_ref - 1.0 / T)
    ln_k_T = laws.lnk_ref + away + laws.c * np.log(T / laws.T_ref) + laws.d * (T - laws.T_ref)
    return np.asarray(ln_k_T)


def ln_K_of_laws(laws: RateLaws, table: SpeciesTable, T: Scalar) -> Array:
    """ln of the equilibrium constants by which the laws come to rest, (R,), standard pressure 1e5 Pa."""
    ln_ref, T_ref, H_over_R, c, d = laws.K_form.T
    own = ln_ref + H_over_R * (1.0 / T_ref - 1.0 / T) + c * np.log(T / T_ref) + d * (T - T_ref)
    return np.asarray(np.where(laws.own_K == 1, own, ln_K(table, laws.nu, T)))


def ln_K_of_driver(
    laws: RateLaws, table: SpeciesTable, T: Scalar, p: Scalar, fluid: Fluid | None, density: Scalar
) -> Array:
    """ln of the equilibrium constants in the unit of each driver, (R,): Ka = K (p0 a/p)^(sum nu).

    In a liquid, whose activities are mole fractions, K (density)^(sum nu) of concentrations; density mol/m3.
    """
    by_driver = [P_STANDARD / (R_GAS * T), P_STANDARD, P_STANDARD / p, P_STANDARD]
    ln_p0_a_p = np.log(np.array(by_driver))[laws.driver]
    if isinstance(fluid, PlainLiquid):
        ln_p0_a_p = np.where(laws.driver == MOLE_FRACTION, 0.0, ln_p0_a_p)
        by_density = (laws.driver == CONCENTRATION) & (laws.own_K == 0)
        ln_p0_a_p = np.where(by_density, np.log(density), ln_p0_a_p)
    return np.asarray(ln_K_of_laws(laws, table, T) + laws.nu.sum(axis=1) * ln_p0_a_p)


def driver_total(driver: int, T: Scalar, p: Scalar) -> Scalar:
    """Sum of the driver over all species: p/(R T) in mol/m3, p in Pa, 1, or p in Pa."""
    return (p / (R_GAS * T), p, 1.0, p)[driver]


def product(a: Array, orders: Floats, total: Scalar) -> Scalar:
    """prod a_i^n_i with the smooth extension of broken and negative orders."""
    value: Scalar = 1.0
    for a_i, n in zip(a, orders, strict=True):
        value = value * power(a_i, n, DELTA * total)
    return value


def power(a: Scalar, n: float, delta: Scalar) -> Scalar:
    """a^n, extended smoothly through zero with the width delta."""
    if n >= 0.0 and n == round(n):
        return a ** int(n)
    square = a * a + delta * delta
    return a * square ** ((n - 1.0) / 2.0) if n > 0.0 else square ** (n / 2.0)


def _floored(y: Array, floor: Floats) -> Array:
    """Floored mole fractions; where there is no floor their power is 0 and they do not matter."""
    return np.asarray(floored(y, floor.reshape(-1, *[1] * (y.ndim - 1))))


def _denominator(laws: RateLaws, r: int, a: Array, T: Scalar, total: Scalar) -> Scalar:
    value: Scalar = 1.0
    for n in range(laws.den_start[r], laws.den_start[r + 1]):
        terms = range(laws.term_start[n], laws.term_start[n + 1])
        value = value * sum(_term(laws, j, a, T, total) for j in terms) ** laws.den_power[n]
    return value


def _term(laws: RateLaws, j: int, a: Array, T: Scalar, total: Scalar) -> Scalar:
    T_ref = laws.term_T_ref[j]
    ln_K_j = laws.term_lnK_ref[j] + laws.term_H_over_R[j] * (1.0 / T_ref - 1.0 / T)
    ln_K_j = ln_K_j + laws.term_c[j] * np.log(T / T_ref) + laws.term_d[j] * (T - T_ref)
    K_j: Scalar = np.exp(ln_K_j)
    return K_j * product(a, laws.below[j], total)
