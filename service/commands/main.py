"""The command `discwright`: reads the command line, runs a subcommand, tells what went wrong in one line."""

import argparse
import io
import logging
import os
import sys
from collections.abc import Callable, Sequence
from importlib import import_module
from types import ModuleType
from typing import NoReturn

from layout.errors import DocumentError, LayoutError
from layout.version import ENGINE_VERSION
from service.commands.arguments import OneLineParser, Tools, add_command
from service.commands.errors import BAD_INPUT, INTERRUPTED, PIPE_CLOSED, CommandError
from service.limits import Limits
from service.planner import AnyPlanner, TheWalk
from service.wording import shortened, told_in_short

ABOUT = "Turns a MIDI file into a tune disc: drawings that can be cut and that play, checked before they are cut."
EXAMPLE = """example:
  discwright movements
  discwright plan dance.mid --movement fernhollow-31 --out dance

`discwright COMMAND --help` tells more of each command."""
# In the order in which help lists them. The module of one is imported when it is asked for: most need much that the
# others do not.
COMMANDS = (
    *("plan", "run", "hear", "check", "sheets", "trial-piece", "movements", "movement", "cutters", "cutter"),
    *("serve", "web", "work", "migrate", "check-setup", "keys"),
    *("backup", "restore", "export"),
)


def main(
    argv: Sequence[str] | None = None,
    *,
    planner: AnyPlanner | None = None,
    execute: Callable[[str, list[str]], NoReturn] = os.execv,
) -> int:
    """Run the command.

    Args:
        argv: The arguments; those of the process by default.
        planner: The computation; None for the walk.
        execute: Replaces this process by another program.

    Returns:
        The exit code: 0 good, 2 bad input, 3 an error-level finding stands.
    """
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")  # a title may hold letters the terminal does not know
    logging.getLogger("ezdxf").setLevel(logging.CRITICAL)  # its remarks about a damaged file; ours is one line
    limits = Limits()
    try:
        words = sys.argv[1:] if argv is None else list(argv)
        asked = _parser(words).parse_args(words)
        code: int = asked.run(asked, Tools(planner=planner or TheWalk(), limits=limits, execute=execute))
        sys.stdout.flush()
    except (CommandError, LayoutError) as error:
        sys.stderr.write(f"discwright: {_in_one_line(error, limits)}\n")
        return BAD_INPUT
    except KeyboardInterrupt:
        return INTERRUPTED
    except BrokenPipeError:
        # Nobody reads on; the flush at exit shall not complain about it.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return PIPE_CLOSED
    return code


def _in_one_line(error: Exception, limits: Limits) -> str:
    if isinstance(error, DocumentError):
        return told_in_short(error, limits.shown_characters)
    return shortened(str(error), limits.shown_characters)


def _parser(words: Sequence[str]) -> OneLineParser:
    """The parser of a command line; where its first word is a command, of that command alone."""
    parser = OneLineParser(
        prog="discwright",
        description=ABOUT,
        epilog=EXAMPLE,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("--version", action="version", version=f"discwright {ENGINE_VERSION}")
    commands = parser.add_subparsers(title="commands", metavar="COMMAND", required=True, parser_class=OneLineParser)
    if words[:1] == ["--version"]:
        return parser
    for name in words[:1] if words[:1] and words[0] in COMMANDS else COMMANDS:
        command = _module_of(name)
        of_command = add_command(commands, name, command.ABOUT, command.EXAMPLE)
        command.add_arguments(of_command)
        of_command.set_defaults(run=command.run)
    return parser


def _module_of(name: str) -> ModuleType:
    return import_module(f"service.commands.{name.replace('-', '_')}")


if __name__ == "__main__":
    sys.exit(main())
