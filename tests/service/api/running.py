"""The service as it runs, on loopback: two web processes, and a worker that plans where one is wanted."""

import os
import socket
import subprocess
import sys
import time
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from urllib.request import urlopen

from service.access.first_start import first_start
from service.moments import utc_now
from tests.service.conftest import environment_of, parts_of

START_WITHIN_S = 60.0
END_WITHIN_S = 30.0
MANY = "1000000/60"


@dataclass(frozen=True, slots=True, kw_only=True)
class Running:
    """A running service.

    Attributes:
        url: Where it is.
        key: The secret of a key that may do everything.
        log: What its processes write.
        environment: The variables that they are started with.
    """

    url: str
    key: str
    log: Path
    environment: Mapping[str, str]


@contextmanager
def running(
    folder: Path, database_url: str | None, *, with_worker: bool, more: Mapping[str, str] | None = None
) -> Iterator[Running]:
    """Start a service of its own in a folder, with more variables where they are wanted, and stop it at the end."""
    parts = parts_of(folder, database_url)
    first = first_start(parts.store, utc_now())
    assert first is not None
    parts.store.close()
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    variables = {"DISCWRIGHT_ON_LOOPBACK": "yes", "DISCWRIGHT_READ_RATE": MANY, "DISCWRIGHT_WRITE_RATE": MANY}
    environment = {**os.environ, **environment_of(folder, database_url), **variables, **(more or {})}
    web = ["-m", "service.commands.main", "web", "--host", "127.0.0.1", "--port", str(port), "--workers", "2"]
    commands = [web]
    if with_worker:
        commands.append(["-m", "service.commands.main", "work", "--slots", "1"])
    service = Running(url=f"http://127.0.0.1:{port}", key=first.secret, log=folder / "log", environment=environment)
    with service.log.open("w") as log:
        processes = [
            subprocess.Popen([sys.executable, *command], env=environment, stdout=log, stderr=log)
            for command in commands
        ]
        try:
            _wait_until_it_answers(service)
            yield service
        finally:
            for process in processes:
                process.terminate()
            for process in processes:
                process.wait(timeout=END_WITHIN_S)


def _wait_until_it_answers(service: Running) -> None:
    until_s = time.monotonic() + START_WITHIN_S
    while True:
        try:
            with urlopen(f"{service.url}/healthz", timeout=5):
                return
        except OSError:
            assert time.monotonic() < until_s, service.log.read_text()
            time.sleep(0.2)
