"""Placing an order: what was sent is read and kept, and the order and its first event are one transaction."""

from collections.abc import Callable
from datetime import datetime

from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.asked import AskedOrder, ReadOrder, read_order
from service.orders.events import add_event
from service.orders.quotes import check_hook, check_quote
from service.orders.states import EventType, State
from service.orders.views import OrderView, order_view
from service.store.holds import FileKeeper, Hold, hold
from service.store.ids import new_id
from service.store.store import Store
from service.store.tables import Order

Also = Callable[[Session, OrderView], None]  # what is written in the same transaction, such as the answer


def place_order(store: Store, keeper: FileKeeper, asker: Asker, asked: AskedOrder, also: Also) -> OrderView:
    """Place an order; it waits for a worker then. Send its id to the queue afterwards.

    Args:
        store: The database.
        keeper: Keeps what was sent.
        asker: Whose order it is.
        asked: What is ordered.
        also: What is written in the same transaction.

    Raises:
        InputRefusedError, MidiReadError, DocumentError: As `read_order`.
        StoreError: It could not be kept; nothing was ordered.
    """
    read = read_order(store, asker, asked)
    inputs = read.inputs
    digests = keeper.keep([inputs.tune, inputs.movement, inputs.cutter, inputs.settings])
    made: list[str] = []

    def placing(session: Session) -> OrderView:
        now = store.now(session)
        made[:] = made or [new_id("order", now)]
        order = session.get(Order, made[0])
        if order is not None:  # the connection was lost after the commit
            return order_view(session, order)
        order = _row(made[0], asker, asked, read, now)
        order.tune_digest, order.movement_digest, order.cutter_digest, order.settings_digest = digests
        check_quote(session, asker, asked, inputs, now)
        check_hook(session, asker, asked.hook_id)
        session.add(order)
        session.flush()
        kinds = ("tune", "document", "document", "document")
        held = [
            Hold(digest=digest, owner_id=asker.owner_id, holder_id=order.id, what=what)
            for digest, what in zip(digests, kinds, strict=True)
        ]
        hold(session, *held)
        data = {"reference": asked.reference, "movement": {"id": read.movement.id, "revision": read.movement_revision}}
        add_event(session, order, EventType.RECEIVED, at=now, by=asker.title, data=data)
        view = order_view(session, order)
        also(session, view)
        return view

    return store.again(placing)


def nothing_more(_session: Session, _done: object) -> None:
    """For `also`, where there is nothing."""


def _row(order_id: str, asker: Asker, asked: AskedOrder, read: ReadOrder, now: datetime) -> Order:
    return Order(
        id=order_id,
        owner_id=asker.owner_id,
        key_id=asker.key_id,
        is_test=asker.is_test,
        state=State.RECEIVED.value,
        version=1,
        reference=asked.reference,
        quantity=asked.quantity,
        tune_name=asked.tune_name,
        movement_id=read.movement.id,
        movement_revision=read.movement_revision,
        cutter_id=read.cutter.id,
        most_lost_share=asked.most_lost_share,
        release_alone=asked.release_alone,
        quote_id=asked.quote_id,
        hook_id=asked.hook_id,
        run_id=asked.run_id,
        plan_revision=0,
        created_at=now,
        updated_at=now,
        attempt=0,
        killed=0,
    )
