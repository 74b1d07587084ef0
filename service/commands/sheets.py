"""`discwright sheets`: the discs of a sheet job are laid on its stock."""

import argparse
import json
import re
from pathlib import Path
from typing import Any

from layout.documents.sheets import read_sheet_job
from layout.file_names import PLAN_FILE
from layout.sheet_walk import plan_sheets, sheet_files_of
from service.commands.arguments import OneLineParser, Tools, add_json, folder
from service.commands.errors import ERROR_STANDS, GOOD, CommandError
from service.commands.files_in import read_file
from service.commands.files_out import write_folders
from service.commands.findings import finding_lines
from service.commands.output import aligned, say, say_json
from service.limits import Limits

ABOUT = (
    "Lay many discs on stock: sheets and remnants of any outline, with gaps, margins and clamp zones. The job is a "
    "JSON document. Writes sheets.json (the plan, for programs), parts.csv (where every disc lies) and one drawing of "
    "every sheet, sheet-1.dxf and so on, rims on the layer RIM in cutting order; drawings of an earlier run that this "
    "one does not replace are removed. A disc is a plain circle, or with --drawing ID=disc.dxf all that its drawing "
    "cuts and marks. Ends with 0 where every disc is placed, with 3 where some fit on no sheet (the "
    "others are written all the same), with 2 where the job or a drawing cannot be used (nothing is written)."
)
EXAMPLE = """example:
  discwright sheets JOB.json --out cut
      writes cut/sheet-1.dxf and the others, and says how well each sheet is used
  discwright sheets JOB.json --drawing dance=dance/disc.dxf --out cut
      the same, and every disc that the job calls dance is cut as dance/disc.dxf draws it"""
DRAWING = re.compile(r"sheet-[1-9][0-9]*\.dxf")


def add_arguments(parser: OneLineParser) -> None:
    """Add the arguments of this subcommand."""
    parser.add_argument("job", type=Path, metavar="JOB.json", help="the sheet job: stock and discs")
    parser.add_argument("--out", type=folder, required=True, metavar="DIR", help="the folder for the files")
    parser.add_argument(
        "--drawing",
        type=_named,
        action="append",
        default=[],
        metavar="ID=disc.dxf",
        help="the drawing of the discs that the job calls ID, for cutting; can be given for every disc",
    )
    add_json(parser)


def run(asked: argparse.Namespace, tools: Tools) -> int:
    """Lay the discs on their sheets; gives the exit code.

    Raises:
        CommandError: A file cannot be read or written.
        LayoutError: The job or a drawing cannot be used.
    """
    job = read_sheet_job(read_file(asked.job, what="the sheet job", most_bytes=tools.limits.document_bytes))
    drawings = _drawings(asked.drawing, tools.limits)
    plan = plan_sheets(job, drawings)
    files = sheet_files_of(plan)
    cutting = {*_earlier_drawings(asked.out), *(name for name in files if DRAWING.fullmatch(name))}
    removed = list(write_folders({asked.out: files}, cutting=sorted(cutting))[asked.out])
    told = json.loads(files[PLAN_FILE])
    if asked.json:
        paths = {name: str(asked.out / name) for name in files}
        say_json({"complete": plan.complete, "files": paths, "removed": removed, "plan": told})
    else:
        say([*_lines(told), *finding_lines(told["findings"])])
        say([f"written to {asked.out}: {', '.join(files)}"])
        say([f"removed from {asked.out}, as they were of an earlier job: {', '.join(removed)}"] if removed else [])
    return GOOD if plan.complete else ERROR_STANDS


def _named(text: str) -> tuple[str, Path]:
    """The id and the path of an argument ID=PATH.

    Raises:
        ArgumentTypeError: It is not of that form.
    """
    disc_id, equals, path = text.partition("=")
    if not (disc_id and equals and path):
        raise argparse.ArgumentTypeError(f"{text!r} names no disc and drawing; write ID=disc.dxf")
    return disc_id, Path(path)


def _drawings(named: list[tuple[str, Path]], limits: Limits) -> dict[str, bytes]:
    drawings: dict[str, bytes] = {}
    for disc_id, path in named:
        if disc_id in drawings:
            raise CommandError(f"two drawings are given for {disc_id!r}; give one")
        drawings[disc_id] = read_file(path, what=f"the drawing of {disc_id}", most_bytes=limits.drawing_bytes)
    return drawings


def _earlier_drawings(out: Path) -> list[str]:
    """Drawings of an earlier job in a folder: beside this one's they would be cut as part of it."""
    try:
        found = out.iterdir() if out.is_dir() else ()
        return sorted(path.name for path in found if DRAWING.fullmatch(path.name) and path.is_file())
    except (OSError, ValueError) as refusal:  # ValueError: a null character in the path
        why = refusal.strerror if isinstance(refusal, OSError) and refusal.strerror else str(refusal)
        raise CommandError(f"cannot write to {str(out)!r}: {why}") from refusal


def _lines(told: dict[str, Any]) -> list[str]:
    placed, wanted = (sum(disc[count] for disc in told["discs"]) for count in ("placed", "wanted"))
    lines = [told["title"], f"  placed      {placed} of {wanted} discs on {_counted(len(told['sheets']), 'sheet')}"]
    rows = [
        (
            f"  sheet {sheet['sheet']}",
            sheet["stock"] + (f", lot {sheet['lot']}" if sheet["lot"] else ""),
            _counted(len(sheet["discs"]), "disc"),
            f"{sheet['used_percent']:.1f} % used",
            f"cut from the {sheet['cut_from']}",
            _counted(len(sheet["remnants"]), "remnant"),
        )
        for sheet in told["sheets"]
    ]
    return lines + (aligned(rows) if rows else [])


def _counted(count: int, what: str) -> str:
    return f"{count} {what}" if count == 1 else f"{count} {what}s"
