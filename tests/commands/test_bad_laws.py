"""Wrong rate laws and temperatures, from the command line: the place, what was found, what to do."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from click.testing import CliRunner

from reactorstage.commands.main import main

CASE = """\
case: Cinderholm Acid, one bed
format: 1
aim: least train.catalyst
percent: mol
currency: EUR
species:
  SO2: {gas data: SO2}
  O2: {gas data: O2}
  SO3: {gas data: SO3}
  N2: {gas data: N2}
fluid: {density: ideal gas, viscosity: 3.3e-5 Pa s}
reactions:
  oxidation:
    equation: SO2 + 0.5 O2 <=> SO3
    rate per: catalyst mass
    driven by: partial pressure
    orders: {SO2: 0.5, SO3: -0.5, O2: 1}
    constant: {exp of: {a: 848.0849, b: -97782.2 K, c: -110.1}, in: kmol/(kg s atm)}
    power of K: 2
    backward: {equilibrium constant: {exp of: {a: -11.24, b: 11829.9 K}, in: atm^-0.5}}
    floor: {SO3: 0.001 %}
feeds:
  gas:
    flow: 2000 kmol/h
    temperature: 420 degC
    composition: {SO2: 8 %, O2: 10.8 %, N2: rest}
train:
  - entry:
      - take: gas
  - bed 1: {catalyst: 30 t, inlet pressure: 1.3 bar(a), bulk density: 600 kg/m^3, pressure drop factor: 0}
  - effluent: []
"""
"""Eklund's law as in Fogler (from memory); the site is invented."""

CONSTANT = "{exp of: {a: 848.0849, b: -97782.2 K, c: -110.1}, in: kmol/(kg s atm)}"
OWN_K = "{exp of: {a: -11.24, b: 11829.9 K}, in: atm^-0.5}"
POWER = "power of K: 2"
HEATER = "heat: {holds: bed 1.inlet temperature, heat from: unpriced}"
SHORT_N2 = (
    "N2: {formula: N2, enthalpy of formation: 0 kJ/mol, entropy: 191.6 J/(mol K), standard pressure: "
    '1 bar(a), heat capacity: {powers of T: ["30.6 J/(mol K)"]}, valid: {temperature: 300 K to 800 K}}'
)
FIRST_ORDERS = {
    "orders: {SO2: 0.5, SO3: -0.5, O2: 1}": "orders: {SO2: 1, O2: 1}",
    CONSTANT: "{at: 427 degC, is: 5e-4 mol/(kg s bar^2), activation energy: 100 kJ/mol}",
    "    floor: {SO3: 0.001 %}\n": "",
}


def said(folder: Path, verb: str, *changes: tuple[str, str]) -> tuple[int, str]:
    """Exit status and everything printed for the case with changes; never a traceback."""
    text = CASE
    for old, new in changes:
        assert text.count(old) == 1, old
        text = text.replace(old, new)
    path = folder / "case.yaml"
    path.write_text(text, encoding="utf-8")
    result = CliRunner().invoke(main, [verb, str(path)])
    printed = result.stdout + result.stderr
    assert "Traceback" not in printed and "defect" not in printed, printed
    return result.exit_code, printed.replace(f"{folder}/", "")


def test_the_case_itself_is_right(tmp_path: Path) -> None:
    assert said(tmp_path, "check")[0] == 0


CAN_DIFFER = "`may differ from Gibbs by: ... %`, `heat may differ by: ... kJ/mol`"

# change, line and column, what was found, what to do
WRONG = {
    "no constant": (
        [(f"    constant: {CONSTANT}\n", "")],
        "13:3",
        "constant is missing in oxidation",
        "constant: rate constant",
    ),
    "constant without a value": (
        [(CONSTANT, "{activation energy: 90 kJ/mol}")],
        "18:5",
        "the constant has no value",
        "write `is: VALUE`, or `exp of: {a: ..., b: ... K}` with `in: UNIT`",
    ),
    "nothing behind constant": (
        [(f"constant: {CONSTANT}", "constant:")],
        "18:14",
        "nothing is written here",
        "give a value, or leave the key out",
    ),
    "term without a constant": (
        [(POWER, "slowed by: [{power: 2, terms: [1, {orders: {SO2: 1}}]}]")],
        "19:39",
        "constant is missing in terms",
        "constant: as in 0.3 1/bar",
    ),
    "own K without a value": (
        [(OWN_K, "{at: 700 K, heat of reaction: -98 kJ/mol}")],
        "20:16",
        "the constant has no value",
        "write `is: VALUE`",
    ),
    "order of an unknown species": (
        [("SO3: -0.5", "SO4: -0.5")],
        "17:24",
        "there is no species 'SO4'",
        "did you mean SO3? (write SO2, O2, SO3 or N2)",
    ),
    "order of a species too many": (
        [("O2: 1}", "O2: 1, Ar: 1}")],
        "17:42",
        "there is no species 'Ar'",
        "write SO2, O2, SO3 or N2",
    ),
    "order that is no number": (
        [("O2: 1}", "O2: one}")],
        "17:39",
        "'one' is not a number",
        "",
    ),
    "order below the line of an unknown species": (
        [(POWER, "slowed by: [{terms: [1, {constant: 2 1/atm, orders: {SO2: 0.5, S02: 0.5}}]}]")],
        "19:68",
        "there is no species 'S02'",
        "did you mean SO2?",
    ),
    "floor of an unknown species": (
        [("floor: {SO3:", "floor: {SO4:")],
        "21:13",
        "there is no species 'SO4'",
        "did you mean SO3?",
    ),
    "key species that is none": (
        [
            (
                POWER,
                "effectiveness: {Thiele: {size: 2 mm, key species: SO, diffusivity: 1e-6 m^2/s, shape: slab, "
                "particle density: 1200 kg/m^3}}",
            )
        ],
        "19:55",
        "there is no species 'SO'",
        "did you mean SO3?",
    ),
    "conversion into no species": (
        [
            (
                POWER,
                "effectiveness: {conversion: {of: SO2, into: SO4}, powers of T: [1], "
                "powers of conversion: [1]}",
            )
        ],
        "19:49",
        "there is no species 'SO4'",
        "did you mean SO3?",
    ),
    "K off by its value": (
        [("a: -11.24", "a: -10.9")],
        "20:16",
        "this K lies 41.6 % above that of the Gibbs energies at 548 degC (33.04 against 23.34 at 1 bar), "
        "and its slope is that of a heat of reaction of -98.4 kJ/mol where the species data say "
        "-98.8 kJ/mol at 395 degC; allowed are 10 % and 5 kJ/mol",
        CAN_DIFFER,
    ),
    "K off by its slope": (
        [(OWN_K, "{at: 700 K, is: 286.2 atm^-0.5, heat of reaction: -92 kJ/mol}")],
        "20:16",
        "its slope is that of a heat of reaction of -92.0 kJ/mol where the species data say -98.8 kJ/mol",
        CAN_DIFFER,
    ),
    "no floor, forward order below zero": (
        [("    floor: {SO3: 0.001 %}\n", "")],
        "13:3",
        "a floor for SO3 is missing: SO3 may be absent (the feeds of the entry do not hold it), and its "
        "order in the forward rate is -0.5",
        "add `floor: {SO3: 0.01 %}` to oxidation",
    ),
    "no floor, a sum below the line that empties": (
        [
            *FIRST_ORDERS.items(),
            (POWER, "slowed by: [{terms: [{constant: 3 1/atm, orders: {SO3: 1}}]}]"),
        ],
        "13:3",
        "a floor for SO3 is missing: SO3 may be absent (the feeds of the entry do not hold it), and a sum "
        "below the line is zero without it",
        "add `floor: {SO3: 0.01 %}` to oxidation",
    ),
    "feed colder than the data": (
        [("420 degC", "20 degC")],
        "25:18",
        "gas: 20 degC is below the range of the species data (those of SO2 begin at 26.85 degC)",
        "correct the temperature, or give these species data that hold there",
    ),
    "feed hotter than the data": (
        [("N2: {gas data: N2}", SHORT_N2), ("420 degC", "600 degC")],
        "25:18",
        "gas: 600 degC is above the range of the species data (those of N2 end at 526.85 degC)",
        "correct the temperature",
    ),
    "end of a range beyond the data": (
        [("420 degC", "{now: 420 degC, from: 300 degC, to: 5000 degC}")],
        "25:54",
        "gas: 5000 degC is above the range of the species data (those of SO2 end at 4726.85 degC)",
        "correct the temperature",
    ),
    "outlet of a cooler": (
        [("- effluent: []", "- effluent:\n      - cool: {to: 10 degC, heat to: unpriced}")],
        "32:20",
        "effluent: 10 degC is below the range of the species data (those of SO2, SO3 begin at 26.85 degC)",
        "correct the temperature",
    ),
    "inlet of a bed": (
        [
            (
                "- take: gas",
                "- take: gas\n      - heat: {holds: bed 1.inlet temperature, heat from: unpriced}",
            ),
            ("catalyst: 30 t,", "catalyst: 30 t, inlet temperature: -5 degC,"),
        ],
        "31:48",
        "bed 1: -5 degC is below the range of the species data (those of SO2 begin at 26.85 degC)",
        "correct the temperature",
    ),
}


@pytest.mark.parametrize("name", WRONG)
def test_one_clear_message(tmp_path: Path, name: str) -> None:
    changes, place, found, todo = WRONG[name]
    status, printed = said(tmp_path, "check", *changes)
    assert status == 3
    assert printed.count(": error: ") == 1, printed
    assert f"case.yaml:{place}: error: {found}" in printed or (
        f"case.yaml:{place}: error: this K" in printed and found in printed
    ), printed
    assert todo in printed, printed


def test_a_bed_that_leaves_the_data_says_where(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The data of nitrogen end at 800 K, which the gas reaches inside the bed."""
    monkeypatch.chdir(tmp_path)
    status, printed = said(tmp_path, "rate", ("N2: {gas data: N2}", SHORT_N2))
    assert status == 4
    words = " ".join(printed.split())
    place = r"NO ANSWER: bed 1 at \d+ % of its depth: the temperature rises above the range of the species"
    assert re.search(place, words), words
    assert "data (those of N2 end at 526.85 degC); a stream kept colder, or data that" in words


def test_a_cold_feed_without_the_species_whose_data_begin_late_passes(tmp_path: Path) -> None:
    """Air at 0 degC into a gas whose SO2 has data from 26.85 degC on only: each has data where it is."""
    air = "  air: {flow: 100 kmol/h, temperature: 0 degC, composition: {O2: 21 %, N2: rest}}\ntrain:\n"
    changes = [("train:\n", air), ("- take: gas\n", "- take: gas\n      - inject: air\n")]
    assert said(tmp_path, "check", *changes)[0] == 0


def test_K_is_compared_where_a_heater_brings_the_feed(tmp_path: Path) -> None:
    """At the 30 degC of the feed this K is 14 % off, at the 420 degC behind the heater it is not."""
    heater = "- take: gas\n      - heat: {to: 420 degC, heat from: unpriced}"
    cold = ("temperature: 420 degC", "temperature: 30 degC")
    assert said(tmp_path, "check", cold)[0] == 3
    status, printed = said(tmp_path, "check", cold, ("- take: gas", heater))
    assert status == 0 and "395 to 570" in printed
