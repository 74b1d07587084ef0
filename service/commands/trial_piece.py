"""`discwright trial-piece`: a movement and a cutter become a piece to cut and measure first."""

import argparse
import json
import os
import tempfile
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from layout.trial_walk import trial_files
from service.commands.arguments import OneLineParser, Tools, add_json, add_movement_and_cutter, folder
from service.commands.errors import GOOD, CommandError
from service.commands.files_in import read_named_cutter, read_named_movement
from service.commands.output import aligned, say, say_json

DRAWING = "trial-piece.dxf"
ABOUT = (
    "Make a trial piece: a sector of the movement's disc to cut and measure before a blank is spent. It is "
    "trial-piece.dxf (to cut), measure.pdf (one page to take to the bench) and trial-piece.json (the same, for "
    "programs). It goes on the movement as a disc does, with one projection on each track; ladders beside them try "
    "kerf, width, depth and web in numbered steps. Needs no tune. Ends with 0, or with 2 where the input cannot be "
    "used (nothing is written)."
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
    _write(asked.out, files)
    told = json.loads(files["trial-piece.json"])
    if asked.json:
        say_json({"files": {name: str(asked.out / name) for name in files}, "trial_piece": told})
    else:
        say([f"trial piece for {movement.id}, revision {movement.revision}, on {cutter.id}", *_lines(told)])
        say([f"written to {asked.out}: {', '.join(files)}"])
    return GOOD


def _write(out: Path, files: Mapping[str, bytes]) -> None:
    """Write the files into their folder, whole or not at all; a disc's files that stand there stay.

    Everything is written in a folder inside first, then renamed, the drawing last: a drawing never
    stands beside the measure sheet of another piece.

    Raises:
        CommandError: The folder cannot be made or written to.
    """
    try:
        out.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory(prefix=".discwright-", dir=out) as inside:
            for name, content in files.items():
                (Path(inside) / name).write_bytes(content)
            (out / DRAWING).unlink(missing_ok=True)
            for name in sorted(files, key=DRAWING.__eq__):
                os.replace(Path(inside) / name, out / name)
    except (OSError, ValueError) as refusal:  # ValueError: a null character in the path
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise CommandError(f"cannot write to {str(out)!r}: {why}; choose another --out") from refusal


def _lines(told: dict[str, Any]) -> list[str]:
    ladders = [
        (f"  {ladder['ladder']}", f"{ladder['step_count']} steps", ladder["measure"]) for ladder in told["ladders"]
    ]
    return [
        *aligned(ladders),
        *(f"  not tried: {left['what']}: {left['why']}" for left in told["not_tried"]),
        *(f"  mind: {caution}" for caution in told["cautions"]),
    ]
