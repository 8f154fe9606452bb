"""Cubic equations of state: density, fugacity and residual enthalpy of mixtures, and their saturation.

    p = R T / (v - b) - a(T) / ((v + delta_1 b) (v + delta_2 b))
    a_i(T) = Omega_a R^2 Tc_i^2 / pc_i (1 + kappa_i (1 - sqrt(T / Tc_i)))^2,   b_i = Omega_b R Tc_i / pc_i
    a = sum_ij y_i y_j sqrt(a_i a_j) (1 - k_ij),   b = sum_i y_i b_i      (van der Waals one-fluid mixing)

Soave (1972), Chem. Eng. Sci. 27, 1197; Peng & Robinson (1976), Ind. Eng. Chem. Fundam. 15, 59; forms and
numbers from memory. The factors Omega are the exact ones of the critical point, not those rounded in the
papers. sqrt(a_i) keeps its sign: where it passes through zero, far above the critical temperature (at
Tc (1 + 1/kappa)^2: about 12 Tc for methane, 5 Tc for ethylbenzene), the equation has no meaning any more.

Plain NumPy, the readable twin of `reactorstage.bed.cubic`; `cubic_state` takes complex flows, temperature
and pressure, so that derivatives can be checked by complex step.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np

from reactorstage.chemistry.constants import R_GAS
from reactorstage.chemistry.critical import Critical
from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.thermo import Array

Scalar = Any
"""A float, or complex for a complex step."""

Phase = Literal["vapour", "liquid"]
VAPOUR: Phase = "vapour"
LIQUID: Phase = "liquid"

FOUND, DENSE, OTHER_PHASE, NOT_FINITE = 0, 1, 2, -1

WORDS = {
    FOUND: "the wanted phase exists",
    DENSE: "dense fluid without a boundary between vapour and liquid",
    OTHER_PHASE: "only the other phase exists at this temperature and pressure",
    NOT_FINITE: "flows, temperature or pressure without meaning",
}
"""What became of the wanted root. Sides are told apart by the critical volume of a fluid of this a and b.

FOUND: on its own side. DENSE: the only root lies on the other side, but the isotherm has no loop, so no
boundary lies between. OTHER_PHASE: the isotherm has a loop and the only root is the other phase's; values
are those of that root. NOT_FINITE: no flow, T or p not positive, or a number that overflowed.
"""


def kappa_soave(omega: float) -> float:
    """kappa of Soave (1972) for the acentric factor omega."""
    return 0.480 + 1.574 * omega - 0.176 * omega**2


def kappa_1976(omega: float) -> float:
    """kappa of Peng & Robinson (1976) for the acentric factor omega."""
    return 0.37464 + 1.54226 * omega - 0.26992 * omega**2


def kappa_1978(omega: float) -> float:
    """kappa with another polynomial above omega = 0.491, after Robinson & Peng (1978), as Cantera has it.

    The numbers are Cantera's, for parity; 0.379642 and 1.48503 are found instead of the first two as well
    (from memory), 0.002 to 0.004 higher between omega of 0.5 and 1.2.
    """
    if omega <= 0.491:
        return kappa_1976(omega)
    return 0.374642 + 1.487503 * omega - 0.164423 * omega**2 + 0.016666 * omega**3


@dataclass(frozen=True)
class Equation:
    """One equation of the family; density is b/v at the critical point of a pure fluid."""

    name: str
    delta: tuple[float, float]
    omega_a: float
    omega_b: float
    density: float
    kappa: Callable[[float], float]


def _soave() -> Equation:
    root = 2.0 ** (1.0 / 3.0) - 1.0
    return Equation("Soave 1972", (1.0, 0.0), 1.0 / (9.0 * root), root / 3.0, root, kappa_soave)


def _peng_robinson(name: str, kappa: Callable[[float], float]) -> Equation:
    root = np.sqrt(2.0)
    x = float((np.cbrt(6.0 * root + 8.0) - np.cbrt(6.0 * root - 8.0) - 1.0) / 3.0)
    delta = (float(1.0 + root), float(1.0 - root))
    return Equation(name, delta, 8.0 * (5.0 * x + 1.0) / (49.0 - 37.0 * x), x / (x + 3.0), x, kappa)


EQUATIONS = {
    one.name: one
    for one in (
        _soave(),
        _peng_robinson("Peng-Robinson 1976", kappa_1976),
        _peng_robinson("Peng-Robinson 1978", kappa_1978),
    )
}
"""By name. Cantera's Peng-Robinson phase is "Peng-Robinson 1978"."""


@dataclass(frozen=True, eq=False)
class CubicFluid:
    """A mixture of S species under one equation.

    With q_i = sqrt(a_i / R): q_i = root_0_i - root_T_i sqrt(T), (S,) in sqrt(K m3/mol) and sqrt(m3/mol);
    b (S,) m3/mol; pairs (S, S) holds 1 - k_ij.
    """

    equation: Equation
    critical: tuple[Critical, ...]
    root_0: Floats = field(repr=False)
    root_T: Floats = field(repr=False)
    b: Floats = field(repr=False)
    pairs: Floats = field(repr=False)

    def part(self, there: Array) -> CubicFluid:
        """The mixture of some of its species, (S,) true where wanted."""
        return CubicFluid(
            self.equation,
            tuple(one for one, wanted in zip(self.critical, there, strict=True) if wanted),
            self.root_0[there],
            self.root_T[there],
            self.b[there],
            self.pairs[np.ix_(there, there)],
        )


def cubic_fluid(equation: str, critical: Sequence[Critical], k: Floats | None = None) -> CubicFluid:
    """A mixture under one of `EQUATIONS`; k (S, S) binary interaction parameters, none: all zero.

    Raises LookupError for an unknown equation, ValueError when k is not symmetric with a zero diagonal.
    """
    if equation not in EQUATIONS:
        raise LookupError(f"no equation of state {equation!r}; there are {', '.join(EQUATIONS)}")
    kind, S = EQUATIONS[equation], len(critical)
    k = np.zeros((S, S)) if k is None else np.asarray(k, dtype=np.float64)
    if k.shape != (S, S) or not np.array_equal(k, k.T) or np.any(np.diag(k) != 0.0):
        raise ValueError(f"the k_ij are not a symmetric {S} by {S} table with a diagonal of zeros")
    Tc = np.array([one.temperature for one in critical])
    pc = np.array([one.pressure for one in critical])
    kappa = np.array([kind.kappa(one.acentric_factor) for one in critical])
    root = np.sqrt(kind.omega_a * R_GAS / pc) * Tc
    return CubicFluid(
        equation=kind,
        critical=tuple(critical),
        root_0=root * (1.0 + kappa),
        root_T=root * kappa / np.sqrt(Tc),
        b=kind.omega_b * R_GAS * Tc / pc,
        pairs=1.0 - k,
    )


@dataclass(frozen=True, eq=False)
class CubicState:
    """One phase of a mixture with the flows F.

    status of `WORDS`; Z compressibility; V volume flow m3/s; H residual enthalpy flow W, that is H of the
    fluid less H of the ideal gas at the same F, T, p; ln_phi (S,) logarithms of the fugacity coefficients.
    """

    status: int
    Z: Scalar
    V: Scalar
    H: Scalar
    ln_phi: Array


@dataclass(frozen=True, eq=False)
class FugacitySlopes:
    """Derivatives of ln_phi (S,): by the flows (S, S) s/mol, temperature (S,) 1/K and pressure (S,) 1/Pa."""

    F: Floats
    T: Floats
    p: Floats


def cubic_state(fluid: CubicFluid, F: Array, T: Scalar, p: Scalar, phase: Phase = VAPOUR) -> CubicState:
    """Z, volume, residual enthalpy and fugacities of a vapour (largest root) or liquid (smallest root).

        ln phi_i = b_i / b (Z - 1) - ln(Z - B) - a / (b R T) (2 sum_j y_j a_ij / a - b_i / b) L
        L = ln((Z + delta_1 B) / (Z + delta_2 B)) / (delta_1 - delta_2),   B = b p / (R T)
        H = n (R T (Z - 1) + (T da/dT - a) L / b)

    F (S,) mol/s, T K, p Pa. Nothing is to be read when the status is NOT_FINITE.
    """
    if not _meaningful(fluid, F, T, p):
        return CubicState(NOT_FINITE, np.nan, np.nan, np.nan, np.full(len(F), np.nan))
    (delta_1, delta_2), n = fluid.equation.delta, np.sum(F)
    y, root_T = F / n, np.sqrt(T)
    q, q_T = fluid.root_0 - fluid.root_T * root_T, -fluid.root_T / (2.0 * root_T)
    u, b = fluid.pairs @ (y * q), fluid.b @ y
    a, a_T = np.sum(y * q * u), 2.0 * np.sum(y * q_T * u)
    B, ratio = b * p / (R_GAS * T), a / (b * T)
    Z, status = _compressibility(fluid.equation, ratio, B, phase)
    L = np.log((Z + delta_1 * B) / (Z + delta_2 * B)) / (delta_1 - delta_2)
    own = 2.0 * q * u / (b * T) - ratio * fluid.b / b
    return CubicState(
        status=status,
        Z=Z,
        V=n * Z * R_GAS * T / p,
        H=n * R_GAS * (T * (Z - 1.0) + (T * a_T - a) * L / b),
        ln_phi=fluid.b / b * (Z - 1.0) - np.log(Z - B) - own * L,
    )


def _meaningful(fluid: CubicFluid, F: Array, T: Scalar, p: Scalar) -> bool:
    sizes = [np.sum(F).real, (fluid.b @ F).real, np.real(T), np.real(p)]
    return bool(np.all(np.isfinite(sizes)) and min(sizes) > 0.0)


def _compressibility(equation: Equation, ratio: Scalar, B: Scalar, phase: Phase) -> tuple[Scalar, int]:
    """Root of Z^3 + c2 Z^2 + c1 Z + c0 above B, with its status; ratio is a / (b R T).

    Newton from beyond the outermost root of a side, hence monotone (at B the cubic is below zero), then two
    steps that carry an imaginary part along.
    """
    total, product = sum(equation.delta), equation.delta[0] * equation.delta[1]
    A = ratio * B
    c2 = (total - 1.0) * B - 1.0
    c1 = A + (product - total) * B**2 - total * B
    c0 = -(A + product * (1.0 + B) * B) * B
    high = 1.0 + np.real(B) - min(np.real(A), 0.0)
    Z: Scalar = _real_root(np.real(c2), np.real(c1), np.real(c0), np.real(B), high, phase)
    for _ in range(2):
        Z = Z - (((Z + c2) * Z + c1) * Z + c0) / ((3.0 * Z + 2.0 * c2) * Z + c1)
    if not np.isfinite(Z):
        return Z, NOT_FINITE
    side: Phase = VAPOUR if np.real(Z) * equation.density > np.real(B) else LIQUID
    if side == phase:
        return Z, FOUND
    return Z, OTHER_PHASE if np.real(ratio) > equation.omega_a / equation.omega_b else DENSE


def _real_root(c2: float, c1: float, c0: float, low: float, high: float, phase: Phase) -> float:
    """The wanted real root, or the only one; all of them lie between low and high."""
    middle, spread = -c2 / 3.0, c2 * c2 - 3.0 * c1
    turn = middle + (1.0 if phase == VAPOUR else -1.0) * np.sqrt(max(spread, 0.0)) / 3.0
    below = ((turn + c2) * turn + c1) * turn + c0 <= 0.0
    from_high = below or (phase == LIQUID and spread > 0.0 and turn <= low)
    Z = high if from_high else low
    for _ in range(100):
        step = (((Z + c2) * Z + c1) * Z + c0) / ((3.0 * Z + 2.0 * c2) * Z + c1)
        Z -= step
        if abs(step) <= 1e-14 * Z or (step > 0.0) != from_high:
            break
    return Z


def fugacity_slopes(fluid: CubicFluid, F: Floats, T: float, p: float, Z: float) -> FugacitySlopes:
    """Derivatives of ln_phi of the phase with the compressibility Z, the one `cubic_state` gives.

    From the residual Helmholtz energy -n ln(1 - beta) - Q L(beta) with beta = b/v and Q = n a / (b R T), as
    in Michelsen & Mollerup, Thermodynamic Models, chapters 1 and 3 (from memory). Quantities that vanish
    in the ideal gas are formed without subtracting larger ones.
    """
    (delta_1, delta_2), n, root_T = fluid.equation.delta, float(np.sum(F)), np.sqrt(T)
    q, q_T = fluid.root_0 - fluid.root_T * root_T, -fluid.root_T / (2.0 * root_T)
    u, u_T, BT = fluid.pairs @ (F * q), fluid.pairs @ (F * q_T), T * float(fluid.b @ F)
    x = fluid.b * (n * T / BT)
    Q, D_T = F @ (q * u) / BT, 2.0 * F @ (q_T * u) * T / BT
    Q_i, TQ_T = 2.0 * q * u / BT - Q * x / n, D_T - Q
    TQ_iT = 2.0 * (q_T * u + q * u_T) * T / BT - 2.0 * q * u / BT - TQ_T * x / n
    beta = p * BT / (n * R_GAS * T * T * Z)
    G = 1.0 / (1.0 - beta)
    M = 1.0 / ((1.0 + delta_1 * beta) * (1.0 + delta_2 * beta))
    M_beta = -M * M * (delta_1 + delta_2 + 2.0 * delta_1 * delta_2 * beta)
    L = np.log1p((delta_1 - delta_2) * beta / (1.0 + delta_2 * beta)) / (delta_1 - delta_2)
    first, second = G - M * Q / n, G * G - M_beta * Q / n
    z = beta * first
    stiff = 2.0 * z + beta**2 * second
    heat = z - beta * M * TQ_T / n
    swell = beta * (G - M * Q_i + x * (first + beta * second))
    cross = (L - M * beta) * np.outer(x, Q_i) + G * beta * x[:, None]
    A_ij = (cross + cross.T + beta**2 * second * np.outer(x, x)) / n
    A_ij -= 2.0 * L * np.outer(q, q) * fluid.pairs / BT
    return FugacitySlopes(
        F=A_ij + (stiff - np.add.outer(swell, swell) - np.outer(swell, swell)) / (n * (1.0 + stiff)),
        T=((stiff - swell - heat - swell * heat) / (1.0 + stiff) - beta * x * M * TQ_T / n - TQ_iT * L) / T,
        p=(z + swell + z * swell - stiff) / (p * (1.0 + stiff)),
    )


def residual_capacity(fluid: CubicFluid, F: Floats, T: float, p: float, Z: float) -> float:
    """dH/dT of the residual enthalpy flow at constant pressure, W/K, of the phase with compressibility Z.

    From H = n R T (Z - 1) + R T^2 dQ/dT L(beta) with Q and beta as in `fugacity_slopes`.
    """
    (delta_1, delta_2), n, root_T = fluid.equation.delta, float(np.sum(F)), np.sqrt(T)
    q, fall = fluid.root_0 - fluid.root_T * root_T, 0.5 * fluid.root_T * root_T
    u, u_fall, BT = fluid.pairs @ (F * q), fluid.pairs @ (F * fall), T * float(fluid.b @ F)
    Q, TQ_T = F @ (q * u) / BT, -2.0 * F @ (fall * u) / BT - F @ (q * u) / BT
    curve = F @ (fall * (u + 2.0 * u_fall)) / BT
    beta = p * BT / (n * R_GAS * T * T * Z)
    G, M = 1.0 / (1.0 - beta), 1.0 / ((1.0 + delta_1 * beta) * (1.0 + delta_2 * beta))
    M_beta = -M * M * (delta_1 + delta_2 + 2.0 * delta_1 * delta_2 * beta)
    L = np.log1p((delta_1 - delta_2) * beta / (1.0 + delta_2 * beta)) / (delta_1 - delta_2)
    z = beta * (G - M * Q / n)
    stiff = 2.0 * z + beta**2 * (G * G - M_beta * Q / n)
    heat = z - beta * M * TQ_T / n
    return float(R_GAS * (L * curve + n * ((2.0 + heat) * heat - stiff) / (1.0 + stiff)))
