"""The disk that holds everything is full for a while: nothing is lost, nobody is told anything wrong."""

import random
from contextlib import ExitStack
from pathlib import Path

import pytest

from service.access.first_start import first_start
from service.moments import utc_now
from tests.faults.asking import Answers, Asking, Told
from tests.faults.fleet import wait_for
from tests.faults.judging import files_judged, hooks_judged, orders_judged
from tests.faults.pipeline import Wanted, wanted_orders
from tests.faults.receiver import Receiver
from tests.faults.served import Served
from tests.faults.server import own_server
from tests.faults.small_disk import filled, small_disk
from tests.faults.whole import HASTE, make_hook, open_orders, untold
from tests.service.conftest import environment_of, new_database, parts_of

DISK_MIB = {"sqlite": 24, "postgresql": 160}  # a new server of PostgreSQL takes 60 MB
BEFORE, DURING, TRIES = 2, 2, 3


@pytest.mark.parametrize("database", ["sqlite", "postgresql"])
def test_what_finds_no_room_is_told_so_and_is_taken_later_and_nothing_is_lost(tmp_path: Path, database: str) -> None:
    answers = Answers()
    orders = wanted_orders(BEFORE + DURING, every_s=1.0, chance=random.Random(24))
    with small_disk(DISK_MIB[database]) as disk, Receiver(random.Random(24)) as receiver, ExitStack() as until_end:
        url = new_database(until_end.enter_context(own_server(disk)).url) if database == "postgresql" else None
        parts = parts_of(disk, url)
        key = first_start(parts.store, utc_now())
        assert key is not None
        served = Served(tmp_path, {**environment_of(disk, url), **HASTE}, workers=0)
        asking = Asking(served.url, key.secret, answers)
        try:
            receiver.secret = make_hook(asking, receiver.url)
            refused, seen = place_around_a_full_disk(asking, orders, disk)
            wait_for(lambda: not open_orders(parts), within_s=240)
            for order in orders[::2]:
                order.released = order.release(asking)
            wait_for(lambda: not untold(parts), within_s=240)
        finally:
            codes = served.stop()
        faults = [*answers.faults, *receiver.faults, *files_judged(disk)]
        faults += orders_judged(parts, orders, tmp_path) + hooks_judged(parts, receiver)
        parts.store.close()

    assert faults == []
    assert refused == [None] * (TRIES * DURING)
    assert set(answers.statuses) == {200, 201, 202, 507}
    assert [None if one is None else one.status for one in seen] == [200] * BEFORE
    assert codes == [0]


def place_around_a_full_disk(
    asking: Asking, orders: list[Wanted], disk: Path
) -> tuple[list[Told | None], list[Told | None]]:
    """Some before, some tried while it is full and placed afterwards; gives what was told meanwhile."""
    before, during = orders[:BEFORE], orders[BEFORE:]
    for order in before:
        order.placed = order.place(asking)
    with filled(disk):  # the last of them is being planned
        refused = [order.place_once(asking) for order in during for _ in range(TRIES)]
        seen = [asking.ask("GET", f"/v1/orders/{order.id}") for order in before]
    for order in during:
        order.placed = order.place(asking)
    return refused, seen
