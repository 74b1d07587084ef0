"""The work sheet of a disc to be looked at in its page: pictures of the PDF's pages, made when they are asked for."""

import io
import threading
from dataclasses import dataclass

import pypdfium2  # type: ignore[import-untyped]  # it ships no types
from flask import Request, Response
from PIL import Image

from service.api.order_answers import file_address
from service.api.problems import ProblemError
from service.orders.views import FileView, PlanView
from service.parts import Parts

SHEET = "work-sheet.pdf"
PNG_MEDIA_TYPE = "image/png"
PIXELS_PER_POINT = 1.6  # 115 to the inch: the smallest letters of a sheet can be read
COLOURS = 64  # of a picture; a sheet has few, and a third of the bytes is enough
_READING = threading.Lock()  # PDFium may be used by one thread at a time


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetTold:
    """A disc's work sheet: its number, where its pages are shown as pictures, and where the file itself is."""

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
    with _READING:
        document = pypdfium2.PdfDocument(parts.files.read(found[0].sha256))
        count = len(document)
        document.close()
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
    if not asked.if_none_match.contains(response.get_etag()[0] or ""):
        response.set_data(picture_of(parts.files.read(file.sha256), number))
    response.make_conditional(asked)
    return response


def picture_of(pdf: bytes, number: int) -> bytes:
    """A page of a PDF as a PNG.

    Args:
        pdf: The file.
        number: Of the page, from 1.

    Raises:
        ProblemError: There is no such page.
    """
    with _READING:
        document = pypdfium2.PdfDocument(pdf)
        try:
            if not 1 <= number <= len(document):
                detail = f"the work sheet has no page {number}; it has {len(document)}"
                raise ProblemError(name="route-unknown", detail=detail)
            image = document[number - 1].render(scale=PIXELS_PER_POINT).to_pil()
        finally:
            document.close()
    out = io.BytesIO()
    image.convert("RGB").quantize(COLOURS, method=Image.Quantize.FASTOCTREE).save(out, "PNG")
    return out.getvalue()
