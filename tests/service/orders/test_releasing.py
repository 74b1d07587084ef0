"""What is released is what was seen: another plan, however it came about, waits to be looked at."""

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import pytest

from service.orders import taking
from service.orders.asked import AskedRepeat
from service.orders.deciding import Release, Seen, release_order, replan_order
from service.orders.faults import ChangedMeanwhileError
from service.orders.finding import events_of, find_order
from service.orders.placing import nothing_more
from service.orders.repeating import repeat_order
from service.orders.views import OrderView
from service.parts import Parts
from tests.service.api.guarded import problem_of
from tests.service.api.test_orders import NO_ROOM
from tests.service.api.test_orders import Shop as WebShop
from tests.service.orders.test_life_of_an_order import TOO_LONG
from tests.service.shop import (
    SHOP,
    WEB_SHOP,
    keeper_of,
    open_shop,
    placed,
    plan_of,
    plan_seen,
    planned,
    release_seen,
    taken,
)

# As another version of the engine, or a search that was stopped elsewhere, would lay the tune out.
OTHERWISE = TOO_LONG.settings.replace(b"0.5", b"0.55")


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


@pytest.fixture
def web(any_parts: Parts) -> Iterator[WebShop]:
    opened = WebShop(any_parts)
    yield opened
    opened.close()


def now_of(parts: Parts, order_id: str) -> OrderView:
    with parts.store.reading() as session:
        return find_order(session, WEB_SHOP, order_id)


def attention(parts: Parts) -> str:
    """An order with an error-level finding, planned."""
    order = placed(parts, TOO_LONG)
    planned(parts, order.id)
    return order.id


def planned_otherwise(parts: Parts, order_id: str) -> None:
    """Plan an order as a worker would that comes to another plan from the same inputs."""
    held = taken(parts, order_id)
    [settings] = keeper_of(parts).keep([OTHERWISE])
    assert taking.publish(parts.store, held, plan_of(parts, replace(held, settings_digest=settings)))


def marks_of(parts: Parts, order: OrderView) -> list[bytes]:
    assert order.plan is not None
    return [parts.files.read(file.sha256) for file in order.plan.files if file.name == "disc.dxf"]


def test_a_plan_made_since_the_one_that_was_seen_is_not_released(shop: Parts) -> None:
    order_id = placed(shop).id
    planned(shop, order_id)
    seen = Release(by="Ada", plan=plan_seen(shop, order_id))
    replan_order(shop.store, WEB_SHOP, Seen(order_id=order_id), {}, nothing_more)
    planned(shop, order_id)

    with pytest.raises(ChangedMeanwhileError, match=r"the plan in force is 2-[0-9a-f]{64}, not 1-[0-9a-f]{64}, which"):
        release_order(shop.store, SHOP, Seen(order_id=order_id), seen, nothing_more)

    assert now_of(shop, order_id).state == "ready"
    assert release_seen(shop, order_id).state == "released"


def test_a_plan_of_the_same_revision_but_with_other_files_is_not_released(shop: Parts) -> None:
    order_id, other_id = placed(shop).id, attention(shop)  # such as one made anew after a backup was restored
    planned(shop, order_id)

    with pytest.raises(ChangedMeanwhileError, match="look at it, then decide about it"):
        release_order(
            shop.store, SHOP, Seen(order_id=order_id), Release(by="Ada", plan=plan_seen(shop, other_id)), nothing_more
        )

    assert now_of(shop, order_id).state == "ready"


def test_what_is_made_again_for_its_release_and_comes_out_otherwise_waits_to_be_seen(shop: Parts) -> None:
    order_id = attention(shop)
    release_seen(shop, order_id, despite="a test cut")

    planned_otherwise(shop, order_id)

    order = now_of(shop, order_id)
    assert (order.state, order.plan_revision) == ("attention", 2)
    assert order.reason == (
        "made again for its release it came out otherwise than revision 1, which was seen; "
        "look at this one, then decide about it"
    )
    assert order.plan is not None
    assert (order.plan.released_at, order.plan.released_by, order.plan.release_reason) == (None, None, None)
    with shop.store.reading() as session:
        told = [event.type for event in events_of(session, SHOP, order_id, after=0, most=100)]
    assert told[-2:] == ["order.planned", "order.attention"]


def test_a_word_that_was_not_kept_to_releases_no_later_plan(shop: Parts) -> None:
    order_id = attention(shop)
    release_seen(shop, order_id, despite="a test cut")
    planned_otherwise(shop, order_id)

    replan_order(shop.store, WEB_SHOP, Seen(order_id=order_id), {}, nothing_more)
    planned_otherwise(shop, order_id)

    assert (now_of(shop, order_id).state, now_of(shop, order_id).plan_revision) == ("attention", 3)


def test_what_came_out_otherwise_is_released_at_once_for_the_reason_on_its_drawing(shop: Parts) -> None:
    order_id = attention(shop)
    release_seen(shop, order_id, despite="a test cut")
    planned_otherwise(shop, order_id)

    order = release_seen(shop, order_id, despite="a test cut")

    assert order.state == "released"
    assert order.plan is not None
    assert (order.plan.revision, order.plan.release_reason) == (2, "a test cut")
    assert all(b"a test cut" in drawing for drawing in marks_of(shop, order))


def test_another_reason_is_put_on_the_drawing_before_it_is_released(shop: Parts) -> None:
    order_id = attention(shop)
    release_seen(shop, order_id, despite="a test cut")
    planned_otherwise(shop, order_id)

    waits = release_seen(shop, order_id, by="Bea", despite="the owner wants it")
    planned_otherwise(shop, order_id)

    order = now_of(shop, order_id)
    assert (waits.state, order.state) == ("received", "released")
    assert order.plan is not None
    assert (order.plan.released_by, order.plan.release_reason) == ("Bea", "the owner wants it")
    [drawing] = marks_of(shop, order)
    assert b"the owner wants it" in drawing
    assert b"a test cut" not in drawing


def test_a_worker_that_dies_between_changes_nothing_where_the_plan_is_the_one_that_was_seen(shop: Parts) -> None:
    order_id = attention(shop)
    release_seen(shop, order_id, despite="a test cut")
    taken(shop, order_id, "one that dies", lease_s=0)

    planned(shop, order_id)

    order = now_of(shop, order_id)
    assert order.state == "released"
    assert order.plan is not None
    assert (order.plan.released_by, order.plan.release_reason) == ("Ada", "a test cut")


def test_a_repeat_is_released_for_another_reason_without_being_planned(shop: Parts) -> None:
    first_id = attention(shop)
    release_seen(shop, first_id, despite="a test cut")
    planned(shop, first_id)
    again = repeat_order(shop.store, WEB_SHOP, AskedRepeat(repeat_of=first_id), nothing_more)

    order = release_seen(shop, again.id, despite="it played well")

    first = now_of(shop, first_id)
    assert (again.state, order.state) == ("attention", "released")
    assert order.plan is not None
    assert first.plan is not None
    assert (order.plan.revision, order.plan.files) == (1, first.plan.files)


def test_a_release_over_http_names_the_plan_or_is_told_to(web: WebShop) -> None:
    order_id = web.ready()
    address = f"/v1/orders/{order_id}/release"

    told = problem_of(web.http.post(address, json={"by": "A. Maker"}, headers=web.shop), "document-invalid")
    seen: Any = web.seen(order_id)["plan"]["tag"]
    web.decide(order_id, "replan", web.web, settings={"title": "Another name"})
    planned(web.parts, order_id)
    changed = problem_of(web.decide(order_id, "release", web.shop, by="A. Maker", plan=seen), "order-changed")

    assert [one["pointer"] for one in told["invalid_params"]] == ["/plan"]
    assert "look at it, then decide about it" in changed["detail"]
    assert web.seen(order_id)["state"] == "ready"
    assert web.decide(order_id, "release", web.shop, by="A. Maker").status_code == 200


def test_over_http_what_comes_out_otherwise_is_not_given_for_cutting(web: WebShop) -> None:
    order_id = web.ready(NO_ROOM)
    web.decide(order_id, "release", web.shop, by="A. Maker", despite_findings="a test cut")
    planned_otherwise(web.parts, order_id)

    refused = web.http.get(f"/v1/orders/{order_id}/plans/2/files/1/disc.dxf", headers=web.shop)

    problem_of(refused, "not-released")
    assert web.seen(order_id)["state"] == "attention"
