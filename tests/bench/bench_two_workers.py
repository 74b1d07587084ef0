"""How much sooner two worker processes plan 300 orders on PostgreSQL than one does, and what a core plans an hour.

Each order is laid out for real: the demo tune's first seconds, each under a title of its own, so that none is the same.
The workers are warm when the orders' messages are sent, all at once, as a run sends them; the time is from there to the
last plan. Meanwhile the bench does nothing but count the open orders four times a second: looking thirty times a second
at every order took a part of the two cores that it measures.

Then a queue is lost: the same without messages, so that the workers find the orders by looking for them.
"""

import json
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from sqlalchemy import func, select, update

from service.background.queue import Queue
from service.orders.states import State
from service.orders.taking import WAITS_TOO_LONG_S
from service.orders.test_tunes import Deed, state_tunes
from service.parts import Parts
from service.store.tables import Order
from tests.bench.opponents.table import say, say_table, told
from tests.faults.server import own_server
from tests.service.conftest import environment_of, new_database, parts_of
from tests.service.shop import ASKED, WEB_TESTS, open_shop, placed

TOP = Path(__file__).resolve().parents[2]
ORDERS = 300
PASSAGE = {"from_s": 0, "to_s": 8}
WITHIN_S = 1800.0
LOOK_EVERY_S = 0.25
OPEN = (State.RECEIVED, State.PLANNING)
GOAL = 1.7  # times what one worker plans, by two


def main() -> int:
    """Measure one worker, then two, on the same database."""
    with own_server() as server, tempfile.TemporaryDirectory() as text:
        folder, url = Path(text), new_database(server.url)
        parts = parts_of(folder, url)
        open_shop(parts)
        environment = environment_of(folder, url)
        took_s, found_s = {}, {}
        for count in (1, 2):
            with _workers(parts, environment, count):
                took_s[count] = _took_s(parts, f"told {count}", _send)
            with _workers(parts, {**environment, "DISCWRIGHT_SWEEP_S": "1"}, count):  # the loss is seen within a second
                found_s[count] = _took_s(parts, f"lost {count}", _let_wait)
        files = [path.stat().st_size for path in (folder / "data" / "files").rglob("*") if path.is_file()]
        parts.store.close()
    say_table(
        ["workers", f"s for {ORDERS} orders", "of the time of one", "orders an hour", "s without messages"],
        [
            [str(count), f"{s:.1f}", f"{s / took_s[1]:.2f}", f"{ORDERS / s * 3600:.0f}", f"{found_s[count]:.1f}"]
            for count, s in took_s.items()
        ],
    )
    told("two workers: orders planned, times those of one", took_s[1] / took_s[2], GOAL, most=False)
    told("the same of orders whose messages are lost", found_s[1] / found_s[2], None, most=False)
    say(f"files kept: {sum(files) / (4 * ORDERS) * 1000 / 1e6:.0f} MB for 1,000 orders of this size")
    return 0


def _took_s(parts: Parts, title: str, begin: Callable[[Parts, Sequence[str]], None]) -> float:
    settings = [json.dumps({"title": f"{title} {number}", "passage": PASSAGE}).encode() for number in range(ORDERS)]
    ids = [placed(parts, replace(ASKED, settings=one)).id for one in settings]
    begun_s = time.monotonic()
    begin(parts, ids)
    _wait_until_none_is_open(parts)
    return time.monotonic() - begun_s


def _send(parts: Parts, ids: Sequence[str]) -> None:
    queue = Queue(parts.settings.queue_url)
    for order_id in ids:
        queue.send(order_id)
    queue.close()


def _let_wait(parts: Parts, ids: Sequence[str]) -> None:
    """Let orders have waited longer than any that has a message."""
    with parts.store.writing() as session:
        long_ago = parts.store.now(session) - timedelta(seconds=WAITS_TOO_LONG_S)
        session.execute(update(Order).where(Order.id.in_(ids)).values(updated_at=long_ago))


def _wait_until_none_is_open(parts: Parts) -> None:
    give_up_s = time.monotonic() + WITHIN_S
    counted = select(func.count()).where(Order.state.in_(OPEN))
    while True:
        with parts.store.reading() as session:
            if not session.scalar(counted):
                return
        if time.monotonic() > give_up_s:
            raise TimeoutError
        time.sleep(LOOK_EVERY_S)


@contextmanager
def _workers(parts: Parts, environment: Mapping[str, str], count: int) -> Iterator[None]:
    """So many workers, from when each has planned: as many slow orders as workers show that all are there."""
    command = [sys.executable, "-m", "service.commands.main", "work", "--slots", "1"]
    running = [
        subprocess.Popen(command, cwd=TOP, env={**os.environ, **environment}, stderr=subprocess.DEVNULL)
        for _ in range(count)
    ]
    try:
        [slow] = [tune.content for tune in state_tunes() if tune.deed is Deed.WAIT]
        _send(parts, [placed(parts, replace(ASKED, tune=slow), WEB_TESTS).id for _ in range(count)])
        _wait_until_none_is_open(parts)
        yield
    finally:
        for process in running:
            process.terminate()
        for process in running:
            process.wait(timeout=60)


if __name__ == "__main__":
    sys.exit(main())
