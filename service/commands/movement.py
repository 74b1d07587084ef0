"""`discwright movement`: one movement document, resolved."""

import argparse

from service.catalogue import document_told
from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD
from service.commands.files_in import read_named_movement
from service.commands.output import say_json

ABOUT = "Print a movement document as JSON, resolved: plain numbers, every track listed."
EXAMPLE = """example:
  discwright movement fernhollow-31 > mine.json
      a document to start from for a movement of your own"""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument(
        "movement", metavar="ID_OR_FILE", help="an id that `discwright movements` lists, or a movement document"
    )
    add_json(parser)  # what it prints is JSON in any case


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Print the movement; gives the exit code.

    Raises:
        CommandError: The file cannot be read.
        LayoutError: There is no such movement, or the document is not valid.
    """
    say_json(document_told(read_named_movement(asked.movement, tools.limits)))
    return GOOD
