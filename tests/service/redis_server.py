"""A Redis of one's own on loopback, that can be killed as a power cut would kill it, and started again."""

import shutil
import socket
import subprocess
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

STARTS_WITHIN_S = 60.0


class RedisServer:
    """A running Redis, which keeps nothing on disk."""

    def __init__(self, program: str, folder: Path) -> None:
        with socket.socket() as probe:
            probe.bind(("127.0.0.1", 0))
            self._port = int(probe.getsockname()[1])
        options = ("--port", str(self._port), "--bind", "127.0.0.1", "--save", "", "--dir", str(folder))
        self._command = (program, *options)
        self.start()

    @property
    def url(self) -> str:
        """Of its first database."""
        return f"redis://127.0.0.1:{self._port}/0"

    def start(self) -> None:
        """Start it where it was, with nothing in it."""
        self._process = subprocess.Popen(self._command, stdout=subprocess.DEVNULL)
        last_s = time.monotonic() + STARTS_WITHIN_S
        while True:
            try:
                socket.create_connection(("127.0.0.1", self._port), 1).close()
                return
            except OSError:
                assert self._process.poll() is None, "it ended as it started"
                assert time.monotonic() < last_s, "it did not start in time"
                time.sleep(0.05)

    def kill(self) -> None:
        """End it with SIGKILL: what it held is lost."""
        self._process.kill()
        self._process.wait()


@contextmanager
def own_redis(folder: Path) -> Iterator[RedisServer]:
    """Start one, and kill it at the end; skips the test where there is none to start, which `tests/run` tells."""
    program = shutil.which("redis-server")
    if program is None:
        pytest.skip("redis-server is not on the PATH")
    server = RedisServer(program, folder)
    try:
        yield server
    finally:
        server.kill()
