"""Workers that are killed while they open a run: each pair becomes one order, and each order is planned once."""

import random
import time
from contextlib import ExitStack
from pathlib import Path

from sqlalchemy import func, select

from service.orders.asked import NamedDocument
from service.orders.run_views import find_run, items_of
from service.orders.running import AskedRun, Pair, begin_run
from service.parts import Parts
from service.store.tables import Order, Run
from tests.faults.fleet import Fleet, wait_for
from tests.faults.ordering import look, tune_called
from tests.faults.test_workers import shop_on
from tests.service.shop import WEB_SHOP, archive_of, keeper_of

PAIRS = 60
KILLS = 3


def run_of(parts: Parts, chance: random.Random) -> str:
    names = [f"t{number}" for number in range(PAIRS)]
    tunes = {name: tune_called(f"do:sleep {chance.uniform(0.0, 0.1):.3f}; {name}") for name in names}
    asked = AskedRun(
        archive=archive_of(**tunes),
        pairs=tuple(Pair(tune=f"{name}.mid", movement=NamedDocument(id="fernhollow-31")) for name in names),
        cutter=NamedDocument(id="fibre-laser"),
        reference="R",
        most_lost_share=1.0,
    )
    return begin_run(parts.store, keeper_of(parts), WEB_SHOP, asked, lambda _session, _run: None).id


def order_count(parts: Parts) -> int:
    with parts.store.reading() as session:
        return session.scalars(select(func.count()).select_from(Order)).one()


def test_each_pair_is_one_order_though_workers_are_killed_while_they_open_the_run(
    tmp_path: Path, database_url: str | None
) -> None:
    chance = random.Random(22)
    with ExitStack() as until_end:
        parts, environment = until_end.enter_context(shop_on(tmp_path, database_url))
        run_id = run_of(parts, chance)
        fleet = until_end.enter_context(Fleet(environment, tmp_path / "log", workers=2))
        mid_run = 0
        for number in range(1, KILLS + 1):
            some = number * PAIRS // (KILLS + 2)  # while it opens: not before, and not after
            wait_for(lambda some=some: order_count(parts) >= some, within_s=60)  # type: ignore[misc]
            fleet.kill_one(chance)
            mid_run += order_count(parts) < PAIRS
            time.sleep(chance.uniform(0.0, 0.1))

        wait_for(lambda: finished(parts, run_id), within_s=240)
        assert fleet.stop() == [0, 0]

        with parts.store.reading() as session:
            items = items_of(session, WEB_SHOP, run_id, after=0, most=PAIRS + 1)
            counts = find_run(session, WEB_SHOP, run_id).counts
            references = sorted(map(str, session.scalars(select(Order.reference))))
            opened_at = session.get_one(Run, run_id).opened_at
        assert mid_run > 0
        assert counts == {"ready": PAIRS}
        assert len({item.order_id for item in items}) == PAIRS
        assert references == sorted(f"R-{number}" for number in range(1, PAIRS + 1))
        assert opened_at is not None
        for item in items:
            assert look(parts, str(item.order_id)).events == ["order.received", "order.planned", "order.ready"]


def finished(parts: Parts, run_id: str) -> bool:
    with parts.store.reading() as session:
        return find_run(session, WEB_SHOP, run_id).is_finished and session.get_one(Run, run_id).opened_at is not None
