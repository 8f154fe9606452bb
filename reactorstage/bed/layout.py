"""Positions in the flat arrays of `data`, for compiled code."""

from __future__ import annotations

from reactorstage.bed.compiled import small
from reactorstage.bed.cubic import cubic_length
from reactorstage.bed.data import BED, CUBIC, KIND, LAW, LIQUID
from reactorstage.chemistry.rate_law import ETA


@small
def is_ideal(chem):
    """Whether the stream is an ideal gas; known when machine code is made."""
    return len(chem.nonideal) == 0


@small
def is_cubic(chem):
    """Whether the stream follows a cubic equation of state."""
    return len(chem.nonideal) > 0 and chem.fluid == CUBIC


@small
def is_liquid(chem):
    """Whether the stream is a liquid of given densities."""
    return len(chem.nonideal) > 0 and chem.fluid == LIQUID


@small
def at_edges(chem):
    """Inner edges of the heat capacity ranges, (S, 2) in real."""
    return 27 * chem.S


@small
def at_mass(chem):
    """Molar masses (S,) in real."""
    return 29 * chem.S


@small
def at_nu(chem):
    """Stoichiometric matrix (R, S) in real."""
    return 30 * chem.S


@small
def at_law(chem):
    """Laws (R, LAW) in real."""
    return 30 * chem.S + chem.R * chem.S


@small
def at_order(chem):
    """Orders and floors (R, 3, L) in real."""
    return 30 * chem.S + chem.R * (chem.S + LAW)


@small
def at_eta(chem):
    """Effectiveness (R, ETA) in real."""
    return 30 * chem.S + chem.R * (chem.S + LAW + 3 * chem.L)


@small
def at_power(chem):
    """Powers of denominator factors in real; terms (each TERM + L) follow."""
    return 30 * chem.S + chem.R * (chem.S + LAW + 3 * chem.L + ETA)


@small
def at_terms(chem):
    """First and last term of each denominator factor in whole."""
    return chem.R * (KIND + chem.L)


@small
def at_factor(chem):
    """Rate factors (R,) in the array of a bed; its flows (S,) stand before them."""
    return BED + chem.S


@small
def at_profile(chem):
    """Points of the activity along depth in the array of a bed."""
    return BED + chem.S + chem.R


@small
def at_local(chem):
    """Local space (6, L) in the work array, behind flows, cp/R, h/(R T) and s/R (S each)."""
    return 4 * chem.S


@small
def at_rate(chem):
    """Rates (R,) in the work array; common slope, slope by T, p, ln K, ln k and T_xi (R each) follow."""
    return 4 * chem.S + 6 * chem.L


@small
def at_member(chem):
    """Slopes by the members (R, L) in the work array."""
    return at_rate(chem) + 7 * chem.R


@small
def at_state(chem):
    """Volume and residual properties of the flows in the work array, as `cubic` lays them out."""
    return at_member(chem) + chem.R * chem.L


@small
def at_partial(chem):
    """Partial molar enthalpies over R T (S,) in the work array: those of the pure species, but in a cubic."""
    return at_state(chem) + cubic_length(chem.S) if is_cubic(chem) else 2 * chem.S


@small
def at_every(chem):
    """Further slopes of the rates by every flow (R, S) in the work array, for fluids but the ideal gas."""
    return at_state(chem) + cubic_length(chem.S) + chem.S


@small
def work_length(chem):
    """Length of the work array of one evaluation."""
    return at_every(chem) + chem.R * chem.S
