"""Workers that are killed, frozen, and robbed of their database: every order ends right, exactly once.

Workers alone; the whole service is tried in `test_whole.py`.
"""

import os
import random
import signal
import time
from collections.abc import Iterator, Mapping
from contextlib import ExitStack, contextmanager
from pathlib import Path

from service.background.queue import Queue
from service.parts import Parts
from tests.faults.fleet import Fleet, Stream, hold_database, wait_for, wait_until_none_is_open
from tests.faults.judging import assert_all_planned_once
from tests.faults.ordering import PlansHere, assert_planned_once, look, place, states, tune_called
from tests.faults.server import own_server
from tests.service.conftest import environment_of, new_database, parts_of, postgresql_first, sqlite_alone, sqlite_first
from tests.service.shop import open_shop

# Short leases, so that what was lost is taken up within the patience of a test.
HASTE = {
    "DISCWRIGHT_LEASE_S": "2",
    "DISCWRIGHT_SWEEP_S": "1",
    "DISCWRIGHT_ATTEMPTS": "20",  # a stream of kills may hit one order many times by mere chance
    "DISCWRIGHT_STOP_WITHIN_S": "5",
}
KILLS = 3
ORDERS = 12


@contextmanager
def shop_on(folder: Path, database_url: str | None, **variables: str) -> Iterator[tuple[Parts, Mapping[str, str]]]:
    parts = parts_of(folder, database_url)
    open_shop(parts)
    yield parts, {**environment_of(folder, database_url), **HASTE, **variables}
    parts.store.close()


@sqlite_alone("its lock")
def test_every_order_is_planned_once_though_workers_are_killed_and_the_database_is_locked(
    tmp_path: Path, database_url: str | None
) -> None:
    chance = random.Random(20)
    with (
        shop_on(tmp_path, database_url) as (parts, environment),
        Fleet(environment, tmp_path / "log", workers=2) as fleet,
    ):
        stream = Stream(parts, orders=ORDERS, every_s=0.2, chance=chance)

        for _ in range(KILLS):
            wait_for(lambda: "planning" in states(parts, list(stream.tunes)), within_s=60)
            time.sleep(chance.uniform(0.0, 0.3))
            fleet.kill_one(chance)
        hold_database(parts, 3.0)  # longer than a lease
        stream.wait()
        wait_until_none_is_open(parts, list(stream.tunes), within_s=240)
        codes = fleet.stop()

        assert fleet.kills >= KILLS - 1  # one may have ended before it was hit
        assert codes == [0, 0]
        assert_all_planned_once(parts, stream.tunes, tmp_path)


def test_every_order_is_planned_once_though_the_database_is_cut_off(tmp_path: Path) -> None:
    chance = random.Random(21)
    with (
        own_server() as server,
        shop_on(tmp_path, new_database(server.url)) as (parts, environment),
        Fleet(environment, tmp_path / "log", workers=2) as fleet,
    ):
        stream = Stream(parts, orders=ORDERS, every_s=0.2, chance=chance)

        wait_for(lambda: "planning" in states(parts, list(stream.tunes)), within_s=60)
        fleet.kill_one(chance)
        server.cut_for(3.0)
        stream.wait()
        wait_until_none_is_open(parts, list(stream.tunes), within_s=240)
        fleet.stop()

        assert_all_planned_once(parts, stream.tunes, tmp_path)


@sqlite_first("what becomes of a process")
def test_a_tune_that_kills_its_worker_fails_after_its_attempts_and_others_are_planned(
    tmp_path: Path, database_url: str | None
) -> None:
    with shop_on(tmp_path, database_url, DISCWRIGHT_ATTEMPTS="2") as (parts, environment):
        deadly = place(parts, tune_called("do:kill-worker;"))
        tunes = {place(parts, tune): tune for tune in map(tune_called, ("Harvest", "Sowing"))}
        queue = Queue(parts.settings.queue_url)
        for order_id in (deadly, *tunes):
            queue.send(order_id)
        queue.close()

        with Fleet(environment, tmp_path / "log", workers=1) as fleet:
            wait_until_none_is_open(parts, [deadly, *tunes], within_s=240)
            fleet.stop()

        seen = look(parts, deadly)
        assert (seen.state, seen.killed, seen.attempt) == ("failed", 2, 2)
        assert seen.reason == (
            "planning it ended its worker 2 times; simplify the tune or the settings, and order again"
        )
        assert fleet.starts == 3
        assert_all_planned_once(parts, tunes, tmp_path)


@postgresql_first("a worker cut off from the others, as on a machine of its own")
def test_what_a_worker_planned_that_slept_past_its_lease_is_thrown_away(
    tmp_path: Path, database_url: str | None
) -> None:
    tune = tune_called("do:sleep 1.5;")
    with shop_on(tmp_path, database_url) as (parts, environment), ExitStack() as until_end:
        order_id = place(parts, tune)
        queue = Queue(parts.settings.queue_url)
        queue.send(order_id)
        queue.close()
        sleeper = until_end.enter_context(Fleet(environment, tmp_path / "sleeper", workers=1))
        wait_for(lambda: look(parts, order_id).state == "planning", within_s=60)

        (pid,) = sleeper.pids()
        os.kill(pid, signal.SIGSTOP)
        other = until_end.enter_context(Fleet(environment, tmp_path / "other", workers=1))
        wait_until_none_is_open(parts, [order_id], within_s=60)
        os.kill(pid, signal.SIGCONT)
        wait_for(lambda: "thrown away" in (tmp_path / "sleeper").read_text(), within_s=30)
        sleeper.stop()
        other.stop()

        assert look(parts, order_id).attempt == 2
        assert_planned_once(parts, order_id, PlansHere(tmp_path).of(tune))
