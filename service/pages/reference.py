"""/reference: the API in words for people, made from the API document that this very service gives programs."""

import json
from functools import cache
from typing import Any

from flask import Blueprint, Flask, Response, current_app, request

from service.api.api_document import document_of
from service.api.asking import open_to_all
from service.api.problems import PROBLEM_MEDIA_TYPE, PROBLEMS
from service.pages.page_views import gives_page
from service.pages.reference_words import blocks_of, kind_of, name_of, rows_of
from service.pages.rendering import page
from service.pages.texts import text_of

Document = dict[str, Any]
METHODS = ("get", "post", "put", "patch", "delete")


def reference_routes(public_url: str | None) -> Blueprint:
    """The page of the API.

    Args:
        public_url: How the service is reached; None for as the request says.
    """
    routes = Blueprint("reference_page", __name__)

    @cache  # once for each process: no answer changes the routes it has
    def told(app: Flask) -> Document:
        return reference_of(document_of(app, server=public_url or "/"))

    @routes.get("/reference")
    @gives_page
    @open_to_all
    def show_reference() -> Response:
        return page(
            request,
            "reference.html",
            told=told(current_app._get_current_object()),  # type: ignore[attr-defined]  # Flask's proxy
        )

    return routes


def reference_of(document: Document) -> Document:
    """What the page shows of an API document: groups of operations, messages of hooks, and shapes.

    Args:
        document: After OpenAPI 3.1, as `document_of` makes it.
    """
    operations = [
        _operation(method, path, item[method], document)
        for path, item in document["paths"].items()
        for method in METHODS
        if method in item
    ]
    groups = [
        {
            "name": tag["name"],
            "anchor": _anchor("group", tag["name"]),
            "about": blocks_of(tag["description"]),
            "operations": [operation for operation in operations if operation["tag"] == tag["name"]],
        }
        for tag in document["tags"]
    ]
    return {
        "about": blocks_of(document["info"]["description"]),
        "version": document["info"]["version"],
        "count": len(operations),
        "groups": [group for group in groups if group["operations"]],
        "messages": [_message(kind, item["post"]) for kind, item in document["webhooks"].items()],
        "shapes": [
            {"name": name, "about": blocks_of(schema.get("description", "")), **rows_of(schema)}
            for name, schema in document["components"]["schemas"].items()
        ],
    }


def _operation(method: str, path: str, told: Document, document: Document) -> Document:
    answers, problems = _answers(told["responses"])
    return {
        "id": told["operationId"],
        "tag": told["tags"][0],
        "method": method.upper(),
        "path": path,
        "summary": told["summary"],
        "about": blocks_of(told.get("description", "")),
        "is_going": told.get("deprecated", False),
        "who": _who(told["security"]),
        "parameters": [_parameter(parameter) for parameter in told.get("parameters", ())],
        "bodies": _bodies(told.get("requestBody")),
        "answers": answers,
        "problems": problems,
    }


def _who(security: list[Document]) -> str:
    """Who may ask, from the keys that an operation wants."""
    if not security:
        return text_of("reference.who_all")
    scopes: list[str] = next((asked["key"] for asked in security if "key" in asked), [])
    needed = text_of("reference.who_scope", scope=scopes[0]) if scopes else text_of("reference.who_key")
    return f"{needed} {text_of('reference.who_also')}" if {} in security else needed


def _parameter(told: Document) -> Document:
    schema = told["schema"]
    example = told.get("example", next(iter(schema.get("examples", ())), None))
    return {
        "name": told["name"],
        "where": text_of(f"reference.in_{told['in']}"),
        "is_needed": told["required"],
        "kind": kind_of(schema),
        "about": blocks_of(told.get("description", "")),
        "example": None if example is None else str(example),
    }


def _bodies(told: Document | None) -> list[Document]:
    if told is None:
        return []
    return [
        {
            "media_type": media_type,
            "is_needed": told["required"],
            "kind": kind_of(content["schema"]),
            "fields": rows_of(content["schema"])["fields"],
            # One body may be sent with several queries: it is shown once.
            "examples": list(
                dict.fromkeys(_shown(example["value"]) for example in content.get("examples", {}).values())
            ),
        }
        for media_type, content in told["content"].items()
    ]


def _shown(value: Any) -> str:
    return value if isinstance(value, str) else json.dumps(value, indent=2, ensure_ascii=False)


def _answers(responses: Document) -> tuple[list[Document], list[Document]]:
    """Answers that tell no problem, and the kinds of problems with what to do about each."""
    answers, problems = [], []
    for status, told in responses.items():
        contents = told.get("content", {})
        if PROBLEM_MEDIA_TYPE in contents:
            types = contents[PROBLEM_MEDIA_TYPE]["schema"]["allOf"][1]["properties"]["type"]["enum"]
            problems += [_problem(status, kind) for kind in types]
            continue
        answers.append(
            {
                "status": status,
                "about": blocks_of(told["description"]),
                "contents": [(media_type, kind_of(content["schema"])) for media_type, content in contents.items()],
                "headers": [_header(name, header) for name, header in told.get("headers", {}).items()],
            }
        )
    return answers, problems


def _header(name: str, told: Document) -> str:
    return name_of(told) if "$ref" in told else name


def _problem(status: str, kind: str) -> Document:
    known = PROBLEMS[kind.rpartition("/")[2]]
    return {
        "status": status,
        "type": kind,
        "name": known.name,
        "title": known.title,
        "what_to_do": known.what_to_do,
        "try_again": known.try_again,
    }


def _message(kind: str, told: Document) -> Document:
    content = next(iter(told["requestBody"]["content"].values()))
    return {
        "kind": kind,
        "anchor": _anchor("message", kind),
        "about": blocks_of(told["summary"]),
        "shape": kind_of(content["schema"]),
        "headers": [parameter["name"] for parameter in told["parameters"]],
    }


def _anchor(what: str, name: str) -> str:
    return f"{what}-{name.replace(' ', '-').replace('.', '-')}"
