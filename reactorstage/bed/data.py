"""The flat arrays that the kernel reads and writes, and where everything stands in them.

S species, R reactions, L most species that one rate law names, n = R + 1 length of the state.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Index = NDArray[np.int64]

GAS_CONSTANT = 8.31446261815324
STANDARD_PRESSURE = 1e5

CONCENTRATION, PARTIAL_PRESSURE, MOLE_FRACTION, FUGACITY = 0, 1, 2, 3

IDEAL, CUBIC, LIQUID = 0, 1, 2
"""Fluids: ideal gas, cubic equation of state, liquid of given densities."""

POWERS_OF_DENSITY = 4
"""Powers of T, from the 0th on, in the density of a species of a liquid."""

LAW = 12
"""Numbers of one law: ln k at T_ref, T_ref, E/R, c, d; m, sum of nu; ln K at T_ref, T_ref, H/R, c, d."""

KIND = 9
"""Whole numbers of one law before its members: driver; 1 if reversible, 2 with a K of its own; members; first
and last factor; kind of effectiveness; positions among the members of its key species and of the product;
1 with floors."""

TERM = 5
"""Numbers of one term of a denominator before its orders: ln K at T_ref, T_ref, H/R, c, d."""

BED = 6
"""Numbers of one bed before its flows: H [W], inlet T [K], F_unit [mol/s], p_unit [Pa], W [kg], friction.

Behind the flows (S,) stand the factors of the rates (R,), then pairs of depth and share of activity.
"""

H_IN, T_IN, F_UNIT, P_UNIT, W_BED, FRICTION = 0, 1, 2, 3, 4, 5

PARAMETERS = ("ln k", "E/R", "ln K of term", "H/R of term", "enthalpy", "entropy", "composition")
"""Kinds of parameters that a direction can move, by number; -1 for none."""

LN_K, E_OVER_R, LN_K_TERM, H_TERM, ENTHALPY, ENTROPY, COMPOSITION = 0, 1, 2, 3, 4, 5, 6


class Chemistry(NamedTuple):
    """Species and rate laws of one case, see `reactorstage.chemistry.rate_law` for the law.

    real holds, one after another: coefficients (S, 3, 9), inner edges of their ranges (S, 2), molar masses
    (S,), nu (R, S), law (R, LAW), orders (R, 3, L) forward, backward and floors of the members (0: none),
    effectiveness (R, ETA); then for each denominator factor its power, then for each term its numbers (TERM)
    and its orders (L,). A species is two members where a law takes powers both of its driver and of its
    floored driver.
    whole holds kind and members (R, KIND + L), then first and last term of each factor. limited counts the
    laws with an effectiveness, fugacity those driven by fugacity. state holds the constants of the fluid: of
    a cubic equation those of the stream's phase, then those of the other phase (`cubic.pack_cubic`); of a
    liquid the densities in kg/m3 (S, POWERS_OF_DENSITY); nothing of an ideal gas. nonideal is empty for an
    ideal gas and holds one number else: its length is part of the type, so that machine code for ideal gases
    has nothing of other fluids in it.
    """

    real: Array
    whole: Index
    S: int
    R: int
    L: int
    factors: int
    T_low: float
    T_high: float
    limited: int
    fugacity: int
    fluid: int
    state: Array
    nonideal: tuple[()] | tuple[float]


class Beds(NamedTuple):
    """What the B beds are made of; numbers that may move stand in the train's input vector.

    rate_factor (B, R) turns each rate into one per kg of catalyst; viscous and inertial (B,) give the
    Ergun gradient per kg of catalyst, dp/dw = -factor (viscous + inertial * m_dot) / rho * m_dot,
    zero where the geometry is not given. profile (B, 2 N) holds points (depth, share of activity), deeper
    ones behind; N = 0 where no bed has any.
    """

    rate_factor: Array
    viscous: Array
    inertial: Array
    profile: Array


class Stages(NamedTuple):
    """Step sequences of all beds: counts (B,) and steps (B, N, 2 + 4 n + 3).

    One step: depth of its start, its length, y0 (n,), Z (3, n), temperatures of the stages (3,).
    """

    counts: Index
    steps: Array


class Tolerance(NamedTuple):
    """Error per step: flow relative to the bed's feed, temperature in K, Newton (share of the feed).

    named (S,) is 1 for species whose own flow must be right relative to itself.
    """

    flow: float
    temperature: float
    newton: float
    named: Array
