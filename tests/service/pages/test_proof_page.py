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
from tests.service.api.test_orders import MINE, NO_ROOM, Shop
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


def data_of(page: Element) -> Any:
    """What the scripts that turn the disc are given."""
    block = page.one("script", id="disc-data").children[0]
    assert isinstance(block, str)
    return json.loads(block)


def file_of(shop: Shop, order_id: str, name: str) -> Any:
    """A file of the order's first disc, as the shop reads it."""
    return shop.http.get(f"/v1/orders/{order_id}/plans/1/files/1/{name}", headers=shop.shop).get_json()


def layout_of(shop: Shop, order_id: str) -> Any:
    return file_of(shop, order_id, "layout.json")


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
    picture = page.one("div", id="stage").one("img").attributes["src"]
    assert shop.http.get(picture).content_type == "image/svg+xml"
    assert picture in [link.attributes["href"] for link in page.all("a")]
    sounds = data_of(page)["hearing"]
    assert {of: sound.rpartition("?")[2] for of, sound in sounds.items()} == {
        "disc": "of=disc",
        "written": "of=written",
    }
    assert {shop.http.head(sound).content_type for sound in sounds.values()} == {"audio/wav"}
    told = shop.seen(order_id)["plan"]["discs"][0]
    assert f"It plays {told['kept_count']} of the {told['asked_count']} notes" in page.text
    assert "Nothing was found against it." in page.text


def test_the_disc_that_turns_for_a_customer_is_the_one_that_was_planned(shop: Shop) -> None:
    order_id = shop.ready()

    shown = data_of(seen(shop, link_to(shop, order_id)))

    layout = layout_of(shop, order_id)
    assert [(one["track"], one["angle_deg"]) for one in shown["layout"]["projections"]] == [
        (one["track"], round(one["angle_deg"], 3)) for one in layout["projections"]
    ]
    assert [one["onset_s"] for one in shown["layout"]["notes"]] == [round(n["onset_s"], 3) for n in layout["notes"]]


def test_a_proof_tells_nothing_that_is_the_shop_s_own(shop: Shop) -> None:
    ruled = [{"note": 5, "do": "leave-out"}, {"note": 9, "do": "leave-out"}]
    order_id = shop.ready({**MINE, "settings": {"rulings": ruled}})
    layout = layout_of(shop, order_id)
    assert sum(one["reason"] == "ruled-out" for one in layout["left_out"]) == 2  # there is something to keep back
    order = shop.seen(order_id)

    answer = shop.http.get(link_to(shop, order_id), headers=HTML)

    data = data_of(page_read(answer.text))
    assert data["rulings_at"] is None
    assert data["layout"].keys() & {"fingerprint", "worth", "good_to_cut"} == set()
    assert {name for note in data["layout"]["notes"] for name in note} == {"onset_s", "pitch", "voice"}
    assert {one["reason"] for one in data["layout"]["left_out"]} == {
        one["reason"] for one in layout["left_out"] if one["reason"] != "ruled-out"
    }
    teeth = [tooth for track in data["movement"]["tracks"] for tooth in track["teeth"]]
    assert {(tooth["cents"], tooth["damped"]) for tooth in teeth} == {(0, True)}
    assert "2 notes, which were taken out by hand" in answer.text
    for own in (
        order_id,
        layout["fingerprint"],
        order["tune"]["sha256"],
        order["plan"]["tag"],
        "fibre-laser",
        "/v1/orders",
    ):
        assert own not in answer.text
    assert file_of(shop, order_id, "making.json")["currency"] == "EUR"
    assert "EUR" not in answer.text


def test_every_disc_of_a_set_is_shown_and_the_decision_is_about_all_of_them(shop: Shop) -> None:
    order_id = shop.ready({**MINE, "settings": {"speed": {"mode": "factor", "factor": 0.5}, "discs": 2}})
    path = link_to(shop, order_id)

    first, second = seen(shop, path), seen(shop, f"{path}?disc=2")

    for number, page in enumerate((first, second), start=1):
        links = page.one("nav").all("a")
        assert [link.attributes["href"] for link in links] == [f"{path}?disc=1", f"{path}?disc=2"]
        assert [link.text for link in links if "aria-current" in link.attributes] == [f"Disc {number} of 2"]
        assert page.one("h2", id="drawing-title").text == f"Disc {number} of 2"
        assert f"/files/{number}/hearing.wav" in data_of(page)["hearing"]["disc"]
        assert "This is about all 2 discs." in page.one("form", id="verdict").text
    assert data_of(first)["layout"]["projections"] != data_of(second)["layout"]["projections"]
    # Mail programs and those who count visits add to the links they pass on; which disc is meant stays.
    for query, number in (
        *(("disc=3", 1), ("disc=0", 1), ("disc=x", 1), ("disc=", 1), ("utm_source=mail&fbclid=a%00b", 1)),
        *(("fbclid=a&disc=2&fbclid=b", 2), ("disc=2&disc=1", 2)),
    ):
        led = seen(shop, f"{path}?{query}")
        assert led.one("h2", id="drawing-title").text == f"Disc {number} of 2"
        assert "disc.dxf" not in led.text  # what the order holds beside


def test_a_customer_gets_no_way_into_the_shop(shop: Shop) -> None:
    path = link_to(shop, shop.ready())

    answer = shop.http.get(path, headers={**HTML, **shop.shop})

    page = page_read(answer.text)
    links = [link.attributes["href"] for link in page.all("a")]
    assert [link for link in links if not link.startswith(("#", path.replace("/proof/", "/v1/proofs/")))] == []
    assert answer.headers["X-Robots-Tag"] == "noindex, nofollow"
    assert answer.headers["Referrer-Policy"] == "same-origin"
    assert answer.headers["Cache-Control"] == "private, no-cache"


@pytest.mark.parametrize("name", ["disc.svg", "report.json", "hearing.wav", "hearing.mid", "making.json"])
def test_a_disc_that_a_proof_has_not_tells_nothing_of_the_files_there_are(shop: Shop, name: str) -> None:
    path = link_to(shop, shop.ready()).replace("/proof/", "/v1/proofs/")

    told = problem_of(shop.http.get(f"{path}/files/2/{name}"), "route-unknown")

    assert told["detail"] == "this proof has no disc 2"
    assert "known_files" not in told


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

    (finding,) = layout_of(shop, order_id)["findings"]
    (told,) = page.one("ul", class_="found error").all("li")
    assert finding["code"] == "music-too-long"
    assert told.text.startswith("The music is longer than one turn of this movement.")
    assert finding["message"] not in page.text
    assert told.one("button", data_finding="0").attributes["aria-label"] == "Show place 1 on the disc"
    assert "Against cutting it as it is" in page.text


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

    for answer, words, what_to_do in (
        (cut_off, "This is no link of ours; was it cut off?", "Copy it from the message, all of it."),
        (deleted, "What this link showed is deleted.", "The shop has deleted this order"),
        (too_old, "This link is too old; ask the shop for a new one.", "a link that ends takes nothing back"),
    ):
        assert (answer.status_code, answer.mimetype) == (404, "text/html")
        page = page_read(answer.text)
        assert words in page.text
        assert what_to_do in page.text
        assert [link.attributes["href"] for link in page.all("a")] == ["#content"]  # no way into the shop


@pytest.mark.parametrize("path", ["/proof", "/proof/", "/proof/a/b"])
def test_what_is_not_even_like_a_link_to_a_proof_shows_no_way_into_the_shop(shop: Shop, path: str) -> None:
    answer = shop.http.get(path, headers=HTML)

    assert answer.status_code == 404
    assert not page_read(answer.text).all("nav")


def test_every_field_of_a_proof_is_named_and_nothing_runs_inline(shop: Shop) -> None:
    page = seen(shop, link_to(shop, shop.ready(NO_ROOM)))

    named = {label.attributes["for"] for label in page.all("label") if "for" in label.attributes}
    within = {one.attributes["value"] for label in page.all("label") for one in label.all("input")}
    assert within == {"disc", "written"}
    fields = [one for tag in ("input", "textarea", "select") for one in page.all(tag)]
    assert {one.attributes["id"] for one in fields if one.attributes.get("name") != "hear"} == named
    assert not [one for one in page.everything() if any(n == "style" or n[:2] == "on" for n in one.attributes)]
    ids = [one.attributes["id"] for one in page.everything() if "id" in one.attributes]
    assert len(ids) == len(set(ids))
    for name in ("aria-describedby", "aria-labelledby"):
        pointed = {word for one in page.everything() for word in one.attributes.get(name, "").split()}
        assert pointed <= set(ids)
