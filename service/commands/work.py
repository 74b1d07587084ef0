"""`discwright work`: plans orders in the background."""

import argparse
import os
import sys

from service.background.worker import Worker, work_until_told
from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import GOOD, CommandError
from service.parts import open_parts
from service.settings import MOST_SLOTS, SettingsError, settings_from
from service.store.faults import StoreError

ABOUT = "Plan the orders that the web takes, until Ctrl-C or SIGTERM."
EXAMPLE = """example:
  DATABASE_URL=postgresql://discs@db/discs discwright work --slots 4

Start as many workers on as many machines as you like: each order is planned once. What is in hand when
a worker stops is finished or handed back; what was in hand when it was killed is taken by another."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument(
        "--slots",
        type=int,
        default=min(len(os.sched_getaffinity(0)), MOST_SLOTS),
        help="how many orders at a time, each on a processor of its own (default here: %(default)s)",
    )


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Work until told to stop.

    Raises:
        CommandError: A number is out of range, a setting is wrong, or the database cannot be used.
    """
    if not 1 <= asked.slots <= MOST_SLOTS:
        raise CommandError(f"--slots is {asked.slots}; it must be a whole number from 1 to {MOST_SLOTS}")
    try:
        parts = open_parts(settings_from(os.environ))
    except (SettingsError, StoreError) as error:
        raise CommandError(str(error)) from error
    work_until_told(Worker(parts, slots=asked.slots), lambda: _say_started(asked.slots))
    return GOOD


def _say_started(slots: int) -> None:
    sys.stderr.write(f"planning orders, {'one' if slots == 1 else slots} at a time, until Ctrl-C\n")
    sys.stderr.flush()
