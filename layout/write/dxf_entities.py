"""Entities of a DXF file: through ezdxf one by one, or for R2010 as text, all of a make at once.

ezdxf keeps an object for each entity, and asks each for its tags: most of a drawing's time, for a document that is
written once and thrown away. `WrittenEntities` gives the same text straight away. What stands before and behind the
entities is ezdxf's own work in either case.
"""

import math
from collections.abc import Sequence
from itertools import accumulate, pairwise
from typing import Protocol

import numpy as np
from ezdxf.document import Drawing
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.entities.polyline import Polyline
from ezdxf.lldxf.const import DXF12
from ezdxf.lldxf.tagwriter import AbstractTagWriter
from ezdxf.sections.entities import EntitySection

from layout.mechanics.arrays import FloatArray
from layout.write.many_numbers import as_repr
from layout.write.plain_text import MOST_DXF_STRING, dxf_text

APP_ID = "DISCWRIGHT"  # under which lettering carries its words as extended data
_STRING = 1000  # DXF reference: a string of extended data
_AT_A_TIME = 1000  # entities; the numbers of 8,000 as texts of their own take 6 MB, and no less time
_HEXADECIMAL = 16  # a handle is a number in hexadecimal digits


class Entities(Protocol):
    """Takes entities in the order they are drawn in. Places are in millimetres, rounded as the file has them."""

    def add_polylines(
        self, layer: str, points_mm: FloatArray, bulges: FloatArray, *, closed: bool, words: str = ""
    ) -> None:
        """Polylines of one make.

        Args:
            layer: The name of its layer in the file.
            points_mm: Shape (n, k, 2); n of 0 adds nothing.
            bulges: Shape (k,). Of the piece that starts at each vertex.
            closed: Whether the last vertex joins the first.
            words: What it carries as extended data; "" for none.
        """

    def add_strokes(self, layer: str, strokes_mm: Sequence[FloatArray], words: str) -> None:
        """Lettering as open lines, each of shape (k, 2), the first of which carries its words as extended data."""

    def add_circles(self, layer: str, centres_mm: FloatArray, radius_mm: Sequence[float]) -> None:
        """Circles: shape (n, 2), and n radii."""

    def add_arc(self, layer: str, centre_mm: FloatArray, radius_mm: float, ends_deg: tuple[float, float]) -> None:
        """An arc of a circle, anticlockwise."""

    def add_points(self, layer: str, points_mm: FloatArray) -> None:
        """Points: shape (n, 2)."""


def entities_of(document: Drawing) -> Entities:
    """What adds entities to the model space of an empty document, in the way of its release."""
    return LibraryEntities(document) if document.dxfversion == DXF12 else WrittenEntities(document)


class LibraryEntities:
    """Each an object of ezdxf. R12 has no light polylines: outlines are POLYLINE there, with the same vertices."""

    def __init__(self, document: Drawing) -> None:
        self._space = document.modelspace()

    def add_polylines(
        self, layer: str, points_mm: FloatArray, bulges: FloatArray, *, closed: bool, words: str = ""
    ) -> None:
        """See Entities."""
        for points in points_mm.tolist():
            vertices = [(x, y, bulge) for (x, y), bulge in zip(points, bulges.tolist(), strict=True)]
            line = self._polyline(vertices, {"layer": layer}, closed=closed)
            if words:
                line.set_xdata(APP_ID, [(_STRING, dxf_text(words, MOST_DXF_STRING))])

    def add_strokes(self, layer: str, strokes_mm: Sequence[FloatArray], words: str) -> None:
        """See Entities."""
        for place, stroke in enumerate(strokes_mm):
            straight, said = np.zeros(len(stroke)), words if place == 0 else ""
            self.add_polylines(layer, stroke[np.newaxis], straight, closed=False, words=said)

    def add_circles(self, layer: str, centres_mm: FloatArray, radius_mm: Sequence[float]) -> None:
        """See Entities."""
        for centre, radius in zip(centres_mm.tolist(), radius_mm, strict=True):
            self._space.add_circle(centre, radius, dxfattribs={"layer": layer})

    def add_arc(self, layer: str, centre_mm: FloatArray, radius_mm: float, ends_deg: tuple[float, float]) -> None:
        """See Entities."""
        self._space.add_arc(centre_mm.tolist(), radius_mm, *ends_deg, dxfattribs={"layer": layer})

    def add_points(self, layer: str, points_mm: FloatArray) -> None:
        """See Entities."""
        for point in points_mm.tolist():
            self._space.add_point(point, dxfattribs={"layer": layer})

    def _polyline(
        self, vertices: list[tuple[float, float, float]], on_layer: dict[str, str], *, closed: bool
    ) -> Polyline | LWPolyline:
        if self._space.dxfversion == DXF12:
            return self._space.add_polyline2d(vertices, format="xyb", close=closed, dxfattribs=on_layer)
        return self._space.add_lwpolyline(vertices, format="xyb", close=closed, dxfattribs=on_layer)


class WrittenEntities(EntitySection):
    """The text of a document's entities section, in the words of R2000 and later."""

    def __init__(self, document: Drawing) -> None:
        super().__init__(document)
        document.entities = self
        self._handles = document.entitydb.handles
        self._owner = document.modelspace().layout_key
        self._text: list[str] = []
        self._is_written = False

    def add_polylines(
        self, layer: str, points_mm: FloatArray, bulges: FloatArray, *, closed: bool, words: str = ""
    ) -> None:
        """See Entities."""
        curves = ["" if bulge == 0 else f" 42\n{bulge!r}\n" for bulge in bulges.tolist()]
        vertices = "".join(f" 10\n%s\n 20\n%s\n{curve}" for curve in curves)
        shape = f" 90\n{len(curves)}\n 70\n{int(closed)}\n{vertices}"
        self._add("LWPOLYLINE", "AcDbPolyline", layer, shape + _said(words).replace("%", "%%"), points_mm)

    def add_strokes(self, layer: str, strokes_mm: Sequence[FloatArray], words: str) -> None:
        """See Entities."""
        if not strokes_mm:
            return
        vertices = [f" 10\n{x}\n 20\n{y}\n" for x, y in as_repr(np.concatenate(strokes_mm))]
        head = self._head("LWPOLYLINE", "AcDbPolyline", layer)
        handle, said = int(str(self._handles), _HEXADECIMAL), _said(words)
        ends = [0, *accumulate(len(stroke) for stroke in strokes_mm)]
        for place, (begin, end) in enumerate(pairwise(ends)):
            stroke = "".join(vertices[begin:end])
            self._text.append(f"{head % (handle + place)} 90\n{end - begin}\n 70\n0\n{stroke}{said}")
            said = ""
        self._handles.reset(f"{handle + len(strokes_mm):X}")

    def add_circles(self, layer: str, centres_mm: FloatArray, radius_mm: Sequence[float]) -> None:
        """See Entities."""
        shape = " 10\n%s\n 20\n%s\n 30\n0.0\n 40\n%s\n"
        self._add("CIRCLE", "AcDbCircle", layer, shape, np.column_stack([centres_mm, radius_mm]))

    def add_arc(self, layer: str, centre_mm: FloatArray, radius_mm: float, ends_deg: tuple[float, float]) -> None:
        """See Entities."""
        shape = " 10\n%s\n 20\n%s\n 30\n0.0\n 40\n%s\n100\nAcDbArc\n 50\n%s\n 51\n%s\n"
        self._add("ARC", "AcDbCircle", layer, shape, np.array([[*centre_mm, radius_mm, *ends_deg]]))

    def add_points(self, layer: str, points_mm: FloatArray) -> None:
        """See Entities."""
        self._add("POINT", "AcDbPoint", layer, " 10\n%s\n 20\n%s\n 30\n0.0\n", points_mm)

    def export_dxf(self, tagwriter: AbstractTagWriter) -> None:
        """Write the section: ezdxf asks for it in its turn.

        Raises:
            RuntimeError: It was written already, and is no longer there: a fault of the program, never of an input.
        """
        if self._is_written:
            raise RuntimeError("the entities of a document are written once")
        tagwriter.write_str("  0\nSECTION\n  2\nENTITIES\n")
        for text in self._text:
            tagwriter.write_str(text)
        tagwriter.write_str("  0\nENDSEC\n")
        self._is_written = True
        self._text.clear()  # a document refers to itself: it may stay in memory long after it is thrown away

    def _add(self, kind: str, subclass: str, layer: str, shape: str, numbers: FloatArray) -> None:
        """Add one entity for each row of numbers, in the order in which they stand in the shape."""
        form = self._head(kind, subclass, layer) + shape
        rows = numbers.reshape(len(numbers), math.prod(numbers.shape[1:]))
        handle = int(str(self._handles), _HEXADECIMAL)
        for begin in range(0, len(rows), _AT_A_TIME):
            some = as_repr(rows[begin : begin + _AT_A_TIME])
            self._text.append("".join([form % (handle + place, *row) for place, row in enumerate(some, begin)]))
        self._handles.reset(f"{handle + len(rows):X}")

    def _head(self, kind: str, subclass: str, layer: str) -> str:
        """What an entity begins with, its handle left open."""
        on_layer = layer.replace("%", "%%")
        return f"  0\n{kind}\n  5\n%X\n330\n{self._owner}\n100\nAcDbEntity\n  8\n{on_layer}\n100\n{subclass}\n"


def _said(words: str) -> str:
    return f"1001\n{APP_ID}\n{_STRING}\n{dxf_text(words, MOST_DXF_STRING)}\n" if words else ""
