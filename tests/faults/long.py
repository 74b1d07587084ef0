"""The long test of workers: 60 kills under a stream of 200 orders, on SQLite and on PostgreSQL, and cuts between.

`python tests/faults/long.py [SEED]` prints its figures, and ends with 1 where anything was lost or doubled.
"""

import logging
import random
import sys
import tempfile
import time
from collections.abc import Callable
from functools import partial
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from service.parts import Parts
from tests.faults.fleet import Fleet, Stream, hold_database, wait_for, wait_until_none_is_open
from tests.faults.judging import assert_all_planned_once
from tests.faults.ordering import states
from tests.faults.server import own_server
from tests.service.conftest import environment_of, new_database, parts_of
from tests.service.shop import open_shop

KILLS = 60
ORDERS = 200
EVERY_S = 1.0  # s; between two orders, on the average
WORKERS = 3
AIMS_S = 0.5  # s; the most between seeing an order in hand and the kill
LOCKED_S = 40.0
CUTS_S = (3.0, 30.0)
ALL_WITHIN_S = 1800.0
HASTE = {"DISCWRIGHT_LEASE_S": "3", "DISCWRIGHT_SWEEP_S": "1", "DISCWRIGHT_ATTEMPTS": "20"}


def main(seed: int) -> int:
    """Run on both databases; gives the exit code."""
    logging.getLogger("service").setLevel(logging.ERROR)  # the workers' own logs are kept apart
    outcomes = [_run("SQLite", seed, None, {KILLS // 2: _lock})]
    with own_server() as server:
        cuts = {KILLS // 3 * (number + 1): _cut(server.cut_for, cut_s) for number, cut_s in enumerate(CUTS_S)}
        outcomes.append(_run("PostgreSQL", seed, new_database(server.url), cuts))
    return 0 if all(outcomes) else 1


def _run(name: str, seed: int, url: str | None, between: dict[int, Callable[[Path], None]]) -> bool:
    chance = random.Random(seed)
    with tempfile.TemporaryDirectory() as text:
        folder = Path(text)
        parts = parts_of(folder, url)
        open_shop(parts)
        begun_s = time.monotonic()
        fleet = Fleet({**environment_of(folder, url), **HASTE}, folder / "log", workers=WORKERS)
        stream = Stream(parts, orders=ORDERS, every_s=EVERY_S, chance=chance)
        for number in range(KILLS):
            due = number * ORDERS // KILLS  # so many orders are placed before this kill
            wait_for(partial(_is_time, parts, stream, due), within_s=ALL_WITHIN_S)
            between.get(number, _nothing)(folder)
            time.sleep(chance.uniform(0.0, AIMS_S))
            fleet.kill_one(chance)
        stream.wait()
        ids = list(stream.tunes)
        wait_until_none_is_open(parts, ids, within_s=ALL_WITHIN_S)
        codes = fleet.stop()
        try:
            assert_all_planned_once(parts, stream.tunes, folder)
            told, is_right = "every order planned exactly once", True
        except AssertionError as fault:
            told, is_right = f"WRONG: {fault}", False
        _say(
            f"{name}, seed {seed}: {len(ids)} orders, {fleet.kills} kills, {fleet.starts} starts of workers, "
            f"{stream.refusals} orders refused and placed again, last codes {codes}, "
            f"{time.monotonic() - begun_s:.0f} s: {told}"
        )
        parts.store.close()
    return is_right


def _is_time(parts: Parts, stream: Stream, due: int) -> bool:
    placed = list(stream.tunes)
    return len(placed) > due and "planning" in states(parts, placed)


def _lock(folder: Path) -> None:
    parts = parts_of(folder)
    hold_database(parts, LOCKED_S)
    parts.store.close()


def _cut(cut_for: Callable[[float], None], cut_s: float) -> Callable[[Path], None]:
    return lambda _: cut_for(cut_s)


def _nothing(_: Path) -> None:
    pass


def _say(line: str) -> None:
    sys.stdout.write(line + "\n")
    sys.stdout.flush()


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 1))
