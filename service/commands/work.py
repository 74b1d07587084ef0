"""`discwright work`: plans orders in the background."""

import argparse
import os
import sys

from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import GOOD, CommandError
from service.logs import start_logging
from service.settings import MOST_SLOTS, SettingsError, settings_from

ABOUT = "Plan the orders that the web takes, and tell hooks of them, until Ctrl-C or SIGTERM."
EXAMPLE = """example:
  DATABASE_URL=postgresql://discs@db/discs discwright work --slots 4

Start as many workers on as many machines as you like: each order is planned once. What is in hand when
a worker stops is finished or handed back; what was in hand when it was killed is taken by another."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    add_slots(parser)


def add_slots(parser: OneLineParser) -> None:
    """Add --slots."""
    parser.add_argument(
        "--slots",
        type=int,
        default=min(len(os.sched_getaffinity(0)), MOST_SLOTS),
        help="how many orders are planned at a time, each on a processor of its own (default here: %(default)s)",
    )


def checked_slots(asked: argparse.Namespace) -> int:
    """The slots asked for.

    Raises:
        CommandError: The number is out of range.
    """
    slots: int = asked.slots
    if not 1 <= slots <= MOST_SLOTS:
        raise CommandError(f"--slots is {slots}; it must be a whole number from 1 to {MOST_SLOTS}")
    return slots


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Work until told to stop.

    Raises:
        CommandError: A number is out of range, a setting is wrong, or the database cannot be used.
    """
    # `serve` reads the arguments of this command, and works not.
    from service.parts import open_parts  # noqa: PLC0415
    from service.store.faults import StoreError  # noqa: PLC0415
    from service.working import work  # noqa: PLC0415

    slots = checked_slots(asked)
    try:
        settings = settings_from(os.environ)
        start_logging(settings.work)
        parts = open_parts(settings)
    except (SettingsError, StoreError) as error:
        raise CommandError(str(error)) from error
    work(parts, slots=slots, say_started=lambda: _say_started(slots))
    return GOOD


def _say_started(slots: int) -> None:
    sys.stderr.write(f"planning orders, {'one' if slots == 1 else slots} at a time, until Ctrl-C\n")
    sys.stderr.flush()
