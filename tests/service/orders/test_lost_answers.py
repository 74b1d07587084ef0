"""Connections lost after the commit: what was done is known to be done, and is not done or counted twice."""

import sqlite3
from collections.abc import Callable
from contextlib import closing
from typing import Any

import pytest
from sqlalchemy import select

from service.orders.asked import AskedRepeat, NamedDocument
from service.orders.deciding import Seen, cancel_order
from service.orders.placing import nothing_more
from service.orders.repeating import repeat_order
from service.orders.running import AskedRun, Pair, begin_run
from service.parts import Parts
from service.store.faults import StoreBusyError
from service.store.tables import Event, Order, Run
from tests.service.shop import (
    TUNE,
    WEB_SHOP,
    archive_of,
    keeper_of,
    open_shop,
    placed,
    plan_of,
    planned,
    release_seen,
    taken,
)

Losing = Callable[[int], None]


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


@pytest.fixture
def lose_next(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> Losing:
    """Loses the connection between the next commit but so many and its answer: on PostgreSQL the server ends it."""
    dialect: Any = shop.store.engine.dialect
    commit = dialect.do_commit
    left = [-1]

    def commit_and_lose(connection: Any) -> None:
        commit(connection)
        left[0] -= 1
        if left[0] != -1:
            return
        if shop.store.is_sqlite:
            fault = sqlite3.OperationalError("the disk did not answer")
            fault.sqlite_errorcode = sqlite3.SQLITE_IOERR
            raise fault
        raw = connection.driver_connection
        with closing(shop.store.engine.raw_connection()) as other:
            other.cursor().execute(f"SELECT pg_terminate_backend({raw.info.backend_pid})")
        raw.execute("SELECT 1")

    monkeypatch.setattr(dialect, "do_commit", commit_and_lose)

    def lose(after: int) -> None:
        left[0] = after

    return lose


def row_of(parts: Parts, order_id: str) -> Order:
    with parts.store.reading() as session:
        return session.get_one(Order, order_id)


def test_a_connection_is_lost_after_its_commit(shop: Parts, lose_next: Losing) -> None:
    order = placed(shop)
    lose_next(0)

    with pytest.raises(StoreBusyError):
        cancel_order(shop.store, WEB_SHOP, Seen(order_id=order.id), reason=None, recalled=False, also=nothing_more)

    assert row_of(shop, order.id).state == "cancelled"


def test_an_order_taken_as_the_connection_is_lost_is_in_hand_and_costs_no_attempt(
    shop: Parts, lose_next: Losing
) -> None:
    order = placed(shop)
    lose_next(0)

    held = taken(shop, order.id)

    assert (row_of(shop, order.id).state, row_of(shop, order.id).killed, held.attempt) == ("planning", 0, 1)
    assert plan_of(shop, held).good_to_cut


def test_what_another_slot_of_the_worker_took_meanwhile_is_not_taken_for_ones_own(
    shop: Parts, lose_next: Losing
) -> None:
    order = placed(shop)
    held = taken(shop, order.id, "a worker")
    lose_next(0)

    with pytest.raises(AssertionError):  # nothing was taken
        taken(shop, order.id, "a worker")

    assert row_of(shop, order.id).attempt == held.attempt


def test_an_order_placed_as_the_connection_is_lost_is_placed_once(shop: Parts, lose_next: Losing) -> None:
    lose_next(2)  # the first two end reading its documents and noting its files

    order = placed(shop)
    planned(shop, order.id)

    with shop.store.reading() as session:
        assert session.scalars(select(Order.id)).all() == [order.id]
        kinds = session.scalars(select(Event.type).order_by(Event.seq)).all()
    assert kinds == ["order.received", "order.planned", "order.ready"]


def test_an_order_repeated_as_the_connection_is_lost_is_repeated_once(shop: Parts, lose_next: Losing) -> None:
    first = placed(shop)
    planned(shop, first.id)
    release_seen(shop, first.id)
    lose_next(0)

    order = repeat_order(shop.store, WEB_SHOP, AskedRepeat(repeat_of=first.id), nothing_more)

    with shop.store.reading() as session:
        assert set(session.scalars(select(Order.id))) == {first.id, order.id}


def test_a_run_begun_as_the_connection_is_lost_is_begun_once(shop: Parts, lose_next: Losing) -> None:
    fernhollow = NamedDocument(id="fernhollow-31")
    asked = AskedRun(
        archive=archive_of(a=TUNE),
        pairs=(Pair(tune="a.mid", movement=fernhollow),),
        cutter=NamedDocument(id="fibre-laser"),
    )
    lose_next(1)  # the first ends noting its file

    run = begin_run(shop.store, keeper_of(shop), WEB_SHOP, asked, lambda _session, _run: None)

    with shop.store.reading() as session:
        assert session.scalars(select(Run.id)).all() == [run.id]
