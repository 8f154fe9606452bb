"""Reading a result.json again, with one clear error for what is broken or of another version."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

from reactorstage.errors import CallError
from reactorstage.report.result_json import SCHEMA_VERSION

Json = dict[str, Any]

NEEDED = ("result", "case", "train", "status", "quantities", "limits", "money")
RESULTS = ("rating", "optimum")


def read_result(path: Path) -> Json:
    """The content of a result file of `rate` or `optimise`.

    Raises CallError with file, line and column where the text is no JSON, and with what was found where it
    is no result, or one of another version.
    """
    try:
        text = path.read_text(encoding="utf-8")
    except UnicodeDecodeError as error:
        raise CallError(f"{path}: this is not text: byte {error.start} is not UTF-8") from error
    except OSError as error:
        raise CallError(f"{path}: cannot be read: {error.strerror or error}") from error
    try:
        content = json.loads(text)
    except json.JSONDecodeError as error:
        place = f"{path}:{error.lineno}:{error.colno}"
        raise CallError(
            f"{place}: this is not JSON: {error.msg}; write the result anew with `rate` or `optimise`"
        ) from None
    except RecursionError:
        raise CallError(f"{path}:1:1: this is no result file: it is nested too deeply") from None
    return checked(content, path)


def checked(content: Any, path: Path) -> Json:
    """The content if it is a whole result of this version."""
    if not isinstance(content, dict) or "schema version" not in content:
        raise CallError(f"{path}:1:1: this is no result file: it has no 'schema version'")
    version = content["schema version"]
    if version != SCHEMA_VERSION:
        raise CallError(
            f"{path}:1:1: this result is of schema version {version}, this program reads {SCHEMA_VERSION}; "
            "write the result anew with `rate` or `optimise`"
        )
    if content.get("result") not in RESULTS:
        found = content.get("result")
        raise CallError(f"{path}:1:1: a result of `rate` or `optimise` is expected, this is {found!r}")
    if content.get("failure"):
        raise CallError(f"{path}: this result has no answer to compare: {content['failure']}")
    missing = [key for key in NEEDED if key not in content]
    if missing or not _sound(content):
        what = f"{', '.join(missing)} missing" if missing else "a part of it has another form"
        raise CallError(
            f"{path}:1:1: this result file is not whole: {what}; write it anew with `rate` or `optimise`"
        )
    return content


def _sound(content: Json) -> bool:
    """Whether the parts that a comparison reads have the form in which they are written."""
    mappings = (content["case"], content["train"], content["quantities"], content["money"])
    if not all(isinstance(part, dict) for part in mappings) or not isinstance(content["limits"], list):
        return False
    values = all(
        isinstance(one, dict)
        and {"value", "unit"} <= one.keys()
        and isinstance(one["value"], int | float | None)
        for one in content["quantities"].values()
    )
    keys = {"limit", "of", "direction", "allowed", "value", "unit", "margin", "margin unit", "state"}
    limits = all(isinstance(one, dict) and keys <= one.keys() for one in content["limits"])
    money = content["money"].get("per label")
    named = isinstance(content["case"].get("name"), str)
    return values and limits and named and isinstance(money, dict)
