"""Positions in the flat arrays of `data`, for compiled code."""

from __future__ import annotations

from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import BED, KIND, LAW
from reactorstage.chemistry.rate_law import ETA


@compiled
def at_edges(chem):
    """Inner edges of the heat capacity ranges, (S, 2) in real."""
    return 27 * chem.S


@compiled
def at_mass(chem):
    """Molar masses (S,) in real."""
    return 29 * chem.S


@compiled
def at_nu(chem):
    """Stoichiometric matrix (R, S) in real."""
    return 30 * chem.S


@compiled
def at_law(chem):
    """Laws (R, LAW) in real."""
    return 30 * chem.S + chem.R * chem.S


@compiled
def at_order(chem):
    """Orders and floors (R, 3, L) in real."""
    return 30 * chem.S + chem.R * (chem.S + LAW)


@compiled
def at_eta(chem):
    """Effectiveness (R, ETA) in real."""
    return 30 * chem.S + chem.R * (chem.S + LAW + 3 * chem.L)


@compiled
def at_power(chem):
    """Powers of denominator factors in real; terms (each TERM + L) follow."""
    return 30 * chem.S + chem.R * (chem.S + LAW + 3 * chem.L + ETA)


@compiled
def at_terms(chem):
    """First and last term of each denominator factor in whole."""
    return chem.R * (KIND + chem.L)


@compiled
def at_factor(chem):
    """Rate factors (R,) in the array of a bed; its flows (S,) stand before them."""
    return BED + chem.S


@compiled
def at_profile(chem):
    """Points of the activity along depth in the array of a bed."""
    return BED + chem.S + chem.R


@compiled
def at_local(chem):
    """Local space (5, L) in the work array, behind flows, cp/R, h/(R T) and s/R (S each)."""
    return 4 * chem.S


@compiled
def at_rate(chem):
    """Rates (R,) in the work array; common slope, slope by T, p, ln K, ln k and T_xi (R each) follow."""
    return 4 * chem.S + 5 * chem.L


@compiled
def at_member(chem):
    """Slopes by the members (R, L) in the work array."""
    return 4 * chem.S + 5 * chem.L + 7 * chem.R


@compiled
def work_length(chem):
    """Length of the work array of one evaluation."""
    return 4 * chem.S + 5 * chem.L + 7 * chem.R + chem.R * chem.L
