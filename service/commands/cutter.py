"""`discwright cutter`: one cutter document."""

import argparse

from service.catalogue import document_told
from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD
from service.commands.files_in import read_named_cutter
from service.commands.output import say_json

ABOUT = "Print a cutter document as JSON."
EXAMPLE = """example:
  discwright cutter fibre-laser > mine.json
      a document to start from for a cutter of your own"""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument(
        "cutter", metavar="ID_OR_FILE", help="an id that `discwright cutters` lists, or a cutter document"
    )
    add_json(parser)  # what it prints is JSON in any case


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Print the cutter; gives the exit code.

    Raises:
        CommandError: The file cannot be read.
        LayoutError: There is no such cutter, or the document is not valid.
    """
    say_json(document_told(read_named_cutter(asked.cutter, tools.limits)))
    return GOOD
