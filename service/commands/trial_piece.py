"""`discwright trial-piece`: a movement and a cutter become a piece to cut and measure first."""

import argparse
import json
from typing import Any

from layout.trial_walk import CUTTING_FILE, trial_files
from service.commands.arguments import OneLineParser, Tools, add_json, add_movement_and_cutter, folder
from service.commands.errors import GOOD
from service.commands.files_in import read_named_cutter, read_named_movement
from service.commands.files_out import write_folders
from service.commands.output import aligned, say, say_json

ABOUT = (
    "Make a trial piece: a sector of the movement's disc to cut and measure before a blank is spent. It is "
    "trial-piece.dxf (to cut), trial-piece.svg (to look at), measure.pdf (one page to take to the bench) and "
    "trial-piece.json (the same, for programs). It goes on the movement as a disc does, with one projection on each "
    "track; ladders beside them try kerf, width, depth and web in numbered steps. Needs no tune. Ends with 0, or with "
    "2 where the input cannot be used (nothing is written)."
)
EXAMPLE = """example:
  discwright trial-piece --movement fernhollow-31 --cutter fibre-laser --out trial
      writes trial/trial-piece.dxf and the others, and says what to measure"""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    add_movement_and_cutter(parser)
    parser.add_argument("--out", type=folder, required=True, metavar="DIR", help="the folder for the files")
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Make the files; gives the exit code.

    Raises:
        CommandError: A file cannot be read or written.
        LayoutError: A document cannot be used, or the cutter cannot make the movement's projections.
    """
    movement = read_named_movement(asked.movement, tools.limits)
    cutter = read_named_cutter(asked.cutter, tools.limits)
    files = trial_files(movement, cutter)
    write_folders({asked.out: files}, cutting=(CUTTING_FILE,))
    told = json.loads(files["trial-piece.json"])
    if asked.json:
        say_json({"files": {name: str(asked.out / name) for name in files}, "trial_piece": told})
    else:
        say([f"trial piece for {movement.id}, revision {movement.revision}, on {cutter.id}", *_lines(told)])
        say([f"written to {asked.out}: {', '.join(files)}"])
    return GOOD


def _lines(told: dict[str, Any]) -> list[str]:
    ladders = [
        (f"  {ladder['ladder']}", f"{ladder['step_count']} steps", ladder["measure"]) for ladder in told["ladders"]
    ]
    return [
        *aligned(ladders),
        *(f"  not tried: {left['what']}: {left['why']}" for left in told["not_tried"]),
        *(f"  mind: {caution}" for caution in told["cautions"]),
    ]
