"""Reaction quotients as the rate laws see them, with exact slopes, for every fluid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.constants import P_STANDARD, R_GAS
from reactorstage.chemistry.law import DRIVERS
from reactorstage.chemistry.mixture import Mixture
from reactorstage.train.chemistry import CaseChemistry

Array = NDArray[np.float64]

TINY = 1e-30
"""Relative step of derivatives by complex step, exact to rounding."""


@dataclass(frozen=True, eq=False)
class Quotient:
    """ln Q of one reaction, in the standard pressure of its K, with slopes by flows (S,), T and p."""

    ln: float
    F: Array
    T: float
    p: float


def quotient(chemistry: CaseChemistry, reaction: int, F: Array, T: float, p: float) -> Quotient:
    """Q of a reaction at flows F (S,); -inf, inf or nan where a species that takes part is absent.

    Activities, unless the law has a K of its own: then what drives it, partial pressures of a real gas too.
    """
    nu, laws = chemistry.laws.nu[reaction], chemistry.laws
    mixture = chemistry.mixture
    own, driver = bool(laws.own_K[reaction]), int(laws.driver[reaction])
    if own and driver == DRIVERS["concentration"]:
        return _by_concentration(mixture, nu, F, T, p)
    if own and driver != DRIVERS["fugacity"] and mixture.fluid is not None:
        gas = Mixture(mixture.table) if driver == DRIVERS["partial pressure"] else mixture
        return _by_activity(gas, nu, F, T, p)
    return _by_activity(mixture, nu, F, T, p)


def _by_activity(mixture: Mixture, nu: Array, F: Array, T: float, p: float) -> Quotient:
    n = float(np.sum(F))
    by_F, by_T, by_p = mixture.coefficient_slopes(F, T, p)
    ln = _ln(nu, F / n) + float(nu @ mixture.ln_coefficients(F, T, p))
    return Quotient(ln, nu @ by_F + _shares(nu, F) - nu.sum() / n, float(nu @ by_T), float(nu @ by_p))


def _by_concentration(mixture: Mixture, nu: Array, F: Array, T: float, p: float) -> Quotient:
    """With c R T/p0 in place of activities."""
    change, flow = float(nu.sum()), float(np.sum(F))
    V = float(mixture.volume(F, T, p))
    each = flow * np.eye(len(F))
    V_F = np.array([mixture.volume(F + 1j * TINY * row, T, p).imag for row in each]) / (TINY * flow)
    V_T = mixture.volume(F, T * (1.0 + 1j * TINY), p).imag / (TINY * T)
    V_p = mixture.volume(F, T, p * (1.0 + 1j * TINY)).imag / (TINY * p)
    ln = _ln(nu, F / V) + change * float(np.log(R_GAS * T / P_STANDARD))
    return Quotient(ln, _shares(nu, F) - change * V_F / V, change * (1.0 / T - V_T / V), -change * V_p / V)


def _ln(nu: Array, amounts: Array) -> float:
    with np.errstate(divide="ignore", invalid="ignore"):
        return float(np.where(nu != 0.0, nu * np.log(np.maximum(amounts, 0.0)), 0.0).sum())


def _shares(nu: Array, F: Array) -> Array:
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(nu != 0.0, nu / F, 0.0)
