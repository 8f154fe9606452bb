"""From species and rate laws to the arrays that the kernel reads."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from reactorstage.bed.cubic import pack_cubic
from reactorstage.bed.data import (
    CUBIC,
    E_OVER_R,
    FUGACITY,
    H_TERM,
    IDEAL,
    LAW,
    LIQUID,
    LN_K,
    LN_K_TERM,
    POWERS_OF_DENSITY,
    TERM,
    Array,
    Beds,
    Chemistry,
    Index,
)
from reactorstage.chemistry.cubic import Phase
from reactorstage.chemistry.fluid import CubicStream, Fluid
from reactorstage.chemistry.rate_law import ETA, RateLaws, basis_factors
from reactorstage.chemistry.species import SpeciesTable


def pack_chemistry(table: SpeciesTable, laws: RateLaws, fluid: Fluid | None = None) -> Chemistry:
    """Arrays of the chemistry; the temperature range is the one that all species' data share.

    Without a fluid the stream is an ideal gas.
    """
    members = [_members(laws, r) for r in range(laws.nu.shape[0])]
    R, S, L = *laws.nu.shape, max(1, max(len(used) for used in members))
    law = np.column_stack(
        [laws.lnk_ref, laws.T_ref, laws.E_over_R, laws.c, laws.d, laws.m, laws.nu.sum(axis=1)]
    )
    floors = np.concatenate([np.zeros((R, S)), laws.floor], axis=1)
    order = [
        _padded(rows[r][used], L, 0.0)
        for r, used in enumerate(members)
        for rows in (laws.forward, laws.backward, floors)
    ]
    term = np.column_stack([laws.term_lnK_ref, laws.term_T_ref, laws.term_H_over_R, laws.term_c, laws.term_d])
    parts = [table.coefficients, table.edges[:, 1:3], table.molar_mass, laws.nu]
    parts += [np.column_stack([law, laws.K_form]), np.array(order), laws.eta]
    parts += [laws.den_power, np.column_stack([term, _term_orders(laws, members, L)])]
    kind = np.column_stack(
        [
            laws.driver,
            laws.reversible * (1 + laws.own_K),
            [len(used) for used in members],
            laws.den_start[:-1],
            laws.den_start[1:],
            laws.eta_kind,
            *(_positions(laws.eta_species[:, i], members) for i in (0, 1)),
            (laws.floor > 0.0).any(axis=1),
        ]
    )
    named = np.array([_padded(used % S, L, -1) for used in members], dtype=np.int64)
    factors = np.column_stack([laws.term_start[:-1], laws.term_start[1:]])
    return Chemistry(
        real=np.concatenate([np.asarray(part, dtype=np.float64).ravel() for part in parts]),
        whole=np.concatenate([np.column_stack([kind, named]).ravel(), factors.ravel()]).astype(np.int64),
        S=S,
        R=R,
        L=L,
        factors=len(laws.den_power),
        T_low=float(table.edges[:, 0].max()),
        T_high=float(table.edges[:, -1].min()),
        limited=int(np.count_nonzero(laws.eta_kind)),
        fugacity=int(np.count_nonzero(laws.driver == FUGACITY)),
        fluid=_fluid_kind(fluid),
        state=_state(fluid),
        nonideal=() if fluid is None else (1.0,),
    )


def _fluid_kind(fluid: Fluid | None) -> int:
    if fluid is None:
        return IDEAL
    return CUBIC if isinstance(fluid, CubicStream) else LIQUID


def _state(fluid: Fluid | None) -> Array:
    if fluid is None:
        return np.empty(0)
    if isinstance(fluid, CubicStream):
        other: Phase = "liquid" if fluid.phase == "vapour" else "vapour"
        return np.concatenate([pack_cubic(fluid.equation, phase) for phase in (fluid.phase, other)])
    missing = POWERS_OF_DENSITY - fluid.density.shape[1]
    return np.pad(fluid.density, ((0, 0), (0, missing))).ravel()


def shift_kinetics(chem: Chemistry, shifts: Mapping[tuple[int, int], float]) -> Chemistry:
    """The chemistry with kinetic parameters (kind, index; see `data.PARAMETERS`) shifted, kernel units."""
    real = chem.real.copy()
    law = 30 * chem.S + chem.R * chem.S
    term = law + chem.R * (LAW + 3 * chem.L + ETA) + chem.factors
    starts = {LN_K: (law, LAW), E_OVER_R: (law + 2, LAW)}
    starts |= {LN_K_TERM: (term, TERM + chem.L), H_TERM: (term + 2, TERM + chem.L)}
    for (kind, index), amount in shifts.items():
        first, width = starts[kind]
        real[first + width * index] += amount
    return chem._replace(real=real)


def ergun_terms(
    diameter: float, bulk_density: float, void_fraction: float, equivalent_size: float, viscosity: float
) -> tuple[float, float]:
    """Viscous and inertial terms of `Beds` (Ergun, Chem. Eng. Prog. 48 (1952) 89, equation from memory).

    dp/dz = -150 mu (1-eps)^2 u / (eps^3 d^2) - 1.75 rho (1-eps) u^2 / (eps^3 d), superficial u = G/rho,
    with dw = rho_b A dz. Lengths in m, bulk density kg/m3, viscosity Pa s. Fitted to random packings with
    void fractions of about 0.35 to 0.55.
    """
    area = np.pi * diameter**2 / 4.0
    solid, eps3 = 1.0 - void_fraction, void_fraction**3
    viscous = 150.0 * viscosity * solid**2 / (eps3 * equivalent_size**2) / area
    inertial = 1.75 * solid / (eps3 * equivalent_size) / area**2
    return viscous / (bulk_density * area), inertial / (bulk_density * area)


def pack_beds(
    laws: RateLaws,
    bulk_density: Sequence[float],
    void_fraction: Sequence[float],
    ergun: Sequence[tuple[float, float]],
    profiles: Sequence[Sequence[tuple[float, float]]] = (),
) -> Beds:
    """Arrays of the beds; densities and void fractions that no rate needs may be not a number.

    profiles: for each bed the points (depth, share of activity), none for the same everywhere.
    """
    factors = np.array([basis_factors(laws, *bed) for bed in zip(bulk_density, void_fraction, strict=True)])
    terms = np.array(ergun, dtype=np.float64).reshape(-1, 2)
    most = max((len(points) for points in profiles), default=0)
    profile = np.array([_profile(points, most) for points in profiles or [()] * len(terms)])
    return Beds(
        np.ascontiguousarray(factors),
        terms[:, 0].copy(),
        terms[:, 1].copy(),
        profile.reshape(len(terms), 2 * most),
    )


BEYOND = 2.0
"""Depth of the points that fill up a profile: never reached."""


def _profile(points: Sequence[tuple[float, float]], most: int) -> list[float]:
    """Points as the kernel reads them, filled up to `most` points by the last (1 without any)."""
    last = points[-1][1] if points else 1.0
    filled = [*points, *((BEYOND + i, last) for i in range(most - len(points)))]
    return [number for point in filled for number in point]


def _terms_of(laws: RateLaws, r: int) -> slice:
    return slice(laws.term_start[laws.den_start[r]], laws.term_start[laws.den_start[r + 1]])


def _members(laws: RateLaws, r: int) -> Index:
    """Columns of the powers that the law of reaction r uses, and the species its effectiveness depends on."""
    named = (laws.forward[r] != 0.0) | ((laws.backward[r] != 0.0) & (laws.reversible[r] == 1))
    named = named | (laws.below[_terms_of(laws, r)] != 0.0).any(axis=0)
    named[laws.eta_species[r][laws.eta_species[r] >= 0]] = True
    return np.flatnonzero(named)


def _positions(species: Index, members: Sequence[Index]) -> list[int]:
    """Where a species of each reaction stands among its members; -1 for none."""
    return [
        int(np.flatnonzero(used == s)[0]) if s >= 0 else -1 for s, used in zip(species, members, strict=True)
    ]


def _padded(values: Array | Index, length: int, filler: float) -> list[float]:
    return [*values.tolist(), *[filler] * (length - len(values))]


def _term_orders(laws: RateLaws, members: Sequence[Index], longest: int) -> Array:
    rows = [
        _padded(line[used], longest, 0.0)
        for r, used in enumerate(members)
        for line in laws.below[_terms_of(laws, r)]
    ]
    return np.array(rows, dtype=np.float64).reshape(-1, longest)
