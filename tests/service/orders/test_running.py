import io
import threading
import zipfile
from dataclasses import replace

import pytest
from sqlalchemy import func, select

from service.orders.asked import NamedDocument
from service.orders.faults import OrderUnknownError
from service.orders.finding import Sought, list_orders
from service.orders.running import AskedRun, Pair, RunView, begin_run, find_run, items_of, open_runs
from service.parts import Parts
from service.store.tables import Order
from tests.service.shop import OTHER_SHOP, TUNE, WEB_SHOP, keeper_of, open_shop, planned

FERN, TARN = NamedDocument(id="fernhollow-31"), NamedDocument(id="tarnlight-17")


def archive_of(**tunes: bytes) -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as archive:
        for name, content in tunes.items():
            archive.writestr(f"{name}.mid", content)
    return out.getvalue()


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


def opened(parts: Parts, most: int = 10) -> list[str]:
    sent: list[str] = []
    while open_runs(parts.store, keeper_of(parts), sent.append, most=most, most_tune_bytes=2_000_000):
        pass
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
    workers = [threading.Thread(target=opened, args=(shop, 4)) for _ in range(3)]
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
