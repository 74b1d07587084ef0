"""How gunicorn runs the web; it reads this module as its configuration (`--config python:service.web_process`).

The master imports the app once and every worker is a fork of it, so a worker is there at once. What must not be
shared between processes (connections, threads) is opened by `create_app`, which each worker calls for itself.
"""

import gc
import importlib
import logging
import os
import shutil
import threading
from pathlib import Path
from typing import Any

from gunicorn.glogging import Logger

from service.logs import start_logging
from service.settings import settings_from
from service.web_worker import GatheringWorker

COUNTS_OF_PROCESSES = "PROMETHEUS_MULTIPROC_DIR"
GATE = "DISCWRIGHT_GATE"  # as `service.commands.web` has it
CHILDREN = "discwright computing children"
WALK = "layout.walk"
WAITING_SHARE = 0.25  # of the threads, for requests that wait and streams of events
COMPUTING_SHARE = 0.6  # of the threads, for requests that compute or wait for it; the rest is for all others
WARM_AFTER_S = 0.5  # s; first the requests that waited for the start


class OneLog(Logger):  # type: ignore[misc]
    """Gunicorn's own lines go where all lines go; a line for each request the app writes itself."""

    def setup(self, cfg: Any) -> None:
        """Take no place of its own."""
        self.cfg = cfg
        self._access_log_enabled = False
        work = settings_from(os.environ).work
        start_logging(work)
        for log in (self.error_log, self.access_log):
            log.handlers[:] = []
            log.propagate = True
        # That it starts and stops its processes is for who looks for a fault.
        self.error_log.setLevel(logging.DEBUG if work.log_level == "debug" else logging.WARNING)

    def reopen_files(self) -> None:
        """There are none."""

    def close_on_exec(self) -> None:
        """There are no files."""


# Names that gunicorn knows.
wsgi_app = "service.web_process:app_with_children()"
worker_class = GatheringWorker
logger_class = OneLog
control_socket_disable = True
timeout = 120  # s; a worker that gives no sign of life for so long is replaced
# A connection is closed after its answer: a new one costs little on a network where a proxy stands before us.
keepalive = 0


def on_starting(server: Any) -> None:
    """Import what the workers will need, once for all of them, and see to the folder of their counts."""
    Path(os.environ[COUNTS_OF_PROCESSES]).mkdir(parents=True, exist_ok=True)
    importlib.import_module("service.app")
    gate = os.environ.pop(GATE, None)
    if gate is not None:
        os.read(int(gate), 1)  # ends when `serve` has opened the database, or has ended itself
        os.close(int(gate))


def app_with_children() -> Any:
    """The app of a web process, whose layouts are computed in children of it. The first gets warm in good time."""
    from service.app import create_app  # noqa: PLC0415 -- the master has imported it, and no one else need to
    from service.computing.children import Children  # noqa: PLC0415 -- as above
    from service.computing.messages import ChildSetup  # noqa: PLC0415 -- as above

    settings = settings_from(os.environ)
    children = Children(ChildSetup(planner=WALK, memory_mib=settings.work.plan_memory_mib))
    app = create_app(settings, children=children)
    app.extensions[CHILDREN] = children
    return app


def post_worker_init(worker: Any) -> None:
    """Tell the app when its process stops and how many may wait, and have a child warm before the first tune."""
    from service.api.computing_queue import (  # noqa: PLC0415 -- the app is imported by now, and not before
        open_computing_queue,
    )
    from service.api.stopping import tell_stopping  # noqa: PLC0415 -- as above
    from service.api.waiting_room import open_waiting_room  # noqa: PLC0415 -- as above

    tell_stopping(worker.wsgi, lambda: not worker.alive)
    open_waiting_room(worker.wsgi, int(worker.cfg.threads * WAITING_SHARE))
    open_computing_queue(worker.wsgi, max(1, int(worker.cfg.threads * COMPUTING_SHARE)))
    warming = threading.Timer(WARM_AFTER_S, _warm, (worker.wsgi.extensions[CHILDREN],))
    warming.daemon = True
    warming.start()


def on_exit(server: Any) -> None:
    """Remove the counts."""
    shutil.rmtree(os.environ[COUNTS_OF_PROCESSES], ignore_errors=True)


def _warm(children: Any) -> None:
    children.warm()
    gc.freeze()  # what is imported stays: it need not be looked at for garbage
