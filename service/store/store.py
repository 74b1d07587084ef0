"""The database, opened: transactions that read, and transactions that write.

SQLite keeps to one writer at a time. So whoever is going to write says so at the beginning (BEGIN IMMEDIATE) and
waits its turn there; one that read first and wanted to write then would fail, not wait. No transaction is held
over computing or over a request to somewhere else.
"""

import sqlite3
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from datetime import UTC, datetime
from pathlib import Path
from typing import Any, TypeVar

from sqlalchemy import Connection, Engine, create_engine, event, make_url, text
from sqlalchemy.engine.interfaces import DBAPIConnection
from sqlalchemy.exc import DBAPIError, InterfaceError, OperationalError
from sqlalchemy.exc import TimeoutError as PoolTimeoutError
from sqlalchemy.orm import Session
from sqlalchemy.pool import ConnectionPoolEntry

from service.store.faults import StoreBusyError, StoreError, StoreFullError
from service.web_turns import give_up_turn

BUSY_TIMEOUT_S = 30  # s; how long a writer waits its turn
CONNECT_TIMEOUT_S = 5  # s; a server on the same network answers within milliseconds
POOL_SIZE = 10  # connections a process keeps; it opens as many more while more of its threads ask at a time
RETRY_AFTER_S = (0.1, 0.3, 1.0, 3.0)  # s; waits between tries of `again`, so a server's restart is sat out
# PostgreSQL's SQLSTATE classes (appendix A of its manual): 53 no resources, of them 53100 disk full.
DISK_FULL_STATE = "53100"
ANSWERLESS_CLASSES = ("08", "40", "53", "55", "57")  # connection, rollback, resources, lock, shut down

Answer = TypeVar("Answer")


class Store:
    """The database. Made after a process has forked, never before."""

    def __init__(self, url: str) -> None:
        """Get ready to connect; the first transaction does.

        Args:
            url: Of SQLAlchemy, for SQLite or for PostgreSQL with psycopg.
        """
        self.engine = _engine(url)

    @property
    def is_sqlite(self) -> bool:
        """Whether it is a file on this machine."""
        return self.engine.dialect.name == "sqlite"

    @contextmanager
    def reading(self) -> Iterator[Session]:
        """A transaction that only reads.

        Raises:
            StoreBusyError: The database does not answer.
        """
        with _told(), Session(self.engine, expire_on_commit=False) as session, session.begin():
            yield session

    @contextmanager
    def writing(self) -> Iterator[Session]:
        """A transaction that writes; it is committed at the end, and not at all where an exception leaves it.

        Raises:
            StoreBusyError: Another writes for too long, or the database does not answer.
            StoreFullError: There is no room.
        """
        give_up_turn()  # for as long as others write
        writer = self.engine.execution_options(writes=True)
        with _told(), Session(writer, expire_on_commit=False) as session, session.begin():
            session.connection()  # the turn begins here, not at the first statement
            yield session

    def again(self, work: Callable[[Session], Answer]) -> Answer:
        """Write, and try again where the database does not answer: for work that may be done twice.

        A lost connection leaves open whether the transaction was committed, so `work` guards its updates.

        Args:
            work: Called with the session of a transaction that writes, perhaps several times.

        Raises:
            StoreBusyError: It did not answer on the last try either.
            StoreFullError: There is no room.
        """
        for wait_s in RETRY_AFTER_S:
            try:
                with self.writing() as session:
                    return work(session)
            except StoreBusyError:
                time.sleep(wait_s)
        with self.writing() as session:
            return work(session)

    def now(self, session: Session) -> datetime:
        """The moment, by the database's own clock where several machines share it, so that leases agree."""
        if self.is_sqlite:
            return datetime.now(UTC)
        told: datetime = session.execute(text("SELECT clock_timestamp()")).scalar_one()
        return told.astimezone(UTC)

    def close(self) -> None:
        """Let all connections go."""
        self.engine.dispose()


def _engine(url: str) -> Engine:
    asked = make_url(url)
    if asked.get_backend_name() != "sqlite":
        return create_engine(
            asked, pool_pre_ping=True, pool_size=POOL_SIZE, connect_args={"connect_timeout": CONNECT_TIMEOUT_S}
        )
    if asked.database not in (None, "", ":memory:"):
        Path(str(asked.database)).parent.mkdir(parents=True, exist_ok=True)
    engine = create_engine(asked, pool_size=POOL_SIZE, connect_args={"timeout": BUSY_TIMEOUT_S})
    event.listen(engine, "connect", _prepare_sqlite)
    event.listen(engine, "begin", _begin_sqlite)
    return engine


def _prepare_sqlite(connection: DBAPIConnection, _record: ConnectionPoolEntry) -> None:
    raw: Any = connection
    raw.isolation_level = None  # transactions begin where we say, not where the driver guesses
    cursor = raw.cursor()
    for line in (
        f"PRAGMA busy_timeout = {BUSY_TIMEOUT_S * 1000}",
        "PRAGMA journal_mode = WAL",
        "PRAGMA synchronous = FULL",
        "PRAGMA foreign_keys = ON",
    ):
        cursor.execute(line)
    cursor.close()


def _begin_sqlite(connection: Connection) -> None:
    writes = connection.get_execution_options().get("writes", False)
    connection.exec_driver_sql("BEGIN IMMEDIATE" if writes else "BEGIN")


@contextmanager
def _told() -> Iterator[None]:
    """Faults of the database in our own words."""
    try:
        yield
    except PoolTimeoutError as fault:
        raise StoreBusyError("all connections to the database are taken; try again in a moment") from fault
    except DBAPIError as fault:
        raise _fault_told(fault) or fault from fault


def _fault_told(fault: DBAPIError) -> StoreError | None:
    raw = fault.orig
    if isinstance(raw, sqlite3.Error):
        code = getattr(raw, "sqlite_errorcode", None)
        primary = None if code is None else code & 0xFF  # the low byte; the rest tells more of the same
        if primary == sqlite3.SQLITE_FULL:
            return StoreFullError("there is no room left on the disk that holds the database")
        if primary in (sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED, sqlite3.SQLITE_IOERR, sqlite3.SQLITE_CANTOPEN):
            return StoreBusyError("the database is held by another or cannot be opened; try again in a moment")
        return None
    state = getattr(raw, "sqlstate", None)
    if state == DISK_FULL_STATE:
        return StoreFullError("there is no room left where the database is")
    lost = isinstance(fault, OperationalError | InterfaceError) and state is None
    if lost or fault.connection_invalidated or (state is not None and state[:2] in ANSWERLESS_CLASSES):
        return StoreBusyError("the database does not answer; try again in a moment")
    return None
