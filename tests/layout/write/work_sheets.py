"""Work sheets of discs made by hand, and how tests look at them: with pypdf for words, pdfium for places and ink."""

import io
import re
from collections.abc import Iterator
from dataclasses import replace
from functools import lru_cache

import numpy as np
import pypdf
import pypdfium2  # type: ignore[import-untyped]  # it ships no types
from numpy.typing import NDArray

from layout.check.finding import Finding
from layout.cut import plan_cuts
from layout.cut.plan import CutPlan
from layout.making.making import Making
from layout.place.disc import Disc
from layout.write.work_sheet import write_work_sheet
from tests.layout.write.examples import FINGERPRINT, laid_out_of

POINTS_PER_MM = 72 / 25.4
PIXELS_PER_MM = 20
DARK = 128  # of 255: ink darker than the grey warning across the page


@lru_cache
def plan_of(disc: Disc) -> CutPlan:
    """The cut plan of a disc; finding room for its letters is slow, so it is made once."""
    return plan_cuts(disc, title="Example", fingerprint=FINGERPRINT, not_good=None)


def sheet_of(
    disc: Disc,
    *,
    title: str = "Example",
    findings: tuple[Finding, ...] = (),
    not_good: str | None = None,
    making: Making | None = None,
) -> bytes:
    plan = replace(plan_of(disc), title=title, not_good=not_good)
    return write_work_sheet(plan, laid_out_of(disc, title=title, findings=findings), making)


def set_sheet_of(disc: Disc, number: int, count: int) -> bytes:
    laid_out = replace(laid_out_of(disc), disc_number=number, disc_count=count)
    return write_work_sheet(replace(plan_of(disc), part=laid_out.part), laid_out, None)


@lru_cache(maxsize=8)
def pages_of(pdf: bytes) -> list[str]:
    """The words of each page, line by line."""
    return [page.extract_text() for page in pypdf.PdfReader(io.BytesIO(pdf)).pages]


def words_of(pdf: bytes) -> str:
    """All words, on one line."""
    return " ".join(" ".join(pages_of(pdf)).split())


def text_boxes_mm(pdf: bytes, page: int) -> Iterator[tuple[float, float, float, float]]:
    """Left, bottom, right and top of every piece of text on a page, from 0."""
    text = pypdfium2.PdfDocument(pdf)[page].get_textpage()
    for index in range(text.count_rects()):
        left, bottom, right, top = (edge / POINTS_PER_MM for edge in text.get_rect(index))
        yield left, bottom, right, top


def ink_of(pdf: bytes, page: int) -> NDArray[np.bool_]:
    """Shape (rows, columns), PIXELS_PER_MM a millimetre, the first row at the top: where the page is dark."""
    bitmap = pypdfium2.PdfDocument(pdf)[page].render(scale=PIXELS_PER_MM / POINTS_PER_MM, grayscale=True)
    grey: NDArray[np.uint8] = np.asarray(bitmap.to_numpy()).reshape(bitmap.height, bitmap.width)
    return grey < DARK


def row_of(ink: NDArray[np.bool_], up_mm: float, from_mm: float, to_mm: float) -> NDArray[np.float64]:
    """Where ink lies on the row so far up the page, in millimetres from the page's left edge."""
    row = ink[round(ink.shape[0] - up_mm * PIXELS_PER_MM)]
    at_mm = (np.flatnonzero(row) + 0.5) / PIXELS_PER_MM
    return at_mm[(at_mm >= from_mm) & (at_mm <= to_mm)]


def counts_told(pdf: bytes) -> dict[int, int]:
    """The count of every track, as the table says."""
    table = pages_of(pdf)[1].split("Projections on each track used")[1]
    return {int(track): int(count) for track, count in re.findall(r"^ *(\d+): (\d+)$", table, flags=re.MULTILINE)}
