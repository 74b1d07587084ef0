"""The page of the API: everything that the API document says stands on it, and every link of it leads somewhere."""

import gzip
from collections.abc import Iterator
from html.parser import HTMLParser

import pytest
from flask.testing import FlaskClient

from layout.documents import Cutter
from service.api.problems import PROBLEMS
from service.pages.reference_words import blocks_of, kind_of
from service.parts import Parts
from tests.service.pages.browsing import browsing


class Shown(HTMLParser):
    """What a page holds: its ids, links, tags, and its words."""

    def __init__(self, html: str) -> None:
        super().__init__()
        self.ids: list[str] = []
        self.links: list[str] = []
        self.tags: set[str] = set()
        self.words = ""
        self.feed(html)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        known = dict(attrs)
        self.tags.add(tag)
        self.ids += [known["id"] or ""] if "id" in known else []
        self.links += [known["href"] or ""] if tag == "a" else []

    def handle_data(self, data: str) -> None:
        self.words += data


@pytest.fixture
def client(parts: Parts) -> Iterator[FlaskClient]:
    with browsing(parts.settings) as client:
        yield client


@pytest.fixture
def shown(client: FlaskClient) -> Shown:
    answer = client.get("/reference")
    assert answer.status_code == 200
    return Shown(answer.get_data(as_text=True))


def test_every_operation_of_the_api_document_stands_on_the_page_with_its_method_path_and_words(
    client: FlaskClient, shown: Shown
) -> None:
    operations = [
        (method.upper(), path, told)
        for path, item in client.get("/openapi.json").get_json()["paths"].items()
        for method, told in item.items()
    ]

    assert len(operations) > 60  # or nothing was compared
    for method, path, told in operations:
        assert told["operationId"] in shown.ids
        assert f"{method} {path}" in shown.words
        assert told["summary"] in shown.words
        for parameter in told.get("parameters", ()):
            assert parameter["name"] in shown.words


def test_every_problem_that_an_operation_may_tell_says_what_to_do(client: FlaskClient, shown: Shown) -> None:
    document = client.get("/openapi.json").get_json()
    layouts = document["paths"]["/v1/layouts"]["post"]["responses"]
    types = [
        kind
        for told in layouts.values()
        for content in told.get("content", {}).values()
        for part in content["schema"].get("allOf", ())
        for kind in part.get("properties", {}).get("type", {}).get("enum", ())
    ]

    assert "/problems/rulings-contradict" in types
    for kind in types:
        assert kind in shown.links
        assert PROBLEMS[kind.rpartition("/")[2]].what_to_do in shown.words


def test_every_shape_of_the_document_stands_on_the_page_with_its_fields(client: FlaskClient, shown: Shown) -> None:
    for name, schema in client.get("/openapi.json").get_json()["components"]["schemas"].items():
        assert f"shape-{name}" in shown.ids
        for field in schema.get("properties", {}):
            assert field in shown.words


def test_no_id_stands_twice_and_every_link_within_the_page_leads_to_one(shown: Shown) -> None:
    assert len(shown.ids) == len(set(shown.ids))
    assert [link for link in shown.links if link.startswith("#") and link[1:] not in shown.ids] == []


def test_the_page_of_the_api_is_packed_and_small_enough_to_load_on_a_phone(client: FlaskClient) -> None:
    packed = client.get("/reference", headers={"Accept-Encoding": "gzip"})

    content = packed.get_data()
    assert packed.headers["Content-Encoding"] == "gzip"
    assert b"make_layout" in gzip.decompress(content)
    assert len(content) < 100_000  # bytes; 73 operations and 110 shapes


def test_a_description_is_escaped_and_its_code_and_strong_words_are_shown() -> None:
    assert blocks_of("**Bold** and `a<b>`.\n\nNext & last") == [
        "<strong>Bold</strong> and <code>a&lt;b&gt;</code>.",
        "Next &amp; last",
    ]
    assert blocks_of("") == []


def test_a_schema_is_told_in_words_with_its_bounds() -> None:
    assert kind_of({"type": "integer", "minimum": 1, "maximum": 65535}) == "whole number, at least 1, at most 65,535"
    assert kind_of({"anyOf": [{"type": "string", "maxLength": 80}, {"type": "null"}]}) == (
        "text, at most 80 characters or null"
    )
    assert kind_of({"type": "array", "items": {"$ref": "#/components/schemas/Ruling"}}) == (
        'list of <a href="#shape-Ruling">Ruling</a>'
    )
    assert kind_of({"enum": ["none", "all"]}) == "<code>&#34;none&#34;</code> or <code>&#34;all&#34;</code>"


def test_a_number_of_a_document_is_told_with_its_range_and_that_it_may_say_its_worth() -> None:
    schema = Cutter.model_json_schema()["properties"]

    told = "number, at least 0.001, at most 50 or that number with its worth: value, plus_minus, basis"
    assert str(kind_of(schema["min_web_mm"])) == told
    assert str(kind_of(schema["id"])).endswith("</code>, such as <code>larkfield-9</code>")


def test_a_body_that_is_sent_with_several_queries_is_shown_once(shown: Shown) -> None:
    layout = shown.words.partition("POST /v1/layouts")[2].partition("GET /v1/layouts/{fingerprint}")[0]

    assert "audio/midi: bytes" in layout
    assert layout.count("TVRoZ") == 2  # raw, and as a part of the form
