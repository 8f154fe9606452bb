"""What every mapping of the case file has in common: words as keys, unknown keys refused, nothing empty."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Annotated, Any, get_origin

from pydantic import (
    BaseModel,
    ConfigDict,
    ValidationError,
    ValidationInfo,
    ValidatorFunctionWrapHandler,
    field_validator,
    model_validator,
)

from reactorstage.case.fields import Raw, problem
from reactorstage.case.marks import UNREADABLE
from reactorstage.case.word_fields import (
    RawText,
    TextOf,
)


def key_of(attribute: str) -> str:
    """The key in the file for an attribute of a model."""
    return attribute.rstrip("_").replace("_", " ")


def mergeable(*keys: str) -> Callable[[dict[str, Any]], None]:
    """A change of schema: keys that may come from an `every ...` block are not required in place."""

    def relax(schema: dict[str, Any]) -> None:
        schema["required"] = [key for key in schema.get("required", []) if key not in keys]

    return relax


def title_of(model: type) -> str:
    """The title of a model in the JSON Schema, in plain words."""
    return re.sub("(?<!^)([A-Z])", r" \1", model.__name__.removesuffix("Written")).lower()


class Words(BaseModel):
    """Base of every mapping in the file: keys are words, unknown keys are errors, nothing changes later."""

    model_config = ConfigDict(
        alias_generator=key_of, extra="forbid", frozen=True, model_title_generator=title_of
    )

    @model_validator(mode="before")
    @classmethod
    def _stand_in(cls, raw: Any) -> Any:
        """A mapping already reported is read as one whose required values were all reported."""
        if raw is not UNREADABLE:
            return raw
        return {field.alias: UNREADABLE for field in cls.model_fields.values() if field.is_required()}

    @field_validator("*", mode="wrap")
    @classmethod
    def _tolerate(cls, raw: Any, handler: ValidatorFunctionWrapHandler, info: ValidationInfo) -> Any:
        if raw is None:
            raise problem("nothing is written here", "give a value, or leave the key out")
        try:
            return handler(raw)
        except ValidationError:
            if raw is not UNREADABLE:
                raise
            return () if get_origin(cls.model_fields[info.field_name or ""].annotation) is tuple else {}


Name = Annotated[str, TextOf()]
PriceText = Annotated[Raw, RawText(True, "34 EUR/MWh", "a price has no sign: say `costs` or `earns`")]
Bound = Annotated[Raw, RawText(example="424 degC")]
