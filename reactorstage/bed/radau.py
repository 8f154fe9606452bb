"""Constants of the three-stage Radau IIA method of order 5 (Hairer & Wanner 1996, section IV.8).

The eigenvalue form of the inverse Runge-Kutta matrix lets one simplified Newton iteration cost one real
and one complex system of the size of the state instead of one of three times that size.
"""

from __future__ import annotations

import numpy as np

ROOT6 = np.sqrt(6.0)

NODES = np.array([(4.0 - ROOT6) / 10.0, (4.0 + ROOT6) / 10.0, 1.0])

MATRIX = np.array(
    [
        [(88 - 7 * ROOT6) / 360, (296 - 169 * ROOT6) / 1800, (-2 + 3 * ROOT6) / 225],
        [(296 + 169 * ROOT6) / 1800, (88 + 7 * ROOT6) / 360, (-2 - 3 * ROOT6) / 225],
        [(16 - ROOT6) / 36, (16 + ROOT6) / 36, 1 / 9],
    ]
)

INVERSE = np.linalg.inv(MATRIX)

ERROR = np.array([-13.0 - 7.0 * ROOT6, -13.0 + 7.0 * ROOT6, -1.0]) / 3.0
"""Weights of the stages in the embedded error estimate."""


def _eigenvalue_form() -> tuple[float, complex, np.ndarray, np.ndarray]:
    """Real eigenvalue, complex eigenvalue and the real transformation with its inverse."""
    values, vectors = np.linalg.eig(INVERSE)
    real = int(np.argmin(np.abs(values.imag)))
    pair = int(np.argmax(values.imag))
    transform = np.column_stack([vectors[:, real].real, vectors[:, pair].real, vectors[:, pair].imag])
    return float(values[real].real), complex(values[pair]), transform, np.linalg.inv(transform)


GAMMA, _PAIR, TRANSFORM, TRANSFORM_INVERSE = _eigenvalue_form()

COMPLEX = complex(_PAIR.real, -_PAIR.imag)
"""Multiplier of the complex system for U = W1 + i W2: ((alpha - i beta)/h - J) U = R1 + i R2."""


def _lagrange() -> np.ndarray:
    """Coefficients (3, 3) of the polynomial y0 + sum_i Z_i sum_k POLYNOMIAL[i, k] theta^(k+1)."""
    powers = NODES[:, None] ** np.arange(1, 4)[None, :]
    return np.linalg.inv(powers).T


POLYNOMIAL = np.ascontiguousarray(_lagrange())
