"""What must hold for every train: balances, halving, order of species, scale, units, bypass, turndown.

Closed forms throughout: no expected number comes from the program.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings

from reactorstage.chemistry import h
from reactorstage.train.result import Rating
from tests.bed.build import Tree, changed, programme
from tests.bed.random_trees import trees
from tests.bed.reference import Gas, Twin


def rated(tree: Tree) -> Rating:
    rating = programme(tree).rate(dense=False)
    assert not rating.failure
    return rating


def texts(tree: Any, change: Callable[[str], str]) -> Any:
    """The tree with every text changed."""
    if isinstance(tree, dict):
        return {key: texts(value, change) for key, value in tree.items()}
    if isinstance(tree, list):
        return [texts(value, change) for value in tree]
    return change(tree) if isinstance(tree, str) else tree


def number(rating: Rating, name: str) -> float:
    value = rating.number(name)
    assert value is not None
    return value


def assert_same(first: Rating, second: Rating, within: float) -> None:
    """Every quantity, also in which of them do not exist; the place of a flat peak is left out."""
    assert set(first.quantities) == set(second.quantities)
    for name, value in first.quantities.items():
        if name.endswith("depth of the peak"):
            continue
        if value.value is None or second.number(name) is None:
            assert second.number(name) == value.value, name
        else:
            size = {"power": 1e6, "pressure": 1e5, "pressure difference": 1e5}.get(value.kind, 1.0)
            assert second.number(name) == pytest.approx(value.value, rel=within, abs=within * size), name


def exits(rating: Rating) -> np.ndarray:
    """Flows (mol/s), temperature (K) and pressure (bar) behind every bed."""
    beds = [profile.owner for profile in rating.profiles]
    names = [f"exit flow of {name}" for name in rating.species] + ["exit temperature", "exit pressure"]
    found = np.array([[number(rating, f"{bed}.{name}") for name in names] for bed in beds])
    return found * np.append(np.ones(found.shape[1] - 1), 1e-5)


@settings(max_examples=15)
@given(trees())
def test_atoms_and_energy_close_over_every_train(tree: Tree) -> None:
    train = programme(tree)
    rating = train.rate(dense=False)
    assert not rating.failure
    table = train.model.chemistry.table
    fed, heat_in, size = _fed(train)
    out = np.array([number(rating, f"effluent.flow of {name}") for name in table.names])
    assert np.abs((fed - out) @ table.atoms).max() < 1e-12 * np.abs(fed @ table.atoms).max()
    places = [section.owner for section in train.case.train if section.bed is None]
    removed = sum(number(rating, f"{owner}.heat removed") for owner in places)
    left = float(out @ h(table, number(rating, "effluent.exit temperature")))
    assert abs(heat_in - removed - left) < 1e-9 * size


def _fed(train: Any) -> tuple[np.ndarray, float, float]:
    """Flows and enthalpy flow of all feeds from the case alone, and 100 K of their heat capacity."""
    chemistry = train.model.chemistry
    twin = Twin(train.case, Gas(chemistry.table, chemistry.laws), {}, 1, [])
    fed, heat = np.zeros(len(chemistry.table.names)), 0.0
    for feed in train.case.feeds.values():
        shares = twin.fractions(feed)
        molar = float(shares @ chemistry.table.molar_mass) if feed.flow.kind == "mass flow" else 1.0
        flow = feed.flow.now / molar * shares
        fed, heat = fed + flow, heat + float(flow @ h(chemistry.table, feed.temperature.now))
    return fed, heat, float(fed @ (h(chemistry.table, 700.0) - h(chemistry.table, 600.0)))


@settings(max_examples=15)
@given(trees(most_beds=1, plain=True))
def test_one_bed_is_two_half_beds(tree: Tree) -> None:
    whole, bed = rated(tree), tree["train"][1]["bed 1"]
    value, unit = bed["catalyst"].split()
    half = {**bed, "catalyst": f"{float(value) / 2!r} {unit}"}
    rear = {key: what for key, what in half.items() if not key.startswith("inlet")}
    sections = [tree["train"][0], {"bed 1": half}, {"gap 1": []}, {"bed 2": rear}, {"effluent": []}]
    halves = rated({**tree, "train": sections})
    size = np.append(np.full(len(whole.species), exits(whole)[0].sum()), [exits(whole)[0, -2], 1.0])
    assert np.abs((exits(whole)[-1] - exits(halves)[-1]) / size).max() < 2e-7


@settings(max_examples=15)
@given(trees(plain=True))
def test_the_order_of_species_and_reactions_in_the_file_changes_nothing(tree: Tree) -> None:
    turned = {
        **tree,
        "species": dict(reversed(tree["species"].items())),
        "reactions": dict(reversed(tree["reactions"].items())),
    }
    assert_same(rated(tree), rated(turned), 1e-9)


@settings(max_examples=15)
@given(trees(plain=True))
def test_all_flows_and_catalyst_times_a_factor_leave_temperatures_alone(tree: Tree) -> None:
    sections = [
        {o: {**b, "pressure drop factor": 0} if "bed" in o else b}
        for s in tree["train"]
        for o, b in s.items()
    ]
    tree = {**tree, "train": sections}
    first, second = rated(tree), rated(texts(tree, _seven_times))
    factor = np.append(np.full(len(first.species), 7.0), [1.0, 1.0])
    assert np.abs(exits(second) / (exits(first) * factor + 1e-9) - 1.0)[:, -2:].max() < 1e-9
    away = np.abs(exits(second) - exits(first) * factor)
    assert away.max() < 1e-9 * exits(second).max()


def _seven_times(text: str) -> str:
    found = re.fullmatch(r"(\S+) (kmol/h|t/h|kg|m\^3|MW)", text)
    return f"{7.0 * float(found[1])!r} {found[2]}" if found else text


@settings(max_examples=15)
@given(trees(plain=True))
def test_the_same_case_in_other_units_gives_the_same_numbers(tree: Tree) -> None:
    kept = {key: tree[key] for key in ("heat levels", "prices")}
    assert_same(rated(tree), rated({**texts(tree, _other_unit), **kept}), 1e-8)


FACTORS = {
    "kmol/h": ("mol/s", 1e3 / 3600.0),
    "t/h": ("kg/s", 1e3 / 3600.0),
    "kg": ("lb", 1.0 / 0.45359237),
    "m^3": ("ft^3", 1.0 / 0.3048**3),
    "MW": ("kW", 1e3),
    "m": ("ft", 1.0 / 0.3048),
    "mm": ("inch", 1.0 / 25.4),
    "kg/m^3": ("lb/ft^3", 0.3048**3 / 0.45359237),
    "kJ/mol": ("kcal/mol", 1.0 / 4.184),
    "J/(mol K)": ("cal/(mol K)", 1.0 / 4.184),
    "Pa s": ("lb/(ft h)", 0.3048 * 3600.0 / 0.45359237),
}
"""Published: NIST Special Publication 811 (2008), factors from memory."""


def _other_unit(text: str) -> str:
    value, _, unit = text.partition(" ")
    if unit == "K":
        return f"{float(value) * 1.8 - 459.67!r} degF"
    if unit == "bar(a)":
        return f"{(float(value) * 1e5 - 101325.0) / 6894.757293168361!r} psi(g)"
    if unit not in FACTORS:
        return text
    return f"{float(value) * FACTORS[unit][1]!r} {FACTORS[unit][0]}"


@pytest.mark.parametrize("what", [{"catalyst": "0 kg"}, {"state": "bypassed"}])
def test_a_bed_without_catalyst_passes_the_stream_unchanged(lead_tree: Tree, what: Tree) -> None:
    bed = {**lead_tree["train"][1]["bed 1"], **what}
    rating = rated(changed(lead_tree, "train", 1, "bed 1", to=bed))
    for name in ("temperature", "pressure", *(f"flow of {one}" for one in rating.species)):
        assert number(rating, f"bed 1.exit {name}") == number(rating, f"bed 1.inlet {name}")
    assert number(rating, "bed 1.pressure drop") == 0.0
    assert number(rating, "bed 1.peak temperature") == number(rating, "bed 1.inlet temperature")
    assert rating.number("bed 1.depth at 50 % of rise") is None


def test_turndown_to_half_lights_earlier_and_drops_a_quarter_of_the_pressure(lead_tree: Tree) -> None:
    """Ergun's inertial term goes with the square of the flow; conversion comes closer to equilibrium."""
    full, half = rated(lead_tree), rated(texts(lead_tree, _half))
    for bed in ("bed 1", "bed 4"):
        assert number(half, f"{bed}.depth at 50 % of rise") < 0.7 * number(
            full, f"{bed}.depth at 50 % of rise"
        )
        assert number(half, f"{bed}.conversion of ethylene") > number(full, f"{bed}.conversion of ethylene")
        assert 0.24 < number(half, f"{bed}.pressure drop") / number(full, f"{bed}.pressure drop") < 0.32
    assert number(half, "gap 1.heat removed") == pytest.approx(
        0.5 * number(full, "gap 1.heat removed"), rel=0.05
    )


def _half(text: str) -> str:
    found = re.fullmatch(r"(\S+) kmol/h", text)
    return f"{0.5 * float(found[1])!r} kmol/h" if found else text
