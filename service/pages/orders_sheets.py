"""The work sheet of a disc to be looked at in its page: pictures of the PDF's pages, made when they are asked for."""

import io
import logging
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from functools import lru_cache

import pypdfium2  # type: ignore[import-untyped]  # it ships no types
from flask import Request, Response
from PIL import Image

from service.api.answers import conditional
from service.api.order_answers import file_address
from service.api.problems import ProblemError
from service.orders.views import FileView, PlanView
from service.parts import Parts
from service.store.files import FileStore

SHEET = "work-sheet.pdf"
PNG_MEDIA_TYPE = "image/png"
PIXELS_PER_POINT = 1.6  # 115 to the inch: the smallest letters of a sheet can be read
COLOURS = 64  # of a picture; a sheet has few, and a third of the bytes is enough
COUNTS_KEPT = 1000  # work sheets of which the count of pages is kept; 0.1 kB each
_READING = threading.Lock()  # PDFium may be used by one thread at a time

log = logging.getLogger(__name__)


class SheetDamagedError(Exception):
    """A work sheet is there, but no PDF that can be opened."""


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetTold:
    """A disc's work sheet: its number, where its pages are shown as pictures, and where the file itself is.

    No pages: the file is damaged and cannot be shown.
    """

    disc: int
    pages: tuple[str, ...]
    address: str


def sheet_told(parts: Parts, order_id: str, plan: PlanView, disc: int) -> SheetTold | None:
    """The work sheet of a disc of a plan; None where its files were deleted, or there is no such disc.

    Raises:
        StoreError: It cannot be read.
    """
    found = [file for file in plan.files if (file.disc, file.name) == (disc, SHEET)]
    if not found:
        return None
    try:
        count = _page_count(parts.files, found[0].sha256)
    except SheetDamagedError:
        log.error("the work sheet %s of order %s cannot be opened", found[0].sha256, order_id, exc_info=True)
        count = 0
    base = f"/orders/{order_id}/discs/{disc}/work-sheet"
    return SheetTold(
        disc=disc,
        pages=tuple(f"{base}/{number}.png?revision={plan.revision}" for number in range(1, count + 1)),
        address=file_address(order_id, plan.revision, disc, SHEET),
    )


def sheet_picture(parts: Parts, file: FileView, number: int, asked: Request) -> Response:
    """A page of a work sheet as a picture.

    Args:
        parts: Read for the file.
        file: The work sheet.
        number: Of the page, from 1.
        asked: The request; a picture it has already is not made again.

    Raises:
        ProblemError: There is no such page.
        StoreError: The file cannot be read.
    """
    response = Response(content_type=PNG_MEDIA_TYPE)
    response.set_etag(f"{file.sha256}-{number}-{PIXELS_PER_POINT}")
    response.headers["Cache-Control"] = "private, no-cache"
    if not asked.if_none_match.contains_weak(response.get_etag()[0] or ""):
        response.set_data(picture_of(parts.files.read(file.sha256), number))
    return conditional(response, asked)


def picture_of(pdf: bytes, number: int) -> bytes:
    """A page of a PDF as a PNG.

    Args:
        pdf: The file.
        number: Of the page, from 1.

    Raises:
        ProblemError: There is no such page, or the file is damaged.
    """
    try:
        with _opened(pdf) as document:
            if not 1 <= number <= len(document):
                detail = f"the work sheet has no page {number}; it has {len(document)}"
                raise ProblemError(name="route-unknown", detail=detail)
            image = document[number - 1].render(scale=PIXELS_PER_POINT).to_pil()
    except SheetDamagedError as fault:
        raise ProblemError(name="route-unknown", detail="the work sheet is damaged and cannot be shown") from fault
    out = io.BytesIO()
    image.convert("RGB").quantize(COLOURS, method=Image.Quantize.FASTOCTREE).save(out, "PNG")
    return out.getvalue()


@lru_cache(maxsize=COUNTS_KEPT)
def _page_count(files: FileStore, sha256: str) -> int:
    """How many pages a work sheet has: counted once, for what a digest names never changes.

    Raises:
        SheetDamagedError: It cannot be opened; the next time it is tried again, as it may be restored meanwhile.
        StoreError: It cannot be read.
    """
    with _opened(files.read(sha256)) as document:
        return len(document)


@contextmanager
def _opened(pdf: bytes) -> Iterator[pypdfium2.PdfDocument]:
    """A PDF, closed however it is left.

    Raises:
        SheetDamagedError: PDFium cannot read it.
    """
    with _READING:
        try:
            document = pypdfium2.PdfDocument(pdf)
        except pypdfium2.PdfiumError as fault:
            raise SheetDamagedError(str(fault)) from fault
        try:
            yield document
        except pypdfium2.PdfiumError as fault:
            raise SheetDamagedError(str(fault)) from fault
        finally:
            document.close()
