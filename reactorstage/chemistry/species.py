"""Species: atoms, molar mass and ideal-gas thermochemistry, as single species and as one table."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from functools import lru_cache
from math import isinf, log
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from reactorstage.chemistry import forms
from reactorstage.chemistry.constants import P_STANDARD
from reactorstage.chemistry.forms import DEFAULT_RANGE, Floats
from reactorstage.chemistry.formula import molar_mass, parse_formula

GAS_FILES = ("nasa_gas.yaml", "gri30.yaml", "nDodecane_Reitz.yaml")
"""Cantera's data files with gas species, in the order in which a bare name is looked up.

The further gas files that Cantera ships hold no neutral species beyond these.
"""


@dataclass(frozen=True, eq=False)
class Species:
    """One species. Entropy constants are at 1e5 Pa; coefficients as in `SpeciesTable`."""

    name: str
    atoms: Mapping[str, float]
    molar_mass: float
    coefficients: Floats
    edges: Floats
    source: str


@dataclass(frozen=True, eq=False)
class SpeciesTable:
    """Thermochemistry of S species made of E elements, as arrays that a kernel can read.

    atoms (S, E); molar_mass (S,) kg/mol; coefficients (S, 3, 9), the dimensionless
    nine-coefficient form of `forms` with entropies at 1e5 Pa; edges (S, 4) K, that is lowest
    temperature, two changes of range, highest. Range k holds for edges[k] < T <= edges[k + 1];
    beyond either end the outermost range is used as it stands. Spare ranges repeat the last.
    """

    names: tuple[str, ...]
    elements: tuple[str, ...]
    atoms: Floats = field(repr=False)
    molar_mass: Floats = field(repr=False)
    coefficients: Floats = field(repr=False)
    edges: Floats = field(repr=False)

    def part(self, there: NDArray[np.bool_]) -> SpeciesTable:
        """The table of some of its species, (S,) true where wanted."""
        return SpeciesTable(
            tuple(name for name, wanted in zip(self.names, there, strict=True) if wanted),
            self.elements,
            self.atoms[there],
            self.molar_mass[there],
            self.coefficients[there],
            self.edges[there],
        )


def table_of(species: Sequence[Species]) -> SpeciesTable:
    """One table of several species, in their order; elements in order of first appearance.

    Raises ValueError when there are none or two of one name.
    """
    names = tuple(one.name for one in species)
    if not names:
        raise ValueError("there are no species; name at least one")
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise ValueError(f"species {', '.join(map(repr, twice))} given more than once")
    elements = tuple(dict.fromkeys(element for one in species for element in one.atoms))
    return SpeciesTable(
        names=names,
        elements=elements,
        atoms=np.array([[one.atoms.get(element, 0.0) for element in elements] for one in species]),
        molar_mass=np.array([one.molar_mass for one in species]),
        coefficients=np.array([one.coefficients for one in species]),
        edges=np.array([one.edges for one in species]),
    )


def inline_species(
    name: str,
    formula: str,
    enthalpy_of_formation: float,
    entropy: float,
    standard_pressure: float,
    powers_of_T: Sequence[float],
    temperature_range: tuple[float, float] | None = None,
    source: str = "",
) -> Species:
    """A species from plain numbers.

    enthalpy_of_formation J/mol and entropy J/(mol K) of the ideal gas at 298.15 K, the entropy at
    standard_pressure Pa; cp = sum_n powers_of_T[n] T^n in J/(mol K), up to T^4. Without a
    temperature_range (K) 200 to 3000 K is assumed. Raises ValueError with what is wrong.
    """
    if not standard_pressure > 0.0:
        raise ValueError(f"the standard pressure {standard_pressure:g} Pa is not above zero")
    low, high = temperature_range or DEFAULT_RANGE
    if not 0.0 < low < high:
        raise ValueError(f"the temperature range {low:g} to {high:g} K does not rise from above 0 K")
    atoms = parse_formula(formula)
    ranges = [forms.from_formation(powers_of_T, enthalpy_of_formation, entropy)]
    return _species(name, atoms, ranges, (low, high), standard_pressure, source)


IN_FILE = re.compile(r"(.+\.ya?ml)\s*:\s*(\S.*)")


def data_name(spec: str) -> str:
    """NAME of "NAME" or "file.yaml:NAME"."""
    in_file = IN_FILE.fullmatch(spec.strip())
    return in_file[2].strip() if in_file else spec.strip()


def species_from_cantera(spec: str, name: str) -> Species:
    """A species of Cantera's data, called `name` in our tables.

    `spec` is a name, looked up exactly in `GAS_FILES`, or "file.yaml:NAME", a file in Cantera's
    format (a relative path starts at the working directory; a file that does not exist there but is
    shipped with Cantera under that name is taken from its data). NASA (seven and nine coefficients),
    Shomate and constant-cp thermochemistry are understood. Data without a temperature range get 200
    to 3000 K.

    Raises LookupError with the nearest names when there is no such species, FileNotFoundError when
    there is no such file, ValueError when a file or its thermochemistry cannot be used.
    """
    in_file, wanted = IN_FILE.fullmatch(spec.strip()), data_name(spec)
    files = [_data_file(in_file[1])] if in_file else [_shipped(file) for file in GAS_FILES]
    known: list[str] = []
    for file in files:
        if not file.is_file():
            raise FileNotFoundError(f"there is no species data file {file}")
        catalogue = _catalogue(str(file), file.stat().st_mtime_ns)
        if wanted in catalogue:
            return _from_cantera(catalogue[wanted], name, f"{file.name}:{wanted}")
        known.extend(catalogue)
    raise LookupError(_unknown(wanted, known, [file.name for file in files]))


def _unknown(wanted: str, known: Sequence[str], files: Sequence[str]) -> str:
    begins = [name for name in known if name.lower().startswith(wanted.lower())]
    near = list(dict.fromkeys([*begins[:5], *get_close_matches(wanted, known, n=4, cutoff=0.6)]))
    hint = f"; nearest: {', '.join(repr(name) for name in near[:6])}" if near else ""
    return f"no species {wanted!r} in {', '.join(files)}{hint}"


def _shipped(path: str) -> Path:
    """The data file of that name that comes with Cantera, whatever lies in the working directory."""
    import cantera

    folders = [Path(folder) for folder in cantera.get_data_directories() if folder != "."]
    candidates = [folder / Path(path).name for folder in folders]
    return next((file for file in candidates if file.is_file()), Path(path))


def _data_file(path: str) -> Path:
    return Path(path) if Path(path).is_file() else _shipped(path)


@lru_cache(maxsize=16)
def _catalogue(path: str, mtime_ns: int) -> dict[str, Any]:
    """Cantera species by name; the time of change keeps the cache from serving an old file."""
    import cantera

    try:
        return {one.name: one for one in cantera.Species.list_from_file(path)}
    except cantera.CanteraError as error:
        raise ValueError(f"{path} is not a species data file in Cantera's format: {_gist(error)}") from error


def _gist(error: Exception) -> str:
    lines = [line.strip() for line in str(error).splitlines() if line.strip(" *")]
    return " ".join(lines[:3])


def _from_cantera(found: Any, name: str, source: str) -> Species:
    thermo = found.thermo
    model = type(thermo).__name__
    if model not in _READERS:
        raise ValueError(
            f"{source}: its thermochemistry ({model}) cannot be used; use NASA, Shomate or constant-cp data"
        )
    ranges, mids = _READERS[model]([float(c) for c in thermo.coeffs])
    low = thermo.min_temp if thermo.min_temp > 0.0 else DEFAULT_RANGE[0]
    high = thermo.max_temp if not isinf(thermo.max_temp) else DEFAULT_RANGE[1]
    edges = (low, *(T for T in mids if low < T < high), high)
    try:
        return _species(
            name, found.composition, ranges[: len(edges) - 1], edges, thermo.reference_pressure, source
        )
    except ValueError as error:
        raise ValueError(f"{source}: {error}") from error


def _species(
    name: str,
    atoms: Mapping[str, float],
    ranges: Sequence[Floats],
    edges: Sequence[float],
    pressure: float,
    source: str,
) -> Species:
    """Entropies from the data's standard pressure to ours: s(p0) = s(p) + R ln(p/p0)."""
    coefficients, filled = forms.fill(ranges, edges)
    coefficients[:, 8] += log(pressure / P_STANDARD)
    return Species(name, dict(atoms), molar_mass(atoms), coefficients, filled, source)


Read = tuple[list[Floats], list[float]]


def _read_nasa7(c: list[float]) -> Read:
    return [forms.from_nasa7(c[8:15]), forms.from_nasa7(c[1:8])], [c[0]]


def _read_nasa9(c: list[float]) -> Read:
    blocks = np.reshape(c[1:], (int(c[0]), 11))
    return [np.array(block[2:]) for block in blocks], [float(block[0]) for block in blocks[1:]]


def _read_shomate(c: list[float]) -> Read:
    return [forms.from_shomate(c[1:8]), forms.from_shomate(c[8:15])], [c[0]]


def _read_constant_cp(c: list[float]) -> Read:
    T_ref, h_ref, s_ref, cp = c[0], c[1] * 1e-3, c[2] * 1e-3, c[3] * 1e-3
    return [forms.from_powers([cp], T_ref, h_ref, s_ref)], []


_READERS = {
    "NasaPoly2": _read_nasa7,
    "Nasa9PolyMultiTempRegion": _read_nasa9,
    "ShomatePoly2": _read_shomate,
    "ConstantCp": _read_constant_cp,
}
