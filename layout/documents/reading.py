"""From JSON text to a checked document: one way for movement, cutter and settings.

Any measured number may be written as `{"value", "plus_minus", "basis"}`. It is taken apart
before the document is checked, so that the rest of the program sees plain numbers; what the
number is worth is kept beside it, under the number's JSON pointer.
"""

import json
import math
import re
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Annotated, Any, Literal, TypeVar

from pydantic import (
    BaseModel,
    BeforeValidator,
    ConfigDict,
    Field,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
    ValidationError,
)
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import CoreSchema
from pydantic_core.core_schema import no_info_before_validator_function

from layout.errors import DocumentError, Problem

MOST_LEVELS = 12  # lists and objects in each other; the deepest document has five
MOST_DIGITS = 400  # of a whole number: more than the greatest a double holds
MOST_WHOLE = 2**53  # whole numbers below it are doubles, each its own (RFC 8259 section 6)
MOST_SHOWN = 120  # characters of a value that a message shows: as many as the longest title has
ID_PATTERN = "[a-z][a-z0-9-]{0,63}"
_HALF_CHARACTER = re.compile("[\ud800-\udfff]")
_TOO_DEEP = f"lists and objects are nested more than {MOST_LEVELS} deep; a document needs fewer"
Json = Any  # what json.loads gives: the one place where the type is not known yet


class Part(BaseModel):
    """Base of every document part: frozen, and a name it does not know is a fault."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False, strict=False)


class Stated(Part):
    """A number with its worth: how far it may be off, and what it rests on."""

    value: float
    plus_minus: Annotated[float, Field(ge=0, le=1e9)] = 0.0
    basis: Literal["measured", "calculated", "assumed"] = "measured"


class At(ValueError):
    """What does not go together in a part: where in the part, as a JSON pointer, and what."""

    def __init__(self, pointer: str, message: str) -> None:
        super().__init__(message)
        self.pointer = pointer


_JSON_NAMES = {dict: "an object", list: "a list", str: "text", bool: "true or false", type(None): "null"}


def _shortened(text: str) -> str:
    return text if len(text) <= MOST_SHOWN else f"{text[:MOST_SHOWN]}... ({len(text)} characters)"


def _named(value: object) -> str:
    """What a JSON value is, in JSON's words; a number or a short text as it stands."""
    if isinstance(value, str) or not isinstance(value, tuple(_JSON_NAMES)):
        return _shortened(repr(value))
    return json.dumps(value) if isinstance(value, bool) else _JSON_NAMES[type(value)]


def _number(value: object) -> object:
    if isinstance(value, Mapping) and set(value) <= set(Stated.model_fields):
        raise ValueError('a number stated with its worth needs "value"')
    if isinstance(value, bool) or not isinstance(value, int | float):
        raise ValueError(f"a number is needed, got {_named(value)}")
    return value


def _identifier(value: object) -> object:
    if not isinstance(value, str) or re.fullmatch(ID_PATTERN, value) is None:
        raise ValueError(
            f"an id is a small letter followed by at most 63 small letters, digits and hyphens; got {_named(value)}"
        )
    return value


@dataclass(frozen=True, slots=True, kw_only=True)
class Within:
    """The range of a number that may be stated with its worth: what reading checks and what the JSON Schema says.

    Written over a number that has a range already, each end it names takes the place of that end.
    """

    ge: float | None = None
    gt: float | None = None
    le: float | None = None
    lt: float | None = None

    def __get_pydantic_core_schema__(self, source: object, handler: GetCoreSchemaHandler) -> CoreSchema:
        """A number within the range, whatever else was said of it."""
        found: Any = handler(source)
        ranged: Any = found["schema"] if found["type"] == "function-before" else found
        for end in (("ge", "gt"), ("le", "lt")):
            own = {name: value for name in end if (value := getattr(self, name)) is not None}
            if own:
                ranged = {**{name: part for name, part in ranged.items() if name not in end}, **own}
        return no_info_before_validator_function(_number, ranged)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> JsonSchemaValue:
        """The number as it stands, or with its worth; as programs tell it, it stands alone."""
        number = handler(schema)
        if handler.mode == "serialization" or "anyOf" in number:  # said already by the range this one is written over
            return number
        number = {
            name: int(said) if isinstance(said, float) and said.is_integer() else said for name, said in number.items()
        }
        worth = {
            name: {key: part for key, part in said.items() if key != "title"}
            for name, said in Stated.model_json_schema()["properties"].items()
        }
        properties = {**worth, "value": number}
        stated = {"type": "object", "required": ["value"], "additionalProperties": False, "properties": properties}
        return {"anyOf": [number, stated]}


# What a number of a document may be, by its quantity: far outside any real disc, and near enough that no sum
# of them overflows and no drawing grows without end.
LEAST_MM = 0.001  # mm; a micrometre, finer than any cutter
MOST_MM = 2000.0  # mm; ten times the radius of the largest shipped disc
LEAST_S, MOST_S = 0.001, 86_400.0  # s; a millisecond to a day
FULL_TURN_DEG = 360.0
# Stiffness, inertia, torque, ratio in their own units; the least is the inertia of a gramme within a micrometre.
LEAST_OF_OTHER, MOST_OF_OTHER = 1e-15, 1e9

Length = Annotated[float, Within(ge=LEAST_MM, le=MOST_MM)]
LengthOrZero = Annotated[float, Within(ge=0, le=MOST_MM)]
Offset = Annotated[float, Within(ge=-MOST_MM, le=MOST_MM)]
Time = Annotated[float, Within(ge=LEAST_S, le=MOST_S)]
TimeOrZero = Annotated[float, Within(ge=0, le=MOST_S)]
Angle = Annotated[float, Within(ge=-FULL_TURN_DEG, le=FULL_TURN_DEG)]
PositiveAngle = Annotated[float, Within(gt=0, le=FULL_TURN_DEG)]
Positive = Annotated[float, Within(ge=LEAST_OF_OTHER, le=MOST_OF_OTHER)]
NotNegative = Annotated[float, Within(ge=0, le=MOST_OF_OTHER)]
Identifier = Annotated[str, Field(pattern=f"^{ID_PATTERN}$", examples=["larkfield-9"]), BeforeValidator(_identifier)]
Title = Annotated[str, Field(min_length=1, max_length=120)]

DocumentT = TypeVar("DocumentT", bound=Part)


def read_json(text: str | bytes, *, document: str) -> tuple[Json, dict[str, Stated]]:
    """The JSON value of a text with every stated number made plain, and what was stated.

    Args:
        text: The document as it is written; bytes in UTF-8, or in UTF-16 or UTF-32, which their zeros tell.
        document: Word for error messages.

    Returns:
        The plain value, and what each stated number is worth by the JSON pointer of the number.

    Raises:
        DocumentError: Not JSON, nested too deep, a name given twice, a number no double holds, half a
            character, or a worth that is not valid. RFC 8259 has neither NaN nor infinities.
    """
    try:
        value = json.loads(
            text, parse_constant=_no_number, parse_int=_whole, parse_float=_real, object_pairs_hook=_without_doubles
        )
        plain, stated = _take_apart(value, "", MOST_LEVELS)
    except (ValueError, RecursionError) as error:
        pointer, message = _what_is_wrong(error)
        raise DocumentError(document=document, problems=(Problem(pointer=pointer, message=message),)) from error
    return plain, _checked_worths(stated, document)


class _Unfit(ValueError):
    """JSON that no document of ours may hold: where, and why."""

    def __init__(self, message: str, pointer: str = "") -> None:
        super().__init__(message)
        self.pointer = pointer


def _what_is_wrong(error: ValueError | RecursionError) -> tuple[str, str]:
    """The JSON pointer of a fault and what it is, in words for a person."""
    match error:
        case RecursionError():
            return "", _TOO_DEEP
        case _Unfit():
            return error.pointer, str(error)
        case UnicodeDecodeError():
            seen = f"0x{error.object[error.start]:02x}"
            return "", f"not UTF-8: byte {seen} at place {error.start} is no part of a character; save it as UTF-8"
        case json.JSONDecodeError() if not error.doc.strip():
            return "", "the document is empty; write it as one JSON object"
        case _:
            return "", f"not JSON: {error}; write the document as one JSON object"


def _no_number(name: str) -> Json:
    raise ValueError(f"{name} is not a JSON number")


def _whole(written: str) -> int:
    digits = written.removeprefix("-")
    if len(digits) > MOST_DIGITS:
        raise _Unfit(f"a number has {len(digits)} digits; {MOST_DIGITS} are the most any field needs")
    return int(written)


def _real(written: str) -> float:
    value = float(written)
    if math.isinf(value):
        raise _Unfit(f"the number {_shortened(written)} is larger than any field needs")
    return value


def _without_doubles(pairs: list[tuple[str, Json]]) -> dict[str, Json]:
    found = dict(pairs)
    if len(found) < len(pairs):
        double, _ = Counter(name for name, _ in pairs).most_common(1)[0]
        raise _Unfit(f"the field {_shortened(repr(double))} is given twice; leave one of them out")
    return found


def _whole_characters(text: str, pointer: str) -> None:
    half = _HALF_CHARACTER.search(text)
    if half is not None:
        seen = f"\\u{ord(half[0]):04x}"
        raise _Unfit(f"{seen} is half a character; write the character itself, or both halves of it", pointer)


def _checked_worths(stated: Mapping[str, Json], document: str) -> dict[str, Stated]:
    worths: dict[str, Stated] = {}
    problems: list[Problem] = []
    for pointer, value in stated.items():
        try:
            worths[pointer] = check_document(Stated, value, document=document)
        except DocumentError as error:
            problems += moved(error, pointer).problems
    if problems:
        raise DocumentError(document=document, problems=tuple(problems))
    return worths


def moved(error: DocumentError, pointer: str) -> DocumentError:
    """The error of a part, with its places as they are in the whole document."""
    problems = tuple(Problem(pointer=f"{pointer}{p.pointer}", message=p.message) for p in error.problems)
    return DocumentError(document=error.document, problems=problems)


def _escaped(key: str) -> str:
    """A key as it stands in a JSON pointer (RFC 6901 section 3)."""
    return key.replace("~", "~0").replace("/", "~1")


def _take_apart(value: Json, pointer: str, levels: int) -> tuple[Json, dict[str, Json]]:
    if not levels:
        raise _Unfit(_TOO_DEEP)
    if isinstance(value, dict):
        for key in value:
            _whole_characters(key, pointer)
        if "value" in value and set(value) <= set(Stated.model_fields):
            return value["value"], {pointer: value}
        pairs = [(key, *_take_apart(item, f"{pointer}/{_escaped(key)}", levels - 1)) for key, item in value.items()]
        plain: Json = {key: item for key, item, _ in pairs}
        return plain, {place: stated for *_, found in pairs for place, stated in found.items()}
    if isinstance(value, list):
        parts = [_take_apart(item, f"{pointer}/{place}", levels - 1) for place, item in enumerate(value)]
        return [item for item, _ in parts], {place: s for _, found in parts for place, s in found.items()}
    if isinstance(value, str):
        _whole_characters(value, pointer)
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
        message = f"a JSON object is needed, got {_named(value)}"
        raise DocumentError(document=document, problems=(Problem(pointer="", message=message),))
    try:
        return model.model_validate_json(json.dumps(_with_whole_numbers(value)), strict=True)
    except ValidationError as error:
        faults = error.errors(include_url=False)
        # Items that are wrong are not counted, so that a list of them is told to be too short as well.
        places = {fault["loc"][:end] for fault in faults for end in range(len(fault["loc"]))}
        told = [fault for fault in faults if fault["type"] != "too_short" or fault["loc"] not in places]
        problems = tuple(_problem(fault, union_tags) for fault in told)
        raise DocumentError(document=document, problems=problems) from error


def _with_whole_numbers(value: Json) -> Json:
    """The value with 1 where it says 1.0: JSON Schema calls both an integer, and pydantic the first alone."""
    if isinstance(value, float) and value.is_integer() and abs(value) < MOST_WHOLE:
        is_minus_zero = value == 0 and math.copysign(1, value) < 0  # no whole number has a sign there
        return value if is_minus_zero else int(value)
    if isinstance(value, Mapping):
        return {name: _with_whole_numbers(part) for name, part in value.items()}
    return [_with_whole_numbers(part) for part in value] if isinstance(value, list) else value


# What a fault of a kind needs, where pydantic would speak of its own types.
NEEDED = {
    **dict.fromkeys(("int_type", "int_from_float", "int_parsing"), "a whole number is needed"),
    **dict.fromkeys(("float_type", "float_parsing"), "a number is needed"),
    **dict.fromkeys(("bool_type", "bool_parsing"), "true or false is needed"),
    "string_type": "text is needed",
    **dict.fromkeys(("list_type", "tuple_type"), "a list is needed"),
    **dict.fromkeys(("dict_type", "model_type"), "a JSON object is needed"),
}


def _problem(fault: Any, union_tags: frozenset[str]) -> Problem:
    place = "".join(f"/{_escaped(str(part))}" for part in fault["loc"] if part not in union_tags)
    raised = fault.get("ctx", {}).get("error")
    place += raised.pointer if isinstance(raised, At) else ""
    if fault["type"] == "extra_forbidden":
        return Problem(pointer=place, message="no such field; remove it or check its spelling")
    if fault["type"] == "missing":
        return Problem(pointer=place, message="this field is needed")
    message = fault["msg"].removeprefix("Value error, ")
    seen = fault.get("input")
    if fault["type"] in NEEDED:
        return Problem(pointer=place, message=f"{NEEDED[fault['type']]}, got {_named(seen)}")
    if isinstance(seen, str | int | float) and "got" not in message and fault["type"] != "value_error":
        message = f"{message}, got {_shortened(repr(seen))}"
    return Problem(pointer=place, message=message)
