from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any

import jsonschema
import pytest
import yaml

from reactorstage.case import json_schema, starter_case

LEAD = Path(__file__).parent / "data" / "lead.yaml"


@pytest.fixture(scope="module")
def validator() -> jsonschema.Draft7Validator:
    schema = json_schema()
    jsonschema.Draft7Validator.check_schema(schema)
    return jsonschema.Draft7Validator(schema)


@pytest.fixture
def broken(validator: jsonschema.Draft7Validator, lead_text: str) -> Callable[[str, str], bool]:
    def is_broken(old: str, new: str) -> bool:
        assert old in lead_text
        return not validator.is_valid(yaml.safe_load(lead_text.replace(old, new, 1)))

    return is_broken


def test_the_lead_and_the_starter_case_fit(validator: jsonschema.Draft7Validator, lead_text: str) -> None:
    for text in (lead_text, starter_case()):
        assert [error.message for error in validator.iter_errors(yaml.safe_load(text))] == []


RIGHT = [
    ("flow: 965 kmol/h", "flow: {now: 965 kmol/h, from: 900 kmol/h, to: 1000 kmol/h}"),
    ("catalyst activity: 1.0", "catalyst activity: 90 %"),
    ("at least: 11.6 mol/mol", "at least: 11.6"),
    (
        "{at: 400 degC, is: 4.2e-3 kmol/(kg h bar^2), activation energy: 66 kJ/mol}",
        "4.2e-3 kmol/(kg h bar^2)",
    ),
    ("orders: as written", "orders: {benzene: 1, ethylene: 0.5}"),
    ("heat from: fired heater", "heat from: [fired heater]"),
    ("  - effluent:\n      - cool: {to: 190 degC, heat to: every cooling level}", "  - effluent:"),
    ("at least: 30 kmol/h, at most: 82 kmol/h", "between: 30 kmol/h and 82 kmol/h"),
]


@pytest.mark.parametrize(("old", "new"), RIGHT)
def test_what_else_fits(broken: Callable[[str, str], bool], old: str, new: str) -> None:
    assert not broken(old, new)


WRONG = [
    ("diameter: 1.8 m", "diametre: 1.8 m"),
    ("diameter: 1.8 m", "diameter: 1.8"),
    ("viscosity: 1.7e-5 Pa s", "viscosity: 1e5"),
    ("percent: mol", "percent: mole"),
    ("format: 1", "format: 2"),
    ("aim: least money.total", "aim: money.total"),
    ("flow: 965 kmol/h, ", ""),
    ("flow: 965 kmol/h", "flow: {now: 965 kmol/h}"),
    (
        "{now: 384 degC, from: 350 degC, to: 410 degC}",
        "{now: 384 degC, from: 350 degC, to: 410 degC, by: 1 K}",
    ),
    ("- gap 1:", "- gab 1:"),
    ("- take: benzene", "- take: benzene\n        inject: ethylene"),
    ("heat to: every cooling level", "heat from: every cooling level"),
    ("steam 9 bar:   {cools down to: 175 degC", "steam 9 bar:   {cools down to: warm"),
    ("of: every bed.rise, ", ""),
]


@pytest.mark.parametrize(("old", "new"), WRONG)
def test_what_does_not_fit(broken: Callable[[str, str], bool], old: str, new: str) -> None:
    assert broken(old, new)


def test_variants_fit(validator: jsonschema.Draft7Validator) -> None:
    variant = {"variant of": "a.yaml", "format": 1, "changes": {"bed 2.state": "bypassed"}}
    assert validator.is_valid(variant)
    assert not validator.is_valid({**variant, "species": {}})


def objects(part: Any) -> Iterator[dict[str, Any]]:
    """Every part of a schema that describes a mapping with named keys."""
    if isinstance(part, dict):
        if "properties" in part and "type" in part:
            yield part
        for inner in part.values():
            yield from objects(inner)
    elif isinstance(part, list):
        for inner in part:
            yield from objects(inner)


def test_every_key_is_explained_and_no_other_is_allowed() -> None:
    found = list(objects(json_schema()["definitions"]))
    assert len(found) > 20
    for part in found:
        assert "additionalProperties" in part
        assert all(value.get("description") for value in part["properties"].values())


def test_draft_7_words_only() -> None:
    text = str(json_schema())
    assert "$defs" not in text and "prefixItems" not in text and "'null'}" not in text
