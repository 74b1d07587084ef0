"""What every worker does now and then."""

from sqlalchemy import update

from service.orders.deciding import Seen, cancel_order
from service.orders.finding import find_order
from service.orders.placing import nothing_more
from service.parts import Parts
from service.store.columns import EPOCH
from service.store.tables import Order
from service.working import chores_of
from tests.service.shop import SHOP, WEB_SHOP, open_shop, placed


def test_a_worker_lets_go_of_what_has_been_kept_long_enough(any_parts: Parts) -> None:
    open_shop(any_parts)
    order = placed(any_parts)
    seen = Seen(order_id=order.id)
    cancel_order(any_parts.store, WEB_SHOP, seen, reason=None, recalled=False, also=nothing_more)
    with any_parts.store.writing() as session:
        session.execute(update(Order).values(finished_at=EPOCH))

    for chore in chores_of(any_parts):
        chore.work()

    with any_parts.store.reading() as session:
        after = find_order(session, SHOP, order.id)
    assert (order.tune_digest != "", after.tune_digest) == (True, "")
