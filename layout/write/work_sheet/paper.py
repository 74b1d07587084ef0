"""The paper: A4 pages on which everything is placed in millimetres, from the lower left corner."""

import io
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from reportlab.lib.units import mm
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas
from reportlab.pdfgen.pathobject import PDFPathObject

from layout.version import ENGINE_VERSION
from layout.write.plain_text import one_line
from layout.write.work_sheet.letters import printable

PAGE_WIDTH_MM, PAGE_HEIGHT_MM = 210.0, 297.0  # A4, ISO 216
# ISO 128: a wide and a narrow line, 2:1; the third for what would run together (all three from memory).
WIDE_MM, NARROW_MM, HAIR_MM = 0.5, 0.25, 0.13
LINE_HEIGHT = 1.25  # of the letter size
DESCENDS = 0.22  # of the letter size: how far letters reach below their line, Helvetica
MORE = "…"
Point = tuple[float, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Area:
    """A rectangle of the page. Where something is written down from its top, what is left is an Area again."""

    left_mm: float
    bottom_mm: float
    width_mm: float
    height_mm: float

    @property
    def right_mm(self) -> float:
        """The right edge."""
        return self.left_mm + self.width_mm

    @property
    def top_mm(self) -> float:
        """The upper edge."""
        return self.bottom_mm + self.height_mm

    def below(self, taken_mm: float) -> "Area":
        """What is left under a strip of this height; never less than nothing."""
        return replace(self, height_mm=max(self.height_mm - taken_mm, 0.0))

    def strip(self, height_mm: float) -> "Area":
        """The strip of this height at the top."""
        return replace(self, bottom_mm=self.top_mm - height_mm, height_mm=height_mm)

    def inside(self, margin_mm: float) -> "Area":
        """The area without a margin all round."""
        return Area(
            left_mm=self.left_mm + margin_mm,
            bottom_mm=self.bottom_mm + margin_mm,
            width_mm=self.width_mm - 2 * margin_mm,
            height_mm=self.height_mm - 2 * margin_mm,
        )

    def beside(self, from_mm: float, width_mm: float) -> "Area":
        """A column of the area, from so far right of its left edge."""
        return replace(self, left_mm=self.left_mm + from_mm, width_mm=width_mm)


@dataclass(frozen=True, slots=True, kw_only=True)
class Face:
    """How text is set. grey_ratio runs from 0, black, to 1, white."""

    size_mm: float
    bold: bool = False
    grey_ratio: float = 0.0
    anchor: Literal["start", "middle", "end"] = "start"

    @property
    def font(self) -> str:
        """Its name among the PDF standard fonts."""
        return "Helvetica-Bold" if self.bold else "Helvetica"

    @property
    def line_mm(self) -> float:
        """From one line to the next."""
        return self.size_mm * LINE_HEIGHT


@dataclass(frozen=True, slots=True, kw_only=True)
class Pen:
    """How a line is drawn: fill_ratio is the grey inside, None for none; no line where width_mm is 0."""

    width_mm: float = NARROW_MM
    grey_ratio: float = 0.0
    fill_ratio: float | None = None
    dashes_mm: tuple[float, ...] = ()


HEADING = Face(size_mm=3.0, bold=True)
BODY = Face(size_mm=2.4)
STRONG = Face(size_mm=2.4, bold=True)
SMALL = Face(size_mm=2.1)
LABEL = Face(size_mm=2.4, grey_ratio=0.35)


class Paper:
    """A PDF being written. The same calls give the same bytes: no date, no random name, nothing compressed.

    Streams stay plain because a compressor's bytes differ from one build to the next.
    """

    def __init__(self, *, title: str, subject: str) -> None:
        self._bytes = io.BytesIO()
        size = (PAGE_WIDTH_MM * mm, PAGE_HEIGHT_MM * mm)
        self._canvas = Canvas(self._bytes, pagesize=size, pageCompression=0, invariant=1, lang="en-GB")
        self._canvas.setTitle(one_line(title))
        self._canvas.setSubject(printable(subject))
        self._canvas.setCreator(f"discwright {ENGINE_VERSION}")
        self._canvas.setAuthor(f"discwright {ENGINE_VERSION}")
        self._start_page()

    def next_page(self) -> None:
        """Ends the page and begins another."""
        self._canvas.showPage()
        self._start_page()

    def finished(self) -> bytes:
        """The file, with the page begun last as its last."""
        self._canvas.showPage()
        self._canvas.save()
        return self._bytes.getvalue()

    def _start_page(self) -> None:
        self._canvas.scale(mm, mm)
        self._canvas.setLineCap(1)
        self._canvas.setLineJoin(1)

    def text(self, at_mm: Point, text: str, face: Face, *, turned_deg: float = 0.0) -> None:
        """A line of text on its base line."""
        shown = printable(text)
        canvas = self._canvas
        canvas.saveState()
        canvas.setFillGray(face.grey_ratio)
        canvas.setFont(face.font, face.size_mm)
        canvas.translate(*at_mm)
        canvas.rotate(turned_deg)
        back_mm = {"start": 0.0, "middle": 0.5, "end": 1.0}[face.anchor] * text_width_mm(shown, face)
        canvas.drawString(-back_mm, 0.0, shown)
        canvas.restoreState()

    def line(self, points_mm: Sequence[Point], pen: Pen, *, closed: bool = False) -> None:
        """A line through points."""
        path = self._canvas.beginPath()
        path.moveTo(*points_mm[0])
        for point in points_mm[1:]:
            path.lineTo(*point)
        if closed:
            path.close()
        self.draw(path, pen)

    def box(self, area: Area, pen: Pen) -> None:
        """A rectangle."""
        path = self._canvas.beginPath()
        path.rect(area.left_mm, area.bottom_mm, area.width_mm, area.height_mm)
        self.draw(path, pen)

    def arrow(self, from_mm: Point, to_mm: Point, pen: Pen) -> None:
        """A line with a filled head at its end."""
        self.line([from_mm, to_mm], pen)
        self.head(from_mm, to_mm, pen)

    def head(self, from_mm: Point, to_mm: Point, pen: Pen, length_mm: float = 2.0) -> None:
        """The head alone of an arrow that comes from a point, its tip at another."""
        away = (from_mm[0] - to_mm[0], from_mm[1] - to_mm[1])
        far_mm = (away[0] ** 2 + away[1] ** 2) ** 0.5 or 1.0
        along = (away[0] / far_mm * length_mm, away[1] / far_mm * length_mm)
        aside = (-along[1] / 5, along[0] / 5)  # a slender head, about 22 degrees
        back = (to_mm[0] + along[0], to_mm[1] + along[1])
        corners = [to_mm, (back[0] + aside[0], back[1] + aside[1]), (back[0] - aside[0], back[1] - aside[1])]
        self.line(corners, replace(pen, width_mm=0.0, fill_ratio=pen.grey_ratio, dashes_mm=()), closed=True)

    def new_path(self) -> PDFPathObject:
        """An empty path in millimetres, for `draw` and `clipped`."""
        return self._canvas.beginPath()

    def draw(self, path: PDFPathObject, pen: Pen) -> None:
        """Strokes and fills a path."""
        canvas = self._canvas
        canvas.saveState()
        canvas.setLineWidth(pen.width_mm)
        canvas.setStrokeGray(pen.grey_ratio)
        if pen.dashes_mm:
            canvas.setDash(list(pen.dashes_mm))
        if pen.fill_ratio is not None:
            canvas.setFillGray(pen.fill_ratio)
        canvas.drawPath(path, stroke=int(pen.width_mm > 0), fill=int(pen.fill_ratio is not None))
        canvas.restoreState()

    def clip_to(self, path: PDFPathObject) -> None:
        """Shows only what lies inside the path, until `unclip`."""
        self._canvas.saveState()
        self._canvas.clipPath(path, stroke=0, fill=0)

    def unclip(self) -> None:
        """Ends the last `clip_to`."""
        self._canvas.restoreState()


def text_width_mm(text: str, face: Face) -> float:
    """How wide a line of text is in the standard font's own metrics."""
    return float(stringWidth(text, face.font, face.size_mm))


def wrapped(text: str, face: Face, room_mm: float) -> list[str]:
    """The text broken into lines that fit: between words, and inside a word that is too long alone."""
    lines: list[str] = []
    for word in printable(text).split(" "):
        longer = f"{lines[-1]} {word}" if lines else word
        if text_width_mm(longer, face) <= room_mm:
            lines[-1:] = [longer]
        else:
            lines += _pieces(word, face, room_mm)
    return lines


def _pieces(word: str, face: Face, room_mm: float) -> Iterator[str]:
    piece = ""
    for letter in word:
        if piece and text_width_mm(piece + letter, face) > room_mm:
            yield piece
            piece = ""
        piece += letter
    yield piece


def at_most(most_lines: int, text: str, face: Face, room_mm: float) -> list[str]:
    """The text broken into so many lines at most, the last one cut with "…" where it does not fit."""
    lines = wrapped(text, face, room_mm)
    if len(lines) <= most_lines:
        return lines
    if most_lines <= 0:
        return []
    last = f"{lines[most_lines - 1]}{MORE}"
    while len(last) > 1 and text_width_mm(last, face) > room_mm:
        last = last[:-2] + MORE
    return [*lines[: most_lines - 1], last]


def written(paper: Paper, area: Area, text: str, face: Face, *, most_lines: int = 99) -> Area:
    """Writes a paragraph down from the top of an area, as far as there is room, and gives what is left."""
    room = int((area.height_mm + 1e-6) / face.line_mm)
    lines = at_most(min(most_lines, room), text, face, area.width_mm)
    for line in lines:
        paper.text((area.left_mm, area.top_mm - face.size_mm * (1 - DESCENDS)), line, face)
        area = area.below(face.line_mm)
    return area


def headed(paper: Paper, area: Area, text: str) -> Area:
    """Writes a heading over a narrow line, and gives what is left."""
    left = written(paper, area, text, HEADING, most_lines=1)
    paper.line([(left.left_mm, left.top_mm), (left.right_mm, left.top_mm)], Pen())
    return left.below(1.0)
