"""Events: what happened to orders, numbered without gaps in the order of their commits."""

from datetime import datetime
from typing import Any

from sqlalchemy import update
from sqlalchemy.orm import Session

from service.hooks.outbox import write_deliveries
from service.orders.states import EventType
from service.store.tables import Counter, Event, Order

EVENTS = "events"  # the counter's name


def add_event(
    session: Session, order: Order, kind: EventType, *, at: datetime, by: str | None = None, data: dict[str, Any]
) -> Event:
    """Write an event of an order, and the messages to hooks about it, into the transaction that makes it true.

    The counter's row stays locked until the commit: whoever has seen event n will never see one before n appear.

    Args:
        session: Of a transaction that writes.
        order: The order, as it is after the change.
        kind: What happened.
        at: When.
        by: Who, as it is told: a key's title, a customer's name; None for the service itself.
        data: What the event tells beside; JSON.
    """
    counted = update(Counter).where(Counter.name == EVENTS).values(value=Counter.value + 1).returning(Counter.value)
    seq = session.execute(counted).scalar_one()
    event = Event(seq=seq, order_id=order.id, owner_id=order.owner_id, type=kind.value, at=at, by=by, data=data)
    session.add(event)
    session.flush()
    write_deliveries(session, event, order)
    return event
