"""Formulas and molar masses."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from reactorstage.chemistry import molar_mass, parse_formula


@pytest.mark.parametrize(
    ("text", "atoms"),
    [
        ("C10H14", {"C": 10, "H": 14}),
        ("CO", {"C": 1, "O": 1}),
        ("Co", {"Co": 1}),
        ("CH3CH2OH", {"C": 2, "H": 6, "O": 1}),
        ("Ca(OH)2", {"Ca": 1, "O": 2, "H": 2}),
        ("K4[Fe(CN)6]3", {"K": 4, "Fe": 3, "C": 18, "N": 18}),
        (" C2H4 ", {"C": 2, "H": 4}),
    ],
)
def test_atoms_are_counted(text: str, atoms: dict[str, float]) -> None:
    assert parse_formula(text) == atoms


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "is empty"),
        ("c2h4", "'c' at character 1 is neither"),
        ("C2H4.5", r"'\.' at character 5"),
        ("C2 H4", "' ' at character 3"),
        ("2CO", "'2' at character 1"),
        ("Ca(OH", r"bracket '\(' is not closed"),
        ("CaOH)2", r"'\)' closes no '\('"),
        ("Ca(OH]2", r"'\]' closes no '\['"),
        ("Ca()2", "nothing between"),
        ("C0H4", "count 0"),
    ],
)
def test_a_wrong_formula_says_what_and_where(text: str, message: str) -> None:
    with pytest.raises(ValueError, match=message):
        parse_formula(text)


SYMBOLS = st.sampled_from(["C", "H", "O", "N", "S", "Cl", "Fe", "Si", "He"])


@given(st.dictionaries(SYMBOLS, st.integers(1, 500), min_size=1), st.integers(1, 9))
def test_writing_and_reading_give_the_same_atoms(atoms: dict[str, int], times: int) -> None:
    text = "".join(f"{element}{count if count > 1 else ''}" for element, count in atoms.items())
    assert parse_formula(text) == atoms
    assert parse_formula(f"({text}){times}") == {element: times * count for element, count in atoms.items()}


# Molar masses in g/mol as the open-source data package `chemicals` 1.5 gives them; it sums standard
# atomic weights of an older IUPAC table than Cantera's, hence the tolerance of 1e-4.
@pytest.mark.parametrize(
    ("formula", "expected"),
    [("C2H4", 28.05316), ("C6H6", 78.11184), ("C8H10", 106.165), ("C10H14", 134.21816), ("SO3", 80.0632)],
)
def test_molar_masses(formula: str, expected: float) -> None:
    assert molar_mass(parse_formula(formula)) == pytest.approx(expected * 1e-3, rel=1e-4)


def test_molar_mass_from_the_iupac_weights_of_carbon_and_hydrogen() -> None:
    """12.011 and 1.008 g/mol: IUPAC, abridged standard atomic weights 2021 (from memory)."""
    assert molar_mass({"C": 10.0, "H": 14.0}) == pytest.approx(0.134222, rel=1e-12)


@pytest.mark.parametrize("element", ["Xx", "Tc"])
def test_what_is_no_element_or_has_no_standard_weight_is_refused(element: str) -> None:
    with pytest.raises(ValueError, match=f"'{element}' is not an element with a standard atomic weight"):
        molar_mass({element: 1.0})
