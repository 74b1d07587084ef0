"""Brings a database to the tables of this version."""

from importlib.resources import as_file, files

from alembic import command
from alembic.config import Config
from alembic.runtime.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Connection, text

from service.store.faults import StoreOldError
from service.store.store import Store

MIGRATION_LOCK = 0x6469_7363  # any number that nothing else locks: "disc"


def migrate(store: Store) -> tuple[str | None, str]:
    """Bring the database to the newest tables; several processes may ask at a time, one does it.

    Returns:
        The revision before (None for a new database) and after.

    Raises:
        StoreBusyError: It does not answer.
    """
    with store.writing() as session:
        connection = session.connection()
        if not store.is_sqlite:
            connection.execute(text("SELECT pg_advisory_xact_lock(:number)"), {"number": MIGRATION_LOCK})
        before = revision_of(connection)
        with as_file(files("service.store") / "migrations") as folder:
            config = Config()
            config.set_main_option("script_location", str(folder))
            config.attributes["connection"] = connection
            command.upgrade(config, "head")
        after = revision_of(connection)
    return before, str(after)


def check_migrated(store: Store) -> None:
    """See that the database has the tables of this version.

    Raises:
        StoreOldError: It has none, or others.
        StoreBusyError: It does not answer.
    """
    with store.reading() as session:
        found = revision_of(session.connection())
    wanted = newest()
    if found != wanted:
        told = "has no tables yet" if found is None else f"has the tables of revision {found}, not {wanted}"
        raise StoreOldError(f"the database {told}; run  discwright migrate")


def revision_of(connection: Connection) -> str | None:
    """The revision of the tables, None where there are none."""
    return MigrationContext.configure(connection).get_current_revision()


def newest() -> str:
    """The revision of this version's tables."""
    with as_file(files("service.store") / "migrations") as folder:
        config = Config()
        config.set_main_option("script_location", str(folder))
        return str(ScriptDirectory.from_config(config).get_current_head())
