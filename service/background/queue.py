"""The queue that tells the workers of an order: it carries ids, and nothing that must not be lost.

The table of orders is the truth. A message that is lost is made good by the sweep (`service.background.sweeping`);
one that comes twice or too late finds its order taken or finished. So sending never fails for the sender, and a
queue that is away only makes orders wait for the next sweep.

Of huey its storages are used and not its tasks: a message is an id in plain letters, which can be read by anyone
and run by nobody, where a task is a pickled object that runs in whoever reads it.
"""

import logging
import sqlite3
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from huey.exceptions import ConfigurationError
from huey.storage import BaseStorage, PostgresStorage, RedisStorage, SqliteStorage
from sqlalchemy import make_url

NAME = "orders"
MOST_ID_BYTES = 48  # bytes; as long as the column of ids

POLL_S = 0.05  # s; between looks into an SQLite file, which tells nobody that it has changed
READ_TIMEOUT_S = 1  # s; a server is asked again after so long, so that a worker sees in time that it shall stop
TIMEOUT_S = 5  # s; a server on the same network answers within milliseconds
AWAY_S = 5.0  # s; a queue that was away is left in peace for so long: nobody waits for it again and again

log = logging.getLogger(__name__)


class QueueAwayError(Exception):
    """The queue does not answer; the text says why, in one line."""


class Queue:
    """The queue. Made after a process has forked, never before; its threads share it."""

    def __init__(self, url: str) -> None:
        """Get ready to connect; the first message does.

        Args:
            url: sqlite:///path, postgresql://… or redis://…, as `ServiceSettings.queue_url` gives it.
        """
        self._url = url
        self._opening = threading.Lock()
        self._storage: BaseStorage | None = None
        self._polls = url.startswith("sqlite:")
        self._away_until_s = 0.0

    def send(self, order_id: str) -> bool:
        """Tell the workers of an order, after the transaction that made it is committed.

        Returns:
            Whether the queue took it. Where it did not, that is logged, and the sweep will find the order.
        """
        try:
            self._do(lambda storage: storage.enqueue(order_id.encode("ascii")))
        except QueueAwayError as fault:
            log.warning("the queue did not take an order; the sweep will find it: %s", fault, extra=_of(order_id))
            return False
        return True

    def receive(self, within_s: float) -> str | None:
        """The next id; None where there is none within about that time. Nobody else gets it.

        Args:
            within_s: Seconds to wait; a server is asked once, for at most a second. For 0 nobody waits.

        Raises:
            QueueAwayError: The queue does not answer.
        """
        if not self._polls and within_s <= 0 and self.length() == 0:  # a server would be waited for
            return None
        last_s = time.monotonic() + within_s
        while True:
            message: bytes | None = self._do(lambda storage: storage.dequeue())
            if message is not None:
                return _id_in(bytes(message))
            if not self._polls or time.monotonic() >= last_s:
                return None
            time.sleep(POLL_S)

    def length(self) -> int:
        """How many messages wait.

        Raises:
            QueueAwayError: The queue does not answer.
        """
        return int(self._do(lambda storage: storage.queue_size()))

    def close(self) -> None:
        """Let this thread's connection and the shared one go; whoever uses the queue again opens it again."""
        with self._opening:
            if self._storage is not None:
                self._storage.close()

    def _do(self, work: Callable[[BaseStorage], Any]) -> Any:
        if time.monotonic() < self._away_until_s:
            raise QueueAwayError("it was away a moment ago")
        try:
            with _told():
                return work(self._opened())
        except QueueAwayError:
            self._away_until_s = time.monotonic() + AWAY_S
            raise

    def _opened(self) -> BaseStorage:
        with self._opening:
            if self._storage is None:
                self._storage = _open(self._url)
            return self._storage


def _open(url: str) -> BaseStorage:
    if url.startswith("sqlite:"):
        path = Path(str(make_url(url).database))
        path.parent.mkdir(parents=True, exist_ok=True)
        return SqliteStorage(NAME, filename=str(path), timeout=TIMEOUT_S)
    if url.startswith("postgresql:"):
        # The last two keep a thread from waiting for a machine that has gone without a word.
        return PostgresStorage(
            NAME,
            dsn=url,
            table_prefix="queue",
            read_timeout=READ_TIMEOUT_S,
            connect_timeout=TIMEOUT_S,
            keepalives_idle=2 * TIMEOUT_S,
            tcp_user_timeout=2 * TIMEOUT_S * 1000,
        )
    from redis import ConnectionPool  # noqa: PLC0415 -- only who uses Redis must have it

    pool = ConnectionPool.from_url(
        url, socket_connect_timeout=TIMEOUT_S, socket_timeout=TIMEOUT_S, health_check_interval=10 * TIMEOUT_S
    )
    return RedisStorage(f"discwright_{NAME}", connection_pool=pool, read_timeout=READ_TIMEOUT_S)


@contextmanager
def _told() -> Iterator[None]:
    """Faults of any queue in our own words."""
    try:
        yield
    except (sqlite3.Error, OSError, ImportError, ConfigurationError) as fault:
        raise QueueAwayError(_in_one_line(fault)) from fault
    except Exception as fault:
        # psycopg and redis need not be there; their faults are known by where they were made.
        if type(fault).__module__.partition(".")[0] not in {"psycopg", "redis"}:
            raise
        raise QueueAwayError(_in_one_line(fault)) from fault


def _in_one_line(fault: Exception) -> str:
    return f"{type(fault).__name__}: {' '.join(str(fault).split())}"


def _id_in(message: bytes) -> str | None:
    if len(message) > MOST_ID_BYTES or not message.isascii():
        log.warning("the queue held a message of %d bytes that is no order's id; it was dropped", len(message))
        return None
    return message.decode("ascii")


def _of(order_id: str) -> dict[str, str]:
    return {"order_id": order_id}
