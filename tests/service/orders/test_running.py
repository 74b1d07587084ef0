import threading
from dataclasses import replace
from typing import Any

import pytest
from sqlalchemy import func, select

from service.access.keys import revoke_key
from service.limits import Limits
from service.moments import utc_now
from service.orders import run_opening
from service.orders.asked import NamedDocument
from service.orders.faults import OrderUnknownError
from service.orders.finding import Sought, list_orders
from service.orders.placing import place_order
from service.orders.run_opening import RunOpener
from service.orders.run_views import RunView, find_run, items_of, list_runs
from service.orders.running import AskedRun, Pair, begin_run
from service.parts import Parts
from service.store.tables import FileHold, Order
from tests.service.shop import OTHER_SHOP, SHOP, TUNE, WEB_SHOP, WEB_TESTS, archive_of, keeper_of, open_shop, planned

FERN, TARN = NamedDocument(id="fernhollow-31"), NamedDocument(id="tarnlight-17")


ASKED = AskedRun(
    archive=archive_of(a=TUNE, b=b"no tune", c=TUNE),
    pairs=(
        Pair(tune="a.mid", movement=FERN),
        Pair(tune="b.mid", movement=FERN),
        Pair(tune="c.mid", movement=TARN, reference="mine"),
        Pair(tune="a.mid", movement=NamedDocument(id="nowhere-1")),
    ),
    cutter=NamedDocument(id="fibre-laser"),
    reference="R-7",
)


@pytest.fixture
def shop(any_parts: Parts) -> Parts:
    open_shop(any_parts)
    return any_parts


def begun(parts: Parts, asked: AskedRun = ASKED) -> RunView:
    return begin_run(parts.store, keeper_of(parts), WEB_SHOP, asked, lambda _session, _run: None)


def opened(parts: Parts, **changes: int) -> list[str]:
    sent: list[str] = []
    RunOpener(parts.store, keeper_of(parts), sent.append, replace(Limits(), **changes)).open_all()
    return sent


def counts_of(parts: Parts, run_id: str) -> dict[str, int]:
    with parts.store.reading() as session:
        return dict(find_run(session, WEB_SHOP, run_id).counts)


def test_each_pair_becomes_an_order_or_is_refused_with_its_reason(shop: Parts) -> None:
    run = begun(shop)
    sent = opened(shop)

    with shop.store.reading() as session:
        items = items_of(session, WEB_SHOP, run.id, after=0, most=10)
        orders, _ = list_orders(session, WEB_SHOP, Sought(run_id=run.id), after=None, most=10)
    assert run.counts == {"waits": 4}
    assert counts_of(shop, run.id) == {"received": 2, "refused": 2}
    assert [item.order_id for item in items if item.order_id] == sent
    assert [(order.reference, order.movement_id) for order in orders] == [
        ("R-7-1", "fernhollow-31"),
        ("mine", "tarnlight-17"),
    ]
    refused = {item.number: item.reason for item in items if item.state == "refused"}
    assert refused.keys() == {2, 4}
    assert "there is no movement 'nowhere-1'" in str(refused[4])


def test_the_summary_fills_as_orders_finish(shop: Parts) -> None:
    run = begun(shop, replace(ASKED, pairs=ASKED.pairs[:1]))
    [order_id] = opened(shop)
    with shop.store.reading() as session:
        before = find_run(session, WEB_SHOP, run.id)
    planned(shop, order_id)
    with shop.store.reading() as session:
        after = find_run(session, WEB_SHOP, run.id)

    assert (before.counts, before.is_finished) == ({"received": 1}, False)
    assert (after.counts, after.is_finished) == ({"ready": 1}, True)


def test_workers_that_open_a_run_together_make_each_pair_one_order(shop: Parts) -> None:
    pairs = tuple(Pair(tune="a.mid", movement=FERN, reference=f"{number}") for number in range(12))
    run = begun(shop, replace(ASKED, pairs=pairs))
    workers = [threading.Thread(target=opened, args=(shop,), kwargs={"run_orders_at_a_time": 4}) for _ in range(3)]
    for worker in workers:
        worker.start()
    for worker in workers:
        worker.join()

    assert counts_of(shop, run.id) == {"received": 12}
    with shop.store.reading() as session:
        assert session.scalars(select(func.count()).select_from(Order)).one() == 12


def test_a_run_of_another_does_not_exist(shop: Parts) -> None:
    run = begun(shop)

    with shop.store.reading() as session, pytest.raises(OrderUnknownError, match="there is no run"):
        find_run(session, OTHER_SHOP, run.id)


def test_an_archive_that_cannot_be_opened_refuses_its_pairs(shop: Parts) -> None:
    run = begun(shop, replace(ASKED, archive=b"PK no archive"))
    opened(shop)

    assert counts_of(shop, run.id) == {"refused": 4}


def test_a_long_run_holds_up_no_short_one(shop: Parts) -> None:
    pairs = tuple(Pair(tune="a.mid", movement=FERN, reference=f"long {number}") for number in range(9))
    begun(shop, replace(ASKED, pairs=pairs))
    short = begun(shop, replace(ASKED, pairs=pairs[:1]))

    sent = opened(shop, run_orders_at_a_time=3)

    with shop.store.reading() as session:
        [item] = items_of(session, WEB_SHOP, short.id, after=0, most=10)
    assert len(sent) == 10
    assert sent.index(str(item.order_id)) <= 3


def test_only_so_many_orders_of_runs_wait_at_a_time(shop: Parts) -> None:
    pairs = tuple(Pair(tune="a.mid", movement=FERN) for _ in range(7))
    run = begun(shop, replace(ASKED, pairs=pairs))

    first = opened(shop, run_orders_at_a_time=2, run_orders_waiting=3)
    before = counts_of(shop, run.id)
    for order_id in first:
        planned(shop, order_id)
    opened(shop, run_orders_at_a_time=2, run_orders_waiting=3)

    assert before == {"received": 3, "waits": 4}
    assert counts_of(shop, run.id) == {"ready": 3, "received": 3, "waits": 1}


def test_a_run_goes_on_though_its_key_is_revoked(shop: Parts) -> None:
    run = begun(shop, replace(ASKED, pairs=ASKED.pairs[:1]))
    revoke_key(shop.store, WEB_SHOP.key_id, utc_now())
    opened(shop)

    assert counts_of(shop, run.id) == {"received": 1}


def test_the_archive_of_a_run_is_held_until_every_pair_is_an_order(shop: Parts) -> None:
    run = begun(shop)

    def held() -> int:
        with shop.store.reading() as session:
            return session.scalars(select(func.count()).where(FileHold.holder_id == run.id)).one()

    assert held() == 1
    opened(shop)
    assert held() == 0


def test_a_run_whose_archive_is_lost_is_refused_and_the_next_one_opened(shop: Parts) -> None:
    lost = begun(shop)
    [digest] = {file for file in shop.files.digests()}
    shop.files.remove(digest)
    next_one = begun(shop, replace(ASKED, archive=archive_of(a=TUNE, z=b"x"), pairs=ASKED.pairs[:1]))
    opened(shop)

    assert counts_of(shop, lost.id) == {"refused": 4}
    assert counts_of(shop, next_one.id) == {"received": 1}


def test_a_fault_of_the_program_refuses_its_pair_alone(shop: Parts, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail_for_tarnlight(*given: Any) -> Any:
        if given[3].movement.id == "tarnlight-17":
            raise RecursionError
        return place_order(*given)

    monkeypatch.setattr(run_opening, "place_order", fail_for_tarnlight)
    run = begun(shop, replace(ASKED, pairs=(ASKED.pairs[2], ASKED.pairs[0])))
    opened(shop)

    with shop.store.reading() as session:
        items = items_of(session, WEB_SHOP, run.id, after=0, most=10)
    assert [item.state for item in items] == ["refused", "received"]
    assert items[0].reason == "the program itself met a fault, logged under this run's id; tell the shop"


def test_runs_are_listed_newest_first_in_pages_and_those_of_test_keys_apart(shop: Parts) -> None:
    ours = [begun(shop).id for _ in range(3)]
    begin_run(shop.store, keeper_of(shop), OTHER_SHOP, ASKED, lambda _session, _run: None)
    tests = begin_run(shop.store, keeper_of(shop), WEB_TESTS, ASKED, lambda _session, _run: None)

    with shop.store.reading() as session:
        first, more = list_runs(session, WEB_SHOP, after=None, most=2, test=False)
        last, end = list_runs(session, WEB_SHOP, after=more, most=2, test=False)
        of_tests, _ = list_runs(session, WEB_TESTS, after=None, most=2, test=False)
        seen_by_shop, _ = list_runs(session, SHOP, after=None, most=9, test=False)
    assert [run.id for run in (*first, *last)] == ours[::-1]
    assert end is None
    assert [run.id for run in of_tests] == [tests.id]
    assert len(seen_by_shop) == 4
