"""Orders found: one by its id, or a page of many, each asker seeing what exists for it."""

from dataclasses import dataclass
from datetime import datetime

from sqlalchemy import Select, select, tuple_
from sqlalchemy.orm import Session

from service.access.asker import Asker
from service.orders.faults import OrderUnknownError
from service.orders.states import EventType
from service.orders.views import EventView, OrderView, event_views, order_view
from service.store.tables import Event, Order, PlanFile


@dataclass(frozen=True, slots=True, kw_only=True)
class Sought:
    """Which orders are sought; what is None does not narrow.

    Attributes:
        state: In this state.
        reference: With this reference, exactly.
        updated_since: Changed at this moment or later.
        run_id: Of this run.
        test: Whether orders for tests are sought, and not the others.
    """

    state: str | None = None
    reference: str | None = None
    updated_since: datetime | None = None
    run_id: str | None = None
    test: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a page begins: after the order that was changed at this moment and has this id."""

    updated_at: datetime
    order_id: str


def order_row(session: Session, asker: Asker, order_id: str, *, to_decide: bool = False) -> Order:
    """The row of an order that exists for an asker.

    Args:
        session: A transaction.
        asker: Who asks.
        order_id: Which order.
        to_decide: Whether it is kept from others until the transaction ends. Of two decisions at a time the second
            then sees what the first made of the order, and is answered for that, on every database alike.

    Raises:
        OrderUnknownError: There is none, or it is another's.
    """
    rows = _seen_by(asker, select(Order)).where(Order.id == order_id)
    order = session.scalars(rows.with_for_update(of=Order) if to_decide else rows).one_or_none()
    if order is None:
        raise OrderUnknownError(f"there is no order {order_id[:64]!r}")
    return order


def find_order(session: Session, asker: Asker, order_id: str) -> OrderView:
    """An order that exists for an asker.

    Raises:
        OrderUnknownError: There is none, or it is another's.
    """
    return order_view(session, order_row(session, asker, order_id))


def layouts_of(session: Session, asker: Asker, order_id: str) -> list[str]:
    """The digests of layout.json of every disc of every plan of an order.

    Raises:
        OrderUnknownError: There is no such order for the asker.
    """
    order = order_row(session, asker, order_id)
    named = select(PlanFile.digest).where(PlanFile.order_id == order.id, PlanFile.name == "layout.json")
    return list(session.scalars(named.order_by(PlanFile.revision, PlanFile.disc)))


def list_orders(
    session: Session, asker: Asker, sought: Sought, *, after: Place | None, most: int, newest_first: bool = False
) -> tuple[tuple[OrderView, ...], Place | None]:
    """A page of orders, by the moment of their last change and then by id, oldest first.

    An order that changes while pages are read comes again on a later page: none is missed. Newest first, as people
    read, such an order is on a page that was read already.

    Returns:
        The orders, and where the next page begins; None where this was the last.
    """
    rows = _seen_by(asker, select(Order)).where(Order.is_test == (sought.test or asker.is_test))
    for wanted, column in ((sought.state, Order.state), (sought.reference, Order.reference)):
        if wanted is not None:
            rows = rows.where(column == wanted)
    if sought.run_id is not None:
        rows = rows.where(Order.run_id == sought.run_id)
    if sought.updated_since is not None:
        rows = rows.where(Order.updated_at >= sought.updated_since)
    if after is not None:
        place, stood = tuple_(Order.updated_at, Order.id), (after.updated_at, after.order_id)
        rows = rows.where(place < stood if newest_first else place > stood)
    by = (Order.updated_at, Order.id)
    found = list(session.scalars(rows.order_by(*(one.desc() if newest_first else one for one in by)).limit(most + 1)))
    page = found[:most]
    more = Place(updated_at=page[-1].updated_at, order_id=page[-1].id) if len(found) > most else None
    return tuple(order_view(session, order) for order in page), more


def events_of(session: Session, asker: Asker, order_id: str, *, after: int, most: int) -> tuple[EventView, ...]:
    """Events of an order past a number, oldest first.

    Raises:
        OrderUnknownError: There is no such order for the asker.
    """
    order = order_row(session, asker, order_id)
    past = select(Event).where(Event.order_id == order.id, Event.seq > after).order_by(Event.seq).limit(most)
    return event_views(session.scalars(past).all())


def verdicts_on(session: Session, order_id: str, revision: int) -> tuple[EventView, ...]:
    """What customers said of a plan of an order, oldest first."""
    said = select(Event).where(Event.order_id == order_id, Event.type.in_((EventType.ACCEPTED, EventType.DECLINED)))
    views = event_views(session.scalars(said.order_by(Event.seq)).all())
    return tuple(view for view in views if view.data.get("revision") == revision)


def events_after(session: Session, asker: Asker, *, after: int, most: int, test: bool) -> tuple[EventView, ...]:
    """Events of all orders that exist for an asker, past a number, oldest first."""
    past = select(Event).join(Order, Order.id == Event.order_id).where(Event.seq > after)
    past = past.where(Order.is_test == (test or asker.is_test))
    if not asker.sees_all_owners:
        past = past.where(Event.owner_id == asker.owner_id)
    return event_views(session.scalars(past.order_by(Event.seq).limit(most)).all())


def _seen_by(asker: Asker, rows: Select[Order]) -> Select[Order]:
    if asker.is_test:
        rows = rows.where(Order.is_test)
    return rows if asker.sees_all_owners else rows.where(Order.owner_id == asker.owner_id)
