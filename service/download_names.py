"""Names under which the files of a layout are saved: they tell a cutting shop what a file is for."""

import re
import unicodedata
from dataclasses import dataclass
from functools import lru_cache
from urllib.parse import quote

from layout.documents import Cutter, Movement

LONGEST_TITLE = 40  # characters; leaves a whole name under the 255 bytes a file name may have
LONGEST_TITLE_BYTES = 60  # bytes in UTF-8, for the same reason
LONGEST_MATERIAL = 40  # characters
NOT_GOOD = "NOT-GOOD-TO-CUT"
ALL_FILES = "all-files.zip"
SETTINGS = "settings.json"
TUNE = "tune.mid"
ENDINGS = {
    "disc.dxf": ".dxf",
    "record.dxf": "_record-not-for-cutting.dxf",
    "disc.svg": ".svg",
    "hits.csv": "_hits.csv",
    "layout.json": "_layout.json",
    "report.json": "_report.json",
    "press.nc": "_press.nc",
    "work-sheet.pdf": "_work-sheet.pdf",
    "making.json": "_making.json",
    SETTINGS: "_settings.json",
    TUNE: "_tune.mid",
    ALL_FILES: "_all-files.zip",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class NamedDisc:
    """What the names of a disc's files tell.

    Attributes:
        title: The tune's.
        movement: The movement it is for.
        cutter: The cutter, for the side the drawings show.
        fingerprint: The layout's.
        not_good: Whether its cutting files are given although an error-level finding stands.
        part: Which disc of a set it is, such as "disc 2 of 3", or which discs; "" for one alone.
    """

    title: str
    movement: Movement
    cutter: Cutter
    fingerprint: str
    not_good: bool
    part: str = ""


def download_name(disc: NamedDisc, file_name: str) -> str:
    """The name of one of a disc's files, in ASCII: letters, digits, hyphens, underscores and dots.

    Args:
        disc: What it tells.
        file_name: A key of ENDINGS.
    """
    return _name(disc, file_name, slug(disc.title, LONGEST_TITLE) or "untitled")


def content_disposition(disc: NamedDisc, file_name: str, *, how: str) -> str:
    """The header field that names a file (RFC 6266), with the title's own letters where ASCII has none.

    Args:
        disc: What the name tells.
        file_name: A key of ENDINGS.
        how: "attachment" or "inline".
    """
    field = f'{how}; filename="{download_name(disc, file_name)}"'
    title = _own_letters(disc.title)
    if title and not disc.title.isascii():
        field += f"; filename*=UTF-8''{quote(_name(disc, file_name, title), safe='')}"
    return field


@lru_cache(maxsize=256)  # titles and materials come again with each file of a disc
def slug(text: str, most_characters: int) -> str:
    """The text in small ASCII letters, digits and single hyphens; empty where nothing is left."""
    plain = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode().lower()
    return re.sub(r"[^a-z0-9]+", "-", plain).strip("-")[:most_characters].rstrip("-")


def _name(disc: NamedDisc, file_name: str, title: str) -> str:
    blank = disc.movement.disc
    material = slug(blank.material, LONGEST_MATERIAL) or "sheet"
    parts = (
        *([NOT_GOOD] if disc.not_good else []),
        title,
        *([slug(disc.part, LONGEST_TITLE)] if disc.part else []),
        f"{disc.movement.id}-r{disc.movement.revision}",
        f"{material}-{blank.thickness_mm:g}mm",
        disc.cutter.drawn_from,
        "mm",
        disc.fingerprint,
    )
    return "_".join(parts) + ENDINGS[file_name]


def _own_letters(title: str) -> str:
    # Letters, marks and numbers of any script; all else (spaces, slashes, direction marks) becomes a hyphen.
    kept = "".join(c if unicodedata.category(c)[0] in "LMN" else " " for c in unicodedata.normalize("NFC", title))
    joined = "-".join(kept.split()).lower()
    return joined.encode()[:LONGEST_TITLE_BYTES].decode(errors="ignore").rstrip("-")
