"""The JSON Schema of case files, made from the same models that check them."""

from __future__ import annotations

from typing import Any

from pydantic.json_schema import models_json_schema

from reactorstage.case.written import CaseWritten, VariantWritten

DRAFT = "http://json-schema.org/draft-07/schema#"


def json_schema() -> dict[str, Any]:
    """Schema (draft 7, which editors of YAML understand) of a case or of a variant of one."""
    _, made = models_json_schema([(CaseWritten, "validation"), (VariantWritten, "validation")])
    definitions = {name: as_draft_7(part) for name, part in made["$defs"].items()}
    return {
        "$schema": DRAFT,
        "title": "reactorstage case",
        "description": "A train of catalyst beds in YAML, or a variant of another case.",
        "type": "object",
        "if": {"required": ["variant of"]},
        "then": {"$ref": "#/definitions/VariantWritten"},
        "else": {"$ref": "#/definitions/CaseWritten"},
        "definitions": definitions,
    }


def as_draft_7(part: Any) -> Any:
    """A part of a newer schema in the words of draft 7."""
    if isinstance(part, list):
        return [as_draft_7(item) for item in part]
    if not isinstance(part, dict):
        return part
    made = {key: as_draft_7(value) for key, value in part.items() if key != "default" or value is not None}
    if "patternProperties" in made:
        made.setdefault("additionalProperties", False)
    if "$ref" in made:
        made["$ref"] = made["$ref"].replace("#/$defs/", "#/definitions/")
    if "$ref" in made and len(made) > 1:  # draft 7 ignores whatever stands beside a reference
        made["allOf"] = [{"$ref": made.pop("$ref")}]
    return without_null(made)


def without_null(made: dict[str, Any]) -> dict[str, Any]:
    """A key that may be left out is not a key that may be null."""
    choices = made.get("anyOf", [])
    if {"type": "null"} not in choices:
        return made
    left = [choice for choice in choices if choice != {"type": "null"}]
    rest = {key: value for key, value in made.items() if key != "anyOf"}
    if len(left) > 1:
        return {**rest, "anyOf": left}
    return {**rest, "allOf": left} if "$ref" in left[0] else {**left[0], **rest}
