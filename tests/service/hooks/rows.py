"""Owners, orders and hooks, as rows that tests of hooks stand on."""

from dataclasses import replace
from datetime import UTC, datetime
from ipaddress import ip_network
from typing import Any

from sqlalchemy import select
from sqlalchemy.orm import Session

from service.hooks.deliveries import Holder
from service.hooks.keeping import HookWish, HookWithSecret, add_hook
from service.orders.events import add_event
from service.orders.states import EventType, State
from service.parts import Parts
from service.settings import HookSettings
from service.store.ids import new_id
from service.store.tables import Delivery, Event, Order, Owner

NOW = datetime(2025, 12, 2, 10, 0, 0, 250_000, tzinfo=UTC)
DIGEST = "0" * 64


def add_owner(parts: Parts, title: str, *, is_shop: bool = False) -> str:
    """An owner; gives its id."""
    with parts.store.writing() as session:
        owner = Owner(id=new_id("owner", NOW), title=title, is_shop=is_shop, created_at=NOW)
        session.add(owner)
    return owner.id


def new_order(owner_id: str, *, is_test: bool = False, hook_id: str | None = None, **columns: Any) -> Order:
    """An order, ready to be added."""
    filled: dict[str, Any] = {
        "state": State.RECEIVED.value,
        "version": 1,
        "reference": "A-1007",
        "quantity": 1,
        "tune_digest": DIGEST,
        "movement_id": "fernhollow-31",
        "movement_revision": 1,
        "movement_digest": DIGEST,
        "cutter_id": "fibre-laser",
        "cutter_digest": DIGEST,
        "settings_digest": DIGEST,
        "most_lost_share": 0.1,
        "release_alone": False,
        "plan_revision": 0,
        "created_at": NOW,
        "updated_at": NOW,
        "attempt": 0,
        "killed": 0,
    }
    return Order(id=new_id("order", NOW), owner_id=owner_id, is_test=is_test, hook_id=hook_id, **{**filled, **columns})


def tell_of(session: Session, order: Order, kind: EventType = EventType.RECEIVED, **data: Any) -> Event:
    """An event of an order, with its deliveries."""
    session.add(order)
    session.flush()
    return add_event(session, order, kind, at=NOW, by="front desk", data=data)


def place(parts: Parts, owner_id: str, **columns: Any) -> str:
    """An order that was received; gives its id."""
    with parts.store.writing() as session:
        order = new_order(owner_id, **columns)
        tell_of(session, order)
    return order.id


def make_hook(
    parts: Parts,
    owner_id: str,
    url: str = "https://shop.example/told",
    *,
    is_test: bool = False,
    types: tuple[str, ...] | None = None,
    for_all_orders: bool = True,
) -> HookWithSecret:
    """A hook."""
    wish = HookWish(url=url, types=types, for_all_orders=for_all_orders)
    with parts.store.writing() as session:
        return add_hook(session, Holder(owner_id=owner_id, is_test=is_test), wish, now=NOW)


def reaching_loopback(parts: Parts, *, timeout_s: int = 5) -> Parts:
    """The same parts, with this machine as a network of the shop's own."""
    hooks = HookSettings(networks=(ip_network("127.0.0.0/8"),), allow_http=True, timeout_s=timeout_s)
    return replace(parts, settings=replace(parts.settings, hooks=hooks))


def only_delivery(parts: Parts) -> Delivery:
    """The one delivery there is."""
    with parts.store.reading() as session:
        return session.scalars(select(Delivery)).one()
