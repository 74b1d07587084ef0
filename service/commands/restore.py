"""`discwright restore`: a backup brought back, and ended again what was ended since it was made."""

import argparse
import os
import sys
from pathlib import Path

from service.backups import BackupError, restore
from service.commands.arguments import OneLineParser, Tools, folder
from service.commands.errors import GOOD, CommandError
from service.commands.output import say
from service.settings import SettingsError, settings_from
from service.store.faults import StoreError

ABOUT = "Bring a backup back; what was deleted or revoked since it was made is so again."
EXAMPLE = """example:
  discwright restore /backups/discs

Stop the service first. On PostgreSQL load the dump before:
  pg_restore --clean --if-exists --no-owner --dbname="$DATABASE_URL" /backups/discs/database.dump

Deleted orders and hooks, hooks turned off and revoked keys are noted beside the files, in the store of files: where
that is lost too, those since the backup are not known; look through `discwright keys list`. Browsers sign in anew.
Events go on with higher numbers than before, so that readers miss none."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("folder", type=folder, metavar="FOLDER", help="a folder that `discwright backup` made")
    parser.add_argument("--replace", action="store_true", help="overwrite a database that holds orders")


def run(asked: argparse.Namespace, _: Tools) -> int:
    """Bring the backup back.

    Raises:
        CommandError: It could not be brought back.
    """
    where: Path = asked.folder
    try:
        back = restore(settings_from(os.environ), where, may_replace=asked.replace)
    except (BackupError, SettingsError, StoreError) as fault:
        raise CommandError(str(fault)) from fault
    say(
        [
            f"restored {'the database and ' if back.has_database else ''}{back.file_count} files from {where}",
            f"deleted again: {back.erased_count} orders; revoked again: {back.revoked_count} keys; "
            f"stopped again: {back.stopped_count} hooks; removed: {back.removed_count} files made since",
        ]
    )
    if back.lost:
        sys.stderr.write(f"discwright: {len(back.lost)} files are in neither place, the first {back.lost[0]}\n")
    return GOOD
