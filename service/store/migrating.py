"""Brings a database to the tables of this version."""

from importlib.resources import as_file, files

from sqlalchemy import Connection, inspect, text

from service.store.faults import StoreOldError
from service.store.store import Store

NEWEST = "0001"  # the revision of this version's tables; a test holds it against the migrations themselves
REVISIONS = "alembic_version"  # the table in which Alembic notes the revision
MIGRATION_LOCK = 0x6469_7363  # any number that nothing else locks: "disc"


def migrate(store: Store) -> tuple[str | None, str]:
    """Bring the database to the newest tables; several processes may ask at a time, one does it.

    Returns:
        The revision before (None for a new database) and after.

    Raises:
        StoreBusyError: It does not answer.
        StoreOldError: It has tables that this version does not know.
    """
    # Half a second to import, and needed once in the life of a database.
    from alembic import command  # noqa: PLC0415
    from alembic.config import Config  # noqa: PLC0415
    from alembic.util.exc import CommandError  # noqa: PLC0415

    with store.writing() as session:
        connection = session.connection()
        if not store.is_sqlite:
            connection.execute(text("SELECT pg_advisory_xact_lock(:number)"), {"number": MIGRATION_LOCK})
        before = revision_of(connection)
        with as_file(files("service.store") / "migrations") as folder:
            config = Config()
            config.set_main_option("script_location", str(folder))
            config.attributes["connection"] = connection
            try:
                command.upgrade(config, "head")
            except CommandError as fault:
                raise StoreOldError(
                    f"the database has the tables of revision {before}, which this version does not know; "
                    "start the version that made them, or a later one"
                ) from fault
        after = revision_of(connection)
    return before, str(after)


def bring_up_to_date(store: Store) -> None:
    """Migrate a database that is not at the newest tables; one that is costs no more than a look.

    Raises:
        StoreBusyError: It does not answer.
    """
    with store.reading() as session:
        found = revision_of(session.connection())
    if found != NEWEST:
        migrate(store)


def check_migrated(store: Store) -> None:
    """See that the database has the tables of this version.

    Raises:
        StoreOldError: It has none, or others.
        StoreBusyError: It does not answer.
    """
    with store.reading() as session:
        found = revision_of(session.connection())
    if found != NEWEST:
        told = "has no tables yet" if found is None else f"has the tables of revision {found}, not {NEWEST}"
        raise StoreOldError(f"the database {told}; run  discwright migrate")


def revision_of(connection: Connection) -> str | None:
    """The revision of the tables, None where there are none."""
    if not inspect(connection).has_table(REVISIONS):
        return None
    found: str | None = connection.execute(text("SELECT version_num FROM alembic_version")).scalar()
    return found
