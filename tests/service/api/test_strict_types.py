"""A value of another JSON type is refused at its place, in every request there is: 1 is neither "1" nor true."""

import json
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import jsonschema  # type: ignore[import-untyped]
import pytest
from flask import Flask, request

from layout.documents import Cutter, Movement, Settings, read_cutter
from layout.documents.movement import read_movement
from layout.documents.reading import Part, check_document
from layout.documents.settings import read_settings
from layout.documents.sheets import SheetJob, read_sheet_job
from layout.errors import DocumentError
from service.api.api_document import Route, routes_of
from service.api.api_schemas import schema_alone
from service.api.models.orders import OrderBody, OrdersQuery
from service.api.models.runs import ItemsQuery
from service.api.problems import ProblemError
from service.api.request_models import read_arguments, read_text
from service.app import create_app
from service.parts import Parts
from tests.service.conftest import parts_of

# One of each JSON type, and those that are easily taken for another: 1.5 is a number and no integer.
VALUES: tuple[Any, ...] = ("1", "true", "1.5", True, False, 1, 0, 1.5, None, [], {}, ["1"], {"a": 1})
WORTH = ("plus_minus", "basis")  # of a number with its worth, which is one by its member value
READERS: dict[Any, Any] = {
    Movement: read_movement,
    Cutter: read_cutter,
    Settings: read_settings,
    SheetJob: read_sheet_job,
}
DEEPEST = 6  # levels that are looked at; the deepest document has five


@dataclass(frozen=True)
class Place:
    """A place of a document: its pointer, its schema, and how a value there is wrapped into a document."""

    pointer: str
    schema: Any
    inside: tuple[str | int, ...]

    def with_value(self, value: Any) -> Any:
        for step in reversed(self.inside):
            beside = {"value": 1} if step in WORTH else {}
            value = {**beside, step: value} if isinstance(step, str) else [value]
        return value


@pytest.fixture(scope="module")
def routes(tmp_path_factory: pytest.TempPathFactory) -> list[Route]:
    parts: Parts = parts_of(tmp_path_factory.mktemp("strict"))
    found = list(routes_of(create_app(parts.settings)))
    parts.store.close()
    return found


def places_of(schema: Any, whole: Any, pointer: str = "", inside: tuple[str | int, ...] = ()) -> Iterator[Place]:
    """Every place that the schema of a document knows, through lists and what may be one thing or another."""
    if len(inside) > DEEPEST:
        return
    if "$ref" in schema:
        schema = whole["$defs"][schema["$ref"].rpartition("/")[2]]
    for name, said in schema.get("properties", {}).items():
        yield Place(f"{pointer}/{name}", said, (*inside, name))
        yield from places_of(said, whole, f"{pointer}/{name}", (*inside, name))
    if isinstance(schema.get("items"), dict):
        yield from places_of(schema["items"], whole, f"{pointer}/0", (*inside, 0))
    for choice in [*schema.get("anyOf", []), *schema.get("oneOf", [])]:
        yield from places_of(choice, whole, pointer, inside)


def refused_at(model: type[Part], document: Any) -> set[str]:
    """The pointers at which a document is refused."""
    text = json.dumps(document)
    try:
        if model in READERS:
            READERS[model](text)
        else:
            with Flask("body").test_request_context("/"):
                read_text(request, model, text.encode(), document="try")
    except DocumentError as error:
        return {problem.pointer for problem in error.problems}
    return set()


def test_no_request_takes_a_value_of_another_type(routes: list[Route]) -> None:
    models: set[Any] = {model for route in routes for model in route.operation.checked_by}
    faults, seen = [], 0
    for model in sorted(models | set(READERS), key=lambda model: model.__name__):
        whole = schema_alone(model)
        for place in places_of(whole, whole):
            valid = jsonschema.Draft202012Validator({**place.schema, "$defs": whole.get("$defs", {})})
            for value in VALUES:
                if valid.is_valid(value):
                    continue
                seen += 1
                pointers = refused_at(model, place.with_value(value))
                # A number stated with its worth is judged by its range where it stands, as one stated plainly is.
                around = place.pointer.removesuffix("/value")
                if not any(one == around or one.startswith(f"{around}/") for one in pointers):
                    faults.append(f"{model.__name__} {place.pointer}: {value!r} gives {sorted(pointers)[:4]}")

    assert faults == [], "\n".join(faults[:400])
    assert seen > 5000


@pytest.mark.parametrize(
    ("value", "told"), [(True, "true"), ("1", "'1'"), (1.5, "1.5"), ([1], "a list"), (None, "null")]
)
def test_a_refusal_says_what_is_needed_and_what_came(value: Any, told: str) -> None:
    with pytest.raises(DocumentError) as raised:
        check_document(OrderBody, {"quantity": value}, document="order")

    assert [(p.pointer, p.message) for p in raised.value.problems] == [
        ("/quantity", f"a whole number is needed, got {told}")
    ]


def test_a_whole_number_may_be_written_with_a_decimal_point() -> None:
    """JSON Schema calls 2.0 an integer (draft 2020-12, validation, section 6.1.1)."""
    assert check_document(OrderBody, {"quantity": 2.0}, document="order").quantity == 2


@pytest.mark.parametrize(
    "query",
    ["limit=1.0", "limit=+1", "limit=%201", "limit=1_0", "limit=01", "limit=true", "test=1", "test=yes", "test=True"],
)
def test_a_parameter_is_written_as_json_writes_it(query: str) -> None:
    with Flask("query").test_request_context(f"/?{query}"), pytest.raises(ProblemError) as raised:
        read_arguments(request, OrdersQuery)

    needed = "true or false" if query.startswith("test") else "a whole number"
    assert f": {needed} is needed" in raised.value.detail


def test_parameters_that_are_well_written_are_read() -> None:
    with Flask("query").test_request_context("/?limit=7&test=true&updated_since=2026-12-02T10:00:00Z&state=ready"):
        query = read_arguments(request, OrdersQuery)
    with Flask("query").test_request_context("/?after=0"):
        items = read_arguments(request, ItemsQuery)

    assert (query.limit, query.test, str(query.updated_since), query.state) == (
        7,
        True,
        "2026-12-02 10:00:00+00:00",
        "ready",
    )
    assert items.after == 0
