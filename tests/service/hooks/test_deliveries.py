from datetime import timedelta

from sqlalchemy import select

from service.hooks.deliveries import count_deliveries, due, forget_deliveries
from service.parts import Parts
from service.store.tables import Delivery
from tests.service.hooks.rows import NOW, add_owner, make_hook, new_order, place, tell_of

SECOND = timedelta(seconds=1)


def finished(parts: Parts, owner_id: str, state: str, at_s: int) -> None:
    """A delivery of a new order, taken or given up so many seconds after NOW."""
    place(parts, owner_id)
    with parts.store.writing() as session:
        row = session.scalars(select(Delivery).where(Delivery.state == "waiting")).one()
        row.state, row.finished_at, row.next_try_at = state, NOW + at_s * SECOND, None


def test_deliveries_older_than_asked_are_forgotten_but_those_that_wait(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    make_hook(any_parts, owner)
    for state in ("delivered", "failed"):
        for at_s in (-1, 0, 1):
            finished(any_parts, owner, state, at_s)
    place(any_parts, owner)

    with any_parts.store.writing() as session:
        assert forget_deliveries(session, NOW) == 2
        assert forget_deliveries(session, NOW) == 0

    with any_parts.store.reading() as session:
        assert count_deliveries(session) == {"waiting": 1, "delivered": 2, "failed": 2}
        assert session.scalars(select(Delivery).where(Delivery.finished_at < NOW)).all() == []


def test_what_is_due_is_given_of_each_hook_in_turn(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    many = make_hook(any_parts, owner, for_all_orders=False).hook
    few = make_hook(any_parts, owner, "https://few.example/", for_all_orders=False).hook
    with any_parts.store.writing() as session:
        for hook_id, count in ((many.id, 9), (few.id, 2)):
            order = new_order(owner, hook_id=hook_id)
            for _ in range(count):
                tell_of(session, order)

    def hooks_due(*, most: int = 32, **room: int) -> list[str]:
        rooms = {many.id: room.get("many", 4), few.id: room.get("few", 4)}
        with any_parts.store.reading() as session:
            ids = due(session, now=NOW, room=rooms, usual=4, most=most)
            return ["many" if session.get_one(Delivery, one).hook_id == many.id else "few" for one in ids]

    assert sorted(hooks_due()[:4]) == ["few", "few", "many", "many"]
    assert hooks_due()[4:] == ["many", "many"]
    assert hooks_due(many=0) == ["few", "few"]
    assert hooks_due(few=-1, many=1) == ["many"]
    assert sorted(hooks_due(most=2)) == ["few", "many"]


def test_nothing_is_due_before_its_time(any_parts: Parts) -> None:
    owner = add_owner(any_parts, "one")
    make_hook(any_parts, owner)
    place(any_parts, owner)

    with any_parts.store.reading() as session:
        assert due(session, now=NOW - SECOND, room={}, usual=4, most=32) == []
        assert len(due(session, now=NOW, room={}, usual=4, most=32)) == 1
