"""Every example of the API document, sent as it stands there, and its answer held against what the document says."""

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import jsonschema  # type: ignore[import-untyped]
import pytest
from flask import Flask

from service.api.api_document import Route, path_of, routes_of
from service.app import OPENED, create_app
from service.parts import Parts
from service.settings import AccessSettings
from tests.service.api.described import World, assert_described
from tests.service.conftest import parts_of
from tests.service.fakes import MANY


def app_of(parts: Parts) -> Flask:
    access = AccessSettings(listens_on_loopback=True, read_rate=MANY, write_rate=MANY)
    return create_app(replace(parts.settings, access=access))


@pytest.fixture(scope="module")
def world(tmp_path_factory: pytest.TempPathFactory, module_database_url: str | None) -> Iterator[World]:
    parts = parts_of(tmp_path_factory.mktemp("examples"), module_database_url)
    app = app_of(parts)
    yield World(app=app, parts=parts)
    for opened in (*app.extensions[OPENED], parts.store):
        opened.close()


@pytest.fixture(scope="module")
def document(world: World) -> Any:
    return world.http.get("/openapi.json").json


@pytest.fixture(scope="module")
def routes(world: World) -> list[Route]:
    return list(routes_of(world.app))


def test_every_example_is_answered_as_the_document_says(world: World, document: Any, routes: list[Route]) -> None:
    faults = []
    for route in routes:
        operation = document["paths"][path_of(route.rule)][route.method.lower()]
        for number, example in enumerate(route.operation.examples, 1):
            try:
                answer = world.send(route.method, path_of(route.rule), example, world.given(example.given))
                assert answer.status_code == example.status, answer.text[:500]
                assert_described(document, operation, answer)
            except (AssertionError, jsonschema.ValidationError) as fault:
                faults.append(f"{route.operation.id}, example {number}: {str(fault)[:600]}")

    assert faults == []


def test_an_answer_that_is_not_described_is_seen(world: World, document: Any) -> None:
    answer = world.http.get("/v1/limits")
    limits = document["paths"]["/v1/limits"]["get"]
    other = document["paths"]["/v1/movements"]["get"]

    assert_described(document, limits, answer)
    with pytest.raises(jsonschema.ValidationError, match="'movements' is a required property"):
        assert_described(document, other, answer)
    answer.headers["Told-To-Nobody"] = "yes"
    with pytest.raises(AssertionError):
        assert_described(document, limits, answer)


def test_messages_to_hooks_are_as_the_document_s_webhooks_say(world: World, document: Any) -> None:
    hook_id = world.given("a hook")["hook_id"]
    world.given("an order")
    world.post(f"/v1/hooks/{hook_id}/test")
    told = world.http.get(f"/v1/hooks/{hook_id}/deliveries", headers=world.headers).json

    assert told is not None
    messages = {one["message"]["type"]: one["message"] for one in told["deliveries"]}
    assert set(messages) == {"order.received", "hook.test"}
    for kind, message in messages.items():
        schema = document["webhooks"][kind]["post"]["requestBody"]["content"]["application/json"]["schema"]
        jsonschema.Draft202012Validator({**schema, "components": document["components"]}).validate(message)
