"""Chemistry of ideal gases: species data, formulas, reactions, rate laws. SI throughout."""

from reactorstage.chemistry.constants import P_STANDARD, R_GAS, T_STANDARD
from reactorstage.chemistry.formula import molar_mass, parse_formula
from reactorstage.chemistry.isomers import isomer_group
from reactorstage.chemistry.law import (
    BASES,
    DRIVERS,
    Constant,
    Denominator,
    Polynomial,
    RateLaw,
    Term,
    Thiele,
)
from reactorstage.chemistry.rate_law import RateLaws, basis_factors, rate_laws
from reactorstage.chemistry.rates import rates
from reactorstage.chemistry.reaction import (
    Equation,
    balance_message,
    data_range,
    equilibrium_temperature,
    heat_of_reaction,
    imbalance,
    independent_count,
    ln_K,
    ln_Q,
    parse_equation,
    stoichiometric_matrix,
)
from reactorstage.chemistry.species import (
    Species,
    SpeciesTable,
    inline_species,
    species_from_cantera,
    table_of,
)
from reactorstage.chemistry.thermo import cp, gibbs, h, s

__all__ = [
    "BASES",
    "DRIVERS",
    "P_STANDARD",
    "R_GAS",
    "T_STANDARD",
    "Constant",
    "Denominator",
    "Equation",
    "Polynomial",
    "RateLaw",
    "RateLaws",
    "Species",
    "SpeciesTable",
    "Term",
    "Thiele",
    "balance_message",
    "basis_factors",
    "cp",
    "data_range",
    "equilibrium_temperature",
    "gibbs",
    "h",
    "heat_of_reaction",
    "imbalance",
    "independent_count",
    "inline_species",
    "isomer_group",
    "ln_K",
    "ln_Q",
    "molar_mass",
    "parse_equation",
    "parse_formula",
    "rate_laws",
    "rates",
    "s",
    "species_from_cantera",
    "stoichiometric_matrix",
    "table_of",
]
