"""`discwright plan`: a tune becomes the files of a disc."""

import argparse
import json
import time
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from layout.documents import Cutter, Movement
from layout.file_names import CUTTING_FILES, files_for
from service.commands.arguments import OneLineParser, Tools, add_json, add_movement_and_cutter, folder
from service.commands.disc_folders import disc_folders, earlier_folders
from service.commands.errors import ERROR_STANDS, GOOD, CommandError
from service.commands.files_in import read_file, read_named_cutter, read_named_movement, read_named_settings
from service.commands.files_out import write_folders
from service.commands.findings import finding_lines
from service.commands.making_lines import making_lines
from service.commands.output import say, say_json
from service.commands.report_lines import kept_lines, report_lines
from service.reason import ReasonError, checked_reason

ABOUT = (
    "Make the files of a disc from a MIDI file: disc.dxf and hits.csv (to cut), for a press press.nc too, record.dxf "
    "(to read, never to cut), disc.svg (to look at), work-sheet.pdf (for the bench), layout.json (for programs), "
    "report.json (what is kept, and what that cost) and making.json (time, mass and price); the last two are told here "
    "in short. Settings that ask for several discs give each a folder of its own, DIR/1, DIR/2 and so on. Ends with 0 "
    "where every disc is good to cut, with 3 where an error-level finding stands (what is to cut is kept back then), "
    "with 2 where the input cannot be used (nothing is written)."
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
    discs = tools.planner.lay_out_discs(tune, movement, cutter, settings, time.monotonic)
    written = _write(asked.out, [tools.planner.files_of(disc, not_good=reason) for disc in discs])
    if asked.json:
        say_json(_told(written, cutter))
    else:
        for made, laid_out in zip(written.discs, discs, strict=True):
            part = "" if len(discs) == 1 else f", disc {laid_out.disc_number} of {laid_out.disc_count}"
            say([f"{laid_out.title}{part}", *layout_lines(made.layout, made.report, movement, cutter)])
            say([*report_lines(made.report), *making_lines(made.making), *finding_lines(made.layout["findings"])])
            say(["good to cut" if made.layout["good_to_cut"] else "NOT GOOD TO CUT", *_file_lines(made, cutter)])
        if written.removed:
            say([f"removed from {asked.out}, as they were of earlier discs: {', '.join(written.removed)}"])
    return GOOD if all(disc.good_to_cut for disc in discs) else ERROR_STANDS


@dataclass(frozen=True, slots=True, kw_only=True)
class _Made:
    """The files of one disc, in their folder; removed: cutting files of an earlier disc that are gone."""

    folder: Path
    files: dict[str, bytes]
    removed: tuple[str, ...]

    @property
    def layout(self) -> dict[str, Any]:
        """Content of layout.json."""
        layout: dict[str, Any] = json.loads(self.files["layout.json"])
        return layout

    @property
    def report(self) -> dict[str, Any]:
        """Content of report.json."""
        report: dict[str, Any] = json.loads(self.files["report.json"])
        return report

    @property
    def making(self) -> dict[str, Any]:
        """Content of making.json."""
        making: dict[str, Any] = json.loads(self.files["making.json"])
        return making


@dataclass(frozen=True, slots=True, kw_only=True)
class _Written:
    """The discs written; removed: cutting files, by their path in the folder asked for, that no disc here replaces."""

    discs: tuple[_Made, ...]
    removed: tuple[str, ...]


def _write(out: Path, files_of_discs: list[dict[str, bytes]]) -> _Written:
    folders = dict(zip(disc_folders(out, len(files_of_discs)), files_of_discs, strict=True))
    earlier = earlier_folders(out, len(files_of_discs))
    removed = write_folders(folders | {folder: {} for folder in earlier}, cutting=CUTTING_FILES)
    return _Written(
        discs=tuple(_Made(folder=folder, files=files, removed=removed[folder]) for folder, files in folders.items()),
        removed=tuple(str((folder / name).relative_to(out)) for folder in earlier for name in removed[folder]),
    )


def _told(written: _Written, cutter: Cutter) -> dict[str, Any]:
    """What was made, for programs: of one disc its own, of several a list."""
    discs = [
        {
            "good_to_cut": made.layout["good_to_cut"],
            "files": {name: str(made.folder / name) for name in made.files},
            "kept_back": [name for name in files_for(cutter) if name not in made.files],
            "removed": list(made.removed),
            "layout": made.layout,
            "report": made.report,
            "making": made.making,
        }
        for made in written.discs
    ]
    if len(discs) == 1:
        return discs[0] | {"removed": [*written.discs[0].removed, *written.removed]}
    return {
        "good_to_cut": all(disc["good_to_cut"] for disc in discs),
        "discs": discs,
        "removed": list(written.removed),
    }


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


def _file_lines(made: _Made, cutter: Cutter) -> list[str]:
    lines = [f"written to {made.folder}: {', '.join(made.files)}"]
    if CUTTING_FILES[0] not in made.files:
        kept_back = [name for name in files_for(cutter) if name in CUTTING_FILES]
        lines.append(f"kept back: {', '.join(kept_back)}; --despite-findings REASON gives them, marked")
    if made.removed:
        lines.append(f"removed from {made.folder}, as they were of an earlier disc: {', '.join(made.removed)}")
    return lines
