"""`discwright hear`: what the disc of a tune sounds like on its movement."""

import argparse
import json
import time
from pathlib import Path
from typing import Any

from layout.documents import Movement
from service.commands.arguments import OneLineParser, Tools, add_json, add_movement_and_cutter
from service.commands.errors import ERROR_STANDS, GOOD, CommandError
from service.commands.file_out import write_file
from service.commands.files_in import read_file, read_named_cutter, read_named_movement, read_named_settings
from service.commands.output import say, say_json
from service.computation import hearing_asked, hearing_of, write_hearing

ABOUT = (
    "Hear a tune as its disc will play it: what is left out, moved or nudged, with the comb's own partials and cents, "
    "its dampers, the start and, where a winding is stated, its sag. FILE.wav is sound, 48 kHz, one channel; FILE.mid "
    "the same plucks for a program. The sound begins when the disc begins to move. Ends with 0, with 3 where an "
    "error-level finding stands (the disc is heard all the same), or with 2 where the input cannot be used."
)
EXAMPLE = """example:
  discwright hear dance.mid --movement fernhollow-31 --out dance.wav
  discwright hear dance.mid --movement fernhollow-31 --of written --out written.wav
      the second plays every note as it is written, on the same comb, to compare"""
WAV, MIDI = ".wav", ".mid"
BITS = (16, 24)
OF = ("disc", "written")
TURNS = ("steady", "first", "middle", "last")


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("tune", type=Path, metavar="TUNE.mid", help="the tune, a Standard MIDI File")
    add_movement_and_cutter(parser)
    parser.add_argument("--settings", type=Path, metavar="FILE", help="a settings document (JSON)")
    parser.add_argument("--disc", type=int, default=1, metavar="N", help="which disc of several; by default 1")
    parser.add_argument("--out", type=Path, required=True, metavar="FILE", help="the file, ending in .wav or .mid")
    parser.add_argument("--of", choices=OF, default=OF[0], help="what the disc plays, or the tune as it is written")
    parser.add_argument(
        "--turn", choices=TURNS, default=TURNS[0], help="at the stated turn, or in which turn of a winding"
    )
    parser.add_argument("--bits", type=int, choices=BITS, help="of a sample of a .wav; by default 16")
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Write the sound; gives the exit code.

    Raises:
        CommandError: A file cannot be read or written, or the arguments do not agree.
        LayoutError: The tune or a document cannot be used, or states no winding where a turn of one is asked for.
    """
    bits = _bits(asked.out, asked.bits)
    tune = read_file(asked.tune, what="the tune", most_bytes=tools.limits.upload_bytes)
    movement = read_named_movement(asked.movement, tools.limits)
    cutter = read_named_cutter(asked.cutter, tools.limits)
    settings = read_named_settings(asked.settings, tools.limits)
    if not 1 <= asked.disc <= settings.discs:
        raise CommandError(f"--disc is {asked.disc}; the settings ask for {settings.discs}, numbered from 1")
    laid_out = tools.planner.lay_out_discs(tune, movement, cutter, settings, time.monotonic)[asked.disc - 1]
    layout_json = tools.planner.files_of(laid_out)["layout.json"]
    hearing = hearing_of(layout_json, movement, hearing_asked(asked.of, asked.turn))
    write_file(asked.out, lambda file: write_hearing(hearing, file, bits))
    told = {
        "file": str(asked.out),
        "good_to_cut": laid_out.good_to_cut,
        "of": asked.of,
        "turn": asked.turn,
        "length_s": hearing.length_s,
        "plucks_heard": len({(ring.track, ring.key, ring.starts_s) for ring in hearing.rings}),
        "quality_assumed_for_teeth": _without_quality(movement),
    }
    if asked.json:
        say_json(told)
    else:
        say(_lines(told, json.loads(layout_json), movement))
    return GOOD if laid_out.good_to_cut else ERROR_STANDS


def _bits(out: Path, bits: int | None) -> Any:
    ending = out.suffix.lower()
    if ending not in (WAV, MIDI):
        raise CommandError(f"--out {str(out)!r} ends in neither {WAV} nor {MIDI}; name a file that does")
    if ending == MIDI and bits is not None:
        raise CommandError(f"--bits belongs to {WAV}, and --out is {str(out)!r}; leave it out")
    return None if ending == MIDI else bits or BITS[0]


def _without_quality(movement: Movement) -> int:
    """How many usable teeth sound with the default quality, for want of one that is stated."""
    if movement.tooth_quality is not None:
        return 0
    return sum(tooth.usable and tooth.quality is None for tooth in movement.teeth)


def _lines(told: dict[str, Any], layout: dict[str, Any], movement: Movement) -> list[str]:
    what = "as the disc plays it" if told["of"] == "disc" else "as it is written"
    turn = "a steady turn" if told["turn"] == "steady" else f"the {told['turn']} turn of a winding"
    lines = [
        f"{layout['title']}, {what}",
        f"  movement    {movement.id}, revision {movement.revision}: {movement.title}",
        f"  heard       {told['plucks_heard']} plucks in {told['length_s']:.1f} s, in {turn}",
    ]
    if told["quality_assumed_for_teeth"]:
        count = told["quality_assumed_for_teeth"]
        lines.append(f"  assumed     how long {count} teeth ring, since the movement states no tooth_quality")
    if not told["good_to_cut"]:
        lines.append("  NOT GOOD TO CUT; `discwright plan` says why")
    return [*lines, f"written to {told['file']}"]
