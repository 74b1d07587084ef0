"""`discwright cutters`: the cutters that ship."""

import argparse

from layout.documents import shipped_cutter, shipped_cutter_ids
from service.catalogue import cutter_told
from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD
from service.commands.output import aligned, say, say_json

ABOUT = "List the cutters that ship."
EXAMPLE = """example:
  discwright cutters"""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    add_json(parser)


def run(asked: argparse.Namespace, _: Tools) -> int:
    """List the cutters; gives the exit code."""
    told = [cutter_told(shipped_cutter(cutter_id)) for cutter_id in shipped_cutter_ids()]
    if asked.json:
        say_json(told)
        return GOOD
    rows = [(c["id"], c["kind"], f"drawn from the {c['drawn_from'].replace('-', ' ')}", c["title"]) for c in told]
    say(aligned(rows))
    return GOOD
