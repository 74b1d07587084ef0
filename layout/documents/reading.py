"""From JSON text to a checked document: one way for movement, cutter and settings.

Any measured number may be written as `{"value", "plus_minus", "basis"}`. It is taken apart
before the document is checked, so that the rest of the program sees plain numbers; what the
number is worth is kept beside it, under the number's JSON pointer.
"""

import json
from collections.abc import Mapping
from typing import Annotated, Any, Literal, TypeVar

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field, ValidationError, WithJsonSchema

from layout.errors import DocumentError, Problem

MOST_LEVELS = 12  # lists and objects in each other; the deepest document has five
Json = Any  # what json.loads gives: the one place where the type is not known yet


class Part(BaseModel):
    """Base of every document part: frozen, and a name it does not know is a fault."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, strict=False)


class Stated(Part):
    """A number with its worth: how far it may be off, and what it rests on."""

    value: float
    plus_minus: Annotated[float, Field(ge=0)] = 0.0
    basis: Literal["measured", "calculated", "assumed"] = "measured"


def _refuse_bool_and_text(value: object) -> object:
    if isinstance(value, bool | str):
        raise ValueError(f"a number is needed, got {value!r}")
    return value


_NUMBER_SCHEMA = {
    "anyOf": [
        {"type": "number"},
        {
            "type": "object",
            "required": ["value"],
            "additionalProperties": False,
            "properties": {
                "value": {"type": "number"},
                "plus_minus": {"type": "number", "minimum": 0},
                "basis": {"enum": ["measured", "calculated", "assumed"]},
            },
        },
    ]
}
_TAKES_STATED = WithJsonSchema(_NUMBER_SCHEMA, mode="validation")

Number = Annotated[float, BeforeValidator(_refuse_bool_and_text), _TAKES_STATED]
Positive = Annotated[float, BeforeValidator(_refuse_bool_and_text), Field(gt=0), _TAKES_STATED]
NotNegative = Annotated[float, BeforeValidator(_refuse_bool_and_text), Field(ge=0), _TAKES_STATED]
Identifier = Annotated[str, Field(pattern=r"^[a-z][a-z0-9-]{0,63}$")]
Title = Annotated[str, Field(min_length=1, max_length=120)]

DocumentT = TypeVar("DocumentT", bound=Part)


def read_json(text: str | bytes, *, document: str) -> tuple[Json, dict[str, Json]]:
    """The JSON value of a text with every stated number made plain, and what was stated.

    Args:
        text: The document as it is written.
        document: Word for error messages.

    Returns:
        The plain value, and the stated objects by the JSON pointer of the number.

    Raises:
        DocumentError: Not UTF-8 JSON, nested too deep, or it holds NaN or an infinity (RFC 8259 has neither).
    """

    def refuse(name: str) -> Json:
        raise ValueError(f"{name} is not a JSON number")

    try:
        return _take_apart(json.loads(text, parse_constant=refuse), "", MOST_LEVELS)
    except (ValueError, RecursionError) as error:
        message = f"not JSON: {error}; write the document as one JSON object"
        raise DocumentError(document=document, problems=(Problem(pointer="", message=message),)) from error


def _take_apart(value: Json, pointer: str, levels: int) -> tuple[Json, dict[str, Json]]:
    if not levels:
        raise ValueError(f"lists and objects are nested more than {MOST_LEVELS} deep")
    if isinstance(value, dict):
        if "value" in value and set(value) <= set(Stated.model_fields):
            return value["value"], {pointer: value}
        pairs = [(key, *_take_apart(item, f"{pointer}/{key}", levels - 1)) for key, item in value.items()]
        plain: Json = {key: item for key, item, _ in pairs}
        return plain, {place: stated for *_, found in pairs for place, stated in found.items()}
    if isinstance(value, list):
        parts = [_take_apart(item, f"{pointer}/{place}", levels - 1) for place, item in enumerate(value)]
        return [item for item, _ in parts], {place: s for _, found in parts for place, s in found.items()}
    return value, {}


def check_document(
    model: type[DocumentT], value: Json, *, document: str, union_tags: frozenset[str] = frozenset()
) -> DocumentT:
    """The value as a checked document.

    Args:
        model: What it must be.
        value: Plain JSON value.
        document: Word for error messages.
        union_tags: Names the model puts into error places that are no keys of the document.

    Raises:
        DocumentError: With one problem per fault, each with its JSON pointer.
    """
    if not isinstance(value, Mapping):
        message = f"a JSON object is needed, got {type(value).__name__}"
        raise DocumentError(document=document, problems=(Problem(pointer="", message=message),))
    try:
        return model.model_validate(value)
    except ValidationError as error:
        problems = tuple(_problem(fault, union_tags) for fault in error.errors(include_url=False))
        raise DocumentError(document=document, problems=problems) from error


def _problem(fault: Any, union_tags: frozenset[str]) -> Problem:
    place = "".join(f"/{part}" for part in fault["loc"] if part not in union_tags)
    if fault["type"] == "extra_forbidden":
        return Problem(pointer=place, message="no such field; remove it or check its spelling")
    if fault["type"] == "missing":
        return Problem(pointer=place, message="this field is needed")
    message = fault["msg"].removeprefix("Value error, ")
    seen = fault.get("input")
    if isinstance(seen, str | int | float) and "got" not in message and fault["type"] != "value_error":
        message = f"{message}, got {seen!r}"
    return Problem(pointer=place, message=message)
