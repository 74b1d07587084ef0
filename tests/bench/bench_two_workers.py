"""How much sooner two worker processes plan a run of 300 on PostgreSQL than one does, and what a core plans an hour.

Each order is laid out for real: the demo tune's first seconds, each under a title of its own, so that none is the same.
"""

import json
import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import replace
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from service.parts import Parts
from tests.bench.opponents.table import say, say_table, told
from tests.faults.fleet import wait_until_none_is_open
from tests.faults.ordering import look
from tests.faults.server import own_server
from tests.service.conftest import environment_of, new_database, parts_of
from tests.service.shop import ASKED, open_shop, placed

TOP = Path(__file__).resolve().parents[2]
ORDERS = 300
PASSAGE = {"from_s": 0, "to_s": 8}
WITHIN_S = 1800.0
GOAL = 1.7  # times what one worker plans, by two


def main() -> int:
    """Measure one worker, then two, on the same database."""
    with own_server() as server, tempfile.TemporaryDirectory() as text:
        folder, url = Path(text), new_database(server.url)
        parts = parts_of(folder, url)
        open_shop(parts)
        environment = environment_of(folder, url)
        took_s = {count: _took_s(parts, environment, count) for count in (1, 2)}
        kept_bytes = sum(path.stat().st_size for path in (folder / "data" / "files").rglob("*") if path.is_file())
        parts.store.close()
    say_table(
        ["workers", "s for 300 orders", "of the time of one", "orders an hour"],
        [[str(count), f"{s:.1f}", f"{s / took_s[1]:.2f}", f"{ORDERS / s * 3600:.0f}"] for count, s in took_s.items()],
    )
    told("two workers: orders planned, times those of one", took_s[1] / took_s[2], GOAL, most=False)
    say(f"files kept: {kept_bytes / (2 * ORDERS) * 1000 / 1e6:.0f} MB for 1,000 orders of this size")
    return 0


def _took_s(parts: Parts, environment: Mapping[str, str], count: int) -> float:
    with _workers(environment, count):
        warm = [_placed(parts, f"warm {count} {number}") for number in range(2 * count)]
        wait_until_none_is_open(parts, warm, within_s=WITHIN_S)
    ids = [_placed(parts, f"{count} {number}") for number in range(ORDERS)]
    with _workers(environment, count):
        first = ids[0]
        while _is_untouched(parts, first):  # from when work begins: starting Python is no planning
            time.sleep(0.01)
        begun_s = time.monotonic()
        wait_until_none_is_open(parts, ids, within_s=WITHIN_S)
        return time.monotonic() - begun_s


def _placed(parts: Parts, title: str) -> str:
    settings = json.dumps({"title": title, "passage": PASSAGE}).encode()
    return placed(parts, replace(ASKED, settings=settings)).id


def _is_untouched(parts: Parts, order_id: str) -> bool:

    return look(parts, order_id).state == "received"


@contextmanager
def _workers(environment: Mapping[str, str], count: int) -> Iterator[None]:
    command = [sys.executable, "-m", "service.commands.main", "work", "--slots", "1"]
    haste = {"DISCWRIGHT_SWEEP_S": "1"}  # orders are placed without the web, which would send their ids
    running = [
        subprocess.Popen(command, cwd=TOP, env={**os.environ, **environment, **haste}, stderr=subprocess.DEVNULL)
        for _ in range(count)
    ]
    try:
        yield
    finally:
        for process in running:
            process.terminate()
        for process in running:
            process.wait(timeout=60)


if __name__ == "__main__":
    sys.exit(main())
