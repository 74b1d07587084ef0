"""What every page leans on: assets, the sign-in form, problems told to people, and that nothing inline runs."""

import gzip
from collections.abc import Iterator
from html.parser import HTMLParser

import pytest
from flask.testing import FlaskClient

from service.pages.assets import address_of, assets
from service.pages.rendering import POLICY
from service.pages.texts import for_scripts, text_of, texts
from service.parts import Parts
from tests.service.pages.browsing import browsing

HTML = {"Accept": "text/html,application/xhtml+xml,*/*;q=0.8"}


@pytest.fixture
def client(parts: Parts) -> Iterator[FlaskClient]:
    with browsing(parts.settings) as client:
        yield client


class Tags(HTMLParser):
    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[tuple[str, dict[str, str | None]]] = []
        self.feed(text)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append((tag, dict(attrs)))


def test_who_asks_for_html_at_the_root_is_led_to_the_first_page(client: FlaskClient) -> None:
    led = client.get("/", headers=HTML)
    told = client.get("/")

    assert (led.status_code, led.headers["Location"]) == (303, "/new")
    assert told.get_json()["service"] == "discwright"
    assert [answer.headers["Vary"] for answer in (led, told)] == ["Accept", "Accept"]


def test_an_asset_is_kept_for_good_under_the_name_of_its_content(client: FlaskClient) -> None:
    address = address_of("css/base.css")

    plain = client.get(address)
    packed = client.get(address, headers={"Accept-Encoding": "gzip"})

    assert plain.content_type == "text/css; charset=utf-8"
    assert plain.headers["Cache-Control"] == "public, max-age=31536000, immutable"
    assert gzip.decompress(packed.data) == plain.data == assets()["css/base.css"].content
    assert packed.headers["Content-Encoding"] == "gzip"


def test_an_asset_of_another_state_of_the_program_is_not_there(client: FlaskClient) -> None:
    address = address_of("css/base.css")
    digest = address.split("/")[2]

    assert client.get(address.replace(digest, "0" * 12)).status_code == 404
    assert client.get(f"/assets/{digest}/css/../texts_en.json").status_code == 404


def test_a_page_may_load_and_run_only_what_this_service_serves(client: FlaskClient) -> None:
    answer = client.get("/sign-in", headers=HTML)

    assert answer.headers["Content-Security-Policy"] == POLICY
    assert "unsafe" not in POLICY
    tags = Tags(answer.text).tags
    assert any(tag == "script" for tag, _ in tags)
    for tag, attributes in tags:
        assert tag != "style"
        assert not [name for name in attributes if name == "style" or name.startswith("on")], attributes
        if tag == "script":
            assert attributes.get("type") == "application/json" or "src" in attributes
        for name in ("src", "href"):
            assert (attributes.get(name) or "/").startswith(("/", "#")), attributes


def test_a_problem_is_told_to_a_person_as_a_page_and_to_a_program_as_before(client: FlaskClient) -> None:
    shown = client.get("/nowhere/<b>", headers=HTML)
    told = client.get("/nowhere/<b>")
    of_the_api = client.get("/v1/nowhere", headers=HTML)

    assert (shown.status_code, shown.mimetype) == (404, "text/html")
    assert "there is nothing at /nowhere/&lt;b&gt;" in shown.text
    assert (told.status_code, told.mimetype) == (404, "application/problem+json")
    assert of_the_api.mimetype == "application/problem+json"


def test_a_key_that_is_refused_is_told_to_a_person_at_its_field_and_to_a_program_as_before(client: FlaskClient) -> None:
    shown = client.post("/sign-in", data={"key": "dw_<b>"}, headers=HTML)
    told = client.post("/sign-in", data={"key": "dw_<b>"})

    assert (shown.status_code, shown.mimetype) == (403, "text/html")
    assert 'id="key-fault">This is no key that is in force.' in shown.text
    assert "dw_&lt;" not in shown.text  # no key goes back out
    assert (told.status_code, told.mimetype) == (403, "application/problem+json")
    assert client.post("/v1/orders", headers=HTML).mimetype == "application/problem+json"


def test_a_text_fills_in_what_it_names() -> None:
    assert text_of("base.signed_in_as", title="shop") == "Signed in: shop"
    with pytest.raises(KeyError):
        text_of("base.signed_in_as")


def test_scripts_get_the_texts_of_their_own_parts_alone() -> None:
    given = for_scripts(())

    assert set(given) == {key.removeprefix("script.") for key in texts() if key.startswith("script.common.")}
    assert "common.unreachable" in given
