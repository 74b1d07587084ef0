"""The pages of orders: the list, one order through all its states, its discs, and who is offered what."""

import json
import re
from collections.abc import Iterator
from contextlib import closing
from io import BytesIO
from typing import Any

import pytest
from werkzeug.test import TestResponse

from layout.documents.shipped import shipped_text
from layout.file_names import CUTTING_FILES
from layout.write.work_sheet.cautions import ALWAYS, LASER
from service.access.scopes import Scope
from service.orders.states import EventType, State
from service.pages.assets import assets
from service.pages.orders_told import state_words
from service.pages.texts import for_scripts, texts
from service.parts import Parts
from tests.service.api.guarded import bearing, new_key
from tests.service.api.test_orders import MINE, NO_ROOM, Shop
from tests.service.pages.browsing import on_both_databases
from tests.service.pages.pages_read import Element, page_read
from tests.service.pages.test_own_routes import HTML
from tests.service.shop import TUNE, planned, taken

SCRIPTS = {name: asset.content.decode() for name, asset in assets().items() if name.startswith("js/orders/")}
FORMS = ("release", "proof-links", "reports", "replan", "repeat", "cancel", "erase")


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def asked(shop: Shop, path: str, who: dict[str, str] | None = None) -> TestResponse:
    return shop.http.get(path, headers={**HTML, **(shop.shop if who is None else who)})


def seen(shop: Shop, path: str, who: dict[str, str] | None = None) -> Element:
    answer = asked(shop, path, who)
    assert answer.status_code == 200, answer.text
    return page_read(answer.text)


def order_seen(shop: Shop, order_id: str, who: dict[str, str] | None = None) -> Element:
    return seen(shop, f"/orders/{order_id}", who)


def rows(page: Element) -> list[Element]:
    return page.one("tbody").all("tr") if page.all("tbody") else []


def forms(page: Element) -> list[str]:
    return [name for name in FORMS if page.all("form", data_do=name)]


def part(page: Element, name: str) -> Element:
    return next(one for tag in ("div", "ol") for one in page.all(tag, data_part=name))


def file_links(page: Element) -> dict[str, str]:
    return {link.text: link.attributes["href"] for link in part(page, "files").all("a")}


def data_of(page: Element) -> Any:
    block = page.one("script", id="order-data").children[0]
    assert isinstance(block, str)
    return json.loads(block)


def test_where_no_order_is_yet_the_list_says_how_one_comes_in(shop: Shop) -> None:
    page = seen(shop, "/orders")

    assert "There is no order yet." in page.text
    ways = [link.attributes["href"] for link in page.one("main").all("a")]
    assert ways == ["/new", "/reference"]
    assert "No order is like that." in seen(shop, "/orders?state=ready").text


@on_both_databases("orders by the moment of their last change, backwards")
def test_the_list_tells_state_reference_movement_and_change_the_last_changed_first(shop: Shop) -> None:
    first, second = shop.ready(), shop.placed({"movement": "mossbrook-67", "reference": "W-1002"})

    listed = rows(seen(shop, "/orders"))

    assert [row.one("a").attributes["href"] for row in listed] == [f"/orders/{second}", f"/orders/{first}"]
    told = [row.text for row in listed]
    assert re.fullmatch(
        r"W-1002 a tune without a name Waits to be planned mossbrook-67 20\d\d-\d\d-\d\d \d\d:\d\d UTC", told[0]
    )
    assert told[1].startswith("W-1001 Turning Day at Wickenbeck Ready to be released fernhollow-31 ")
    shown = listed[1].one("time").attributes["datetime"]
    assert shown == re.sub(r"\.\d+Z", "+00:00", shop.seen(first)["updated_at"])


@on_both_databases("orders of one state and reference, backwards")
def test_the_list_is_narrowed_by_state_and_reference_and_leaves_empty_fields_out(shop: Shop) -> None:
    ready = shop.ready()
    shop.placed({"movement": "fernhollow-31", "reference": "W-1002"})

    def addresses(query: str) -> list[str]:
        return [row.one("a").attributes["href"] for row in rows(seen(shop, f"/orders{query}"))]

    assert addresses("?state=ready") == addresses("?reference=W-1001") == [f"/orders/{ready}"]
    assert addresses("?state=ready&reference=W-1002") == []
    led = asked(shop, "/orders?state=&reference=W-1001")
    assert (led.status_code, led.headers["Location"]) == (303, "/orders?reference=W-1001")
    narrowed = seen(shop, "/orders?state=ready&reference=W-1001")
    assert narrowed.one("option", value="ready").attributes["selected"] == ""
    assert narrowed.one("input", name="reference").attributes["value"] == "W-1001"
    assert asked(shop, "/orders?state=lost").status_code == 400


@on_both_databases("orders before a moment and an id, backwards")
def test_the_list_is_read_on_from_page_to_page_and_shows_each_order_once(any_parts: Parts) -> None:
    with closing(Shop(any_parts)) as shop:
        placed = [f"/orders/{shop.placed()}" for _ in range(5)]

        found, path = [], "/orders?limit=2&reference=W-1001"
        for _ in range(3):
            page = seen(shop, path)
            found += [row.one("a").attributes["href"] for row in rows(page)]
            further = page.all("a", rel="next")
            path = further[0].attributes["href"] if further else ""

    assert found == placed[::-1]
    assert path == ""
    assert page.one("nav", class_="paging").one("a").attributes["href"] == "/orders?limit=2&reference=W-1001"


def test_an_owner_sees_its_own_orders_alone_and_nobody_without_a_key(shop: Shop) -> None:
    order_id = shop.ready()

    assert rows(seen(shop, "/orders", shop.other)) == []
    for path in (f"/orders/{order_id}", f"/orders/{order_id}/discs/1"):
        assert asked(shop, path, shop.web).status_code == 200
        assert asked(shop, path, shop.other).status_code == 404
        refused = asked(shop, path, {})
        assert (refused.status_code, "Sign in" in refused.text) == (401, True)


@pytest.mark.parametrize("state", State)
def test_every_state_has_its_words_and_what_comes_next(state: State) -> None:
    assert state_words(state)
    assert texts()[f"orders.next_{state}"]


@pytest.mark.parametrize("kind", EventType)
def test_every_event_has_its_words(kind: EventType) -> None:
    assert texts()[f"orders.event_{kind.removeprefix('order.')}"]


def test_an_order_that_waits_says_so_and_may_only_be_cancelled(shop: Shop) -> None:
    order_id = shop.placed()
    waits = order_seen(shop, order_id)
    taken(shop.parts, order_id)
    held = order_seen(shop, order_id)

    assert [page.one("strong", id="state").text for page in (waits, held)] == [
        "Waits to be planned",
        "Is being planned",
    ]
    assert [forms(page) for page in (waits, held)] == [["cancel"], ["cancel"]]
    assert [data_of(page)["unplanned"] for page in (waits, held)] == [True, True]
    assert "There is none yet." in part(waits, "plans").text
    assert part(waits, "events").text.endswith("The order came in, with the key “a key”")


def test_a_ready_order_shows_previews_and_keeps_what_is_for_cutting_back(shop: Shop) -> None:
    order_id = shop.ready()

    page = order_seen(shop, order_id)

    links = file_links(page)
    previews = ["record.dxf", "disc.svg", "work-sheet.pdf", "layout.json", "report.json", "making.json"]
    assert list(links) == [*previews, "hearing.wav", "hearing.mid"]
    assert {shop.http.get(link, headers=shop.shop).status_code for link in links.values()} == {200}
    held_back = [row.text for row in part(page, "files").all("tr") if "after release" in row.text]
    assert [row.split()[0] for row in held_back] == ["disc.dxf", "hits.csv"]
    assert "Whoever runs the machine that cuts" in held_back[0]
    picture = part(page, "discs").one("img")
    assert shop.http.get(picture.attributes["src"], headers=shop.shop).content_type == "image/svg+xml"
    told = shop.seen(order_id)["plan"]["discs"][0]
    assert f"Plays {told['kept_count']} of {told['asked_count']} notes" in part(page, "discs").text
    assert forms(page) == ["release", "proof-links", "replan", "cancel"]
    assert not page.all("input", name="despite_findings")


def test_the_cautions_are_those_of_the_work_sheet(shop: Shop) -> None:
    cautions = part(order_seen(shop, shop.ready()), "cautions")

    names, words = ([one.text for one in cautions.all(tag)] for tag in ("dt", "dd"))
    assert list(zip(names, words, strict=True)) == [*LASER, *ALWAYS]


def test_a_release_says_which_plan_and_version_was_seen_and_gives_the_cutting_files(shop: Shop) -> None:
    order_id = shop.ready()
    form = order_seen(shop, order_id).one("form", data_do="release")
    said = {"by": "A. Maker", **({"plan": form.attributes["data-plan"]} if "data-plan" in form.attributes else {})}
    version = {"If-Match": f'"{form.attributes["data-version"]}"'}

    answer = shop.http.post(f"/v1/orders/{order_id}/release", json=said, headers={**shop.shop, **version})

    assert answer.status_code == 200
    assert form.attributes.get("data-plan") == shop.seen(order_id)["plan"].get("tag")
    page = order_seen(shop, order_id)
    assert page.one("strong", id="state").text == "Released"
    assert "Good to cut" in part(page, "discs").text
    assert {"disc.dxf", "hits.csv"} <= file_links(page).keys()
    assert "these files are the ones to cut from" in part(page, "files").text
    assert "Released by A. Maker" in part(page, "plans").text
    assert part(page, "events").text.startswith(page.one("ol", data_part="events").all("time")[0].text)
    assert "It was released, by A. Maker" in part(page, "events").text
    assert forms(page) == ["reports", "replan", "repeat", "cancel", "erase"]


def test_where_a_person_must_decide_the_findings_stand_on_the_page_and_a_reason_is_asked_for(shop: Shop) -> None:
    order_id = shop.ready(NO_ROOM)

    page = order_seen(shop, order_id)

    finding = shop.http.get(file_links(page)["layout.json"], headers=shop.shop).get_json()["findings"][0]
    assert " ".join(finding["message"].split()) in part(page, "discs").text
    assert "A person must decide" in part(page, "standing").text
    assert "only when a person releases the order with a reason" in part(page, "files").text
    assert page.one("input", name="despite_findings").attributes["required"] == ""
    assert not file_links(page).keys() & set(CUTTING_FILES)
    assert shop.decide(order_id, "release", shop.shop, by="A. Maker", despite_findings="a try").status_code == 202
    anew = order_seen(shop, order_id)
    assert "makes it anew; till then nothing of it may be cut" in part(anew, "standing").text
    planned(shop.parts, order_id)
    assert "Released although something stood: a try" in part(order_seen(shop, order_id), "plans").text


@on_both_databases("every plan and event of an order in one transaction")
def test_a_plan_that_is_superseded_is_marked_and_nothing_of_it_is_called_fit_to_cut(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    shop.decide(order_id, "replan", shop.shop)

    page = order_seen(shop, order_id)

    assert "Nothing of it may be cut any more" in part(page, "files").text
    assert "Good to cut" not in part(page, "discs").text
    assert not file_links(page).keys() & set(CUTTING_FILES)
    assert page.one("li", class_="superseded").text.startswith("Plan 1 superseded: not to be cut any more")
    planned(shop.parts, order_id)
    page = order_seen(shop, order_id)
    assert [heading.text for heading in part(page, "plans").all("h3")] == [
        "Plan 2 in force",
        "Plan 1 superseded: not to be cut any more",
    ]
    assert [link.attributes["href"] for link in part(page, "plans").all("a")] == [
        f"/orders/{order_id}/discs/1?revision=2",
        f"/orders/{order_id}/discs/1?revision=1",
    ]
    old = seen(shop, f"/orders/{order_id}/discs/1?revision=1")
    assert "Order W-1001: plan 1 is superseded. Nothing of it may be cut any more." in old.text
    assert not [link for link in old.all("a") if link.attributes["href"].endswith(CUTTING_FILES)]


def test_an_order_that_was_called_back_calls_nothing_fit_to_cut(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    assert order_seen(shop, order_id).one("input", name="recalled").attributes["required"] == ""
    shop.decide(order_id, "cancel", shop.shop, reason="a wrong tune", recalled=True)

    page = order_seen(shop, order_id)

    assert part(page, "standing").text.endswith("Nothing more is done with it. Nothing of it may be cut.")
    assert "Nothing of it may be cut." in part(page, "files").text
    assert "Good to cut" not in part(page, "discs").text
    assert not file_links(page).keys() & set(CUTTING_FILES)
    assert "Because: a wrong tune Its files were called back" in part(page, "events").text
    assert forms(page) == ["erase"]


def test_what_became_of_the_discs_stands_in_the_story(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    shop.decide(order_id, "reports", shop.shop, what="cut", count=2, note="<b>clean</b>")
    shop.decide(order_id, "reports", shop.shop, what="measured", count=1, measures={"tab_width_mm": 1.19})

    answer = asked(shop, f"/orders/{order_id}")
    story = part(page_read(answer.text), "events")

    assert "Discs were cut, with the key “a key” Plan 1 “<b>clean</b>” 2 discs" in story.text
    assert "A disc was measured, with the key “a key” Plan 1 1 disc tab_width_mm 1.19" in story.text
    assert not story.all("b")
    assert data_of(page_read(answer.text))["last"] == 6  # in, planned, ready, released, cut, measured


def test_a_key_is_offered_what_its_scopes_allow(shop: Shop) -> None:
    order_id = shop.ready()
    reader = bearing(new_key(shop.parts, Scope.READ, owner="Bellgrove"))

    reads, orders = (order_seen(shop, order_id, who) for who in (reader, shop.web))

    assert (forms(reads), forms(orders)) == ([], ["proof-links", "replan", "cancel"])
    assert "sign in with a key that has the scope “release”" in reads.text
    assert "sign in with a key that has the scope “order”" in reads.text
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    released = order_seen(shop, order_id, shop.web)
    assert forms(released) == ["replan", "repeat", "erase"]
    assert "only the shop can call it back and cancel it. Ask the shop." in part(released, "deciding").text


@on_both_databases("a deleted order with what is left of its plans and events")
def test_a_deleted_order_says_so_and_offers_nothing(shop: Shop) -> None:
    order_id = shop.ready()
    shop.decide(order_id, "cancel", shop.web)
    shop.http.delete(f"/v1/orders/{order_id}", headers=shop.web)

    page = order_seen(shop, order_id)

    assert "It was deleted." in part(page, "standing").text
    assert forms(page) == []
    assert part(page, "files").text == part(page, "discs").text == part(page, "cautions").text == ""
    assert asked(shop, f"/orders/{order_id}/discs/1").status_code == 404


def test_a_disc_of_an_order_is_shown_and_heard_as_it_was_planned(shop: Shop) -> None:
    order_id = shop.ready()

    page = seen(shop, f"/orders/{order_id}/discs/1")

    block = page.one("script", id="disc-data").children[0]
    assert isinstance(block, str)
    data = json.loads(block)
    base = f"/v1/orders/{order_id}/plans/1/files/1"
    layout = shop.http.get(f"{base}/layout.json", headers=shop.shop).get_json()
    assert data["layout"]["fingerprint"] == layout["fingerprint"]
    assert len(data["layout"]["projections"]) == len(layout["projections"])
    assert data["hearing"] == {of: f"{base}/hearing.wav?of={of}" for of in ("disc", "written")}
    assert data["rulings_at"] is None
    assert shop.http.head(data["hearing"]["disc"], headers=shop.shop).content_type == "audio/wav"
    assert [link.attributes["href"] for link in page.one("p", class_="way-back no-print").all("a")] == [
        f"/orders/{order_id}"
    ]
    for path in ("discs/2", "discs/1?revision=2", f"discs/1?revision={2**31 - 1}"):
        assert asked(shop, f"/orders/{order_id}/{path}").status_code == 404
    assert asked(shop, f"/orders/{order_id}/discs/1?revision=x").status_code == 400


def test_a_disc_of_an_order_without_a_plan_is_not_there_yet(shop: Shop) -> None:
    answer = asked(shop, f"/orders/{shop.placed()}/discs/1")

    assert answer.status_code == 404
    assert "no plan yet" in answer.text


def test_every_field_of_an_order_s_page_is_named_and_nothing_runs_inline(shop: Shop) -> None:
    released = shop.ready()
    shop.decide(released, "release", shop.shop, by="A. Maker")

    for page in (seen(shop, "/orders"), order_seen(shop, shop.ready(NO_ROOM)), order_seen(shop, released)):
        elements = [one for tag in ("input", "select", "textarea") for one in page.all(tag)]
        named = {label.attributes["for"] for label in page.all("label")}
        assert elements
        assert {one.attributes["id"] for one in elements} == named
        everything = list(page.everything())
        assert not [one for one in everything if any(name == "style" or name[:2] == "on" for name in one.attributes)]
        every_id = [one.attributes["id"] for one in everything if "id" in one.attributes]
        assert len(every_id) == len(set(every_id))
        for name in ("aria-describedby", "aria-labelledby"):
            pointed = {word for one in everything for word in one.attributes.get(name, "").split()}
            assert pointed <= set(every_id)


def test_the_scripts_of_orders_have_every_word_they_show_and_no_word_more() -> None:
    shown = set(re.findall(r'text\("orders\.(\w+)"', "\n".join(SCRIPTS.values())))

    assert shown == {key.removeprefix("orders.") for key in for_scripts(("orders",)) if key.startswith("orders.")}


@pytest.mark.parametrize("name", SCRIPTS)
def test_a_script_of_orders_imports_what_is_there_and_makes_nothing_of_strings(name: str) -> None:
    everything = {name: asset.content.decode() for name, asset in assets().items() if name.endswith(".js")}

    for names, found in re.findall(r'import \{([^}]+)\} from "(\.[^"]+)"', SCRIPTS[name]):
        path = found.replace("../", "js/") if found.startswith("../") else found.replace("./", "js/orders/")
        for wanted in names.split(","):
            assert re.search(rf"export (?:async )?(?:function|const|class) {wanted.strip()}\b", everything[path])
    assert not re.search(
        r"innerHTML =[^=]|outerHTML|insertAdjacentHTML|document\.write|\beval\(|new Function", SCRIPTS[name]
    )


def planned_with(shop: Shop, **changes: Any) -> str:
    """An order whose cutter is the fibre laser with changes; None leaves a field out."""
    cutter = {**json.loads(shipped_text("fibre-laser")), "id": "bench-laser", **changes}
    text = json.dumps({name: value for name, value in cutter.items() if value is not None}).encode()
    form = {"tune": (BytesIO(TUNE), "tune.mid"), "order": json.dumps(MINE), "cutter": (BytesIO(text), "cutter.json")}
    answer = shop.http.post("/v1/orders", data=form, headers=shop.web)
    assert answer.status_code == 202, answer.text
    order_id = str(answer.json["id"])  # type: ignore[index]  # an answer in JSON
    planned(shop.parts, order_id)
    return order_id


def test_a_disc_whose_cutter_states_no_feeds_and_rates_has_no_time_and_no_price(shop: Shop) -> None:
    told = part(order_seen(shop, planned_with(shop, feeds=None, rates=None)), "discs").text

    assert "notes" in told
    assert "to make" not in told
    assert "EUR" not in told


def test_a_disc_that_takes_hours_at_the_machine_says_so_in_hours(shop: Shop) -> None:
    feeds = {"cut_mm_per_s": 0.5, "rapid_mm_per_s": 100, "pierce_s": 0.1, "mark_mm_per_s": 20}
    order_id = planned_with(shop, feeds=feeds)

    [disc] = shop.seen(order_id)["plan"]["discs"]

    assert disc["time_s"] > 3600  # a second for each half millimetre
    assert f"{disc['time_s'] / 3600:.1f} h" in part(order_seen(shop, order_id), "discs").text
