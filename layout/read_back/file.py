"""From the bytes of a DXF file to what is cut, or a clear word why not."""

import io
from collections.abc import Iterator
from contextlib import contextmanager

from ezdxf import recover
from ezdxf.document import Drawing
from ezdxf.enums import InsertUnits
from ezdxf.filemanagement import read
from ezdxf.lldxf.const import DXFError

from layout.documents.cutter import Cutter
from layout.errors import DrawingReadError
from layout.read_back.entities import CutDrawing, cut_drawing_of
from layout.read_back.limits import MOST_MIB

_BINARY_START = b"AutoCAD Binary DXF"  # DXF reference: the sentinel of a binary file
_REMEDY = "save it as an ASCII DXF file of release R2010 or later and try again"
# What a library made for well-meant files may raise on damaged ones; one handler, so that none gets through.
_STUMBLES = (
    DXFError,
    ArithmeticError,
    AssertionError,
    AttributeError,
    LookupError,
    RecursionError,
    TypeError,
    ValueError,
)


def read_drawing(dxf: bytes, cutter: Cutter, *, farthest_mm: float) -> CutDrawing:
    """What is cut in a DXF file.

    Args:
        dxf: The file.
        cutter: For its layer names and the side its drawings show.
        farthest_mm: How far from the centre a coordinate may lie.

    Raises:
        DrawingReadError: Too large, no ASCII DXF, damaged beyond use, or not in millimetres.
    """
    with open_drawing(dxf) as (document, mended):
        return cut_drawing_of(document, cutter, farthest_mm=farthest_mm, mended=mended)


@contextmanager
def open_drawing(dxf: bytes) -> Iterator[tuple[Drawing, bool]]:
    """The document of a DXF file, and whether it had to be mended; what the library stumbles over becomes an error.

    Args:
        dxf: The file.

    Raises:
        DrawingReadError: As for read_drawing, from here or from what is read of the document meanwhile.
    """
    _refuse_by_its_bytes(dxf)
    with _stumbles_as_errors():
        document, mended = _document(dxf)
        _refuse_other_units(dxf, document)
        yield document, mended


def _refuse_by_its_bytes(dxf: bytes) -> None:
    if len(dxf) > MOST_MIB * 2**20:
        size_mib = len(dxf) / 2**20
        raise DrawingReadError(f"drawing: {size_mib:.1f} MiB, allowed are {MOST_MIB}; leave out all that is not cut")
    if not dxf.strip():
        raise DrawingReadError("drawing: the file is empty; give a DXF file")
    if dxf.startswith(_BINARY_START):
        raise DrawingReadError(f"drawing: a binary DXF file is not read; {_REMEDY}")
    if b"ENTITIES" not in dxf:  # the library would mend any text into an empty drawing
        raise DrawingReadError(f"drawing: not a DXF file that can be read (it has no ENTITIES section); {_REMEDY}")


@contextmanager
def _stumbles_as_errors() -> Iterator[None]:
    try:
        yield
    except _STUMBLES as error:
        said = " ".join(str(error).split())[:120] or type(error).__name__
        raise DrawingReadError(f"drawing: not a DXF file that can be read ({said}); {_REMEDY}") from error


def _document(dxf: bytes) -> tuple[Drawing, bool]:
    """The document, and whether it had to be mended."""
    try:
        text = dxf.decode("utf-8", errors="surrogateescape").replace("\r\n", "\n")  # only files get this done for them
        return read(io.StringIO(text)), False
    except _STUMBLES:
        document, _ = recover.read(io.BytesIO(dxf))
    if not len(document.modelspace()):
        raise DrawingReadError(f"drawing: not a DXF file that can be read (it is damaged, nothing is left); {_REMEDY}")
    return document, True


def _refuse_other_units(dxf: bytes, document: Drawing) -> None:
    if b"$INSUNITS" not in dxf:
        return  # the library would put in its own default
    code = int(document.header.get("$INSUNITS", 0))
    if code in (InsertUnits.Unitless, InsertUnits.Millimeters):
        return
    known = {unit.value: unit.name.lower() for unit in InsertUnits}
    found = known.get(code, "an unknown unit")
    raise DrawingReadError(f"drawing: drawn in {found} ($INSUNITS {code}), allowed are millimetres (4); convert it")
