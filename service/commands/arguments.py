"""The command line: how it is read, and the arguments that several subcommands share."""

import argparse
import textwrap
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import NoReturn

from service.commands.errors import CommandError
from service.limits import Limits
from service.planner import AnyPlanner


@dataclass(frozen=True, slots=True, kw_only=True)
class Tools:
    """What the subcommands work with.

    Attributes:
        planner: The computation.
        limits: How large files may be, how much is told.
        execute: Replaces this process by another program, as os.execv does.
    """

    planner: AnyPlanner
    limits: Limits
    execute: Callable[[str, list[str]], NoReturn]


HELP_WIDTH = 78  # characters; fits the common terminal of 80


class OneLineParser(argparse.ArgumentParser):
    """An argument parser whose complaint is one line, raised for the command to tell."""

    def error(self, message: str) -> NoReturn:
        """Raise what is wrong with the command line.

        Raises:
            CommandError: Always.
        """
        raise CommandError(f"{message}; see {self.prog} --help")


def add_command(
    commands: "argparse._SubParsersAction[OneLineParser]", name: str, about: str, example: str
) -> OneLineParser:
    """A parser for one subcommand, its help ending with an example.

    Args:
        commands: Where it is added.
        name: Of the subcommand.
        about: What it does; the first sentence stands in the list of commands.
        example: What a person can type, with what comes of it.
    """
    return commands.add_parser(
        name,
        help=about.partition(".")[0],
        description=textwrap.fill(about, HELP_WIDTH),
        epilog=example,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )


def add_movement_and_cutter(parser: argparse.ArgumentParser) -> None:
    """Add --movement and --cutter."""
    parser.add_argument(
        "--movement",
        required=True,
        metavar="ID_OR_FILE",
        help="the movement the disc is for: an id that `discwright movements` lists, or a movement document (JSON)",
    )
    parser.add_argument(
        "--cutter",
        metavar="ID_OR_FILE",
        help="the machine that cuts it: an id that `discwright cutters` lists, or a cutter document (JSON); "
        "by default fibre-laser",
    )


def folder(text: str) -> Path:
    """The folder an argument names.

    Raises:
        ArgumentTypeError: The argument is empty, which would be the current folder by accident.
    """
    if not text.strip():
        raise argparse.ArgumentTypeError("is empty; give a folder, or . for the current one")
    return Path(text)


def add_json(parser: argparse.ArgumentParser) -> None:
    """Add --json."""
    parser.add_argument("--json", action="store_true", help="write JSON and nothing else, for programs")
