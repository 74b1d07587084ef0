"""`discwright backup`: the service's data, copied into a folder while it runs."""

import argparse
import sys
from pathlib import Path

from service.backups import BackupError, back_up
from service.commands.arguments import OneLineParser, Tools, folder
from service.commands.errors import GOOD, CommandError
from service.commands.output import say
from service.commands.parts_opened import parts_opened

ABOUT = "Copy the service's data into a folder: the database, the files, and what was deleted."
EXAMPLE = """example:
  discwright backup /backups/discs

On PostgreSQL dump the database first, into the same folder:
  pg_dump --format=custom --file=/backups/discs/database.dump "$DATABASE_URL"

The service may run meanwhile. Into the same folder again, only new files are copied, and those go that were deleted.
The folder holds secrets: keep it where nobody else reads, and copy it to another machine."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("folder", type=folder, metavar="FOLDER", help="where to; made where it does not exist")


def run(asked: argparse.Namespace, _: Tools) -> int:
    """Make the backup.

    Raises:
        CommandError: It could not be made.
    """
    where: Path = asked.folder
    with parts_opened() as parts:
        try:
            made = back_up(parts, where)
        except BackupError as fault:
            raise CommandError(str(fault)) from fault
    what = "the database and" if made.has_database else "beside the dump of PostgreSQL,"
    say([f"{where} holds {what} {made.file_count} files, {made.copied_count} of them new"])
    if made.lost:
        sys.stderr.write(f"discwright: {len(made.lost)} files were not to be had, the first {made.lost[0]}\n")
    return GOOD
