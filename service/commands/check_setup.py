"""`discwright check-setup`: says what is wrong with how the service is set up, and how to mend it."""

import argparse
import os
from dataclasses import asdict

from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD, NOT_IN_ORDER
from service.commands.output import say, say_json
from service.logs import without_secrets
from service.setup_checks import Level, Remark, check_setup

ABOUT = (
    "Look whether the service can run here: settings, folders, database, queue, files, secret, clock. Says what is "
    "wrong and how to mend it. Ends with 0 where nothing is wrong, with 1 where something is."
)
EXAMPLE = """example:
  DATABASE_URL=postgresql://discs@db/discs discwright check-setup

Run it as the user that runs the service and with the same settings. It keeps a small file in the store of files
and removes it, and notes a number made of the secret in the database, so that the next machine can be held
against it."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    add_json(parser)
    parser.add_argument(
        "--note-secret",
        action="store_true",
        help="this machine's secret is the right one: note it anew (after it was changed on all machines)",
    )


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Look, and tell; gives the exit code."""
    remarks = check_setup(os.environ, note_secret=asked.note_secret)
    is_good = all(remark.level is not Level.WRONG for remark in remarks)
    if asked.json:
        say_json({"in_order": is_good, "remarks": [_told(remark) for remark in remarks]})
    else:
        say(line for remark in remarks for line in _lines(remark))
        say(["nothing is wrong" if is_good else "something is wrong: see the lines above"])
    return GOOD if is_good else NOT_IN_ORDER


def _told(remark: Remark) -> dict[str, str]:
    return {name: without_secrets(text) for name, text in asdict(remark).items()}


def _lines(remark: Remark) -> list[str]:
    told = [f"{remark.level:<7} {remark.about}: {remark.told}"]
    if remark.remedy:
        told.append(f"{'':<7} to mend it: {remark.remedy}")
    return [without_secrets(line) for line in told]
