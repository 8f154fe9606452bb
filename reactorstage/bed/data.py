"""The arrays that the kernel reads. Named tuples of arrays, so that compiled code takes them as they are.

S species, R reactions, B beds, L most species that one rate law names, NT terms of denominators.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Index = NDArray[np.int64]

GAS_CONSTANT = 8.31446261815324
STANDARD_PRESSURE = 1e5

CONCENTRATION, PARTIAL_PRESSURE, MOLE_FRACTION = 0, 1, 2


class Chemistry(NamedTuple):
    """Species and rate laws of one case, see `reactorstage.chemistry.rate_law` for the law.

    coefficients (S, 3, 9) and edges (S, 4): nine-coefficient heat capacity in up to three ranges.
    nu (R, S) with its row sums change (R,). law (R, 6): ln k at T_ref, T_ref, E/R, c, d, m.
    kind (R, 3): driver, 1 if reversible, number of members. member (R, L): the species that the law of a
    reaction names anywhere, padded with -1; order (R, 2, L): their forward and backward orders.
    Denominators: factors den_start[r]..den_start[r + 1] of reaction r, each the power den_power of a sum
    of the terms term_start[f]..term_start[f + 1]; term (NT, 3): ln K at T_ref, T_ref, H/R; term_order
    (NT, L) of the members.
    """

    coefficients: Array
    edges: Array
    molar_mass: Array
    nu: Array
    change: Array
    law: Array
    kind: Index
    member: Index
    order: Array
    den_start: Index
    den_power: Array
    term_start: Index
    term: Array
    term_order: Array
    T_low: float
    T_high: float


class Beds(NamedTuple):
    """What the B beds are made of; numbers that may move stand in the train's input vector.

    rate_factor (B, R) turns each rate into one per kg of catalyst; viscous and inertial (B,) give the
    Ergun gradient per kg of catalyst, dp/dw = -factor (viscous + inertial * m_dot) / rho * m_dot,
    zero where the geometry is not given.
    """

    rate_factor: Array
    viscous: Array
    inertial: Array
