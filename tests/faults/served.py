"""`discwright serve` as real processes on loopback, and workers beside it: killed, and started again as by an init.

Only what was started here is touched.
"""

import os
import signal
import socket
import subprocess
import sys
import threading
import time
from collections import Counter
from collections.abc import Mapping
from enum import StrEnum
from pathlib import Path
from urllib.request import urlopen

from tests.faults.fleet import children_of

TOP = Path(__file__).parents[2]
COMMAND = (sys.executable, "-m", "service.commands.main")
START_WITHIN_S = 90.0
END_WITHIN_S = 60.0
AGAIN_S = 0.2  # s; before what has ended is started again, as the port is let go of


class Kind(StrEnum):
    """What may be killed."""

    WORKER = "workers"
    CHILD = "planning children"
    WEB = "web workers"
    WEB_MASTER = "masters of the web"
    MASTER = "masters"


class Served:
    """A service that is kept alive."""

    def __init__(self, folder: Path, environment: Mapping[str, str], *, workers: int) -> None:
        """Start it, and wait until it answers.

        Args:
            folder: Where its log goes.
            environment: The variables of the service.
            workers: `discwright work` beside the one of `discwright serve`.
        """
        with socket.socket() as probe:
            probe.bind(("127.0.0.1", 0))
            self.port = probe.getsockname()[1]
        self.url = f"http://127.0.0.1:{self.port}"
        self.kills: Counter[Kind] = Counter()
        self.starts = 0
        self.left_behind: list[int] = []
        self.log = folder / "log"
        self._file = self.log.open("ab")
        ours = ("DISCWRIGHT", "DATABASE_URL")
        self._environment = {
            **{name: value for name, value in os.environ.items() if not name.startswith(ours)},
            **environment,
            "PYTHONPATH": str(TOP),
            "DISCWRIGHT_SHOWN_TO": str(folder),  # read by nobody: by it a process is known for one of these
        }
        self._mark = f"DISCWRIGHT_SHOWN_TO={folder}".encode()
        self._lock = threading.Lock()
        self._is_over = False
        serve = ("serve", "--port", str(self.port), "--slots", "1")
        self._commands = [serve, *[("work", "--slots", "1")] * workers]
        self._processes = [self._start(command) for command in self._commands]
        self._keeper = threading.Thread(target=self._keep_alive, daemon=True)
        self._keeper.start()
        self._wait_until_it_answers()

    def pids(self, kind: Kind) -> list[int]:
        """Of the processes of a kind that live now."""
        with self._lock:
            serve, *workers = [process.pid if process.poll() is None else 0 for process in self._processes]
        below = children_of(serve) if serve else []
        web_masters = [pid for pid in below if "gunicorn" in _words_of(pid)]
        workers = [*filter(None, workers), *(pid for pid in below if "work" in _words_of(pid))]
        match kind:
            case Kind.MASTER:
                return [serve] if serve else []
            case Kind.WEB_MASTER:
                return web_masters
            case Kind.WEB:
                return [pid for master in web_masters for pid in children_of(master)]
            case Kind.WORKER:
                return workers
        return [pid for worker in workers for pid in children_of(worker)]

    def kill(self, pid: int, kind: Kind) -> bool:
        """End one of its processes without a word; False where it had ended before."""
        try:
            os.kill(pid, signal.SIGKILL)
        except ProcessLookupError:
            return False
        self.kills[kind] += 1
        return True

    def stop(self) -> list[int]:
        """Tell all to stop, and give the codes they end with; what outlives them is ended, and noted."""
        with self._lock:
            self._is_over = True
        self._keeper.join()
        for process in self._processes:
            process.terminate()
        codes = [process.wait(END_WITHIN_S) for process in self._processes]
        until_s = time.monotonic() + END_WITHIN_S
        while (alive := self._alive()) and time.monotonic() < until_s:
            time.sleep(0.1)
        for pid in alive:
            os.kill(pid, signal.SIGKILL)
        self.left_behind = alive
        self._file.close()
        return codes

    def _alive(self) -> list[int]:
        """What was started here and lives: killed masters leave processes that end by themselves."""
        return [pid for path in Path("/proc").glob("[0-9]*") if self._is_ours(path) and (pid := int(path.name))]

    def _is_ours(self, path: Path) -> bool:
        try:
            return self._mark in (path / "environ").read_bytes().split(b"\0")
        except OSError:
            return False

    def _keep_alive(self) -> None:
        while not self._is_over:
            with self._lock:
                for place, process in enumerate(self._processes):
                    if process.poll() is not None and not self._is_over:
                        self._processes[place] = self._start(self._commands[place])
            time.sleep(AGAIN_S)

    def _start(self, command: tuple[str, ...]) -> "subprocess.Popen[bytes]":
        self.starts += 1
        return subprocess.Popen(
            [*COMMAND, *command],
            env=self._environment,
            cwd=TOP,
            stdin=subprocess.DEVNULL,
            stdout=self._file,
            stderr=self._file,
        )

    def _wait_until_it_answers(self) -> None:
        until_s = time.monotonic() + START_WITHIN_S
        while True:
            try:
                with urlopen(f"{self.url}/healthz", timeout=5):
                    return
            except OSError:
                if time.monotonic() > until_s:
                    self.stop()
                    raise TimeoutError(self.log.read_text()[-3000:]) from None
                time.sleep(0.1)


def _words_of(pid: int) -> list[str]:
    try:
        return Path(f"/proc/{pid}/cmdline").read_text().split("\0")
    except OSError:
        return []
