"""From what a request says to a checked model, every fault told with its place."""

import json
import re
from collections.abc import Iterator, Mapping
from functools import cache
from typing import Any, TypeVar, get_args

from flask import Request
from pydantic import ValidationError

from layout.documents.reading import NEEDED, Part, check_document, read_json
from layout.errors import DocumentError, Problem
from service.api.describing import operation_asked
from service.api.failures import too_large
from service.api.models.orders import NAMING_TAGS
from service.api.problems import ProblemError
from service.media_types import JSON_MEDIA_TYPE

ModelT = TypeVar("ModelT", bound=Part)
WHOLE = re.compile("-?(0|[1-9][0-9]{0,399})")  # as JSON writes it (RFC 8259 section 6); no field needs more digits
TRUTHS = {"true": True, "false": False}
PLAIN = "a plain value is needed, got an object"
NUL = "\0"  # no name of ours holds one, and no text of PostgreSQL (its manual, section 8.3)
HOLDS_NUL = "it holds the character NUL (U+0000), which nothing here does; leave it out"


def read_body(asked: Request, model: type[ModelT], *, document: str, most_bytes: int) -> ModelT:
    """The JSON body of a request, checked.

    Args:
        asked: The request; its body is read.
        model: What the body must be.
        document: Word for it in messages.
        most_bytes: How large it may be.

    Raises:
        ProblemError: It is of another media type, or too large.
        DocumentError: It is not valid; each fault with its JSON pointer.
    """
    if asked.mimetype != JSON_MEDIA_TYPE:
        raise ProblemError(
            name="media-type-unsupported",
            detail=f"{asked.mimetype[:100] or 'a body without a media type'!r} is not taken; send {JSON_MEDIA_TYPE}",
            more={"allowed_types": [JSON_MEDIA_TYPE]},
            headers={"Accept-Post": JSON_MEDIA_TYPE},
        )
    body = asked.stream.read(most_bytes + 1)
    if len(body) > most_bytes:
        raise too_large(most_bytes, f"the {document}")
    return read_text(asked, model, body, document=document)


def read_text(asked: Request, model: type[ModelT], text: bytes, *, document: str, plain: str = PLAIN) -> ModelT:
    """The JSON text of a body or a part, checked.

    Args:
        asked: The request that brought it.
        model: What it must be.
        text: As it came; nothing is an object without members.
        document: Word for it in messages.
        plain: What is said of a number with its worth, which no request takes.

    Raises:
        DocumentError: It is not valid; each fault with its JSON pointer.
    """
    operation = operation_asked(asked)
    if operation is not None and model not in operation.checked_by:
        raise LookupError(f"{operation.id} is not described as bringing {model.__name__}")
    value, stated = read_json(text or b"{}", document=document)
    # A number of a settings document may say what it is worth, wherever the document stands.
    faults = tuple(Problem(pointer=place, message=plain) for place in stated if not place.startswith("/settings/"))
    if faults:
        raise DocumentError(document=document, problems=faults)
    faults = tuple(Problem(pointer=place, message=HOLDS_NUL) for place in _places_of_nul(value, ""))
    if faults:
        raise DocumentError(document=document, problems=faults)
    return check_document(model, value, document=document, union_tags=NAMING_TAGS)


def read_arguments(asked: Request, model: type[ModelT]) -> ModelT:
    """The query of a request, checked.

    Raises:
        ProblemError: A parameter is unknown, comes twice, or has a value that is not allowed.
    """
    operation = operation_asked(asked)
    if operation is not None and operation.query is not model:
        raise LookupError(f"{operation.id} is not described as asking by {model.__name__}")
    if not asked.args:
        without: ModelT = _without_arguments(model)
        return without
    known = f"known are {', '.join(model.model_fields)}" if model.model_fields else "none are taken"
    for name, values in asked.args.lists():
        if name not in model.model_fields:
            raise _invalid(name, f"there is no parameter called {name[:100]!r} here; {known}")
        if len(values) > 1:
            raise _invalid(name, f"the parameter {name} comes {len(values)} times; give it once")
        if NUL in values[0]:
            raise _invalid(name, f"{name} is {values[0][:100]!r}: {HOLDS_NUL}")
    return _arguments_checked(model, asked.args)


@cache
def _without_arguments(model: type[ModelT]) -> ModelT:
    """What a query without parameters says: frozen, so that all requests can have the same one."""
    return _arguments_checked(model, {})


def _arguments_checked(model: type[ModelT], given: Mapping[str, str]) -> ModelT:
    written = {name: _value_of(text, model.model_fields[name].annotation) for name, text in given.items()}
    try:
        return model.model_validate_json(json.dumps(written), strict=True)
    except ValidationError as error:
        fault = error.errors(include_url=False)[0]
        name = str(fault["loc"][0])
        message = NEEDED.get(fault["type"]) or fault["msg"].removeprefix("Value error, ")
        raise _invalid(name, f"{name} is {given.get(name, '')[:100]!r}: {message}") from error


def _value_of(text: str, annotation: Any) -> Any:
    """A parameter as the JSON value it writes: the text where that is none of its type."""
    types = {annotation, *get_args(annotation)}
    if bool in types and text in TRUTHS:
        return TRUTHS[text]
    is_whole = any(wanted is int or int in get_args(wanted) for wanted in types)
    return int(text) if is_whole and WHOLE.fullmatch(text) else text


def _places_of_nul(value: Any, place: str) -> Iterator[str]:
    """JSON pointers of the texts that hold NUL, and of the objects with such a name in them."""
    if isinstance(value, str):
        if NUL in value:
            yield place
    elif isinstance(value, list):
        for number, member in enumerate(value):
            yield from _places_of_nul(member, f"{place}/{number}")
    elif isinstance(value, dict):
        for name, member in value.items():
            if NUL in name:
                yield place
            else:
                yield from _places_of_nul(member, f"{place}/{name.replace('~', '~0').replace('/', '~1')}")


def _invalid(name: str, detail: str) -> ProblemError:
    return ProblemError(name="parameter-invalid", detail=detail, more={"parameter": name})
