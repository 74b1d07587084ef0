"""`discwright movements`: the movements that ship."""

import argparse

from layout.documents import shipped_movement, shipped_movement_ids
from service.catalogue import movement_told
from service.commands.arguments import OneLineParser, Tools, add_json
from service.commands.errors import GOOD
from service.commands.output import aligned, say, say_json

ABOUT = "List the movements that ship."
EXAMPLE = """example:
  discwright movements"""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    add_json(parser)


def run(asked: argparse.Namespace, _: Tools) -> int:
    """List the movements; gives the exit code."""
    told = [movement_told(shipped_movement(movement_id)) for movement_id in shipped_movement_ids()]
    if asked.json:
        say_json(told)
        return GOOD
    rows = [
        (m["id"], f"{m['outer_diameter_mm']:g} mm", f"{m['free_turn_s']:.1f} s of music", m["turns"], m["title"])
        for m in told
    ]
    say(aligned(rows))
    return GOOD
