"""Deleted orders: nothing that came from others is left anywhere in the database, and no request makes it anew."""

import json
from collections.abc import Iterator
from dataclasses import replace
from io import BytesIO
from typing import Any

import pytest
from flask.testing import FlaskClient
from sqlalchemy import select
from werkzeug.test import TestResponse

from service.access.scopes import Scope
from service.app import OPENED, create_app
from service.hooks.outbox import new_delivery
from service.orders.deciding import Seen, cancel_order, replan_order, report_on_order
from service.orders.erasing import erase_again, erase_order
from service.orders.faults import OrderUnknownError, StateForbidsError
from service.orders.finding import find_order
from service.orders.placing import nothing_more
from service.orders.replanning import AskedAnew, columns_of
from service.orders.states import State
from service.parts import Parts
from service.settings import AccessSettings
from service.store.faults import StoreBusyError
from service.store.holds import sweep_files
from service.store.tables import Event, FileHold, Hook, Order, Row, Run, RunItem
from tests.service.api.guarded import bearing, new_key, problem_of
from tests.service.fakes import MANY
from tests.service.pricing import PricingPlanner
from tests.service.shop import (
    OTHER_SHOP,
    SHOP,
    TUNE,
    WEB_SHOP,
    keeper_of,
    open_shop,
    placed,
    plan_seen,
    planned,
)

# What the sender said, which nobody shall find any more.
PRIVATE = ("W-1001-private", "for-aunt-ada.mid", "she moved away", "cut it anyway")


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def finished(parts: Parts) -> str:
    order = placed(parts)
    planned(parts, order.id)
    cancel_order(parts.store, WEB_SHOP, Seen(order_id=order.id), reason="x", recalled=False, also=nothing_more)
    return order.id


def everything(parts: Parts) -> str:
    """The whole database as text."""
    with parts.store.reading() as session:
        rows = [session.execute(select(table)).all() for table in Row.metadata.sorted_tables]
    return repr(rows)


class Web:
    """The service, with a web shop and a hook for all its orders."""

    def __init__(self, parts: Parts) -> None:
        settings = replace(parts.settings, access=AccessSettings(read_rate=MANY, write_rate=MANY))
        self.app = create_app(settings, planner=PricingPlanner())
        self.http: FlaskClient = self.app.test_client()
        self.key = bearing(new_key(parts, *Scope, owner="Bellgrove"))
        hook = {"url": "https://shop.example/told"}
        assert self.http.post("/v1/hooks", json=hook, headers=self.key).status_code == 201

    def place(self, key: str, quote: str | None = None) -> TestResponse:
        order = {
            "movement": "fernhollow-31",
            "reference": PRIVATE[0],
            "tune_name": PRIVATE[1],
            **({} if quote is None else {"quote": quote}),
        }
        form = {"tune": (BytesIO(TUNE), "a.mid"), "order": json.dumps(order)}
        return self.http.post("/v1/orders", data=form, headers={**self.key, "Idempotency-Key": f'"{key}"'})

    def say(self, order_id: str, path: str, key: str, **said: Any) -> TestResponse:
        headers = {**self.key, "Idempotency-Key": f'"{key}"'}
        answer = self.http.post(f"/v1/orders/{order_id}/{path}", json=said, headers=headers)
        assert answer.status_code == 200, answer.text
        return answer


@pytest.fixture
def web(any_parts: Parts) -> Iterator[Web]:
    opened = Web(any_parts)
    yield opened
    for one in opened.app.extensions[OPENED]:
        one.close()


def test_nothing_that_was_sent_is_left_in_the_database(web: Web, any_parts: Parts) -> None:
    form = {"tune": (BytesIO(TUNE), "a.mid"), "order": '{"movement": "fernhollow-31"}'}
    quote: Any = web.http.post("/v1/quotes", data=form, headers=web.key).json
    placed_answer: Any = web.place("place-1", quote["id"]).json
    order_id = placed_answer["id"]
    planned(any_parts, order_id)
    web.say(
        order_id,
        "release",
        "release-1",
        by=PRIVATE[2],
        plan=plan_seen(any_parts, order_id),
        despite_findings=PRIVATE[3],
    )
    web.say(order_id, "reports", "report-1", what="measured", note=PRIVATE[3])
    before = everything(any_parts)
    assert all(word in before for word in PRIVATE)

    answer = web.http.delete(f"/v1/orders/{order_id}", headers=web.key)

    assert answer.status_code == 200
    after = everything(any_parts)
    assert [word for word in (*PRIVATE, "Turning Day", quote["id"]) if word in after] == []
    with any_parts.store.reading() as session:
        assert session.scalars(select(FileHold.what).where(FileHold.holder_id == order_id)).all() == []


def test_the_kept_answer_of_its_quote_is_deleted_with_the_quote(web: Web, any_parts: Parts) -> None:
    def quoted() -> TestResponse:
        form = {"tune": (BytesIO(TUNE), "a.mid"), "order": '{"movement": "fernhollow-31"}'}
        return web.http.post("/v1/quotes", data=form, headers={**web.key, "Idempotency-Key": '"quote-1"'})

    quote: Any = quoted().json
    order: Any = web.place("place-1", quote["id"]).json
    planned(any_parts, order["id"])
    web.say(order["id"], "cancel", "cancel-1")
    assert quoted().json == quote

    web.http.delete(f"/v1/orders/{order['id']}", headers=web.key)

    problem_of(quoted(), "answer-deleted")


def test_a_request_sent_again_after_the_deletion_makes_nothing_anew(web: Web, any_parts: Parts) -> None:
    order: Any = web.place("place-1").json
    planned(any_parts, order["id"])
    word = {"by": "Ada", "plan": plan_seen(any_parts, order["id"])}
    web.say(order["id"], "release", "release-1", **word)
    web.http.delete(f"/v1/orders/{order['id']}", headers=web.key)

    problem_of(web.place("place-1"), "answer-deleted")
    headers = {**web.key, "Idempotency-Key": '"release-1"'}
    again = web.http.post(f"/v1/orders/{order['id']}/release", json=word, headers=headers)

    problem_of(again, "answer-deleted")
    told: Any = web.http.get("/v1/orders", headers=web.key).json
    assert [one["id"] for one in told["orders"]] == [order["id"]]


def test_a_pair_of_a_run_forgets_its_tune_and_reference(shop: Parts) -> None:
    order_id = finished(shop)
    with shop.store.writing() as session:
        now = shop.store.now(session)
        run = {name: None for name in ("reference", "opened_at")}
        session.add(
            Run(
                id="run_1",
                owner_id=WEB_SHOP.owner_id,
                key_id=WEB_SHOP.key_id,
                is_test=False,
                archive_digest="0" * 64,
                asked={},
                order_count=1,
                created_at=now,
                **run,
            )
        )
        session.flush()
        pair = {"tune_name": PRIVATE[1], "reference": PRIVATE[0], "movement_id": "fernhollow-31"}
        session.add(RunItem(run_id="run_1", number=1, order_id=order_id, **pair))

    erase_order(shop.store, shop.files, WEB_SHOP, order_id)

    with shop.store.reading() as session:
        item = session.scalars(select(RunItem)).one()
    assert (item.tune_name, item.reference, item.order_id) == ("", None, order_id)


def test_what_a_hook_was_told_of_it_is_deleted_and_it_is_told_of_the_deletion(shop: Parts) -> None:
    order_id = finished(shop)
    with shop.store.writing() as session:
        now = shop.store.now(session)
        row = {"url": "https://a.example", "types": "", "for_all_orders": True, "is_test": False, "secrets": {}}
        session.add(Hook(id="hook_1", owner_id=WEB_SHOP.owner_id, created_at=now, **row))
        session.flush()
        event = session.scalars(select(Event).where(Event.order_id == order_id).limit(1)).one()
        hook = session.scalars(select(Hook)).one()
        session.add(new_delivery(hook, f'{{"reference": "{PRIVATE[0]}"}}', at=now, event_seq=event.seq))

    erase_order(shop.store, shop.files, WEB_SHOP, order_id)

    text = everything(shop)
    assert PRIVATE[0] not in text
    assert '"type":"order.erased"' in text


def test_the_files_of_a_deleted_order_are_swept_away_but_those_of_others_stay(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("service.store.holds.SPARED_S", -1)
    gone, kept = finished(shop), placed(shop, asker=OTHER_SHOP)
    files = set(shop.files.digests())

    erase_order(shop.store, shop.files, WEB_SHOP, gone)
    swept = set(sweep_files(shop.store, shop.files, most=100))

    assert swept
    assert set(shop.files.digests()) == files - swept
    assert keeper_of(shop).read(kept.tune_digest) == TUNE


def test_an_order_that_is_not_finished_is_not_deleted_and_not_noted(shop: Parts) -> None:
    order = placed(shop)

    with pytest.raises(StateForbidsError, match="is received; cancel it, then delete it"):
        erase_order(shop.store, shop.files, WEB_SHOP, order.id)
    with pytest.raises(OrderUnknownError):
        erase_order(shop.store, shop.files, OTHER_SHOP, finished(shop))

    assert list(shop.files.noted()) == []


def test_a_deletion_that_lost_to_another_change_takes_its_note_back(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    order_id = finished(shop)
    monkeypatch.setattr("service.orders.erasing.change", lambda *_args, **_named: False)

    with pytest.raises(Exception, match="changed at the same moment"):
        erase_order(shop.store, shop.files, WEB_SHOP, order_id)

    assert list(shop.files.noted()) == []


def test_a_deletion_of_which_nobody_knows_how_it_ended_keeps_its_note(
    shop: Parts, monkeypatch: pytest.MonkeyPatch
) -> None:
    order_id = finished(shop)

    def lost(*_args: object) -> None:
        raise StoreBusyError("the database does not answer")

    monkeypatch.setattr("service.orders.erasing._erase", lost)
    with pytest.raises(StoreBusyError):
        erase_order(shop.store, shop.files, WEB_SHOP, order_id)

    assert list(shop.files.noted()) == [order_id]


def test_a_deletion_asked_for_twice_is_one(shop: Parts) -> None:
    order_id = finished(shop)

    first, second = (erase_order(shop.store, shop.files, WEB_SHOP, order_id) for _ in range(2))

    assert first == second
    assert first.erased_at is not None


def test_nothing_more_is_decided_about_a_deleted_order(shop: Parts) -> None:
    order_id = finished(shop)
    erase_order(shop.store, shop.files, WEB_SHOP, order_id)
    seen = Seen(order_id=order_id)

    with pytest.raises(StateForbidsError, match="was deleted"):
        replan_order(shop.store, WEB_SHOP, seen, {}, nothing_more)
    with pytest.raises(StateForbidsError, match="was deleted"):
        report_on_order(shop.store, SHOP, seen, "cut", {"note": PRIVATE[2]}, nothing_more)


def test_a_note_deletes_again_whatever_state_the_backup_brought_back(shop: Parts) -> None:
    waiting, done, other = placed(shop).id, finished(shop), placed(shop).id

    count = erase_again(shop.store, [waiting, done, "order_never_seen"])

    assert count == 2
    assert erase_again(shop.store, [waiting, done]) == 0
    with shop.store.reading() as session:
        states = {one: (find_order(session, SHOP, one)) for one in (waiting, done, other)}
    assert [(order.state, order.erased_at is None) for order in states.values()] == [
        (State.CANCELLED, False),
        (State.CANCELLED, False),
        (State.RECEIVED, True),
    ]
    with shop.store.reading() as session:
        assert session.get_one(Order, waiting).tune_digest == ""


def test_what_was_asked_anew_of_a_deleted_order_is_not_kept(shop: Parts) -> None:
    order_id = finished(shop)
    erase_order(shop.store, shop.files, WEB_SHOP, order_id)

    with pytest.raises(StateForbidsError, match="tune was deleted"):
        columns_of(shop.store, keeper_of(shop), WEB_SHOP, order_id, AskedAnew(settings=b'{"title": "for Ada"}'))

    with shop.store.reading() as session:
        assert session.scalars(select(FileHold).where(FileHold.holder_id == order_id)).all() == []
