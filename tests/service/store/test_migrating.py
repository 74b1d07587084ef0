"""Migrations: what the code takes for the newest revision is the newest, and no start pays for looking."""

import subprocess
import sys
from importlib.resources import files
from pathlib import Path

import pytest
from alembic import command
from alembic.config import Config
from alembic.script import ScriptDirectory
from sqlalchemy import inspect, text

from service.parts import Parts
from service.settings import settings_from
from service.store.faults import StoreOldError
from service.store.migrating import NEWEST, REVISIONS, bring_up_to_date, check_migrated, migrate
from service.store.store import Store
from service.store.tables import Row
from tests.service.conftest import environment_of, new_database, parts_of


def test_the_revision_in_the_code_is_the_newest_of_the_migrations() -> None:
    config = Config()
    config.set_main_option("script_location", str(files("service.store") / "migrations"))

    assert ScriptDirectory.from_config(config).get_current_head() == NEWEST


def test_a_database_is_migrated_once_and_stays_as_it_is(any_parts: Parts) -> None:
    assert migrate(any_parts.store) == (NEWEST, NEWEST)
    bring_up_to_date(any_parts.store)
    check_migrated(any_parts.store)


def test_a_database_of_a_later_version_is_left_alone_and_told(tmp_path: Path, module_database_url: str | None) -> None:
    parts = parts_of(tmp_path, module_database_url)  # of its own, which no other test finds so
    with parts.store.writing() as session:
        session.execute(text("UPDATE alembic_version SET version_num = '9999'"))

    with pytest.raises(StoreOldError, match="revision 9999, which this version does not know"):
        bring_up_to_date(parts.store)
    with pytest.raises(StoreOldError, match="revision 9999, not 0001"):
        check_migrated(parts.store)
    parts.store.close()


def test_opening_a_migrated_database_imports_no_alembic(parts: Parts, tmp_path: Path) -> None:
    source = (
        "import os, sys; from service.parts import open_parts; from service.settings import settings_from; "
        "open_parts(settings_from(os.environ)).store.close(); print('alembic' in sys.modules)"
    )
    environment = environment_of(tmp_path, parts.settings.places.database_url)

    told = subprocess.run(
        [sys.executable, "-c", source], env=environment, capture_output=True, text=True, check=True, timeout=60
    )

    assert told.stdout == "False\n"


def back_and_forth(store: Store) -> None:
    """Migrate a database to the newest tables, back to none, and to the newest again."""
    migrate(store)
    with store.writing() as session:
        config = Config()
        config.set_main_option("script_location", str(files("service.store") / "migrations"))
        config.attributes["connection"] = session.connection()
        command.downgrade(config, "base")
        left = set(inspect(session.connection()).get_table_names())

    assert left == {REVISIONS}
    assert migrate(store) == (None, NEWEST)
    with store.reading() as session:
        assert {*Row.metadata.tables} <= set(inspect(session.connection()).get_table_names())
    store.close()


def test_the_migrations_lead_back_to_no_tables_and_forth_again_on_sqlite(tmp_path: Path) -> None:
    back_and_forth(Store(f"sqlite:///{tmp_path}/shop.sqlite"))


def test_the_migrations_lead_back_to_no_tables_and_forth_again_on_postgresql(postgresql_url: str) -> None:
    back_and_forth(Store(settings_from({"DATABASE_URL": new_database(postgresql_url)}).database_url))
