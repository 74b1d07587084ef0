"""measure.pdf: one A4 page to take to the bench, with room to write what is measured."""

import io
from collections.abc import Sequence

from reportlab.lib.pagesizes import A4
from reportlab.lib.units import mm
from reportlab.lib.utils import simpleSplit
from reportlab.pdfbase.pdfmetrics import stringWidth
from reportlab.pdfgen.canvas import Canvas

from layout.trial.piece import Ladder, TrialPiece
from layout.version import ENGINE_VERSION
from layout.write.numbers import number
from layout.write.plain_text import one_line

# Sizes in PDF points. 7.5 pt is the least that is read easily at a bench (common practice: not below 7 pt).
PAGE_WIDTH, PAGE_HEIGHT = A4
MARGIN = 15 * mm
TEXT_WIDTH = PAGE_WIDTH - 2 * MARGIN
REGULAR, BOLD = "Helvetica", "Helvetica-Bold"  # two of the fonts every PDF reader has
TEXT_SIZE, LINE = 7.5, 9.2
HEAD_SIZE, TITLE_SIZE = 9.0, 15.0
NAME_WIDTH = 22 * mm
ROW_HEIGHT, WRITING_HEIGHT = 11.0, 19.0  # 19 pt are 6.7 mm: a line of handwriting
BLOCK_GAP = 7.0
WORDS = {
    "kerf": "Kerf",
    "tab-width": "Tab width",
    "depth": "Depth",
    "slot-width": "Slot width",
    "slot-length": "Slot length",
    "web": "Web: metal left",
    "tracks": "Tracks",
}


def write_trial_sheet(piece: TrialPiece) -> bytes:
    """The measure sheet as a PDF of one A4 page; the same piece gives the same bytes.

    For each ladder it says what to measure, the nominal value of each step, room for the measured one,
    and which field of which document to correct and how. Letters the page's fonts lack become "?".
    """
    buffer = io.BytesIO()
    canvas = Canvas(buffer, pagesize=A4, invariant=1)
    canvas.setTitle(f"Measure sheet, trial piece for {piece.movement_id} on {piece.cutter_id}")
    canvas.setAuthor("discwright")
    sheet = _Sheet(canvas)
    sheet.title("Measure sheet of a trial piece", _about(piece))
    for ladder in piece.ladders:
        sheet.ladder(ladder)
    if piece.not_tried:
        sheet.paragraphs("Not tried", _not_tried(piece))
    sheet.paragraphs("Mind", piece.cautions)
    sheet.foot("Measured by, date:")
    canvas.showPage()
    canvas.save()
    return buffer.getvalue()


def _about(piece: TrialPiece) -> list[str]:
    tool = "" if piece.hits is None else f", tool {piece.hits.tool}"
    return [
        f"Movement {piece.movement_id}, revision {piece.movement_revision}. Cutter {piece.cutter_id}{tool}. "
        f"Sheet {piece.material}, {number(piece.thickness_mm)} mm.",
        f"trial-piece.dxf is drawn from the {piece.drawn_from.replace('-', ' ')}; {piece.edges}. "
        f"discwright {ENGINE_VERSION}.",
    ]


MOST_TOLD = 4  # things not tried that are named on the page; trial-piece.json has them all


def _not_tried(piece: TrialPiece) -> list[str]:
    told = [f"{left.what}: {left.why}." for left in piece.not_tried[:MOST_TOLD]]
    more = len(piece.not_tried) - MOST_TOLD
    return told + ([f"And {more} more, all in trial-piece.json."] if more > 0 else [])


class _Sheet:
    """A page that is filled from the top."""

    def __init__(self, canvas: Canvas) -> None:
        self._canvas = canvas
        self._y = PAGE_HEIGHT - MARGIN

    def title(self, title: str, lines: Sequence[str]) -> None:
        self._y -= TITLE_SIZE
        self._say(title, BOLD, TITLE_SIZE, MARGIN)
        self._y -= 3
        for line in lines:
            self._wrapped(line)
        self._y -= BLOCK_GAP

    def ladder(self, ladder: Ladder) -> None:
        tool = f", tool {ladder.tool}" if ladder.tool else ""
        self._head(f"{WORDS[ladder.name]}{tool}")
        self._wrapped(f"Measure: {ladder.measure}")
        self._wrapped(f"Correct: {_fields(ladder)}. {ladder.how}")
        self._y -= 3
        self._table(ladder)
        self._y -= BLOCK_GAP

    def paragraphs(self, head: str, paragraphs: Sequence[str]) -> None:
        self._head(head)
        for paragraph in paragraphs:
            self._wrapped(paragraph)
        self._y -= BLOCK_GAP

    def foot(self, text: str) -> None:
        self._y -= WRITING_HEIGHT
        self._say(text, REGULAR, TEXT_SIZE, MARGIN)
        self._canvas.line(MARGIN + NAME_WIDTH + 2 * mm, self._y - 2, PAGE_WIDTH - MARGIN, self._y - 2)

    def _head(self, text: str) -> None:
        self._y -= HEAD_SIZE
        self._say(text, BOLD, HEAD_SIZE, MARGIN)
        self._y -= 2

    def _wrapped(self, text: str) -> None:
        for line in _lines(_printable(text)):
            self._y -= LINE
            self._say(line, REGULAR, TEXT_SIZE, MARGIN)

    def _table(self, ladder: Ladder) -> None:
        columns = max(len(ladder.steps), 1)
        cell_width = (TEXT_WIDTH - NAME_WIDTH) / columns
        rows = [
            ("step", [step.mark for step in ladder.steps], BOLD, ROW_HEIGHT),
            ("nominal, mm", [number(step.nominal_mm, 3) for step in ladder.steps], REGULAR, ROW_HEIGHT),
            ("measured, mm", ["" for _ in ladder.steps], REGULAR, WRITING_HEIGHT),
        ]
        for name, cells, font, height in rows:
            self._y -= height
            self._canvas.rect(MARGIN, self._y, NAME_WIDTH, height)
            self._say(name, REGULAR, TEXT_SIZE, MARGIN + 3, lift=(height - TEXT_SIZE) / 2 + 1)
            for place, cell in enumerate(cells):
                left = MARGIN + NAME_WIDTH + place * cell_width
                self._canvas.rect(left, self._y, cell_width, height)
                self._say(cell, font, TEXT_SIZE, left + 3, lift=(height - TEXT_SIZE) / 2 + 1)

    def _say(self, text: str, font: str, size: float, left: float, lift: float = 0.0) -> None:
        self._canvas.setFont(font, size)
        self._canvas.setLineWidth(0.5)
        self._canvas.drawString(left, self._y + lift, _printable(text))


def _lines(text: str) -> list[str]:
    """The text in lines as wide as the page allows; a word too wide for a line is broken."""
    lines: list[str] = []
    for line in simpleSplit(text, REGULAR, TEXT_SIZE, TEXT_WIDTH):
        start = 0
        for end in range(1, len(line) + 1):
            if stringWidth(line[start:end], REGULAR, TEXT_SIZE) > TEXT_WIDTH:
                lines.append(line[start : end - 1])
                start = end - 1
        lines.append(line[start:])
    return lines


def _fields(ladder: Ladder) -> str:
    places = dict.fromkeys(f"{step.document} {step.field}" for step in ladder.steps)
    return ", ".join(places)


def _printable(text: str) -> str:
    """The text in the letters of the page's fonts (Windows-1252)."""
    return one_line(text).encode("cp1252", "replace").decode("cp1252")
