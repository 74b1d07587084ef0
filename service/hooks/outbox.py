"""The outbox: messages are written in the very transaction that makes them true, and sent later.

So a message is sent if, and only if, what it tells was committed, whatever is killed in between. Its id and its
body are settled here and never change.
"""

import json
from datetime import datetime
from typing import Any

from sqlalchemy import Select, or_, select
from sqlalchemy.orm import Session

from service.hooks.types import TEST_TYPE
from service.limits import HOOK_LIMITS
from service.moments import moment_text
from service.store.ids import new_id
from service.store.tables import Delivery, Event, Hook, Order, Owner

WAITING, DELIVERED, FAILED = "waiting", "delivered", "failed"  # states of a delivery


def write_deliveries(session: Session, event: Event, order: Order) -> int:
    """Write the messages of an event, one for each hook that wants it.

    Those are: the hook that the order names; the hooks of the order's owner for all orders; and the shop's hooks
    for all orders, of whomever, but for test orders. Each only where it wants the type and is not turned off, and
    a hook made with a test key hears of test orders alone, as the others of none.

    Args:
        session: Of the transaction that wrote the event; its row is there already.
        event: What happened.
        order: What it happened to, as it is after the event.

    Returns:
        How many were written.
    """
    hooks = session.scalars(_hooks_of(order)).all()
    wanting = [hook for hook in hooks if wants(hook, event.type)]
    if wanting:
        body = message(event.type, at=event.at, data=_data(event, order))
        session.add_all(new_delivery(hook, body, at=event.at, event_seq=event.seq) for hook in wanting)
        session.flush()
    return len(wanting)


def write_test(session: Session, hook: Hook, *, at: datetime) -> Delivery:
    """Write a message that tells nothing but that messages arrive.

    Args:
        session: Of a transaction that writes.
        hook: Whom to tell.
        at: When it was asked for.
    """
    delivery = new_delivery(hook, message(TEST_TYPE, at=at, data={"hook": hook.id}), at=at, event_seq=None)
    session.add(delivery)
    session.flush()
    return delivery


def wants(hook: Hook, kind: str) -> bool:
    """Whether a hook wants messages of a type."""
    return not hook.types or kind in hook.types.split()


def new_delivery(hook: Hook, body: str, *, at: datetime, event_seq: int | None) -> Delivery:
    """A message to one hook, due at once; not added to a session yet.

    Args:
        hook: Whom to tell.
        body: What to tell.
        at: When it was written.
        event_seq: The number of the event it tells of; None for a test.
    """
    return Delivery(
        id=new_id("msg", at),
        hook_id=hook.id,
        event_seq=event_seq,
        body=body,
        state=WAITING,
        tries=0,
        next_try_at=at,
        created_at=at,
    )


def message(kind: str, *, at: datetime, data: dict[str, Any]) -> str:
    """The body of a message, below 20 kB: an event's own data that would not fit is left out, and it says so.

    Args:
        kind: The type.
        at: When it happened.
        data: What is told; its member `data` may be left out.
    """
    told = {"type": kind, "timestamp": moment_text(at), "data": data}
    body = _compact(told)
    if len(body) < HOOK_LIMITS.body_bytes:
        return body
    return _compact({**told, "data": {**data, "data": None, "data_left_out": True}})


def _hooks_of(order: Order) -> Select[Hook]:
    own = Hook.owner_id == order.owner_id
    reached = [own & Hook.for_all_orders]
    if not order.is_test:
        reached.append(Owner.is_shop & Hook.for_all_orders)
    if order.hook_id is not None:
        reached.append(own & (Hook.id == order.hook_id))
    return (
        select(Hook)
        .join(Owner, Owner.id == Hook.owner_id)
        .where(or_(*reached))
        .where(Hook.is_test == order.is_test, Hook.disabled_at.is_(None), Hook.deleted_at.is_(None))
        .order_by(Hook.id)
    )


def _data(event: Event, order: Order) -> dict[str, Any]:
    """The event as /v1/events tells it, and of the order what tells it apart: most receivers need to ask no more."""
    return {
        "seq": event.seq,
        "order": order.id,
        "type": event.type,
        "at": moment_text(event.at),
        "by": event.by,
        "data": event.data,
        "reference": order.reference,
        "state": order.state,
        "is_test": order.is_test,
    }


def _compact(told: dict[str, Any]) -> str:
    # All of ASCII: the bytes of the body are then the same wherever they are kept.
    return json.dumps(told, separators=(",", ":"), allow_nan=False)
