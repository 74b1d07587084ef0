"""The API document: that it is valid, whole, the same each time, and describes what checks."""

import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import jsonschema  # type: ignore[import-untyped]
import pytest
from flask import Flask
from openapi_spec_validator import OpenAPIV31SpecValidator

from layout.documents import shipped_cutter_ids, shipped_movement_ids, shipped_text
from service.api.api_document import document_of, path_of, routes_of
from service.api.asking import access_of
from service.api.describing import operation_of
from service.api.problems import PROBLEMS
from service.api.request_ids import FIELD
from service.app import create_app
from service.hooks.types import MEANINGS
from service.pages.page_views import is_page
from tests.service.conftest import parts_of
from tests.service.fakes import FakePlanner


@pytest.fixture(scope="module")
def app(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Flask]:
    parts = parts_of(tmp_path_factory.mktemp("described"))
    yield create_app(parts.settings, planner=FakePlanner())
    parts.store.close()


@pytest.fixture(scope="module")
def document(app: Flask) -> Any:
    return app.test_client().get("/openapi.json").json


def operations_in(document: Any) -> Iterator[tuple[str, Any]]:
    for path, methods in document["paths"].items():
        for method, operation in methods.items():
            yield f"{method.upper()} {path}", operation


def test_the_document_is_valid_after_openapi_3_1(document: Any) -> None:
    # openapi-spec-validator holds it against the published schema of OpenAPI 3.1 and every schema against 2020-12.
    OpenAPIV31SpecValidator(document).validate()


def test_every_route_describes_its_operation(app: Flask) -> None:
    silent = [
        rule.rule
        for rule in app.url_map.iter_rules()
        if operation_of(view := app.view_functions[rule.endpoint]) is None and not is_page(view)
    ]

    assert silent == []


def test_every_route_is_in_the_document(app: Flask, document: Any) -> None:
    routes = {
        f"{method} {path_of(rule)}"
        for rule in app.url_map.iter_rules()
        if not is_page(app.view_functions[rule.endpoint])
        for method in (rule.methods or set()) - {"HEAD", "OPTIONS"}
    }

    assert {name for name, _ in operations_in(document)} == routes


def test_every_operation_has_a_name_of_its_own_and_an_example(app: Flask, document: Any) -> None:
    names = [operation["operationId"] for _, operation in operations_in(document)]

    assert len(names) == len(set(names))
    assert [route.operation.id for route in routes_of(app) if not route.operation.examples] == []


def test_every_problem_that_is_described_is_a_kind_there_is(app: Flask) -> None:
    described = {name for route in routes_of(app) for name in route.operation.problems}

    assert described <= PROBLEMS.keys()


def test_every_group_is_explained(document: Any) -> None:
    used = {tag for _, operation in operations_in(document) for tag in operation["tags"]}

    assert used <= {tag["name"] for tag in document["tags"]}


def test_every_field_of_a_query_is_described_from_the_model_that_checks_it(app: Flask, document: Any) -> None:
    by_id = {operation["operationId"]: operation for _, operation in operations_in(document)}

    for route in routes_of(app):
        told = [one["name"] for one in by_id[route.operation.id].get("parameters", []) if one["in"] == "query"]
        assert told == list(route.operation.query.model_fields if route.operation.query else ())


def test_the_keys_that_an_operation_needs_are_those_its_route_declares(app: Flask, document: Any) -> None:
    by_id = {operation["operationId"]: operation for _, operation in operations_in(document)}

    told = {name: operation["security"] for name, operation in by_id.items()}

    assert told["release_order"] == [{"key": ["release"]}, {"browser": ["release"]}]
    assert told["make_layout"] == [{"key": ["order"]}, {"browser": ["order"]}, {}]
    assert told["tell_health"] == []
    for route in routes_of(app):
        scope = access_of(app.view_functions[route.rule.endpoint]).scope  # type: ignore[union-attr]
        assert (scope is None) or {"key": [scope.value]} in told[route.operation.id]


def test_names_of_schemas_are_plain_and_nothing_refers_to_what_is_not_there(document: Any) -> None:
    text = json.dumps(document)
    named = document["components"]["schemas"].keys()

    assert [name for name in named if not re.fullmatch("[A-Z][A-Za-z0-9]*", name)] == []
    assert set(re.findall(r"#/components/schemas/(\w+)", text)) == set(named)


def test_requests_take_no_unknown_member_and_answers_may_have_more(document: Any) -> None:
    schemas = document["components"]["schemas"]

    assert schemas["OrderBody"]["additionalProperties"] is False
    assert "additionalProperties" not in schemas["OrderAnswer"]


def test_there_is_a_webhook_for_every_type_of_message(document: Any) -> None:
    assert list(document["webhooks"]) == list(MEANINGS)


def test_every_problem_says_whether_to_try_again(document: Any) -> None:
    problem = document["components"]["schemas"]["Problem"]

    assert {"type", "title", "status", "detail", "instance", "request_id", "try_again"} == set(problem["required"])
    busy = document["paths"]["/v1/orders"]["post"]["responses"]["503"]
    assert busy["description"] == (
        "`service-busy`: The service has more to do than it can; the same request may do better later. "
        "`store-busy`: The service cannot reach what it keeps its data in; the same request may do better later."
    )
    assert busy["headers"]["Retry-After"] == {"$ref": "#/components/headers/Retry-After"}


def test_the_same_code_gives_the_same_bytes(tmp_path: Path) -> None:
    texts = []
    for name in ("one", "two"):
        parts = parts_of(tmp_path / name)
        texts.append(create_app(parts.settings, planner=FakePlanner()).test_client().get("/openapi.json").data)
        parts.store.close()

    assert texts[0] == texts[1]


def test_the_document_is_not_sent_again_to_who_has_it(app: Flask) -> None:
    http = app.test_client()
    tag = http.get("/openapi.json").headers["ETag"]

    assert http.get("/openapi.json", headers={"If-None-Match": tag}).status_code == 304


def test_the_server_is_where_the_service_is_reached(app: Flask) -> None:
    assert document_of(app, server="https://discs.example")["servers"] == [{"url": "https://discs.example"}]


@pytest.mark.parametrize("kind", ["movement", "cutter"])
def test_every_shipped_document_is_valid_by_its_schema_and_a_wrong_one_is_not(app: Flask, kind: str) -> None:
    answer = app.test_client().get(f"/v1/schemas/{kind}")
    check = jsonschema.Draft202012Validator(answer.json)

    assert answer.content_type == "application/schema+json"
    for known in shipped_movement_ids() if kind == "movement" else shipped_cutter_ids():
        shipped = json.loads(shipped_text(known))
        check.validate(shipped)
        assert list(check.iter_errors({**shipped, "wheels": 3})) != []


def test_a_schema_that_is_not_there_is_told_with_those_that_are(app: Flask) -> None:
    answer = app.test_client().get("/v1/schemas/tune").json

    assert answer is not None
    assert answer["known_ids"] == ["movement", "cutter", "settings", "sheet-job"]


@pytest.mark.parametrize("path", ["/", "/nowhere", "/v1/orders"])
def test_a_request_keeps_the_id_it_brings(app: Flask, path: str) -> None:
    answer = app.test_client().get(path, headers={FIELD: "shop-7:a.b~c_d"})

    assert answer.headers[FIELD] == "shop-7:a.b~c_d"
    assert answer.status_code == 200 or (answer.json or {})["request_id"] == "shop-7:a.b~c_d"


@pytest.mark.parametrize("strange", ["", "two words", "a" * 129, '"quoted"', "ä", "a\tb"])
def test_a_request_without_an_id_that_is_safe_in_a_log_gets_one(app: Flask, strange: str) -> None:
    http = app.test_client()
    made = [http.get("/nowhere", headers={FIELD: strange}) for _ in range(2)]

    for answer in made:
        assert re.fullmatch("req_[0-9a-f]{24}", answer.headers[FIELD])
        assert (answer.json or {})["request_id"] == answer.headers[FIELD]
    assert made[0].headers[FIELD] != made[1].headers[FIELD]


# Objects that may hold members the document does not name, each with its reason.
OPEN = {
    "ApiDocument": "OpenAPI 3.1 says what such a document holds",
    "SchemaAnswer": "the dialect that it names says what a schema holds",
    "Problem": "RFC 9457 section 3.2: kinds of problems have members of their own, to be ignored where not known",
}


def loose_in(value: Any, place: str) -> Iterator[str]:
    """Where a schema says no more than that something is there."""
    if isinstance(value, list):
        for number, part in enumerate(value):
            yield from loose_in(part, f"{place}/{number}")
    if not isinstance(value, dict):
        return
    names = value.keys() & {"properties", "patternProperties"}
    says_what_it_holds = any(value[name] for name in names) or value.get("additionalProperties") not in (None, True, {})
    if value.get("type") == "object" and (not says_what_it_holds or value.get("additionalProperties") is True):
        yield place
    if value.get("type") == "array" and not value.get("items") and not value.get("prefixItems"):
        yield place
    for name, part in value.items():
        if part == {} and name in ("schema", "items", "additionalProperties"):
            yield f"{place}/{name}"
        if name not in ("default", "example", "examples", "const", "enum"):
            yield from loose_in(part, f"{place}/{name}")


def test_every_object_is_described_member_by_member(document: Any) -> None:
    schemas = document["components"]["schemas"]
    of_schemas = {place.split("/")[1] for place in loose_in(schemas, "")}

    assert of_schemas == OPEN.keys()
    assert list(loose_in({name: part for name, part in document.items() if name != "components"}, "")) == []


@pytest.mark.parametrize(
    "schema",
    [
        {"type": "object"},
        {"type": "object", "properties": {}},
        {"type": "object", "additionalProperties": True},
        {"type": "array"},
        {"type": "array", "items": {}},
        {"anyOf": [{"type": "object", "properties": {"a": {"type": "object"}}}]},
    ],
)
def test_what_is_described_loosely_is_found(schema: Any) -> None:
    assert len(list(loose_in(schema, ""))) >= 1


def test_every_problem_says_what_to_do_and_whether_to_try_again(app: Flask) -> None:
    told = app.test_client().get("/problems").json

    assert told is not None
    assert {one["type"].rpartition("/")[2] for one in told["problems"]} == PROBLEMS.keys()
    for one in told["problems"]:
        assert isinstance(one["try_again"], bool), one
        assert one["what_to_do"].strip(), one


def test_every_answer_is_told_with_its_request_id(document: Any) -> None:
    silent = [
        f"{name} {status}"
        for name, operation in operations_in(document)
        for status, answer in operation["responses"].items()
        if "Request-Id" not in answer.get("headers", {})
    ]

    assert silent == []
