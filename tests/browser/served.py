"""The whole service as `discwright serve` starts it, with a shop's discs and one order in it."""

import os
import re
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from urllib.request import urlopen

from service.client.client import Client
from tests.service.conftest import environment_of
from tests.service.shop import TUNE

WITHIN_S = 90.0
STOP_WITHIN_S = 40.0
MANY = "1000000/60"
KEY = re.compile(r"^ {2}(\S+)$", re.MULTILINE)
ASKED = {"movement": "fernhollow-31", "cutter": "fibre-laser", "reference": "W-1001"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Served:
    """A running service.

    Attributes:
        url: Where it is.
        key: The secret of the shop's own key, which may do everything.
        places: What stands in addresses of pages, by name.
    """

    url: str
    key: str
    places: dict[str, str]


@contextmanager
def served(folder: Path) -> Iterator[Served]:
    """Start a service of its own in a folder, fill it, and stop it at the end."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    variables = {"DISCWRIGHT_READ_RATE": MANY, "DISCWRIGHT_WRITE_RATE": MANY}
    environment = {**os.environ, **environment_of(folder), **variables}
    log = folder / "log"
    command = [sys.executable, "-m", "service.commands.main", "serve", "--port", str(port)]
    with log.open("w") as out:
        process = subprocess.Popen(command, env=environment, stdout=out, stderr=out)
    try:
        url = f"http://127.0.0.1:{port}"
        _wait_until_it_answers(url, log)
        told = KEY.search(log.read_text())
        assert told is not None, log.read_text()
        yield Served(url=url, key=told[1], places=_filled(Client(url, told[1]), Client(url)))
    finally:
        process.send_signal(signal.SIGTERM)
        process.wait(timeout=STOP_WITHIN_S)


def _filled(client: Client, open_to_all: Client) -> dict[str, str]:
    """Lay discs out for whoever has no key, and order one; gives what stands in addresses for them."""
    order = client.order(TUNE, ASKED)  # type: ignore[arg-type]  # the fields left out have defaults
    discs = {
        name: open_to_all.make_layout({"tune": TUNE}, {"movement": movement}).json["fingerprint"]
        for name, movement in (("disc", "fernhollow-31"), ("faulty", "tarnlight-17"))
    }
    planned = client.wait_for(order["id"], frozenset({"ready", "attention"}), within_s=WITHIN_S)
    proof = client.make_proof_link(planned["id"])["href"]
    return {
        **discs,
        "order": planned["id"],
        "proof": proof.rsplit("/", 1)[-1],
    }


def _wait_until_it_answers(url: str, log: Path) -> None:
    until_s = time.monotonic() + WITHIN_S
    while True:
        try:
            with urlopen(f"{url}/healthz", timeout=5):
                return
        except OSError:
            assert time.monotonic() < until_s, log.read_text()
            time.sleep(0.1)
