"""The long test of faults: 60 kills of workers, 30 of web workers and 10 of the master under 200 orders over HTTP.

`python tests/faults/long.py [SEED] [sqlite|postgresql]` prints its figures, and ends with 1 where anything was lost,
doubled or answered wrongly. With SQLite the database is locked for 40 s meanwhile; PostgreSQL is stopped hard for 3 s
and for 30 s.
"""

import sys
import tempfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import partial
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.faults.fleet import hold_database_of
from tests.faults.served import Kind
from tests.faults.server import own_server
from tests.faults.whole import Between, Ordeal, bear
from tests.service.conftest import new_database

KILLS = {Kind.WORKER: 60, Kind.CHILD: 10, Kind.WEB: 30, Kind.WEB_MASTER: 5, Kind.MASTER: 10}
ORDERS = 200
EVERY_S = 1.0  # s; between two orders, on the average
WORKERS = 2
LOCKED_S = 40.0
CUTS_S = (3.0, 30.0)


def main(seed: int, names: list[str]) -> int:
    """Run on both databases, or those named; gives the exit code."""
    return 0 if all([_run(name, seed) for name in names or ["sqlite", "postgresql"]]) else 1


def _run(name: str, seed: int) -> bool:
    ordeal = Ordeal(orders=ORDERS, every_s=EVERY_S, workers=WORKERS, kills=KILLS, seed=seed)
    with tempfile.TemporaryDirectory() as text, _database(name, Path(text)) as (url, between):
        outcome = bear(Path(text), ordeal, database_url=url, between=between)
        _say(f"{name}, seed {seed}", *outcome.figures, *outcome.faults)
        if outcome.faults:
            lines = (Path(text) / "log").read_text(errors="replace").splitlines()
            _say(*[line for line in lines if " INFO " not in line][-200:])
    return not outcome.faults


@contextmanager
def _database(name: str, folder: Path) -> Iterator[tuple[str | None, Between]]:
    """Its URL, and when it is taken away."""
    count = sum(KILLS.values())
    if name == "sqlite":
        yield None, {count // 2: partial(hold_database_of, folder, LOCKED_S)}
        return
    with own_server() as server:
        cuts: dict[int, Callable[[], None]] = {
            count * (number + 1) // 3: partial(server.cut_for, cut_s) for number, cut_s in enumerate(CUTS_S)
        }
        yield new_database(server.url), cuts


def _say(*lines: str) -> None:
    sys.stdout.write("\n  ".join(lines) + "\n")
    sys.stdout.flush()


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 1, sys.argv[2:]))
