"""`discwright export`: all that the service keeps of one owner, in one archive."""

import argparse
import os
from pathlib import Path

from service.api.zip_stream import Packed, zip_stream
from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import GOOD, CommandError
from service.commands.output import say
from service.commands.parts_opened import parts_opened
from service.orders.exporting import export_of, find_owner

ABOUT = "Write all that the service keeps of one owner into a ZIP archive."
EXAMPLE = """example:
  discwright export Bellgrove --out bellgrove.zip

Orders, plans, events, quotes, runs, hooks and messages stand in it as lines of JSON; tunes, documents and drawings
as they were sent and made. Secrets are left out. `discwright keys list` shows the owners there are."""
OWNER_ONLY = 0o600


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("owner", metavar="OWNER", help="the owner's title or id")
    parser.add_argument("--out", type=Path, required=True, metavar="FILE", help="the archive to write")


def run(asked: argparse.Namespace, _: Tools) -> int:
    """Write the archive; it is there whole, or not at all.

    Raises:
        CommandError: There is no such owner, or the archive cannot be written.
    """
    out: Path = asked.out
    with parts_opened() as parts:
        owner_id = find_owner(parts.store, asked.owner)
        if owner_id is None:
            raise CommandError(f"there is no owner {asked.owner!r}; `discwright keys list` shows those there are")
        files = export_of(parts.store, parts.files, owner_id)
        part = out.with_name(f"{out.name}.part")
        try:
            with os.fdopen(os.open(part, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, OWNER_ONLY), "wb") as archive:
                for piece in zip_stream(Packed(name=name, pieces=pieces) for name, pieces in files):
                    archive.write(piece)
            os.replace(part, out)
        except OSError as fault:
            raise CommandError(f"{out} cannot be written: {fault.strerror}") from fault
        finally:
            part.unlink(missing_ok=True)
    say([f"wrote {out}: all that is kept of {asked.owner}"])
    return GOOD
