"""`discwright serve`: all of the service on one machine, the web and a worker, started again where they die."""

import argparse
import os
import shutil
import sys

from service.access.loopback import is_loopback
from service.commands import web
from service.commands.arguments import OneLineParser, Tools
from service.commands.errors import CommandError
from service.commands.output import say
from service.commands.work import add_slots, checked_slots
from service.logs import start_logging
from service.moments import utc_now
from service.settings import ServiceSettings, SettingsError
from service.supervisor import Program, supervise

ABOUT = "Start all of the service on this machine, web and worker, and keep it running until Ctrl-C."
EXAMPLE = """example:
  discwright serve --port 8001
      then  curl --data-binary @dance.mid -H 'Content-Type: audio/midi' -H 'Accept: image/vnd.dxf' \\
                 'http://127.0.0.1:8001/v1/layouts?movement=fernhollow-31' -o dance.dxf

On a loopback address the first start makes the owner's key and prints it once; everywhere else make one with
`discwright keys add`. On many machines run `discwright web` and `discwright work` instead."""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    web.add_arguments(parser)
    add_slots(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Serve until told to stop.

    Raises:
        CommandError: A number is out of range, a setting is wrong, the database cannot be used, or nothing can listen
            on that address and port.
    """
    wanted, slots = web.web_asked(asked), checked_slots(asked)
    settings = web.read_settings()
    waits_for, opens = os.pipe()
    with web.listening(wanted) as listener, os.fdopen(waits_for) as waits, os.fdopen(opens, "w") as gate:
        start_logging(settings.work)
        counts = web.new_counts()

        def prepare() -> None:
            _open_once(settings, wanted)
            gate.close()  # whoever reads from the other end has waited for this

        try:
            return supervise(
                [
                    Program(
                        name="the web",
                        # It gets the socket itself: while it is started again connections wait, and none is refused.
                        command=web.gunicorn_command(wanted, f"fd://{listener.fileno()}", settings),
                        # It imports the app meanwhile, and opens nothing before the database is ready.
                        environment={**web.web_environment(wanted, counts), web.GATE: str(waits.fileno())},
                        handed_on=(listener.fileno(), waits.fileno()),
                    ),
                    Program(
                        name="the worker",
                        command=[sys.executable, "-m", "service.commands.main", "work", "--slots", str(slots)],
                    ),
                ],
                stop_within_s=settings.work.stop_within_s,
                prepare=prepare,
            )
        finally:
            shutil.rmtree(counts, ignore_errors=True)


def _open_once(settings: ServiceSettings, wanted: web.WebAsked) -> None:
    """See that the database can be used, make the first key where that is due, and say where it serves."""
    # These take half a second to import, in which the web is on its way.
    from service.access.first_start import first_start  # noqa: PLC0415
    from service.commands.keys import first_key_lines  # noqa: PLC0415
    from service.parts import open_parts  # noqa: PLC0415
    from service.store.faults import StoreError  # noqa: PLC0415

    try:
        parts = open_parts(settings)
        try:
            first = first_start(parts.store, utc_now()) if is_loopback(wanted.host) else None
        finally:
            parts.store.close()
    except (SettingsError, StoreError) as error:
        raise CommandError(str(error)) from error
    if first is not None:
        say(first_key_lines(first, wanted.address))  # on the standard output: the log, which may be kept, holds no keys
        sys.stdout.flush()
    sys.stderr.write(f"serving on {wanted.address} until Ctrl-C\n")
    sys.stderr.flush()
