"""Published forms of species thermochemistry, each mapped exactly onto the nine-coefficient form.

The nine-coefficient form (McBride, Zehe, Gordon, NASA/TP-2002-211556, eqs. 1-3):

    cp/R   = sum_{k=0..6} c_k T^(k-2)
    h/(RT) = -c0 T^-2 + c1 ln(T)/T + c2 + c3 T/2 + c4 T^2/3 + c5 T^3/4 + c6 T^4/5 + c7/T
    s/R    = -c0 T^-2/2 - c1/T + c2 ln T + c3 T + c4 T^2/2 + c5 T^3/3 + c6 T^4/4 + c8

Every function returns one or more ranges of (9,) coefficients, entropies at the pressure of the
data; `fill` brings them to the fixed shape of a species table.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import log

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry.constants import R_GAS, T_STANDARD

Floats = NDArray[np.float64]

RANGES = 3
DEFAULT_RANGE = (200.0, 3000.0)
"""Temperature range assumed for data that state none, K."""


def from_nasa7(a: Sequence[float]) -> Floats:
    """Seven coefficients a1..a7 of one range: cp/R = a1 + a2 T + ... + a5 T^4, a6 of h, a7 of s."""
    return np.array([0.0, 0.0, *a], dtype=np.float64)


def from_shomate(a: Sequence[float]) -> Floats:
    """Shomate coefficients A..G of one range (t = T/1000, J/(mol K), h in kJ/mol):

    cp = A + B t + C t^2 + D t^3 + E/t^2,  h = A t + B t^2/2 + C t^3/3 + D t^4/4 - E/t + F,
    s = A ln t + B t + C t^2/2 + D t^3/3 - E/(2 t^2) + G.
    """
    A, B, C, D, E, F, G = a
    powers = [E * 1e6, 0.0, A, B * 1e-3, C * 1e-6, D * 1e-9, 0.0]
    return np.array([*powers, F * 1e3, G - A * log(1000.0)]) / R_GAS


def from_powers(powers: Sequence[float], T_ref: float, h_ref: float, s_ref: float) -> Floats:
    """cp = sum_n powers[n] T^n in J/(mol K), with h_ref in J/mol and s_ref in J/(mol K) at T_ref.

    Raises ValueError for more than five powers.
    """
    if not 1 <= len(powers) <= 5:
        raise ValueError(f"the heat capacity has {len(powers)} powers of T; give one to five (T^0 to T^4)")
    orders = np.arange(1, len(powers) + 1)
    terms = np.asarray(powers, dtype=np.float64) * T_ref**orders / orders
    h_0 = h_ref - terms.sum()
    s_0 = s_ref - powers[0] * log(T_ref) - sum(terms[1:] * orders[1:] / (orders[1:] - 1)) / T_ref
    padded = [*powers, *[0.0] * (5 - len(powers))]
    return np.array([0.0, 0.0, *padded, h_0, s_0]) / R_GAS


def from_formation(powers: Sequence[float], enthalpy: float, entropy: float) -> Floats:
    """As `from_powers`, with enthalpy of formation and entropy at 298.15 K."""
    return from_powers(powers, T_STANDARD, enthalpy, entropy)


def fill(ranges: Sequence[Floats], edges: Sequence[float]) -> tuple[Floats, Floats]:
    """Coefficients (3, 9) and edges (4,) in K of one to three ranges; spare ranges repeat the last.

    `edges` are one more than the ranges, rising. Raises ValueError for more than three ranges or
    edges that do not rise.
    """
    if not 1 <= len(ranges) <= RANGES:
        raise ValueError(f"the data have {len(ranges)} temperature ranges; one to {RANGES} can be used")
    if len(edges) != len(ranges) + 1 or np.any(np.diff(edges) <= 0.0):
        raise ValueError(f"the temperature ranges {', '.join(f'{T:g}' for T in edges)} K do not rise")
    spare = RANGES - len(ranges)
    return np.array([*ranges, *[ranges[-1]] * spare]), np.array([*edges, *[edges[-1]] * spare])
