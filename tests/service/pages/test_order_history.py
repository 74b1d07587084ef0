"""The page of an order: its plans and what is different between them, and what ends or repeats an order."""

import json
from collections.abc import Iterator
from contextlib import closing
from typing import Any

import pytest
from sqlalchemy import update

from service.pages.orders_plans import settings_changes
from service.parts import Parts
from service.store.tables import Order
from tests.service.api.test_orders import MINE, NO_ROOM, Shop
from tests.service.pages.pages_read import Element
from tests.service.pages.test_order_pages import forms, order_seen, part
from tests.service.shop import planned


@pytest.fixture
def shop(parts: Parts) -> Iterator[Shop]:
    with closing(Shop(parts)) as opened:
        yield opened


def plans(shop: Shop, order_id: str) -> list[Element]:
    """The plans on the page, the newest first."""
    shown = part(order_seen(shop, order_id), "plans").one("ol", class_="plans")
    return [one for one in shown.children if isinstance(one, Element)]


def changes(plan: Element) -> list[str]:
    return [line.text for line in plan.one("ul", class_="changes").all("li")]


def customer_says(shop: Shop, order_id: str, verdict: str, by: str) -> None:
    made: Any = shop.decide(order_id, "proof-links", shop.web).json
    text = made["href"].rpartition("/")[2]
    assert shop.http.post(f"/v1/proofs/{text}/verdict", json={"verdict": verdict, "by": by}).status_code == 200


def replanned(shop: Shop, order_id: str, who: dict[str, str] | None = None, **said: Any) -> None:
    assert shop.decide(order_id, "replan", who or shop.web, **said).status_code == 202
    planned(shop.parts, order_id)


def test_each_plan_tells_what_is_different_from_the_one_before(shop: Shop) -> None:
    order_id = shop.ready()
    before = shop.seen(order_id)["plan"]
    replanned(shop, order_id, settings={"speed": {"mode": "factor", "factor": 0.5}, "discs": 2})
    after = shop.seen(order_id)["plan"]

    second, first = plans(shop, order_id)

    kept = [sum(disc["kept_count"] for disc in plan["discs"]) for plan in (before, after)]
    told = changes(second)
    assert f"Notes it plays: {kept[0]} → {kept[1]}" in told
    assert "Discs: 1 → 2" in told
    assert {line for line in told if line.startswith("Setting")} == {
        'Setting speed.mode: not stated → "factor"',
        "Setting speed.factor: not stated → 0.5",
        "Setting discs: not stated → 2",
    }
    price = [" + ".join(f"{d['price']['amount']} EUR" for d in plan["discs"]) for plan in (before, after)]
    assert f"Price: {price[0]} → {price[1]}" in told
    assert not first.all("ul", class_="changes")
    assert f"Plays {kept[0]} of {before['discs'][0]['asked_count']} notes." in first.text
    assert [link.text for link in second.all("a")] == ["Disc 1", "Disc 2"]


def test_a_plan_that_is_made_again_as_it_was_says_that_nothing_is_different(shop: Shop) -> None:
    order_id = shop.ready()
    replanned(shop, order_id)

    second, _ = plans(shop, order_id)

    assert "Nothing is different from the plan before." in second.text


def test_a_plan_tells_who_asked_for_it_what_the_customer_said_and_who_released_it(shop: Shop) -> None:
    order_id = shop.ready()
    customer_says(shop, order_id, "declined", "B. Client")
    replanned(shop, order_id, settings={"title": "Turning Day"})
    customer_says(shop, order_id, "accepted", "C. Client")
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    replanned(shop, order_id, shop.shop)

    third, second, first = (plan.text for plan in plans(shop, order_id))

    assert "As the order was placed, with the key “a key”." in first
    assert "B. Client declined its proof, 20" in first
    assert "It was asked for anew." in second
    assert second.index("C. Client accepted its proof, 20") < second.index("Released by A. Maker, 20")
    assert "declined" not in second
    assert "It was asked for anew, with the key “a key”." in third
    assert "accepted" not in third


def test_a_plan_made_again_for_a_release_despite_findings_says_so(shop: Shop) -> None:
    order_id = shop.ready(NO_ROOM)
    shop.decide(order_id, "release", shop.shop, by="A. Maker", despite_findings="a try")
    planned(shop.parts, order_id)

    second, first = plans(shop, order_id)

    assert "Made again with its cutting files, since a person gave a reason." in second.text
    assert "Found: 1 error." in first.text


@pytest.mark.parametrize(
    ("was", "now", "told"),
    [
        ({}, {}, ()),
        ({"discs": 2}, {"discs": 2}, ()),
        ({"discs": 2}, {}, ("Setting discs: 2 → not stated",)),
        (
            {"rulings": [{"note": 1, "do": "leave-out"}]},
            {"rulings": [{"note": 1, "do": "leave-out"}, {"note": 2, "do": "must-sound"}]},
            ("Setting rulings: 1 entry → 2 entries",),
        ),
        ({"title": "x"}, {"title": 70 * "y"}, (f'Setting title: "x" → "{59 * "y"}…',)),
    ],
)
def test_settings_that_changed_are_told_by_their_place_and_long_ones_are_cut_or_counted(
    was: dict[str, Any], now: dict[str, Any], told: tuple[str, ...]
) -> None:
    assert settings_changes(was, now) == told


def test_where_many_settings_changed_the_rest_is_counted() -> None:
    told = settings_changes({}, {f"field_{place}": place for place in range(14)})

    assert len(told) == 13
    assert told[-1] == "and 2 more settings"


def test_to_cancel_an_order_a_reason_and_a_yes_are_asked_for(shop: Shop) -> None:
    form = order_seen(shop, shop.ready()).one("form", data_do="cancel")

    assert form.one("input", name="reason").attributes["required"] == ""
    yes = form.one("input", type="checkbox")
    assert yes.attributes["required"] == ""
    assert "data-kind" not in yes.attributes  # it is for the person; the API is not told


def test_a_released_order_is_ordered_again_from_its_page_and_the_copy_says_what_it_repeats(shop: Shop) -> None:
    order_id = shop.ready()
    assert "repeat" not in forms(order_seen(shop, order_id))
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    form = order_seen(shop, order_id).one("form", data_do="repeat")

    order = {"repeat_of": form.attributes["data-order"], "quantity": 3}
    brought = {"data": {"order": json.dumps(order)}, "content_type": "multipart/form-data"}
    again: Any = shop.http.post("/v1/orders", **brought, headers=shop.shop).json

    assert again["repeat_of"] == order_id
    (plan,) = plans(shop, again["id"])
    assert "Taken over from the order that is repeated." in plan.text


def test_an_order_that_is_finished_can_be_deleted_after_a_yes_and_an_open_one_cannot(shop: Shop) -> None:
    order_id = shop.ready()
    assert "erase" not in forms(order_seen(shop, order_id))
    shop.decide(order_id, "cancel", shop.web, reason="a wrong tune")

    form = order_seen(shop, order_id, shop.web).one("form", data_do="erase")

    assert form.one("input", type="checkbox").attributes["required"] == ""
    assert "cannot be brought back" in form.text
    assert "cutting files" not in form.text  # there were none


def test_an_order_whose_tune_was_deleted_says_why_it_cannot_be_planned_anew(shop: Shop) -> None:
    order_id = shop.ready()
    with shop.parts.store.writing() as session:
        session.execute(update(Order).where(Order.id == order_id).values(tune_digest=""))

    page = order_seen(shop, order_id)

    assert "replan" not in forms(page)
    assert "its tune was deleted. Order again with the tune." in part(page, "deciding").text


def test_while_it_waits_the_page_says_so_to_who_cannot_see_it_too(shop: Shop) -> None:
    waits, ready = order_seen(shop, shop.placed(MINE)), order_seen(shop, shop.ready())

    assert part(waits, "standing").one("progress").attributes["aria-label"]
    assert not ready.all("progress")
    assert waits.one("p", id="said").attributes["aria-live"] == "polite"


def test_the_files_tell_who_wants_them_and_the_cautions_stand_with_what_is_cut_from(shop: Shop) -> None:
    order_id = shop.ready()
    before = part(order_seen(shop, order_id), "files")
    shop.decide(order_id, "release", shop.shop, by="A. Maker")
    files = part(order_seen(shop, order_id), "files")

    rows = {row.one("th").text: row.text for row in files.one("tbody").all("tr")}
    assert "The customer, and whoever arranges: to hear it made anew" in rows["hearing.wav"]
    assert "Whoever arranges, in a program of their own" in rows["hearing.mid"]
    assert "Before you cut: Laser, Fume, Zinc, " in files.one("p", class_="caution").text
    assert not before.all("p", class_="caution")
