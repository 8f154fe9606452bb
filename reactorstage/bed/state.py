"""Equation of state of the stream inside the kernel: its volume, and what its enthalpy has beyond ideal gas.

Whatever the fluid, the results stand where `cubic` puts them: volume flow V with its slopes by T, p and the
flows, residual enthalpy flow with its slopes, fugacity coefficients.
"""

from __future__ import annotations

import numpy as np

from reactorstage.bed.compiled import compiled, for_nonideal, small
from reactorstage.bed.cubic import (
    BULK,
    FIELD,
    H_RES,
    H_RES_P,
    H_RES_T,
    PAIRS,
    SPECIES,
    STIFF,
    VOLUME,
    VOLUME_P,
    VOLUME_T,
    cubic,
)
from reactorstage.bed.data import CUBIC, GAS_CONSTANT, POWERS_OF_DENSITY
from reactorstage.bed.layout import (
    at_mass,
    at_partial,
    at_state,
    is_cubic,
    is_ideal,
)
from reactorstage.bed.properties import heat_and_enthalpy
from reactorstage.chemistry.cubic import DENSE, FOUND, NOT_FINITE

END_OF_PHASE = 0.3
"""-V^2/(n R T) dp/dV below which a phase is about to end: 1 in an ideal gas, 0 at the end."""

BELOW, ABOVE = 0.5, 1.1
"""How far beyond the data that all species share a temperature may lie: a stream need not hold every one."""


@small
def at_swelling(chem):
    """dV/dF (S,) in the work array, m3/mol."""
    return at_state(chem) + FIELD + 3 * chem.S


@small
def ideal_volume(chem, T, p, work):
    """Volume of the flows in the work array as an ideal gas, with its slopes."""
    at, swelling, n = at_state(chem), at_swelling(chem), 0.0
    for s in range(chem.S):
        n += work[s]
        work[swelling + s] = GAS_CONSTANT * T / p
    volume = n * GAS_CONSTANT * T / p
    work[at + VOLUME], work[at + VOLUME_T], work[at + VOLUME_P] = volume, volume / T, -volume / p


@compiled
def liquid_volume(chem, T, work):
    """Volume of the flows in the work array as a liquid without excess volume, with its slopes."""
    at, swelling, mass = at_state(chem), at_swelling(chem), at_mass(chem)
    volume, volume_T = 0.0, 0.0
    for s in range(chem.S):
        density, slope = 0.0, 0.0
        for k in range(POWERS_OF_DENSITY - 1, -1, -1):
            slope = slope * T + density
            density = density * T + chem.state[s * POWERS_OF_DENSITY + k]
        molar = chem.real[mass + s] / density
        work[swelling + s] = molar
        volume += work[s] * molar
        volume_T -= work[s] * molar * slope / density
    work[at + VOLUME], work[at + VOLUME_T], work[at + VOLUME_P] = volume, volume_T, 0.0


@small
def equation_of_state(chem, T, p, start, extent, work):
    """Results for the flows in the work array in the phase whose constants stand at `start`; the status."""
    if is_ideal(chem):
        ideal_volume(chem, T, p, work)
        return FOUND
    return nonideal_state(chem, T, p, start, extent, work)


@for_nonideal(FOUND)
def nonideal_state(chem, T, p, start, extent, work):
    """`equation_of_state` of all but ideal gases."""
    if chem.fluid != CUBIC:
        liquid_volume(chem, T, work)
        return FOUND
    at, partial = at_state(chem), at_partial(chem)
    status = cubic(chem.state, start, chem.S, T, p, work, at, extent)
    for s in range(chem.S if status != NOT_FINITE and extent >= SPECIES else 0):
        own = work[at + FIELD + 4 * chem.S + s] / (GAS_CONSTANT * T)
        work[partial + s] = work[2 * chem.S + s] + own
    return status


@small
def exists(status):
    """Whether a status is that of the wanted phase."""
    return status in (FOUND, DENSE)


@compiled
def all_properties(chem, T, p, start, work):
    """Properties of the species and of the mixture at T and p; False where the phase does not exist."""
    heat_and_enthalpy(chem, T, work)
    return exists(equation_of_state(chem, T, p, start, SPECIES, work))


@compiled
def loses_phase(chem, T, p, work):
    """Whether the phase of the flows in the work array ends here or next to here, where slopes grow."""
    known = all_properties(chem, T, p, 0, work)
    return not known or 1.0 + work[at_state(chem) + STIFF] < END_OF_PHASE


@small
def heat_capacity_flow(chem, work):
    """dH/dT / R at constant pressure of the flows in the work array, after their properties."""
    total = work[at_state(chem) + H_RES_T] / GAS_CONSTANT if is_cubic(chem) else 0.0
    for s in range(chem.S):
        total += work[s] * work[chem.S + s]
    return total


@small
def pressure_slope(chem, work):
    """dT/dp at constant enthalpy, K/Pa, of the flows in the work array: zero but in a real gas."""
    if not is_cubic(chem):
        return 0.0
    return -work[at_state(chem) + H_RES_P] / (GAS_CONSTANT * heat_capacity_flow(chem, work))


@small
def enthalpy_flow(chem, T, work):
    """H / R, K mol/s, of the flows in the work array, after their properties at T."""
    held = 0.0
    for s in range(chem.S):
        held += work[s] * work[2 * chem.S + s]
    return held * T + (work[at_state(chem) + H_RES] / GAS_CONSTANT if is_cubic(chem) else 0.0)


@small
def temperature_step(chem, H_R, T, p, work):
    """Newton correction of T towards H(F, T, p) = H for the flows in the work array; H_R is H/R.

    Whether the root of a cubic is that of the wanted phase is not looked at here.
    """
    heat_and_enthalpy(chem, T, work)
    if is_cubic(chem) and equation_of_state(chem, T, p, 0, BULK, work) == NOT_FINITE:
        return np.nan
    return (H_R - enthalpy_flow(chem, T, work)) / heat_capacity_flow(chem, work)


@compiled
def temperature_of(chem, H_R, T, p, work):
    """T with H(F, T, p) = H by Newton from the guess T, kept within reach of the species' data."""
    for _ in range(60):
        step = temperature_step(chem, H_R, T, p, work)
        if not np.isfinite(step):
            return np.nan
        new = min(max(T + min(max(step, -200.0), 200.0), BELOW * chem.T_low), ABOVE * chem.T_high)
        if abs(new - T) <= 1e-13 * T:
            return new
        T = new
    return T


@compiled
def extent_of(chem, with_slopes):
    """What of a cubic equation rates and balances need: all with slopes by fugacity, else less."""
    return PAIRS if with_slopes and chem.fugacity > 0 else SPECIES
