"""The service as `discwright serve` starts it, in a folder of its own on loopback, with rates that refuse nobody."""

import os
import re
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from urllib.request import ProxyHandler, build_opener

from tests.service.access.free_port import free_port

TOP = Path(__file__).resolve().parents[2]
START_WITHIN_S = 60.0
END_WITHIN_S = 60.0
MANY = "1000000/60"
KEY = re.compile(r"dw_\S+")


@dataclass(frozen=True, slots=True, kw_only=True)
class Service:
    """One that runs.

    Attributes:
        port: Where it listens.
        pid: Of the process that keeps all others.
        key: The secret of the shop's own key.
        log: What its processes write.
    """

    port: int
    pid: int
    key: str
    log: Path

    def faults(self) -> list[str]:
        """Lines of the log that tell of a failure."""
        lines = self.log.read_text(errors="replace").splitlines()
        return [line for line in lines if "Traceback" in line or " ERROR " in line or " CRITICAL " in line]


@contextmanager
def serving(folder: Path) -> Iterator[Service]:
    """A service of its own, from when it answers; stopped at the end."""
    port, log, said = free_port(), folder / "log", folder / "said"
    ours = ("DISCWRIGHT", "DATABASE_URL")
    environment = {
        **{name: text for name, text in os.environ.items() if not name.startswith(ours)},
        "DISCWRIGHT_DATA": str(folder / "data"),
        "DISCWRIGHT_CACHE": str(folder / "layouts"),
        "DISCWRIGHT_READ_RATE": MANY,
        "DISCWRIGHT_WRITE_RATE": MANY,
        "DISCWRIGHT_LOG": "text",
        "DISCWRIGHT_LOG_LEVEL": "warning",
    }
    command = [sys.executable, "-m", "service.commands.main", "serve", "--port", str(port)]
    with log.open("wb") as errors, said.open("wb") as output:
        process = subprocess.Popen(command, cwd=TOP, env=environment, stdout=output, stderr=errors)
        try:
            _wait_until_it_answers(port, process)
            key = KEY.search(said.read_text())
            assert key is not None, "the first start told no key"
            yield Service(port=port, pid=process.pid, key=key[0], log=log)
        finally:
            process.terminate()
            process.wait(END_WITHIN_S)


def _wait_until_it_answers(port: int, process: "subprocess.Popen[bytes]") -> None:
    until_s = time.monotonic() + START_WITHIN_S
    asking = build_opener(ProxyHandler({}))
    while True:
        try:
            with asking.open(f"http://127.0.0.1:{port}/healthz", timeout=5):
                return
        except OSError:
            if process.poll() is not None or time.monotonic() > until_s:
                raise SystemExit("the service did not start") from None
            time.sleep(0.1)
