"""The names of the files that are made, where they may be asked for without the computation that makes them."""

from layout.documents.cutter import Cutter

PRESS_FILES = ("press.nc",)  # only where a press cuts
CUTTING_FILES = ("disc.dxf", "hits.csv", *PRESS_FILES)
FILES = (
    "disc.dxf",
    "record.dxf",
    "disc.svg",
    "hits.csv",
    "press.nc",
    "work-sheet.pdf",
    "layout.json",
    "report.json",
    "making.json",
)
PLAN_FILE, PARTS_FILE = "sheets.json", "parts.csv"  # of a sheet job, beside a drawing for each sheet


def files_for(cutter: Cutter) -> tuple[str, ...]:
    """The names of the files a layout for this cutter has, cutting files included."""
    return tuple(name for name in FILES if cutter.kind == "punch-press" or name not in PRESS_FILES)
