"""Of two decisions at the same moment the second is answered for what the first made of the order."""

import threading
import time
from concurrent.futures import ThreadPoolExecutor

import pytest
from sqlalchemy import func, select, update

from service.orders.changing import change
from service.orders.deciding import Seen, cancel_order
from service.orders.erasing import erase_order
from service.orders.faults import ChangedMeanwhileError, OrderFault, StateForbidsError
from service.orders.placing import nothing_more
from service.orders.states import State
from service.orders.views import OrderView
from service.parts import Parts
from service.store.tables import Event, Order
from tests.service.shop import WEB_SHOP, open_shop, placed

HELD_S = 0.5  # s; that the first takes to commit, in which the second comes


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def cancelled_twice(parts: Parts, order: OrderView, seen: Seen) -> list[OrderFault | OrderView]:
    """Cancel an order twice at the same moment: what became of the first and of the second."""
    is_decided = threading.Event()

    def cancel(*, first: bool) -> OrderFault | OrderView:
        def linger(*_: object) -> None:
            if first:
                is_decided.set()
                time.sleep(HELD_S)

        if not first:
            is_decided.wait(10)
        try:
            return cancel_order(parts.store, WEB_SHOP, seen, reason=None, recalled=False, also=linger)
        except OrderFault as fault:
            return fault

    with ThreadPoolExecutor(2) as pool:
        running = [pool.submit(cancel, first=True), pool.submit(cancel, first=False)]
        return [one.result(30) for one in running]


def test_who_names_no_version_is_told_what_the_state_forbids(shop: Parts) -> None:
    order = placed(shop)

    first, second = cancelled_twice(shop, order, Seen(order_id=order.id))

    assert isinstance(first, OrderView)
    assert first.state == State.CANCELLED
    assert isinstance(second, StateForbidsError)
    assert "cancelled already" in str(second)


def test_who_names_a_version_is_told_that_the_order_changed(shop: Parts) -> None:
    order = placed(shop)

    first, second = cancelled_twice(shop, order, Seen(order_id=order.id, version=order.version))

    assert isinstance(first, OrderView)
    assert isinstance(second, ChangedMeanwhileError)
    assert f"at version {order.version + 1}, not {order.version}" in str(second)


def test_an_order_deleted_twice_at_a_time_is_deleted_once(shop: Parts) -> None:
    order = placed(shop)
    cancel_order(shop.store, WEB_SHOP, Seen(order_id=order.id), reason=None, recalled=False, also=nothing_more)

    with ThreadPoolExecutor(8) as pool:
        running = [pool.submit(erase_order, shop.store, shop.files, WEB_SHOP, order.id) for _ in range(8)]
        erased = [one.result(30) for one in running]

    assert len({(one.erased_at, one.version) for one in erased}) == 1
    with shop.store.reading() as session:
        told = select(func.count()).where(Event.order_id == order.id, Event.type == "order.erased")
        assert session.scalars(told).one() == 1


def test_a_change_to_an_order_that_another_has_changed_meanwhile_is_none(shop: Parts) -> None:
    order_id = placed(shop).id
    with shop.store.writing() as session:
        order = session.get_one(Order, order_id)
        others = update(Order).where(Order.id == order_id).values(version=order.version + 1)
        session.execute(others, execution_options={"synchronize_session": False})

        assert not change(session, order, State.CANCELLED, at=shop.store.now(session), columns={})

    with shop.store.reading() as session:
        assert session.get_one(Order, order_id).state == State.RECEIVED


def test_a_state_that_cannot_follow_is_never_written(shop: Parts) -> None:
    order_id = placed(shop).id
    with shop.store.writing() as session:
        order = session.get_one(Order, order_id)

        with pytest.raises(ValueError, match=r"^ready cannot follow received$"):
            change(session, order, State.READY, at=shop.store.now(session), columns={})
