"""`discwright plan`: a tune becomes the files of a disc."""

import argparse
import json
from pathlib import Path
from typing import Any

from layout.documents import Cutter, Movement
from layout.walk import CUTTING_FILES, FILES
from service.commands.arguments import OneLineParser, Tools, add_json, add_movement_and_cutter, folder
from service.commands.errors import ERROR_STANDS, GOOD, CommandError
from service.commands.files_in import read_file, read_named_cutter, read_named_movement, read_named_settings
from service.commands.files_out import write_files
from service.commands.findings import finding_lines
from service.commands.output import say, say_json
from service.commands.report_lines import kept_lines, report_lines
from service.reason import ReasonError, checked_reason

ABOUT = (
    "Make the files of a disc from a MIDI file. They are disc.dxf and hits.csv (to cut), record.dxf (to read, "
    "never to cut), disc.svg (to look at), layout.json (for programs) and report.json (what is kept, and what that "
    "cost; told here in short). Ends with 0 where the disc is good to "
    "cut, with 3 where an error-level finding stands (disc.dxf and hits.csv are then kept back), with 2 where the "
    "input cannot be used (nothing is written)."
)
EXAMPLE = """example:
  discwright plan dance.mid --movement fernhollow-31 --out dance
      writes dance/disc.dxf and the others, and says what the disc keeps of the tune"""


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("tune", type=Path, metavar="TUNE.mid", help="the tune, a Standard MIDI File")
    add_movement_and_cutter(parser)
    parser.add_argument(
        "--settings", type=Path, metavar="FILE", help="a settings document (JSON): passage, speed, transposition, …"
    )
    parser.add_argument("--out", type=folder, required=True, metavar="DIR", help="the folder for the files")
    parser.add_argument(
        "--despite-findings",
        metavar="REASON",
        help="write the cutting files although an error stands, marked NOT GOOD TO CUT with this reason",
    )
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Make the files; gives the exit code.

    Raises:
        CommandError: A file cannot be read or written, or the reason cannot be used.
        LayoutError: The tune or a document cannot be used.
    """
    reason = _reason(asked.despite_findings, tools)
    tune = read_file(asked.tune, what="the tune", most_bytes=tools.limits.upload_bytes)
    movement = read_named_movement(asked.movement, tools.limits)
    cutter = read_named_cutter(asked.cutter, tools.limits)
    settings = read_named_settings(asked.settings, tools.limits)
    laid_out = tools.planner.lay_out(tune, movement, cutter, settings)
    files = tools.planner.files_of(laid_out, not_good=reason)
    removed = write_files(asked.out, files)
    layout, report = json.loads(files["layout.json"]), json.loads(files["report.json"])
    kept_back = [name for name in FILES if name not in files]
    if asked.json:
        paths = {name: str(asked.out / name) for name in files}
        say_json(
            {
                "good_to_cut": laid_out.good_to_cut,
                "files": paths,
                "kept_back": kept_back,
                "removed": list(removed),
                "layout": layout,
                "report": report,
            }
        )
    else:
        say([laid_out.title, *layout_lines(layout, report, movement, cutter), *report_lines(report)])
        say(finding_lines(layout["findings"]))
        say(["good to cut" if laid_out.good_to_cut else "NOT GOOD TO CUT"])
        say(_file_lines(asked.out, files, removed))
    return GOOD if laid_out.good_to_cut else ERROR_STANDS


def _reason(text: str | None, tools: Tools) -> str | None:
    try:
        return None if text is None else checked_reason(text, most_characters=tools.limits.reason_characters)
    except ReasonError as error:
        raise CommandError(f"--despite-findings: {error}") from error


def layout_lines(layout: dict[str, Any], report: dict[str, Any], movement: Movement, cutter: Cutter) -> list[str]:
    """Lines that say what a disc keeps of a tune, and how it plays it.

    Args:
        layout: Content of layout.json.
        report: Content of report.json.
        movement: The movement the disc is for.
        cutter: The cutter that makes it.
    """
    side = layout["drawn_from"].replace("-", " ")
    return [
        f"  movement    {movement.id}, revision {movement.revision}: {movement.title}",
        f"  cutter      {cutter.id}: {cutter.title}; drawn from the {side}",
        *kept_lines(report),
        f"  transposed  {layout['transposed_semitones']:+d} semitones",
        f"  speed       {layout['speed_factor']:.4g} times as written",
        f"  starts at   {layout['from_s']:.2f} s of the tune",
        *(f"  odd in the tune: {warning}" for warning in layout["read"]["warnings"]),
    ]


def _file_lines(folder: Path, files: dict[str, bytes], removed: tuple[str, ...]) -> list[str]:
    lines = [f"written to {folder}: {', '.join(files)}"]
    if CUTTING_FILES[0] not in files:
        lines.append(f"kept back: {', '.join(CUTTING_FILES)}; --despite-findings REASON gives them, marked")
    if removed:
        lines.append(f"removed from {folder}, as they were of an earlier disc: {', '.join(removed)}")
    return lines
