"""`discwright migrate`: brings the database to the tables of this version."""

import argparse
import os

from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD, CommandError
from service.commands.output import say, say_json
from service.settings import SettingsError, settings_from
from service.store.faults import StoreError
from service.store.migrating import migrate
from service.store.store import Store

ABOUT = "Bring the database to the tables of this version; what it holds stays."
EXAMPLE = """example:
  DATABASE_URL=postgresql://discs@db/discs discwright migrate

Run it before the first start on PostgreSQL and after each new version, while no process of the old one runs.
It may be run again: a database that is up to date stays as it is. An SQLite file is migrated by every start."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Migrate, and tell from what to what.

    Raises:
        CommandError: A setting is wrong, or the database cannot be used.
    """
    try:
        store = Store(settings_from(os.environ).database_url)
        try:
            before, after = migrate(store)
        finally:
            store.close()
    except (SettingsError, StoreError, OSError) as error:
        raise CommandError(str(error)) from error
    if asked.json:
        say_json({"before": before, "after": after})
    elif before == after:
        say([f"the database has the tables of revision {after} already"])
    else:
        say([f"the database went from {'no tables' if before is None else f'revision {before}'} to revision {after}"])
    return GOOD
