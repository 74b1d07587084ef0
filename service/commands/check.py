"""`discwright check`: what the disc of a drawing plays, and what is wrong with it."""

import argparse
import math
from pathlib import Path
from typing import Any

import numpy as np

from layout.check.finding import finding_told
from layout.documents import Movement
from service.commands.arguments import OneLineParser, Tools, add_json, add_movement_and_cutter
from service.commands.errors import ERROR_STANDS, GOOD
from service.commands.files_in import read_file, read_named_cutter, read_named_movement
from service.commands.findings import finding_lines, thousandths
from service.commands.output import aligned, say, say_json
from service.planner import CheckedDrawing

ABOUT = (
    "Read a disc back from a drawing and check it. Only what is cut is read (the layers SLITS, SLOTS, HITS, HOLES and "
    "RIM, as the cutter names them), so this is what the cut disc will play. A record, and a file marked NOT GOOD TO "
    "CUT, are errors. Ends with 0 where nothing is wrong at error "
    "level, with 3 where an error stands, with 2 where the drawing cannot be read."
)
EXAMPLE = """example:
  discwright check dance/disc.dxf --movement fernhollow-31
      says how often each track is plucked, when first and last, and what is wrong"""

SECONDS_DECIMALS = 6  # a microsecond: what the rounding of a drawing leaves is nearly as much


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("drawing", type=Path, metavar="DISC.dxf", help="the drawing to read")
    add_movement_and_cutter(parser)
    parser.add_argument("--plucks", action="store_true", help="list every pluck, in the order they sound")
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Check the drawing; gives the exit code.

    Raises:
        CommandError: A file cannot be read.
        LayoutError: The drawing or a document cannot be used.
    """
    dxf = read_file(asked.drawing, what="the drawing", most_bytes=tools.limits.drawing_bytes)
    movement = read_named_movement(asked.movement, tools.limits)
    cutter = read_named_cutter(asked.cutter, tools.limits)
    checked = tools.planner.check_drawing(dxf, movement, cutter)
    told = drawing_told(checked, movement)
    if asked.json:
        say_json(told)
    else:
        say(_lines(asked.drawing, told, movement))
        say(_pluck_lines(told) if asked.plucks else [])
        say([*finding_lines(told["findings"]), "good to cut" if checked.good_to_cut else "NOT GOOD TO CUT"])
    return GOOD if checked.good_to_cut else ERROR_STANDS


def drawing_told(checked: CheckedDrawing, movement: Movement) -> dict[str, Any]:
    """What a drawing plays and what is wrong with it, for programs.

    Args:
        checked: The drawing, read back.
        movement: The movement it was checked for.

    Returns:
        Times in seconds from the start of the music, to a microsecond, null where nothing is plucked;
        plucks in the order they sound, tracks from the innermost.
    """
    disc, plucks = checked.disc, checked.plucks
    pitches = {tooth.track: tooth.pitch for tooth in reversed(movement.teeth)}
    order = np.lexsort((plucks.track_index, plucks.sounds_s)).tolist()
    listed = [
        {
            "track": int(plucks.track_index[place]) + 1,
            "pitch": pitches.get(int(plucks.track_index[place]) + 1, ""),
            "radius_mm": float(disc.radius_mm[place]),
            "angle_deg": math.degrees(float(disc.edge_angle_rad[place])),
            # A first pluck read back a nanosecond early is at 0, not at -6e-09 nor -0.
            "sounds_s": round(float(plucks.sounds_s[place]), SECONDS_DECIMALS) + 0.0,
        }
        for place in order
    ]
    counts = np.bincount(plucks.track_index, minlength=len(movement.tracks)).tolist()
    return {
        "movement": {"id": movement.id, "revision": movement.revision},
        "cutter": {"id": disc.cutter.id},
        "good_to_cut": checked.good_to_cut,
        "first_s": listed[0]["sounds_s"] if listed else None,
        "last_s": listed[-1]["sounds_s"] if listed else None,
        "tracks": [
            {"track": place + 1, "pitch": pitches.get(place + 1, ""), "pluck_count": count}
            for place, count in enumerate(counts)
        ],
        "plucks": listed,
        "findings": [finding_told(finding) for finding in checked.findings],
    }


def _lines(drawing: Path, told: dict[str, Any], movement: Movement) -> list[str]:
    used = [track for track in told["tracks"] if track["pluck_count"]]
    lines = [f"{drawing} on {movement.id}, revision {movement.revision}: {movement.title}"]
    lines.append(f"  plays       {_counted(len(told['plucks']))} on {len(used)} of {len(told['tracks'])} tracks")
    if used:
        lines.append(f"  first pluck {_seconds(told['first_s'])}, last pluck {_seconds(told['last_s'])}")
        rows = [(f"  track {track['track']}", track["pitch"], _counted(track["pluck_count"])) for track in used]
        lines += aligned(rows)
    return lines


def _seconds(value_s: float) -> str:
    return f"{thousandths(value_s)} s"


def _counted(count: int) -> str:
    return f"{count} pluck" if count == 1 else f"{count} plucks"


def _pluck_lines(told: dict[str, Any]) -> list[str]:
    rows = [(f"  {_seconds(pluck['sounds_s'])}", f"track {pluck['track']}", pluck["pitch"]) for pluck in told["plucks"]]
    return aligned(rows)
