import json
from contextlib import suppress

from sqlalchemy import select

from service.hooks.deliveries import Holder
from service.hooks.keeping import delete_hook
from service.hooks.types import MEANINGS, ORDER_TYPES, TEST_TYPE
from service.limits import HOOK_LIMITS
from service.orders.states import EventType
from service.parts import Parts
from service.store.tables import Delivery, Hook
from tests.service.hooks.rows import NOW, add_owner, make_hook, new_order, only_delivery, place, tell_of


def told_hooks(parts: Parts) -> list[str]:
    with parts.store.reading() as session:
        return list(session.scalars(select(Delivery.hook_id).order_by(Delivery.hook_id)))


def test_every_type_of_event_is_published_with_its_meaning() -> None:
    assert set(ORDER_TYPES) == set(EventType)
    assert set(MEANINGS) == {*EventType, TEST_TYPE}


def test_an_event_is_told_once_to_a_hook_that_the_order_names_and_that_hears_of_all_orders(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "a shop on the web")
    hook = make_hook(any_parts, owner).hook

    place(any_parts, owner, hook_id=hook.id)

    assert told_hooks(any_parts) == [hook.id]


def test_a_message_holds_type_time_and_what_happened(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "a shop on the web")
    make_hook(any_parts, owner)

    with any_parts.store.writing() as session:
        order = new_order(owner)
        event = tell_of(session, order, discs=2)

    delivery = only_delivery(any_parts)
    assert json.loads(delivery.body) == {
        "type": "order.received",
        "timestamp": "2025-12-02T10:00:00.250000Z",
        "data": {
            "seq": event.seq,
            "order": order.id,
            "type": "order.received",
            "at": "2025-12-02T10:00:00.250000Z",
            "by": "front desk",
            "data": {"discs": 2},
            "reference": "A-1007",
            "state": "received",
            "is_test": False,
        },
    }
    assert delivery.id.startswith("msg_")
    assert "." not in delivery.id
    assert (delivery.state, delivery.tries, delivery.next_try_at) == ("waiting", 0, NOW)


def test_no_message_is_written_where_the_event_is_rolled_back(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "a shop on the web")
    make_hook(any_parts, owner)

    with suppress(ZeroDivisionError), any_parts.store.writing() as session:
        tell_of(session, new_order(owner))
        assert session.scalars(select(Delivery)).one().state == "waiting"
        1 / 0  # noqa: B018 -- what happens in the transaction after it

    assert told_hooks(any_parts) == []


def test_hooks_of_others_are_told_nothing(any_parts: Parts) -> None:
    owner, other = add_owner(any_parts, "one"), add_owner(any_parts, "another")
    strange = make_hook(any_parts, other).hook

    place(any_parts, owner, hook_id=strange.id)

    assert told_hooks(any_parts) == []


def test_the_shop_is_told_of_everybodys_orders_but_of_no_test_orders(any_parts: Parts) -> None:
    shop, owner = add_owner(any_parts, "the shop", is_shop=True), add_owner(any_parts, "one")
    hook = make_hook(any_parts, shop).hook

    place(any_parts, owner)
    place(any_parts, owner, is_test=True)
    place(any_parts, shop, is_test=True)

    assert told_hooks(any_parts) == [hook.id]


def test_a_hook_of_a_test_key_is_told_of_its_owners_test_orders_alone(any_parts: Parts) -> None:
    owner, other = add_owner(any_parts, "one"), add_owner(any_parts, "another")
    hook = make_hook(any_parts, owner, is_test=True).hook
    named = make_hook(any_parts, owner, "https://named.example/", is_test=True, for_all_orders=False).hook

    place(any_parts, owner)
    place(any_parts, other, is_test=True)
    place(any_parts, owner, hook_id=named.id)
    place(any_parts, owner, is_test=True)

    assert told_hooks(any_parts) == [hook.id]


def test_a_test_hook_of_the_shop_hears_of_no_test_orders_of_others(any_parts: Parts) -> None:
    shop, owner = add_owner(any_parts, "the shop", is_shop=True), add_owner(any_parts, "one")
    make_hook(any_parts, shop, is_test=True)

    place(any_parts, owner, is_test=True)

    assert told_hooks(any_parts) == []


def test_a_hook_for_named_orders_is_told_of_those_alone(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    hook = make_hook(any_parts, owner, for_all_orders=False).hook

    place(any_parts, owner)
    assert told_hooks(any_parts) == []
    place(any_parts, owner, hook_id=hook.id)
    assert told_hooks(any_parts) == [hook.id]


def test_a_hook_is_told_the_types_it_wants(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    make_hook(any_parts, owner, types=("order.ready", "order.failed"))

    with any_parts.store.writing() as session:
        order = new_order(owner)
        for kind in EventType:
            tell_of(session, order, kind)

    with any_parts.store.reading() as session:
        types = [json.loads(body)["type"] for body in session.scalars(select(Delivery.body).order_by(Delivery.id))]
    assert sorted(types) == ["order.failed", "order.ready"]


def test_hooks_that_are_off_or_deleted_are_told_nothing(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    off, gone = make_hook(any_parts, owner).hook, make_hook(any_parts, owner, "https://gone.example/").hook
    with any_parts.store.writing() as session:
        session.get_one(Hook, off.id).disabled_at = NOW
        delete_hook(session, Holder(owner_id=owner, is_test=False), gone.id, now=NOW)

    place(any_parts, owner, hook_id=gone.id)

    assert told_hooks(any_parts) == []


def test_data_too_long_for_a_message_is_left_out_and_it_says_so(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    make_hook(any_parts, owner)

    with any_parts.store.writing() as session:
        tell_of(session, new_order(owner), EventType.RECEIVED, reason="ä" * 4000)  # 6 bytes each as JSON in ASCII

    body = only_delivery(any_parts).body
    assert len(body.encode()) < HOOK_LIMITS.body_bytes == 20_000
    assert json.loads(body)["data"]["data"] is None
    assert json.loads(body)["data"]["data_left_out"] is True


def test_data_that_just_fits_is_told(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    make_hook(any_parts, owner)

    with any_parts.store.writing() as session:
        tell_of(session, new_order(owner), EventType.RECEIVED, reason="a" * 19_500)

    assert len(json.loads(only_delivery(any_parts).body)["data"]["data"]["reason"]) == 19_500
