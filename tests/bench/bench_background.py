"""How many orders workers plan a second where planning costs nothing, and how soon an order is planned.

Says what the service itself costs: the queue, the lease, the child, the files and the transactions.
"""

import sys
import tempfile
import time
from collections.abc import Mapping
from pathlib import Path
from statistics import median

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from service.background.queue import Queue
from service.parts import Parts
from tests.bench.opponents.table import say, say_table
from tests.faults.fleet import Fleet, wait_until_none_is_open
from tests.faults.ordering import look, place, tune_called
from tests.faults.server import own_server
from tests.service.conftest import environment_of, new_database, parts_of
from tests.service.shop import open_shop

ORDERS = 60
LONE_ORDERS = 12
WITHIN_S = 300.0


def main() -> int:
    """Measure on both databases."""
    rows = []
    with own_server() as server:
        for name, url in (("SQLite", None), ("PostgreSQL", new_database(server.url))):
            rows.append([name, *_measured(url)])
            say(f"{name}: {rows[-1]}")
    say(f"{ORDERS} orders at once, then {LONE_ORDERS} one by one; a planner that costs nothing")
    say_table(
        ["database", "placed/s", "1 worker, orders/s", "2 workers, orders/s", "lone order, ms (p50)", "ms (worst)"],
        rows,
    )
    return 0


def _measured(url: str | None) -> list[str]:
    with tempfile.TemporaryDirectory() as folder:
        parts = parts_of(Path(folder), url)
        open_shop(parts)
        environment = environment_of(Path(folder), url)
        begun_s = time.monotonic()
        ids = _placed(parts, ORDERS, "first")
        placed_s = time.monotonic() - begun_s
        one_s = _took_s(parts, environment, ids, Path(folder), workers=1)
        two_s = _took_s(parts, environment, _placed(parts, ORDERS, "second"), Path(folder), workers=2)
        waits_ms = _waits_ms(parts, environment, Path(folder))
        parts.store.close()
    return [
        f"{ORDERS / placed_s:.0f}",
        f"{ORDERS / one_s:.1f}",
        f"{ORDERS / two_s:.1f}",
        f"{median(waits_ms):.0f}",
        f"{max(waits_ms):.0f}",
    ]


def _placed(parts: Parts, count: int, kind: str) -> list[str]:
    return [place(parts, tune_called(f"{kind} {number}")) for number in range(count)]


def _took_s(parts: Parts, environment: Mapping[str, str], ids: list[str], folder: Path, *, workers: int) -> float:
    fleet = _warm_fleet(parts, environment, folder, workers=workers)
    begun_s = time.monotonic()
    _send(parts, ids)
    wait_until_none_is_open(parts, ids, within_s=WITHIN_S)
    took_s = time.monotonic() - begun_s
    fleet.stop()
    return took_s


def _waits_ms(parts: Parts, environment: Mapping[str, str], folder: Path) -> list[float]:
    fleet = _warm_fleet(parts, environment, folder, workers=1)
    found = []
    for number in range(LONE_ORDERS):
        begun_s = time.monotonic()
        order_id = place(parts, tune_called(f"lone {number}"))
        _send(parts, [order_id])
        while look(parts, order_id).state != "ready":
            time.sleep(0.003)
        found.append((time.monotonic() - begun_s) * 1000)
        time.sleep(0.037)  # so that the looks into an SQLite queue are met at all their moments
    fleet.stop()
    return found


def _warm_fleet(parts: Parts, environment: Mapping[str, str], folder: Path, *, workers: int) -> Fleet:
    """Workers whose children have all planned: as many slow orders as slots show that each is there."""
    fleet = Fleet({**environment, "DISCWRIGHT_SWEEP_S": "3600"}, folder / "log", workers=workers)
    ids = [place(parts, tune_called(f"do:sleep 5; {number}")) for number in range(workers)]
    _send(parts, ids)
    wait_until_none_is_open(parts, ids, within_s=WITHIN_S)
    return fleet


def _send(parts: Parts, ids: list[str]) -> None:
    queue = Queue(parts.settings.queue_url)
    for order_id in ids:
        queue.send(order_id)
    queue.close()


if __name__ == "__main__":
    sys.exit(main())
