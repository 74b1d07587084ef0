"""Retention: each class of what others sent goes when its own time is over, and nothing before."""

from datetime import timedelta
from typing import Any

import pytest
from sqlalchemy import func, select, update

from service.orders import retention
from service.orders.asked import AskedRepeat
from service.orders.deciding import Seen, replan_order
from service.orders.faults import StateForbidsError
from service.orders.finding import find_order
from service.orders.placing import nothing_more
from service.orders.repeating import repeat_order
from service.orders.retention import forget_drawings, forget_tunes, keep_retention
from service.orders.views import OrderView
from service.parts import Parts
from service.settings import RetentionSettings
from service.store.tables import Delivery, Event, Hook, KeptAnswer, Order
from tests.service.shop import OTHER_SHOP, SHOP, TUNE, WEB_SHOP, keeper_of, open_shop, placed, planned, release_seen

TIMES = RetentionSettings(tunes_days=10, drawings_days=100, deliveries_days=5, answers_days=7)


@pytest.fixture
def shop(any_parts: Parts, monkeypatch: pytest.MonkeyPatch) -> Parts:
    monkeypatch.setattr("service.store.holds.SPARED_S", -1)
    open_shop(any_parts)
    return any_parts


def released(parts: Parts, *, days_ago: float, asker: Any = WEB_SHOP) -> OrderView:
    """An order that was released so many days ago."""
    order = placed(parts, asker=asker)
    planned(parts, order.id)
    release_seen(parts, order.id)
    with parts.store.writing() as session:
        then = parts.store.now(session) - timedelta(days=days_ago)
        session.execute(update(Order).where(Order.id == order.id).values(finished_at=then))
    return now_of(parts, order.id)


def now_of(parts: Parts, order_id: str) -> OrderView:
    with parts.store.reading() as session:
        return find_order(session, SHOP, order_id)


def test_a_tune_goes_after_its_time_and_the_drawings_stay(shop: Parts) -> None:
    before = released(shop, days_ago=10.01)
    tune = keeper_of(shop).read(before.tune_digest)

    forgotten = keep_retention(shop.store, shop.files, TIMES)

    after = now_of(shop, before.id)
    assert (forgotten.tunes, forgotten.drawings, forgotten.files) == (1, 0, 1)
    assert tune == TUNE
    assert not shop.files.has(before.tune_digest)
    assert (after.tune_digest, after.tune_name, after.version) == ("", None, before.version + 1)
    assert after.plan == before.plan
    assert (after.state, after.finished_at, after.reference) == ("released", before.finished_at, "W-1001")


def test_nothing_goes_before_its_time(shop: Parts) -> None:
    order = released(shop, days_ago=9.99)

    forgotten = keep_retention(shop.store, shop.files, TIMES)

    assert (forgotten.tunes, forgotten.drawings, forgotten.files) == (0, 0, 0)
    assert now_of(shop, order.id) == order


def test_an_order_that_is_not_finished_keeps_everything_however_old(shop: Parts) -> None:
    order = placed(shop)
    with shop.store.writing() as session:
        old = shop.store.now(session) - timedelta(days=5000)
        session.execute(update(Order).values(created_at=old, updated_at=old))

    forgotten = keep_retention(shop.store, shop.files, TIMES)

    assert (forgotten.tunes, forgotten.files) == (0, 0)
    assert keeper_of(shop).read(order.tune_digest) == TUNE


def test_the_drawings_go_after_their_time_with_the_documents(shop: Parts) -> None:
    order = released(shop, days_ago=100.01)

    forgotten = keep_retention(shop.store, shop.files, TIMES)

    after = now_of(shop, order.id)
    assert (forgotten.tunes, forgotten.drawings) == (1, 1)
    assert list(shop.files.digests()) == []
    assert after.plan is not None
    assert after.plan.files == ()
    assert (after.reference, after.plan.released_by) == ("W-1001", "Ada")  # the story stays till it is deleted


@pytest.mark.parametrize("end", ["failed", "cancelled"])
def test_the_documents_of_an_order_without_a_plan_go_after_their_time_too(shop: Parts, end: str) -> None:
    order = placed(shop)
    with shop.store.writing() as session:
        then = shop.store.now(session) - timedelta(days=101)
        session.execute(update(Order).where(Order.id == order.id).values(state=end, finished_at=then))

    forgotten = keep_retention(shop.store, shop.files, TIMES)

    assert (forgotten.tunes, forgotten.drawings, forgotten.files) == (1, 1, 4)  # tune, movement, cutter, settings
    assert list(shop.files.digests()) == []


def test_a_tune_that_another_order_still_needs_stays_for_it(shop: Parts) -> None:
    old, young = released(shop, days_ago=11), placed(shop, asker=OTHER_SHOP)

    assert forget_tunes(shop.store, days=10) == 1

    assert (now_of(shop, old.id).tune_digest, keeper_of(shop).read(young.tune_digest)) == ("", TUNE)


def test_an_order_whose_tune_is_gone_is_not_planned_anew_but_can_be_repeated(shop: Parts) -> None:
    order = released(shop, days_ago=11)
    forget_tunes(shop.store, days=10)

    with pytest.raises(StateForbidsError, match="tune was deleted; order again"):
        replan_order(shop.store, SHOP, Seen(order_id=order.id), {}, nothing_more)
    again = repeat_order(shop.store, WEB_SHOP, AskedRepeat(repeat_of=order.id), nothing_more)

    assert again.plan is not None
    assert order.plan is not None
    assert again.plan.files == order.plan.files


def test_an_order_whose_drawings_are_gone_is_not_repeated(shop: Parts) -> None:
    order = released(shop, days_ago=101)
    forget_drawings(shop.store, days=100)

    with pytest.raises(StateForbidsError, match=r"files of the order .* were deleted"):
        repeat_order(shop.store, WEB_SHOP, AskedRepeat(repeat_of=order.id), nothing_more)


def test_doing_it_twice_changes_nothing_more(shop: Parts) -> None:
    order = released(shop, days_ago=101)
    keep_retention(shop.store, shop.files, TIMES)
    once = now_of(shop, order.id)

    again = keep_retention(shop.store, shop.files, TIMES)

    assert {getattr(again, name) for name in again.__slots__} == {0}
    assert now_of(shop, order.id) == once


def test_many_orders_are_gone_through_bit_by_bit(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(retention, "MOST_AT_A_TIME", 2)
    for _ in range(5):
        released(shop, days_ago=11)

    assert forget_tunes(shop.store, days=10) == 5


@pytest.mark.parametrize(("days_ago", "state", "left"), [(5.1, "delivered", 0), (4.9, "failed", 1), (99, "waiting", 1)])
def test_messages_that_were_taken_or_given_up_go_after_their_time(
    shop: Parts, days_ago: float, state: str, left: int
) -> None:
    order = placed(shop)
    with shop.store.writing() as session:
        now = shop.store.now(session)
        hook = {"url": "https://a.example", "types": "", "for_all_orders": True, "is_test": False, "secrets": {}}
        session.add(Hook(id="hook_1", owner_id=WEB_SHOP.owner_id, created_at=now, **hook))
        session.flush()
        seq = session.scalars(select(Event.seq).where(Event.order_id == order.id)).one()
        then = now - timedelta(days=days_ago)
        ended = None if state == "waiting" else then
        session.add(
            Delivery(
                id="msg_1",
                hook_id="hook_1",
                event_seq=seq,
                body="{}",
                state=state,
                tries=1,
                created_at=then,
                finished_at=ended,
            )
        )

    forgotten = keep_retention(shop.store, shop.files, TIMES)

    with shop.store.reading() as session:
        assert session.scalar(select(func.count()).select_from(Delivery)) == left
    assert forgotten.deliveries == 1 - left


@pytest.mark.parametrize(("days", "left"), [(-0.01, 0), (0.01, 1)])
def test_kept_answers_go_when_they_said_they_would(shop: Parts, days: float, left: int) -> None:
    with shop.store.writing() as session:
        now = shop.store.now(session)
        row = {"operation": "POST /v1/orders", "key": "a-1", "digest": "0" * 64, "token": "claim_1", "status": 202}
        session.add(
            KeptAnswer(
                owner_id=WEB_SHOP.owner_id,
                started_at=now,
                lease_until=now,
                expires_at=now + timedelta(days=days),
                **row,
            )
        )

    assert keep_retention(shop.store, shop.files, TIMES).answers == 1 - left
