"""Critical constants by name, as given, and what is said when they are missing."""

from __future__ import annotations

import pytest

from reactorstage.chemistry.critical import critical_data, critical_names


@pytest.mark.parametrize(
    ("name", "T", "p", "omega"),
    [
        ("C6H6", 562.0, 48.9e5, 0.21),
        ("Benzene", 562.0, 48.9e5, 0.21),
        ("C8H10,ethylbenz", 617.0, 36.1e5, 0.30),
        ("ch4o", 512.6, 80.9e5, 0.56),
        ("nitrogen", 126.2, 33.9e5, 0.04),
        ("H2", 33.0, 12.9e5, -0.22),
    ],
)
def test_known_species(name: str, T: float, p: float, omega: float) -> None:
    """Published: Poling, Prausnitz & O'Connell (2001), appendix A, from memory, hence the wide margins."""
    found = critical_data(name)
    assert found.temperature == pytest.approx(T, rel=0.005)
    assert found.pressure == pytest.approx(p, rel=0.04)
    assert found.acentric_factor == pytest.approx(omega, abs=0.01)
    assert found.source.startswith("critical-properties.yaml: ")


def test_every_entry_of_the_file_can_be_used() -> None:
    """By its name and by its words; the file has 697 species in Cantera 3.2."""
    shown = critical_names()
    assert len(shown) > 600
    for text in shown:
        name, words = text[:-1].split(" (", 1)
        assert critical_data(name) == critical_data(words)


def test_given_constants_stand_before_the_file() -> None:
    own = critical_data("no such species", 650.0, 2.9e6, 0.4)
    assert (own.temperature, own.pressure, own.acentric_factor, own.source) == (650.0, 2.9e6, 0.4, "as given")
    mixed = critical_data("C6H6", acentric_factor=0.0)
    assert (mixed.pressure, mixed.acentric_factor) == (critical_data("C6H6").pressure, 0.0)
    assert mixed.source == "critical-properties.yaml: C6H6 (benzene), some as given"


@pytest.mark.parametrize(
    ("name", "hint"),
    [
        ("H2O", "of 'H2O' in critical-properties.yaml; give the critical temperature, the critical"),
        ("CH3OH", r"nearest: CH4O \(methanol\); give"),
        ("C2H5OH", r"nearest: C2H6O \(methyl-ether\), C2H6O-1 \(ethyl-alcohol\); give"),
        ("C8H10,xyl", r"nearest: C8H10 \(ethylbenzene\), C8H10-1 \(m-xylene\), C8H10-2 \(o-xylene\)"),
        ("C4H8,", r"nearest: C4H8 \(1-butene\)"),
        ("etylbenzene", r"nearest: C8H10 \(ethylbenzene\)"),
    ],
)
def test_missing_species(name: str, hint: str) -> None:
    with pytest.raises(LookupError, match=hint):
        critical_data(name)
    with pytest.raises(LookupError):
        critical_data(name, temperature=500.0, pressure=3e6)


@pytest.mark.parametrize(
    ("numbers", "message"),
    [
        ((0.0, 3e6, 0.1), "critical temperature 0 K and pressure 3e[+]06 Pa must be above zero"),
        ((500.0, float("nan"), 0.1), "pressure nan Pa must be above zero"),
        ((500.0, 3e6, 30.0), "acentric factor of 30 is not between -1 and 3"),
    ],
)
def test_impossible_numbers(numbers: tuple[float, float, float], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        critical_data("X", *numbers)
