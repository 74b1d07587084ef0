"""The sheet the picture stands on: its units, and the ways anything is put on it."""

import io
import unicodedata
from dataclasses import dataclass, replace
from typing import Literal
from xml.etree.ElementTree import ElementTree  # nosec B405 -- written here, never read

import svgwrite
from svgwrite.base import Desc, Title
from svgwrite.shapes import Rect
from svgwrite.text import Text

from layout.write.numbers import number
from layout.write.plain_text import one_line
from layout.write.svg_style import BLACK, FONT, WHITE

PAGE_PER_DISC = 1.14  # the page's width in disc diameters: room for the turning arrow
HUNDRED = 100.0
_HALF_ROOM = 47.0  # hundredths of the page's width, from its middle
_DECIMALS = 3  # of a millimetre, for what is not an outline
# em; of a wide font, DejaVu Sans, rounded up, since fonts differ; capitals and other scripts are broad
_WIDTHS = (
    (0.36, "ijlIJf.,:;'|/\\- "),
    (0.42, 'tr()[]!*"'),
    (0.59, "sczkvxyLFTYP?_"),
    (1.0, "mMW—…@%"),
)
_WIDTH_OF = {character: width for width, characters in _WIDTHS for character in characters}
_MIDDLE, _BROAD, _FULL = 0.64, 0.79, 1.0
_BOLD = 1.16
_LATIN = 0x250  # the first character after the Latin letters
_SIZES = 8  # steps from the largest letters to the smallest
_HEAD = b'<?xml version="1.0" encoding="UTF-8"?>\n'


@dataclass(frozen=True, slots=True, kw_only=True)
class Page:
    """The page's scale: the disc's centre is the origin, x to the right, y down, millimetres.

    Attributes:
        width_mm: Of the whole page.
        disc_radius_mm: Of the disc on it.
    """

    width_mm: float
    disc_radius_mm: float

    def units_mm(self, units: float) -> float:
        """So many hundredths of the page's width."""
        return self.width_mm * units / HUNDRED

    def units(self, units: float) -> str:
        """The same, as text."""
        return short(self.units_mm(units))

    def part(self, width_ratio: float) -> str:
        """So much of the page's width, as text."""
        return short(self.width_mm * width_ratio)

    def dashes(self, dashes_ratio: tuple[float, ...]) -> str | None:
        """Dash and gap lengths as SVG wants them; None for a full line."""
        return " ".join(map(self.part, dashes_ratio)) or None

    @property
    def left_mm(self) -> float:
        """Left edge of what is written."""
        return -self.units_mm(_HALF_ROOM)

    @property
    def room_mm(self) -> float:
        """Width of what is written, from the left edge to the right one."""
        return self.units_mm(2 * _HALF_ROOM)


@dataclass(frozen=True, slots=True, kw_only=True)
class Face:
    """How a line of text is set: its size, weight, colour, and which part of it stands at its place."""

    size_mm: float
    bold: bool = False
    colour: str = BLACK
    anchor: Literal["start", "middle", "end"] = "start"


def page_for(disc_diameter_mm: float) -> Page:
    """The page for a disc of this diameter, at natural size."""
    return Page(width_mm=disc_diameter_mm * PAGE_PER_DISC, disc_radius_mm=disc_diameter_mm / 2)


def short(value_mm: float) -> str:
    """A place on the page as text, to a micrometre."""
    return number(value_mm, _DECIMALS)


def new_drawing(page: Page, top_mm: float, bottom_mm: float) -> svgwrite.Drawing:
    """An empty picture from top_mm down to bottom_mm, on white."""
    width, height = short(page.width_mm), short(bottom_mm - top_mm)
    left, top = short(-page.width_mm / 2), short(top_mm)
    drawing = svgwrite.Drawing(
        size=(f"{width}mm", f"{height}mm"), viewBox=f"{left} {top} {width} {height}", debug=False, font_family=FONT
    )
    drawing.add(Rect(insert=(left, top), size=(width, height), fill=WHITE, debug=False))
    return drawing


def describe(drawing: svgwrite.Drawing, title: str, description: str) -> None:
    """Gives the picture the name and the description that screen readers read."""
    texts = (Title(one_line(title)), Desc(one_line(description)))
    for text, name in zip(texts, ("title", "description"), strict=True):
        text.xml.set("id", name)
    drawing.elements[:0] = texts
    drawing["role"] = "img"
    drawing["aria-labelledby"] = "title description"


def bytes_of(drawing: svgwrite.Drawing) -> bytes:
    """The file of a drawing, UTF-8, written once: a large one is some megabytes."""
    file = io.BytesIO(_HEAD)
    file.seek(0, io.SEEK_END)
    ElementTree(drawing.get_xml()).write(file, encoding="utf-8", xml_declaration=False)
    file.write(b"\n")
    return file.getvalue()


def words(text: str, at_mm: tuple[float, float], face: Face) -> Text:
    """A line of text with its base line at at_mm."""
    return Text(
        one_line(text),
        insert=(short(at_mm[0]), short(at_mm[1])),
        font_size=short(face.size_mm),
        font_weight="bold" if face.bold else None,
        fill=face.colour,
        text_anchor=None if face.anchor == "start" else face.anchor,
        debug=False,
    )


def text_width_mm(text: str, face: Face) -> float:
    """About how wide a line of text is, rather more than less: the font is the viewer's."""
    widths = sum(map(_width_em, text))
    return widths * face.size_mm * (_BOLD if face.bold else 1.0)


def _width_em(character: str) -> float:
    if character in _WIDTH_OF:
        return _WIDTH_OF[character]
    if unicodedata.east_asian_width(character) in {"W", "F"}:
        return _FULL
    is_broad = character.isupper() or character in "w&+−×=<>#^~" or ord(character) >= _LATIN
    return _BROAD if is_broad else _MIDDLE


def shortened(text: str, face: Face, room_mm: float) -> str:
    """The text, cut with "…" where it does not fit."""
    plain = one_line(text)
    if text_width_mm(plain, face) <= room_mm:
        return plain
    while plain and text_width_mm(plain + "…", face) > room_mm:
        plain = plain[:-1]
    return plain.rstrip() + "…"


def wrapped(text: str, face: Face, room_mm: float) -> list[str]:
    """The text broken into lines that fit: between words, and inside a word that is too long alone."""
    lines: list[str] = []
    for word in one_line(text).split(" "):
        longer = f"{lines[-1]} {word}" if lines else word
        if lines and text_width_mm(longer, face) <= room_mm:
            lines[-1] = longer
        else:
            lines += _pieces(word, face, room_mm)
    return lines


def _pieces(word: str, face: Face, room_mm: float) -> list[str]:
    pieces = [""]
    for character in word:
        if pieces[-1] and text_width_mm(pieces[-1] + character, face) > room_mm:
            pieces.append("")
        pieces[-1] += character
    return pieces


def at_most(most_lines: int, text: str, face: Face, room_mm: float) -> list[str]:
    """The text broken into so many lines at most, the last one cut with "…" where it does not fit."""
    lines = wrapped(text, face, room_mm)
    if len(lines) <= most_lines:
        return lines
    rest = " ".join(lines[most_lines - 1 :])
    return [*lines[: most_lines - 1], shortened(rest, face, room_mm)]


def fitted(text: str, face: Face, room_mm: float, least_size_mm: float) -> tuple[Face, list[str]]:
    """The text on one line, smaller where it must be; else on two lines; else cut with "…".

    Returns:
        The face with the size it takes, not under least_size_mm, and the lines.
    """
    sizes_mm = [face.size_mm + (least_size_mm - face.size_mm) * step / _SIZES for step in range(_SIZES + 1)]
    faces = [replace(face, size_mm=size_mm) for size_mm in sizes_mm]
    for most_lines in (1, 2):
        for smaller in faces:
            lines = wrapped(text, smaller, room_mm)
            if len(lines) <= most_lines:
                return smaller, lines
    return faces[-1], at_most(2, text, faces[-1], room_mm)
