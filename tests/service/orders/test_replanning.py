"""Planning anew: what is asked for is held by the order that was changed for it, and by nothing else."""

import json
from collections.abc import Mapping
from typing import Any

import pytest
from sqlalchemy import select
from sqlalchemy.orm import Session

from service.orders.asked import AskedRepeat
from service.orders.deciding import Seen, replan_order
from service.orders.faults import ChangedMeanwhileError, InputRefusedError, StateForbidsError
from service.orders.placing import Also, nothing_more
from service.orders.repeating import repeat_order
from service.orders.replanning import AskedAnew, columns_of
from service.orders.views import OrderView
from service.parts import Parts
from service.store.tables import FileHold, Order
from tests.service.shop import WEB_SHOP, keeper_of, open_shop, placed, plan_of, planned, release_seen, taken

ANEW = AskedAnew(settings=b'{"title": "For Ada"}')


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def held_for(parts: Parts, order_id: str) -> set[str]:
    with parts.store.reading() as session:
        return set(session.scalars(select(FileHold.digest).where(FileHold.holder_id == order_id)))


def replanned(parts: Parts, order_id: str, *, version: int | None = None, also: Also = nothing_more) -> OrderView:
    columns = columns_of(parts.store, keeper_of(parts), WEB_SHOP, order_id, ANEW)
    return replan_order(parts.store, WEB_SHOP, Seen(order_id=order_id, version=version), columns, also)


def test_what_is_asked_for_anew_is_held_and_planned(shop: Parts) -> None:
    order_id = placed(shop).id
    planned(shop, order_id)
    before = held_for(shop, order_id)

    replanned(shop, order_id)

    with shop.store.reading() as session:
        settings = session.get_one(Order, order_id).settings_digest
    assert shop.files.read(settings) == ANEW.settings
    assert held_for(shop, order_id) == before | {settings}
    assert plan_of(shop, taken(shop, order_id)).told["title"] == "For Ada"


def test_a_replan_that_is_refused_or_undone_leaves_nothing_held(shop: Parts) -> None:
    order_id = placed(shop).id
    planned(shop, order_id)
    before = held_for(shop, order_id)

    def fails(_session: Session, _order: OrderView) -> None:
        raise ZeroDivisionError

    with pytest.raises(ChangedMeanwhileError):
        replanned(shop, order_id, version=1)
    with pytest.raises(ZeroDivisionError):
        replanned(shop, order_id, also=fails)
    assert held_for(shop, order_id) == before

    replan_order(shop.store, WEB_SHOP, Seen(order_id=order_id), {}, nothing_more)
    with pytest.raises(StateForbidsError, match="the order is received"):
        replanned(shop, order_id)
    assert held_for(shop, order_id) == before


def test_a_repeat_holds_what_it_gives_and_nothing_of_the_plans_before(shop: Parts) -> None:
    first_id = placed(shop).id
    before = {file.digest for file in planned(shop, first_id).files}
    replanned(shop, first_id)
    anew = {file.digest for file in planned(shop, first_id).files}
    release_seen(shop, first_id)

    again = repeat_order(shop.store, WEB_SHOP, AskedRepeat(repeat_of=first_id), nothing_more)

    with shop.store.reading() as session:
        row = session.get_one(Order, again.id)
    asked = {row.tune_digest, row.movement_digest, row.cutter_digest, row.settings_digest}
    assert before - anew
    assert held_for(shop, again.id) == anew | asked
    assert keeper_of(shop).read(row.settings_digest) == ANEW.settings


def columns_for(parts: Parts, order_id: str, anew: AskedAnew) -> Mapping[str, Any]:
    return columns_of(parts.store, keeper_of(parts), WEB_SHOP, order_id, anew)


def test_another_revision_of_the_movement_is_planned_with_when_it_is_asked_for(shop: Parts) -> None:
    order_id = placed(shop).id
    planned(shop, order_id)

    columns = columns_for(shop, order_id, AskedAnew(movement_revision=1, most_lost_share=0.25))

    assert (columns["movement_revision"], columns["most_lost_share"]) == (1, 0.25)
    movement = json.loads(shop.files.read(columns["movement_digest"]))
    assert (movement["id"], movement["revision"]) == ("fernhollow-31", 1)


def test_a_revision_that_the_movement_never_had_is_refused_by_its_number(shop: Parts) -> None:
    order_id = placed(shop).id
    planned(shop, order_id)

    with pytest.raises(InputRefusedError, match=r"^there is no revision 7 of fernhollow-31$"):
        columns_for(shop, order_id, AskedAnew(movement_revision=7))
