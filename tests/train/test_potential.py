"""What beds could do at most, how much of it they do, and the names that are only reported."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pytest

import reactorstage
from reactorstage.errors import CaseProblems
from reactorstage.train.potential import BedPotential, idle_share, unlit_notes
from reactorstage.train.quantities import REPORTED
from reactorstage.train.result import Profile, Rating


@pytest.fixture(scope="module")
def oxidation(root: Path) -> Path:
    """One reversible reaction in two beds."""
    return root / "tests" / "report" / "data" / "oxidation.yaml"


def rated(path: Path, *changes: str) -> Rating:
    return reactorstage.rate(reactorstage.load(path, changes))


def values(rating: Rating, word: str) -> list[float | None]:
    return [rating.number(f"{profile.owner}.{word}") for profile in rating.profiles]


LONG = ("bed 1.catalyst=3000 t", "bed 2.catalyst=3000 t")
LEVEL = ("bed 1.pressure drop factor=0", "bed 2.pressure drop factor=0")


def test_very_long_beds_end_at_the_equilibrium_that_was_found_without_them(oxidation: Path) -> None:
    """Independent way to the same state: integrating rates along the bed against least Gibbs energy."""
    rating = rated(oxidation, *LONG, *LEVEL)
    exits, ends = values(rating, "exit temperature"), values(rating, "equilibrium temperature")
    assert exits == pytest.approx(ends, abs=1e-4)
    assert values(rating, "utilisation") == pytest.approx([1.0, 1.0], abs=1e-6)
    assert values(rating, "Q/K of oxidation") == pytest.approx([1.0, 1.0], abs=1e-5)


def test_several_reactions_end_there_too(lead: Path) -> None:
    words = ("catalyst=4000 t", "pressure drop factor=0")
    rating = rated(lead, *(f"bed {n}.{word}" for n in range(1, 5) for word in words))
    exits, ends = values(rating, "exit temperature"), values(rating, "equilibrium temperature")
    assert exits == pytest.approx(ends, abs=1e-3)
    assert values(rating, "Q/K of second ethylation") == pytest.approx([1.0] * 4, abs=1e-4)


def test_lit_beds_are_told_apart_by_how_far_they_come(lead: Path) -> None:
    rating = rated(lead)
    rises, potentials = values(rating, "rise"), values(rating, "potential rise")
    assert values(rating, "utilisation") == pytest.approx(
        [rise / potential for rise, potential in zip(rises, potentials, strict=True)], rel=1e-12
    )
    assert all(0.98 < share < 1.0 for share in values(rating, "utilisation"))
    assert all(0.05 < share < 0.5 for share in values(rating, "idle catalyst"))
    assert not any("unlit" in note for note in rating.notes)


def test_idle_catalyst_lies_behind_99_percent_of_the_rise(lead: Path) -> None:
    """Independent way: the fine profile itself, linearly interpolated."""
    rating = rated(lead)
    for profile, idle in zip(rating.profiles, values(rating, "idle catalyst"), strict=True):
        there = profile.T[0] + 0.99 * (profile.T[-1] - profile.T[0])
        depth = float(np.interp(there, profile.T, profile.w)) / profile.w[-1]
        assert idle == pytest.approx(1.0 - depth, abs=2e-3)


def test_an_unlit_bed_is_said_in_words(lead: Path) -> None:
    rating = rated(lead, "bed 2.catalyst activity=0.01")
    rise, potential = rating.number("bed 2.rise"), rating.number("bed 2.potential rise")
    assert rise is not None and potential is not None and rise < 0.1 * potential
    assert rating.notes[0] == (
        f"Bed 2 is practically unlit: it rises {rise:.0f} K of a possible {potential:.0f} K."
    )
    assert sum("unlit" in note for note in rating.notes) == 1


def bed(potential: float, share: float, converted: float = 0.0) -> BedPotential:
    return BedPotential("bed 1", 700.0 + potential, potential, share * potential, share, 0.0, converted)


def test_a_bed_with_little_left_to_do_or_with_its_reactant_used_is_not_unlit() -> None:
    assert bed(31.0, 0.06).unlit
    assert not bed(14.0, 0.06).unlit
    assert not bed(31.0, 0.11).unlit
    assert not bed(31.0, 0.06, converted=0.9).unlit


def test_small_and_falling_rises_are_said_as_they_are() -> None:
    (small,) = unlit_notes([bed(31.0, 0.0097)])
    assert small == "Bed 1 is practically unlit: it rises 0.3 K of a possible 31 K."
    (falling,) = unlit_notes([bed(-50.0, 0.04)])
    assert falling == "Bed 1 is practically unlit: it falls 2 K of a possible 50 K."


def profile(T: Sequence[float]) -> Profile:
    w, along, F = np.linspace(0.0, 1000.0, len(T)), np.array(T), np.ones((len(T), 1))
    return Profile("bed 1", w, along, np.full(len(T), 1e5), F, 0.0 * F, float(along.max()), 0.0)


def test_idle_share_of_an_exponential_rise_has_a_closed_form() -> None:
    """T = 600 + 50 (1 - exp(-z/L)): 99 % of the rise at z = -L ln(e + 0.01 (1 - e)) with e = exp(-1/L)."""
    for length in (0.1, 0.15, 0.3):
        end = np.exp(-1.0 / length)
        done = -length * np.log(end + 0.01 * (1.0 - end))
        T = 600.0 + 50.0 * (1.0 - np.exp(-np.linspace(0.0, 1.0, 30) / length))
        assert idle_share(profile(T)) == pytest.approx(1.0 - done, abs=3e-3)


def test_catalyst_behind_a_peak_is_not_idle_while_the_temperature_falls() -> None:
    assert idle_share(profile([600.0, 650.0, 690.0, 680.0, 670.0, 660.0])) == pytest.approx(0.2 * 0.06)
    assert idle_share(profile([600.0, 600.0, 600.0])) is None


def test_a_bypassed_bed_has_a_potential_and_uses_none_of_it(lead: Path) -> None:
    rating = rated(lead, "bed 3.state=bypassed")
    assert rating.number("bed 3.potential rise") > 30.0
    value = rating.quantities["bed 3.utilisation"]
    assert value.value is None and value.reason == "no catalyst"
    assert not any("unlit" in note for note in rating.notes)


def test_beds_behind_a_failure_are_not_reached(oxidation: Path) -> None:
    rating = rated(oxidation, "bed 2.pressure drop factor=1e6")
    assert rating.failure and rating.number("bed 1.equilibrium temperature") is not None
    assert rating.quantities["bed 2.equilibrium temperature"].reason == "not reached"


def test_absent_reactants_leave_no_quotient(lead: Path) -> None:
    rating = rated(lead, "bed 1.injected ethylene=0 kmol/h")
    value = rating.quantities["bed 1.Q/K of ethylation"]
    assert value.value is None and value.reason == "a reactant is absent"


@pytest.mark.parametrize(
    "name", ["bed 1.utilisation", "bed 2.equilibrium temperature", "train.energy closure"]
)
def test_what_is_reported_only_cannot_be_limited(lead: Path, tmp_path: Path, name: str) -> None:
    text = lead.read_text(encoding="utf-8").replace(
        "of: every bed.rise, at most: 46 K", f"of: {name}, at most: 46 K"
    )
    path = tmp_path / "case.yaml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(CaseProblems) as caught:
        reactorstage.compile(reactorstage.load(path))
    (problem,) = caught.value.problems
    assert "reported only, it cannot be a limit" in problem.message
    assert problem.line > 100


def test_every_reported_name_is_in_a_rating_and_no_other_name_is_missing(lead: Path) -> None:
    rating = rated(lead)
    known = {name.partition(".")[2] for name in rating.quantities}
    words = {pattern.words.replace("<reaction>", "ethylation") for pattern in REPORTED}
    assert words <= known
