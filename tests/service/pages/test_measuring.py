"""How to measure: that every number of a movement is told of, with a tool, a count, what to state, and cautions."""

import re
from collections.abc import Iterator
from typing import Any

import pytest
from flask.testing import FlaskClient

from layout.documents import Movement
from service.pages.measuring import SECTIONS, section_of, sections
from service.parts import Parts
from tests.service.pages.browsing import browsing
from tests.service.pages.test_own_routes import HTML, Tags

NOT_MEASURED = {"/format", "/id", "/revision", "/title"}


@pytest.fixture
def client(parts: Parts) -> Iterator[FlaskClient]:
    with browsing(parts.settings) as client:
        yield client


def places_of(schema: dict[str, Any], part: dict[str, Any], place: str = "") -> Iterator[str]:
    """Every field of a schema, without the numbers of lists."""
    if "$ref" in part:
        part = schema["$defs"][part["$ref"].rsplit("/", 1)[1]]
    choices = [*part.get("anyOf", ()), *part.get("oneOf", ())]
    properties = part.get("properties", {})
    if (not choices and not properties and "items" not in part) or any(one.get("type") == "number" for one in choices):
        yield place
        return
    for one in choices:
        if one.get("type") != "null":
            yield from places_of(schema, one, place)
    for name, one in properties.items():
        yield from places_of(schema, one, f"{place}/{name}")
    if "items" in part:
        yield from places_of(schema, part["items"], place)


def test_every_field_of_a_movement_is_told_how_to_measure() -> None:
    schema = Movement.model_json_schema()
    places = set(places_of(schema, schema)) - {""}

    assert len(places) > 60
    assert {place for place in places if section_of(place) is None} == NOT_MEASURED


def test_the_longest_beginning_of_a_place_decides_its_section() -> None:
    assert section_of("/disc/features/radius_mm") == "features"
    assert section_of("/disc/thickness_mm") == "disc"
    assert section_of("/teeth/lift_mm") == "bending"
    assert section_of("/drive/winding/spring/width_mm") == "spring"
    assert section_of("/discs") is None


def test_a_section_stands_at_the_anchor_that_fields_link_to_and_says_all_it_should(client: FlaskClient) -> None:
    html = client.get("/measuring", headers=HTML).text
    anchors = {attributes["id"] for tag, attributes in Tags(html).tags if tag == "h2" and "id" in attributes}

    assert anchors == set(SECTIONS)
    for section in sections():
        assert [name for name, _ in section.said] == ["What", "With what", "How often", "State as ±"]
        assert all(len(words) > 10 for _, words in section.said)
        assert section.fields


def test_the_page_says_first_to_let_the_spring_down_and_claims_no_source(client: FlaskClient) -> None:
    html = client.get("/measuring", headers=HTML).text

    assert html.index("Let the spring down fully") < html.index('id="turning"')
    assert "common practice" in html
    assert "Teeth of the comb and points of the wheels are sharp" in html
    assert "work for trained people" in html
    assert not re.search(r"\b(ISO|DIN|ANSI|BS) ?\d", html)
