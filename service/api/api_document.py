"""The API document after OpenAPI 3.1, made of the routes of an app and what is described beside them."""

import base64
import re
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from flask import Flask
from pydantic import BaseModel
from werkzeug.routing import Rule

from layout.version import ENGINE_VERSION
from service.api.api_problems import problems_of
from service.api.api_schemas import DIALECT, Schema, Schemas, Use
from service.api.api_texts import PATH_PARAMETERS, SCHEMES, TAGS, about_problem, description
from service.api.asking import Access, Openness, access_of
from service.api.describing import Answer, Body, Example, FormPart, HeaderField, Operation, operation_of
from service.api.models.about import Problem
from service.api.models.messages import Message, TestMessage
from service.api.problems import PROBLEM_MEDIA_TYPE, PROBLEMS
from service.hooks.types import MEANINGS, TEST_TYPE
from service.media_types import JSON_MEDIA_TYPE

VERSION = "1.0.0"  # of the API: the first number changes where a client must, the second where something is added
BYTES: Schema = {"type": "string", "format": "binary"}
SIGNED = ("webhook-id", "webhook-timestamp", "webhook-signature")
REQUEST_ID: Schema = {"$ref": "#/components/headers/Request-Id"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Route:
    """A route that describes its operation."""

    rule: Rule
    method: str
    access: Access
    operation: Operation


def routes_of(app: Flask) -> Iterator[Route]:
    """The routes of an app that describe an operation, in order of path and method."""
    for rule in sorted(app.url_map.iter_rules(), key=lambda rule: rule.rule):
        view = app.view_functions[rule.endpoint]
        operation, access = operation_of(view), access_of(view)
        if operation is not None and access is not None:
            for method in sorted((rule.methods or set()) - {"HEAD", "OPTIONS"}):
                yield Route(rule=rule, method=method, access=access, operation=operation)


def document_of(app: Flask, *, server: str) -> Schema:
    """The document of an app.

    Args:
        app: With all its routes.
        server: How the service is reached: a URL, or "/" for where the document came from.
    """
    routes = list(routes_of(app))
    schemas = Schemas(_uses(routes))
    paths: dict[str, Schema] = {}
    for route in routes:
        paths.setdefault(path_of(route.rule), {})[route.method.lower()] = _operation(route, schemas)
    webhooks = {kind: _webhook(kind, meaning, schemas) for kind, meaning in MEANINGS.items()}
    return {
        "openapi": "3.1.0",
        "jsonSchemaDialect": DIALECT,
        "info": {
            "title": "discwright",
            "summary": "Tunes become discs: laid out, ordered, released, cut.",
            "version": VERSION,
            "description": description(ENGINE_VERSION),
        },
        "servers": [{"url": server}],
        "tags": [{"name": name, "description": meaning} for name, meaning in TAGS.items()],
        "paths": paths,
        "webhooks": webhooks,
        "components": {
            "schemas": schemas.reached_from([paths, webhooks]),
            "headers": _COMMON_HEADERS,
            "securitySchemes": SCHEMES,
        },
    }


def path_of(rule: Rule) -> str:
    """The path of a rule as the document writes it."""
    return re.sub(r"<(?:\w+:)?(\w+)>", r"{\1}", rule.rule)


_COMMON_HEADERS: Schema = {
    "Request-Id": {
        "description": "The id of the request: as the client chose it, else made by the service.",
        "schema": {"type": "string", "pattern": "^[A-Za-z0-9._~:-]{1,128}$"},
    },
    "RateLimit": {
        "description": "How many requests are left, and for how many seconds.",
        "schema": {"type": "string"},
    },
    "RateLimit-Policy": {
        "description": "How many requests are taken, in how many seconds.",
        "schema": {"type": "string"},
    },
    "Retry-After": {
        "description": "Seconds to wait before the same request is sent again.",
        "schema": {"type": "integer", "minimum": 0},
    },
    "WWW-Authenticate": {"description": "How a key is shown (RFC 6750).", "schema": {"type": "string"}},
}


def _uses(routes: list[Route]) -> Iterator[tuple[type[BaseModel], Use]]:
    yield from ((model, "told") for model in (Problem, Message, TestMessage))
    for route in routes:
        operation = route.operation
        if operation.query is not None:
            yield operation.query, "asked"
        for model in sorted(operation.checked_by, key=lambda model: model.__name__):
            yield model, "asked"
        for answer in operation.answers:
            yield from ((model, "told") for model in answer.contents.values() if model is not None)


def _operation(route: Route, schemas: Schemas) -> Schema:
    operation = route.operation
    made: Schema = {"operationId": operation.id, "tags": [operation.tag], "summary": operation.summary}
    if operation.description:
        made["description"] = operation.description
    if operation.retirement is not None:
        made["deprecated"] = True
    parameters = [*_path_parameters(route), *_query_parameters(operation, schemas), *_header_parameters(operation)]
    if parameters:
        made["parameters"] = parameters
    if operation.bodies:
        content = {body.media_type: _content(body, operation, schemas) for body in operation.bodies}
        made["requestBody"] = {"required": operation.is_body_required, "content": content}
    made["responses"] = _responses(route, schemas)
    made["security"] = _security(route.access)
    return made


def _path_parameters(route: Route) -> Iterator[Schema]:
    example = _first_example(route.operation)
    for name in re.findall(r"<(?:\w+:)?(\w+)>", route.rule.rule):
        told = PATH_PARAMETERS[name]
        yield {
            "name": name,
            "in": "path",
            "required": True,
            "description": told.meaning,
            "schema": dict(told.schema),
            "example": example.path.get(name, told.example),
        }


def _query_parameters(operation: Operation, schemas: Schemas) -> Iterator[Schema]:
    if operation.query is None:
        return
    schema = schemas.named[schemas.of(operation.query, "asked")["$ref"].rpartition("/")[2]]
    example = _first_example(operation)
    for name, said in schema.get("properties", {}).items():
        made: Schema = {"name": name, "in": "query", "required": name in schema.get("required", ())}
        own = _without_null(said)
        if "description" in own:
            made["description"] = own.pop("description")
        made["schema"] = own
        if name in example.query:
            made["example"] = example.query[name]
        yield made


def _without_null(schema: Schema) -> Schema:
    """What a value of a query may be: it can be left out, but never be null."""
    own = dict(schema)
    if own.get("default", 0) is None:
        del own["default"]
    choices = [choice for choice in own.pop("anyOf", []) if choice != {"type": "null"}]
    if len(choices) == 1:
        return {**choices[0], **own}
    return {**own, "anyOf": choices} if choices else own


def _header_parameters(operation: Operation) -> Iterator[Schema]:
    example = _first_example(operation)
    for field in operation.headers:
        if field.name == "Accept":
            continue  # OpenAPI reads it from the media types of the answers, and ignores a parameter of the name
        made = {
            "name": field.name,
            "in": "header",
            "required": field.is_required,
            "description": field.meaning,
            "schema": dict(field.schema),
        }
        if field.name in example.headers:
            made["example"] = example.headers[field.name]
        yield made


def _first_example(operation: Operation) -> Example:
    return operation.examples[0] if operation.examples else Example(status=200)


def _content(body: Body, operation: Operation, schemas: Schemas) -> Schema:
    made: Schema = {"schema": _body_schema(body, schemas)}
    if body.parts:
        made["encoding"] = {part.name: {"contentType": part.media_type} for part in body.parts}
    examples = [example for example in operation.examples if example.media_type == body.media_type]
    if examples:
        made["examples"] = {
            f"example_{number}": {"value": _shown(example.content)} for number, example in enumerate(examples, 1)
        }
    return made


def _body_schema(body: Body, schemas: Schemas) -> Schema:
    if body.parts:
        return _form(
            {part.name: _part_schema(part, schemas) for part in body.parts},
            [part.name for part in body.parts if part.is_required],
            body.more_parts,
        )
    if body.fields:
        return _form({name: dict(schema) for name, schema in body.fields.items()}, list(body.fields), None)
    return dict(BYTES) if body.model is None else schemas.of(body.model, "asked")


def _form(properties: Schema, required: list[str], more: str | None) -> Schema:
    made: Schema = {"type": "object", "properties": properties, "additionalProperties": False}
    if required:
        made["required"] = required
    return made if more is None else {**made, "patternProperties": {more: dict(BYTES)}}


def _part_schema(part: FormPart, schemas: Schemas) -> Schema:
    if part.model is None:
        return {**BYTES, "contentMediaType": part.media_type, "description": part.meaning}
    return {**schemas.of(part.model, "asked"), "description": part.meaning}


def _shown(value: Any) -> Any:
    """A body as an example shows it: bytes in base64."""
    if isinstance(value, bytes):
        return base64.b64encode(value).decode()
    return {name: _shown(part) for name, part in value.items()} if isinstance(value, dict) else value


def _responses(route: Route, schemas: Schemas) -> Schema:
    operation = route.operation
    made = {str(answer.status): _response(answer, route, schemas) for answer in operation.answers}
    problems = problems_of(operation, route.access, route.method, has_path=bool(route.rule.arguments))
    for status, names in problems.items():
        told = schemas.of(Problem, "told")
        types = {"properties": {"type": {"enum": [PROBLEMS[name].type for name in names]}}}
        headers = {**_headers((), route), **_headers_of_problem(status, names)}
        made[str(status)] = {
            "description": " ".join(about_problem(name) for name in names),
            "headers": headers,
            "content": {PROBLEM_MEDIA_TYPE: {"schema": {"allOf": [told, types]}}},
        }
    return dict(sorted(made.items()))


def _response(answer: Answer, route: Route, schemas: Schemas) -> Schema:
    made: Schema = {"description": answer.meaning, "headers": _headers(answer.headers, route)}
    if answer.contents:
        made["content"] = {
            media_type: {"schema": dict(BYTES) if model is None else schemas.of(model, "told")}
            for media_type, model in answer.contents.items()
        }
    return made


def _headers(fields: tuple[HeaderField, ...], route: Route) -> Schema:
    made: Schema = {field.name: {"description": field.meaning, "schema": dict(field.schema)} for field in fields}
    made["Request-Id"] = REQUEST_ID
    if route.access.is_counted:
        for name in ("RateLimit", "RateLimit-Policy"):
            made[name] = {"$ref": f"#/components/headers/{name}"}
    return made


def _headers_of_problem(status: int, names: tuple[str, ...]) -> Schema:
    fields = ["WWW-Authenticate"] if status == 401 else []  # noqa: PLR2004 -- RFC 9110 section 15.5.2
    if any(PROBLEMS[name].try_again and name != "internal-error" for name in names):
        fields.append("Retry-After")
    return {name: {"$ref": f"#/components/headers/{name}"} for name in fields}


def _security(access: Access) -> list[Schema]:
    scopes = [] if access.scope is None else [access.scope.value]
    if access.openness is Openness.ALL and access.scope is None:
        return []
    shown: list[Schema] = [{"key": scopes}, {"browser": scopes}]
    return shown if access.openness is Openness.NOBODY else [*shown, {}]


def _webhook(kind: str, meaning: str, schemas: Schemas) -> Schema:
    model = TestMessage if kind == TEST_TYPE else Message
    header = {"in": "header", "required": True, "schema": {"type": "string"}}
    return {
        "post": {
            "tags": ["hooks"],
            "summary": meaning,
            "parameters": [{"name": name, **header} for name in SIGNED],
            "requestBody": {
                "required": True,
                "content": {JSON_MEDIA_TYPE: {"schema": schemas.of(model, "told")}},
            },
            "responses": {
                "2XX": {"description": "The message is taken. Anything else, and it is sent again later."},
                "410": {"description": "No more messages are wanted: the hook is turned off."},
            },
        }
    }
