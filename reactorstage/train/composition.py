"""What a feed brings, from shares in mole or mass."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from reactorstage.chemistry.forms import Floats
from reactorstage.chemistry.species import SpeciesTable

if TYPE_CHECKING:
    from reactorstage.case.model import Case, Feed


def mole_fractions(case: Case, table: SpeciesTable, feed: Feed) -> Floats:
    """Mole fractions of a feed (S,), from mole or mass shares."""
    shares = np.array([feed.composition.get(name, 0.0) for name in table.names])
    if case.percent == "mass":
        shares = shares / table.molar_mass
    return np.asarray(shares / shares.sum())


def feed_moles(case: Case, table: SpeciesTable, feed: Feed) -> Floats:
    """Molar flows of the species in a feed (S,), mol/s, as it is now."""
    y = mole_fractions(case, table, feed)
    flow = feed.flow.now / float(y @ table.molar_mass) if feed.flow.kind == "mass flow" else feed.flow.now
    return np.asarray(y * flow)
