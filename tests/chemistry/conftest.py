"""Species used by several tests of this floor."""

from __future__ import annotations

import pytest

from reactorstage.chemistry import Species, SpeciesTable, inline_species, species_from_cantera, table_of

IN_CANTERA = {"benzene": "C6H6", "ethylene": "C2H4", "ethane": "C2H6", "ethylbenzene": "C8H10,ethylbenz"}


@pytest.fixture(scope="session")
def diethylbenzene() -> Species:
    """Invented round numbers near those of the meta isomer; only consistency is tested with them."""
    powers = [-37.4, 0.8671, -5.56e-4, 1.411e-7]
    return inline_species("diethylbenzene", "C10H14", -22.0e3, 435.0, 1e5, powers)


@pytest.fixture(scope="session")
def alkylation(diethylbenzene: Species) -> SpeciesTable:
    """benzene, ethylene, ethane, ethylbenzene of Cantera's data and an inline diethylbenzene."""
    found = [species_from_cantera(spec, name) for name, spec in IN_CANTERA.items()]
    return table_of([*found, diethylbenzene])


@pytest.fixture(scope="session")
def oxidation() -> SpeciesTable:
    """SO2, O2, SO3, N2 of Cantera's data."""
    return table_of([species_from_cantera(name, name) for name in ("SO2", "O2", "SO3", "N2")])
