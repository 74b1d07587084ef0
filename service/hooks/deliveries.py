"""Messages as they are told, looked for, sent again and forgotten."""

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from sqlalchemy import Select, delete, func, or_, select, update
from sqlalchemy.orm import Session

from service.hooks.outbox import DELIVERED, FAILED, WAITING
from service.limits import HOOK_LIMITS
from service.store.tables import Delivery, Hook


class DeliveryUnknownError(Exception):
    """The asker has no message of this id; the text says so."""


class HookOffError(Exception):
    """A hook that is turned off gets no messages; the text says since when and why."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Holder:
    """Whose hooks these are: an owner's, those for tests apart from the others."""

    owner_id: str
    is_test: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class DeliveryTold:
    """A message, as its owner sees it.

    Attributes:
        id: Of the message: the webhook-id of every try.
        hook_id: Of the hook.
        event_seq: The number of the event it tells of; None for a test.
        message: What is told: type, timestamp and data.
        state: "waiting", "delivered" or "failed".
        tries: How many were made, since it was written or asked for again.
        next_try_at: When it is tried next, None where it is not.
        last_status: What the last try was answered, None where there was no answer.
        last_error: Why the last try failed, None where it did not.
        created_at: When it was written.
        finished_at: When it was taken or given up, None while it waits.
    """

    id: str
    hook_id: str
    event_seq: int | None
    message: Mapping[str, Any]
    state: str
    tries: int
    next_try_at: datetime | None
    last_status: int | None
    last_error: str | None
    created_at: datetime
    finished_at: datetime | None


def deliveries_of(
    session: Session, hook_id: str, *, state: str | None = None, before: str | None = None, most: int
) -> tuple[DeliveryTold, ...]:
    """The messages of a hook, the newest first.

    Args:
        session: Of a transaction.
        hook_id: Of a hook that the asker may see.
        state: Only those in this state.
        before: Only those older than this message.
        most: How many at most.
    """
    wanted = select(Delivery).where(Delivery.hook_id == hook_id).order_by(Delivery.id.desc()).limit(most)
    if state is not None:
        wanted = wanted.where(Delivery.state == state)
    if before is not None:
        wanted = wanted.where(Delivery.id < before)
    return tuple(delivery_told(one) for one in session.scalars(wanted))


def find_delivery(session: Session, holder: Holder, delivery_id: str) -> DeliveryTold:
    """A message.

    Raises:
        DeliveryUnknownError: There is none, or it is another's.
    """
    return delivery_told(_row(session, holder, delivery_id)[0])


def redeliver(session: Session, holder: Holder, delivery_id: str, *, now: datetime) -> DeliveryTold:
    """Have a message sent again, with the same id and body, from the first try on.

    One that waits is tried at once; one that is being sent at this moment is left as it is. So asking twice sends
    once.

    Args:
        session: Of a transaction that writes.
        holder: Whose it must be.
        delivery_id: Of the message.
        now: The moment.

    Raises:
        DeliveryUnknownError: There is none, or it is another's.
        HookOffError: Its hook is turned off.
    """
    delivery, hook = _row(session, holder, delivery_id)
    check_on(hook)
    finished = {"state": WAITING, "tries": 0, "next_try_at": now, "lease_until": None, "finished_at": None}
    again = update(Delivery).where(Delivery.id == delivery.id, Delivery.state.in_((DELIVERED, FAILED)))
    sooner = update(Delivery).where(
        Delivery.id == delivery.id,
        Delivery.state == WAITING,
        Delivery.next_try_at > now,
        or_(Delivery.lease_until.is_(None), Delivery.lease_until <= now),
    )
    without = {"synchronize_session": False}
    session.execute(again.values(finished), execution_options=without)
    session.execute(sooner.values(next_try_at=now), execution_options=without)
    session.refresh(delivery)
    return delivery_told(delivery)


def check_on(hook: Hook) -> None:
    """See that a hook gets messages.

    Raises:
        HookOffError: It does not.
    """
    if hook.disabled_at is not None:
        raise HookOffError(f"the hook {hook.id} is turned off: it {hook.disabled_because}")


def due(session: Session, *, now: datetime, room: Mapping[str, int], usual: int, most: int) -> list[str]:
    """The messages to send now: those that are due, of each hook in turn, so that none waits for another's.

    Args:
        session: Of a transaction.
        now: The moment, as all processes agree on it.
        room: How many more a hook takes at a time, by its id.
        usual: The same for hooks not named there.
        most: How many in all.
    """
    # The first due message of each hook stands at the head of an index; a long queue of one costs nothing.
    first = (
        select(func.min(Delivery.next_try_at))
        .where(Delivery.hook_id == Hook.id, Delivery.state == WAITING)
        .correlate(Hook)
        .scalar_subquery()
    )
    full = [hook_id for hook_id, left in room.items() if left <= 0]
    hooks = session.scalars(
        select(Hook.id)
        .where(or_(Hook.quiet_until.is_(None), Hook.quiet_until <= now), Hook.id.not_in(full), first <= now)
        .order_by(first)
        .limit(HOOK_LIMITS.hooks_per_look)
    ).all()
    queues = [session.scalars(_due_of(hook_id, now, room.get(hook_id, usual))).all() for hook_id in hooks[:most]]
    return _in_turn(queues)[:most]


def forget_deliveries(session: Session, before: datetime) -> int:
    """Delete the messages that were taken or given up before a moment; those that wait stay.

    Returns:
        How many.
    """
    gone = delete(Delivery).where(Delivery.state.in_((DELIVERED, FAILED)), Delivery.finished_at < before)
    return int(session.execute(gone).rowcount)  # type: ignore[attr-defined]


def count_deliveries(session: Session) -> dict[str, int]:
    """How many messages there are in each state."""
    counted: dict[str, int] = {WAITING: 0, DELIVERED: 0, FAILED: 0}
    for state, count in session.execute(select(Delivery.state, func.count()).group_by(Delivery.state)):
        counted[state] = count
    return counted


def delivery_told(delivery: Delivery) -> DeliveryTold:
    """A row as a value."""
    return DeliveryTold(
        id=delivery.id,
        hook_id=delivery.hook_id,
        event_seq=delivery.event_seq,
        message=json.loads(delivery.body),
        state=delivery.state,
        tries=delivery.tries,
        next_try_at=delivery.next_try_at,
        last_status=delivery.last_status,
        last_error=delivery.last_error,
        created_at=delivery.created_at,
        finished_at=delivery.finished_at,
    )


def _row(session: Session, holder: Holder, delivery_id: str) -> tuple[Delivery, Hook]:
    found = session.execute(
        select(Delivery, Hook)
        .join(Hook, Hook.id == Delivery.hook_id)
        .where(Delivery.id == delivery_id, Hook.owner_id == holder.owner_id, Hook.is_test == holder.is_test)
        .where(Hook.deleted_at.is_(None))
    ).one_or_none()
    if found is None:
        raise DeliveryUnknownError(f"there is no delivery {delivery_id!r}")
    return found[0], found[1]


def _due_of(hook_id: str, now: datetime, most: int) -> Select[str]:
    return (
        select(Delivery.id)
        .where(Delivery.hook_id == hook_id, Delivery.state == WAITING, Delivery.next_try_at <= now)
        .order_by(Delivery.next_try_at, Delivery.id)
        .limit(most)
    )


def _in_turn(queues: Sequence[Sequence[str]]) -> list[str]:
    longest = max(map(len, queues), default=0)
    return [queue[place] for place in range(longest) for queue in queues if place < len(queue)]
