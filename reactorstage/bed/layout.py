"""Positions in the flat arrays of `data`, for compiled code."""

from __future__ import annotations

from reactorstage.bed.compiled import compiled
from reactorstage.bed.data import BED, KIND, LAW


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
    """Orders (R, 2, L) in real."""
    return 30 * chem.S + chem.R * (chem.S + LAW)


@compiled
def at_power(chem):
    """Powers of denominator factors in real; terms (each 3 + L) follow."""
    return 30 * chem.S + chem.R * (chem.S + LAW + 2 * chem.L)


@compiled
def at_terms(chem):
    """First and last term of each denominator factor in whole."""
    return chem.R * (KIND + chem.L)


@compiled
def at_factor(chem):
    """Rate factors (R,) in the array of a bed; its flows (S,) stand before them."""
    return BED + chem.S


@compiled
def at_local(chem):
    """Local space (5, L) in the work array, behind flows, cp/R, h/(R T) and s/R (S each)."""
    return 4 * chem.S


@compiled
def at_rate(chem):
    """Rates (R,) in the work array; common slope, slope by T, by p, by ln K and T_xi (R each) follow."""
    return 4 * chem.S + 5 * chem.L


@compiled
def at_member(chem):
    """Slopes by the members (R, L) in the work array."""
    return 4 * chem.S + 5 * chem.L + 6 * chem.R


@compiled
def work_length(chem):
    """Length of the work array of one evaluation."""
    return 4 * chem.S + 5 * chem.L + 6 * chem.R + chem.R * chem.L
