"""Effectiveness factors in plain NumPy: actual rate over the rate without pore limitation; see `law`."""

from __future__ import annotations

from typing import Any

import numpy as np

from reactorstage.chemistry.law import MOST_POWERS_OF_T, SHAPES
from reactorstage.chemistry.rate_law import NO_ETA, POLYNOMIAL, RateLaws
from reactorstage.chemistry.smooth import floored
from reactorstage.chemistry.thermo import Array, Scalar

LEAST_ETA = 1e-4
"""Smooth floor of an effectiveness polynomial."""

TRACE = 1e-9
"""Smooth floor of the key species in a Thiele modulus, mole fraction; below it nothing is converted."""

SMALL = 0.01
"""Square of the Thiele modulus below which the series stand in for the closed forms."""

SLAB = (1.0, -1 / 3, 2 / 15, -17 / 315, 62 / 2835, -1382 / 155925)
SPHERE = (1.0, -1 / 15, 2 / 315, -1 / 1575, 2 / 31185, -1382 / 212837625)
"""Series of both forms in the square of the modulus."""


def effectiveness(laws: RateLaws, r: int, rate: Any, y: Array, T: Scalar, density: Scalar) -> Any:
    """Effectiveness of reaction r at its rate without pore limitation, mol/(kg s); y (S,) or (S, N).

    density of the stream, mol/m3.
    """
    kind, eta = laws.eta_kind[r], laws.eta[r]
    key, into = laws.eta_species[r]
    if kind == NO_ETA:
        return 1.0
    if kind == POLYNOMIAL:
        by_T, by_Z = eta[:MOST_POWERS_OF_T], eta[MOST_POWERS_OF_T:-1]
        value = np.polyval(by_T[::-1], T)
        if key >= 0:
            Z = converted(y[key], y[into], eta[-1])
            value = value + Z * np.polyval(by_Z[::-1], Z)
        return floored(value, LEAST_ETA)
    speed = np.where(np.real(rate) < 0.0, -rate, rate)
    square = eta[0] * speed / (density * floored(y[key], TRACE))
    return of_modulus(kind, square)


def converted(y_key: Any, y_into: Any, weight: float) -> Any:
    """Part of the key species that has become the product; 0 where neither is there."""
    all_of_it = y_key + weight * y_into
    there = np.real(all_of_it) > TRACE
    return np.where(there, weight * y_into / np.where(there, all_of_it, 1.0), 0.0)


def of_modulus(kind: int, square: Any) -> Any:
    """Effectiveness of a slab or sphere for the square of its Thiele modulus.

    tanh(phi)/phi, 3 (phi coth(phi) - 1)/phi^2.
    """
    slab = kind == SHAPES["slab"]
    small = np.real(square) < SMALL
    phi = np.sqrt(np.where(small, 1.0, square))
    tanh = np.tanh(phi)
    closed = tanh / phi if slab else 3.0 * (phi / tanh - 1.0) / phi**2
    return np.where(small, np.polyval((SLAB if slab else SPHERE)[::-1], square), closed)
