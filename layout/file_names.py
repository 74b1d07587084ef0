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
TOLD_FILES = ("layout.json", "report.json")  # what a layout tells without a plan of how it is cut
HEARING_FILES = ("hearing.wav", "hearing.mid")  # how a disc sounds: to be had of each, made when asked for
PLAN_FILE, PARTS_FILE = "sheets.json", "parts.csv"  # of a sheet job, beside a drawing for each sheet


def files_given(cutter: Cutter, *, cutting: bool) -> tuple[str, ...]:
    """The names of the files of a layout for this cutter, or those alone by which nothing is cut."""
    return tuple(name for name in files_for(cutter) if cutting or name not in CUTTING_FILES)


def files_for(cutter: Cutter) -> tuple[str, ...]:
    """The names of the files a layout for this cutter has, cutting files included."""
    return tuple(name for name in FILES if cutter.kind == "punch-press" or name not in PRESS_FILES)
