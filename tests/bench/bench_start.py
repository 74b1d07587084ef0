"""How long from `discwright serve` to the first answer: in a new folder, and in one that is there. Prints, never fails.

Each start is a process of its own, on loopback, asked for /healthz every few milliseconds until it answers. The time
of the import of `layout` stands beside it, as the floor of every command.
"""

import http.client
import os
import signal
import socket
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.bench.opponents.table import say, told

TIMES = 7
ASKED_EVERY_S = 0.01
GIVE_UP_S = 60.0
START_GOAL_S, IMPORT_GOAL_S = 2.5, 0.5


def main() -> None:
    """Measure, and print a table."""
    say(f"load of the machine: {os.getloadavg()[0]:.1f} on {os.cpu_count()} cores; median of {TIMES}, least, most")
    with tempfile.TemporaryDirectory() as folder:
        there = Path(folder) / "there"
        _start_s(there)
        rows = {
            "serve, new folder": [_start_s(Path(folder) / f"new-{number}") for number in range(TIMES)],
            "serve, folder that is there": [_start_s(there) for _ in range(TIMES)],
            "import layout.walk": [_import_s("layout.walk") for _ in range(TIMES)],
            "import layout": [_import_s("layout") for _ in range(TIMES)],
            "import service.app": [_import_s("service.app") for _ in range(TIMES)],
        }
    for name, seconds in rows.items():
        say(f"{name:<28} {statistics.median(seconds):6.2f} s  {min(seconds):6.2f} s  {max(seconds):6.2f} s")
    for name in ("serve, new folder", "serve, folder that is there"):
        told(f"{name}: s to the first answer", statistics.median(rows[name]), START_GOAL_S, most=True)
    told("import layout: s", statistics.median(rows["import layout"]), IMPORT_GOAL_S, most=True)


def _start_s(folder: Path) -> float:
    """Seconds from the start of the command to the end of its first answer."""
    folder.mkdir(exist_ok=True)
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    environment = {
        **{name: text for name, text in os.environ.items() if not name.startswith(("DISCWRIGHT", "DATABASE_URL"))},
        "DISCWRIGHT_DATA": str(folder / "data"),
        "DISCWRIGHT_CACHE": str(folder / "layouts"),
    }
    command = [sys.executable, "-m", "service.commands.main", "serve", "--port", str(port)]
    begun_s = time.monotonic()
    process = subprocess.Popen(command, env=environment, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    try:
        while not _answers(port):
            if process.poll() is not None or time.monotonic() > begun_s + GIVE_UP_S:
                raise SystemExit("the service did not start")
            time.sleep(ASKED_EVERY_S)
        return time.monotonic() - begun_s
    finally:
        process.send_signal(signal.SIGTERM)
        process.wait()


def _answers(port: int) -> bool:
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=GIVE_UP_S)
    try:
        connection.request("GET", "/healthz")
        return connection.getresponse().status == http.HTTPStatus.OK
    except OSError:
        return False
    finally:
        connection.close()


def _import_s(module: str) -> float:
    text = f"import time; begun = time.monotonic(); import {module}; print(time.monotonic() - begun)"
    return float(subprocess.run([sys.executable, "-c", text], check=True, capture_output=True).stdout)


if __name__ == "__main__":
    main()
