"""The page on which a browser signs in: told where it belongs what was wrong, and led to the page that was wanted."""

from collections.abc import Iterator
from contextlib import closing

import pytest

from service.access.scopes import Scope
from service.parts import Parts
from tests.service.api.guarded import new_key, problem_of
from tests.service.api.test_orders import Shop
from tests.service.pages.pages_read import Element, page_read
from tests.service.pages.test_own_routes import HTML


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def back_of(page: Element) -> str:
    return page.one("input", name="back").attributes["value"]


def test_who_signs_in_comes_to_the_page_that_was_wanted(shop: Shop) -> None:
    wanted = "/orders?state=ready&reference=W-1001"
    refused = shop.http.get(wanted, headers=HTML)
    back = back_of(page_read(refused.text))
    key = new_key(shop.parts, Scope.READ).secret

    led = shop.http.post("/sign-in", data={"key": key, "back": back}, headers=HTML)

    assert refused.status_code == 401
    assert (led.status_code, led.headers["Location"]) == (303, wanted)
    assert shop.http.get(wanted, headers=HTML).status_code == 200


@pytest.mark.parametrize(
    "back",
    [
        *("//elsewhere.example", "/\\elsewhere.example", "\\\\elsewhere.example", "https://elsewhere.example/"),
        *("javascript:alert(1)", "orders", "", "/orders\r\nSet-Cookie: a=b", "/a\tb", "/%0d" + "x" * 2001),
    ],
)
def test_a_form_that_names_no_page_of_this_service_leads_to_the_first_one(shop: Shop, back: str) -> None:
    key = new_key(shop.parts, Scope.READ).secret

    led = shop.http.post("/sign-in", data={"key": key, "back": back})

    assert (led.status_code, led.headers["Location"]) == (303, "/")
    assert led.headers.getlist("Set-Cookie")[0].count("discwright=") == 1


@pytest.mark.parametrize(
    ("back", "shown"),
    [
        *(("/discs/abc?a=b", "/discs/abc?a=b"), ("//elsewhere.example", "/"), ("/\\elsewhere.example", "/")),
        *(("javascript:alert(1)", "/"), ("/sign-in", "/"), ("", "/")),
    ],
)
def test_the_form_comes_back_to_the_page_that_led_to_it_and_to_no_other_site(shop: Shop, back: str, shown: str) -> None:
    answer = shop.http.get("/sign-in", query_string={"back": back}, headers=HTML)

    assert answer.status_code == 200
    assert back_of(page_read(answer.text)) == shown


def test_a_key_that_is_not_in_force_is_told_beside_its_field_and_the_way_on_is_kept(shop: Shop) -> None:
    answer = shop.http.post("/sign-in", data={"key": "dw_none", "back": "/orders"}, headers=HTML)

    page = page_read(answer.text)
    field = page.one("input", id="key")
    assert answer.status_code == problem_of(shop.http.post("/sign-in", data={"key": "x"}), "sign-in-refused")["status"]
    assert field.attributes["aria-invalid"] == "true"
    assert field.attributes["aria-describedby"].split() == ["key-fault", "key-hint"]
    assert page.one("span", id="key-fault").text.startswith("This is no key that is in force.")
    assert "dw_none" not in answer.text
    assert back_of(page) == "/orders"


def test_a_form_over_the_limit_of_bodies_is_told_of_and_offered_again(shop: Shop) -> None:
    most = shop.parts.settings.limits.upload_bytes

    answer = shop.http.post("/sign-in", data={"key": "x" * most, "back": "/orders"}, headers=HTML)

    page = page_read(answer.text)
    assert (answer.status_code, answer.mimetype) == (413, "text/html")
    assert f"the request body is larger than {most} bytes" in page.text
    assert back_of(page) == "/"


def test_a_link_that_signs_nobody_in_any_more_says_so_and_offers_the_form(shop: Shop) -> None:
    answer = shop.http.get("/sign-in/never-made", headers=HTML)

    page = page_read(answer.text)
    assert page.one("span", id="key-fault").text.startswith("This link signs nobody in any more")
    assert back_of(page) == "/"
    # Told to no other site; were it told to none at all, the form would be sent with Origin: null, and refused.
    assert answer.headers["Referrer-Policy"] == "same-origin"


def test_the_form_names_its_field_and_says_where_keys_come_from(shop: Shop) -> None:
    page = page_read(shop.http.get("/sign-in", headers=HTML).text)

    field = page.one("input", id="key")
    assert page.one("label").attributes["for"] == "key"
    assert field.attributes["aria-describedby"] == "key-hint"
    assert "aria-invalid" not in field.attributes
    assert page.one("span", id="key-hint").text.startswith("It begins with dw_.")
