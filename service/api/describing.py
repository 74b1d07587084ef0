"""How an operation of the API is described: values beside the route, from which the API document is made.

What a request must be is described by the very models that check it: `request_models` refuses to check by another.
Who may ask, and the problems that follow from that, are read from the view's declaration of access.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any, TypeVar

from flask import Request, current_app
from pydantic import BaseModel

from service.api.retiring import Retirement

View = TypeVar("View", bound=Callable[..., Any])
Schema = Mapping[str, Any]


def _text() -> Schema:
    return {"type": "string"}


@dataclass(frozen=True, slots=True, kw_only=True)
class HeaderField:
    """A header field of a request or an answer.

    Attributes:
        name: Of the field.
        meaning: What it says.
        schema: What its value may be, as JSON Schema.
        is_required: Whether a request must have it.
    """

    name: str
    meaning: str
    schema: Schema = field(default_factory=_text)
    is_required: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class FormPart:
    """A part of a multipart body.

    Attributes:
        name: Of the part.
        meaning: What it brings.
        media_type: What it is.
        model: What checks it; None for bytes that are no JSON.
        is_required: Whether the form must have it.
    """

    name: str
    meaning: str
    media_type: str
    model: type[BaseModel] | None = None
    is_required: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Body:
    """A form in which the body of a request may come.

    Attributes:
        media_type: What it is.
        model: What checks it; None for bytes that are no JSON, and for forms.
        parts: Of a multipart form; empty for other bodies.
        fields: Of a form of fields; empty for other bodies.
        more_parts: Pattern of the names of further parts, each bytes; None where there are none.
    """

    media_type: str
    model: type[BaseModel] | None = None
    parts: tuple[FormPart, ...] = ()
    fields: Mapping[str, Schema] = field(default_factory=dict)
    more_parts: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """An answer that tells no problem.

    Attributes:
        status: Of HTTP.
        meaning: When it is given.
        contents: What it holds by media type, None for bytes that are no JSON; empty where it has no body.
        headers: Fields beside those of every answer.
    """

    status: int
    meaning: str
    contents: Mapping[str, type[BaseModel] | None] = field(default_factory=dict)
    headers: tuple[HeaderField, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Example:
    """A request as it may be sent, which the tests send.

    Attributes:
        status: Of the answer it gets.
        given: What must be there before, such as "a ready order"; the tests know how to make it. "" for nothing.
        path: Values of the path's parameters, but for ids of what must be there.
        query: Of the query.
        headers: Fields of the head.
        media_type: Of the body; "" for no body.
        body: A JSON value; bytes; for a form, parts by name, each one of these; or what gives one when it is called.
    """

    status: int
    given: str = ""
    path: Mapping[str, Any] = field(default_factory=dict)
    query: Mapping[str, Any] = field(default_factory=dict)
    headers: Mapping[str, str] = field(default_factory=dict)
    media_type: str = ""
    body: Any = None

    @property
    def content(self) -> Any:
        """The body; parts of a form by name."""
        return self.body() if callable(self.body) else self.body


@dataclass(frozen=True, slots=True, kw_only=True)
class Operation:
    """An operation of the API.

    Attributes:
        id: Its name in the document; that of the method of a client.
        tag: Of the group it belongs to.
        summary: What it does, in a few words.
        description: What else there is to know.
        query: The model that checks the query; None where the query is not looked at.
        headers: Fields of the request's head that mean something.
        bodies: The forms in which its body may come; empty for none.
        is_body_required: Whether it must have one.
        answers: Those that tell no problem.
        problems: Names of the kinds of problems it may tell, beside those that follow from the rest.
        examples: At least one.
        retirement: That it will go; None where it stays.
    """

    id: str
    tag: str
    summary: str
    answers: tuple[Answer, ...]
    description: str = ""
    query: type[BaseModel] | None = None
    headers: tuple[HeaderField, ...] = ()
    bodies: tuple[Body, ...] = ()
    is_body_required: bool = True
    problems: tuple[str, ...] = ()
    examples: tuple[Example, ...] = ()
    retirement: Retirement | None = None

    @property
    def checked_by(self) -> frozenset[type[BaseModel]]:
        """The models that check what a request brings in its body."""
        whole = {body.model for body in self.bodies}
        parts = {part.model for body in self.bodies for part in body.parts}
        return frozenset(model for model in whole | parts if model is not None)


def describes(operation: Operation) -> Callable[[View], View]:
    """Say which operation a view does; the attribute `operation` of the view."""

    def declare(view: View) -> View:
        view.operation = operation  # type: ignore[attr-defined]  # functions take attributes
        return view

    return declare


def operation_of(view: Callable[..., Any]) -> Operation | None:
    """The operation that a view does; None where it describes none."""
    described = getattr(view, "operation", None)
    return described if isinstance(described, Operation) else None


def operation_asked(asked: Request) -> Operation | None:
    """The operation that a request asks for; None where its view describes none."""
    view = current_app.view_functions.get(asked.endpoint or "")
    return None if view is None else operation_of(view)
