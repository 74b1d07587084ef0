"""The page of a proof: what a customer sees, hears and says by a signed link, and what the link says when it is old."""

import json
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from typing import Any
from urllib.parse import urlsplit

import pytest

from service.parts import Parts
from tests.service.api.guarded import problem_of
from tests.service.api.test_orders import NO_ROOM, Shop
from tests.service.pages.browsing import on_both_databases
from tests.service.pages.pages_read import Element, page_read
from tests.service.pages.test_own_routes import HTML
from tests.service.shop import planned


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def link_to(shop: Shop, order_id: str) -> str:
    """The path of a proof link."""
    made: Any = shop.decide(order_id, "proof-links", shop.web).json
    return str(urlsplit(made["href"]).path)


def seen(shop: Shop, path: str) -> Element:
    answer = shop.http.get(path, headers=HTML)
    assert (answer.status_code, answer.mimetype) == (200, "text/html")
    return page_read(answer.text)


def say(shop: Shop, page: Element, **said: str) -> None:
    block = page.one("script", id="proof-data").children[0]
    assert isinstance(block, str)
    assert shop.http.post(json.loads(block)["verdict"], json=said).status_code == 200


def test_the_link_that_is_made_leads_a_customer_without_a_key_to_the_disc_and_its_sound(shop: Shop) -> None:
    order_id = shop.ready()
    path = link_to(shop, order_id)

    page = seen(shop, path)

    assert path.startswith("/proof/")
    assert page.one("h1").text == "Turning Day at Wickenbeck"
    assert "for the movement fernhollow-31" in page.text
    assert "Reference: W-1001." in page.text
    assert shop.http.get(page.one("img").attributes["src"]).content_type == "image/svg+xml"
    sounds = [audio.attributes["src"] for audio in page.all("audio")]
    assert [sound.rpartition("?")[2] for sound in sounds] == ["of=disc", "of=written"]
    assert {shop.http.head(sound).content_type for sound in sounds} == {"audio/wav"}
    told = shop.seen(order_id)["plan"]["discs"][0]
    assert f"It plays {told['kept_count']} of the {told['asked_count']} notes" in page.text
    assert "Nothing was found against it." in page.text


def test_a_customer_gets_no_way_into_the_shop(shop: Shop) -> None:
    path = link_to(shop, shop.ready())

    answer = shop.http.get(path, headers={**HTML, **shop.shop})

    page = page_read(answer.text)
    links = [link.attributes["href"] for link in page.all("a")]
    assert [link for link in links if not link.startswith(("#content", path.replace("/proof/", "/v1/proofs/")))] == []
    assert answer.headers["X-Robots-Tag"] == "noindex, nofollow"
    assert answer.headers["Referrer-Policy"] == "same-origin"
    assert answer.headers["Cache-Control"] == "private, no-cache"


def test_a_program_with_the_link_is_led_to_what_programs_read(shop: Shop) -> None:
    path = link_to(shop, shop.ready())

    led = shop.http.get(path, headers={"Accept": "application/json"})

    assert led.status_code == 303
    assert led.headers["Location"] == path.replace("/proof/", "/v1/proofs/")
    assert "Accept" in led.headers["Vary"]
    told: Any = shop.http.get(led.headers["Location"]).json
    assert told["reference"] == "W-1001"


def test_what_was_found_is_told_in_words_before_a_customer_decides(shop: Shop) -> None:
    order_id = shop.ready(NO_ROOM)

    page = seen(shop, link_to(shop, order_id))

    layout: Any = shop.http.get(f"/v1/orders/{order_id}/plans/1/files/1/layout.json", headers=shop.web).json
    told = page.one("ul", class_="found").all("li")
    assert len(told) == len(layout["findings"]) == 1
    assert told[0].text.startswith(" ".join(layout["findings"][0]["message"].split()))
    assert "1 error: so the disc must not be cut" in page.text


@on_both_databases("what was said about one plan of an order")
def test_a_decision_is_asked_for_with_a_name_and_shown_once_it_was_said(shop: Shop) -> None:
    order_id = shop.ready()
    path = link_to(shop, order_id)
    form = seen(shop, path).one("form", id="verdict")

    say(shop, seen(shop, path), verdict="declined", by="B. Client", note="too <i>thin</i>")
    declined = seen(shop, path)
    say(shop, declined, verdict="accepted", by="C. Client")
    accepted = seen(shop, path)

    assert [one.attributes["value"] for one in form.all("input", name="verdict")] == ["accepted", "declined"]
    assert form.one("input", name="by").attributes["required"] == ""
    assert "required" not in form.one("textarea", name="note").attributes
    assert declined.one("ul", class_="verdicts").text.startswith("B. Client declined it “too <i>thin</i>” 20")
    said = [one.text.partition(" it")[0] for one in accepted.one("ul", class_="verdicts").all("li")]
    assert said == ["C. Client accepted", "B. Client declined"]
    assert accepted.one("h2", id="verdict-title").text == "Say something else"
    events: Any = shop.http.get(f"/v1/orders/{order_id}/events", headers=shop.web).json
    assert [event["type"] for event in events["events"]][-2:] == ["order.declined", "order.accepted"]


def test_a_link_says_why_nothing_is_decided_any_more(shop: Shop) -> None:
    order_id = shop.ready()
    path = link_to(shop, order_id)
    say(shop, seen(shop, path), verdict="accepted", by="B. Client")
    standings = []

    def look() -> None:
        page = seen(shop, path)
        assert not page.all("form")
        assert "B. Client accepted it" in page.text  # what was said of this plan stays
        standings.append(page.one("p", id="standing").text)

    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    look()
    shop.decide(order_id, "replan", shop.shop)
    look()
    planned(shop.parts, order_id)
    look()
    newer = seen(shop, link_to(shop, order_id))
    shop.decide(order_id, "cancel", shop.shop)
    look()

    assert [standing.partition(".")[0] for standing in standings] == [
        "The shop has released this disc to be cut",
        "The shop is having this disc planned anew",
        "A newer plan was made since this link was",
        "The order was cancelled",
    ]
    assert newer.one("form", id="verdict")
    assert not newer.all("ul", class_="verdicts")


def test_a_link_that_is_none_or_too_old_or_of_a_deleted_order_is_told_of_in_a_page(parts: Parts) -> None:
    with closing(Shop(parts)) as shop:
        order_id = shop.ready()
        path = link_to(shop, order_id)
        cut_off = shop.http.get(path[:-3], headers=HTML)
        problem_of(shop.http.get(path[:-3]), "proof-refused")
        shop.decide(order_id, "cancel", shop.web)
        shop.http.delete(f"/v1/orders/{order_id}", headers=shop.web)
        deleted = shop.http.get(path, headers=HTML)
    work = replace(parts.settings.work, quote_days=-1)  # every link is older than that
    with closing(Shop(replace(parts, settings=replace(parts.settings, work=work)))) as shop:
        too_old = shop.http.get(link_to(shop, shop.ready()), headers=HTML)

    for answer, words in (
        (cut_off, "this is no link of ours; was it cut off?"),
        (deleted, "what this link showed is deleted"),
        (too_old, "this link is too old; ask the shop for a new one"),
    ):
        assert (answer.status_code, answer.mimetype) == (404, "text/html")
        assert words in page_read(answer.text).text


def test_every_field_of_a_proof_is_named_and_nothing_runs_inline(shop: Shop) -> None:
    page = seen(shop, link_to(shop, shop.ready(NO_ROOM)))

    named = {label.attributes["for"] for label in page.all("label")}
    assert {one.attributes["id"] for tag in ("input", "textarea") for one in page.all(tag)} == named
    assert not [one for one in page.everything() if any(n == "style" or n[:2] == "on" for n in one.attributes)]
    ids = [one.attributes["id"] for one in page.everything() if "id" in one.attributes]
    assert len(ids) == len(set(ids))
    for name in ("aria-describedby", "aria-labelledby"):
        pointed = {word for one in page.everything() for word in one.attributes.get(name, "").split()}
        assert pointed <= set(ids)
