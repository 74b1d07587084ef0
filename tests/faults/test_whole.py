"""The whole service, its processes killed under a stream of orders over HTTP: nothing is lost, and nothing doubled.

A short version of `tests/faults/long.py`: fewer kills, the same chances.
"""

from contextlib import ExitStack
from pathlib import Path

import pytest

from tests.faults.served import Kind
from tests.faults.server import own_server
from tests.faults.whole import Ordeal, bear
from tests.service.conftest import new_database

KILLS = {
    "sqlite": {Kind.WORKER: 1, Kind.WEB: 2, Kind.WEB_MASTER: 1},
    "postgresql": {Kind.WORKER: 1, Kind.WEB: 1, Kind.MASTER: 1},
}
ORDERS = 6


@pytest.mark.parametrize("database", ["sqlite", "postgresql"])
def test_every_order_ends_right_once_and_is_told_though_processes_are_killed(tmp_path: Path, database: str) -> None:
    ordeal = Ordeal(orders=ORDERS, every_s=0.2, workers=0, kills=KILLS[database], seed=23)
    with ExitStack() as until_end:
        url = new_database(until_end.enter_context(own_server()).url) if database == "postgresql" else None

        outcome = bear(tmp_path, ordeal, database_url=url)

    assert outcome.faults == []
    assert outcome.kills == KILLS[database]
