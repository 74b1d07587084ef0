"""A planned drawing as a DXF file made entity by entity with ezdxf's own API, and what such a file holds when read.

One call for each line, circle and point, as the library's guide has it, with nothing gathered and nothing rounded. It
draws what our writer draws: lettering as open lines, the first of which carries the words.
"""

import io
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from ezdxf.document import Drawing as Document
from ezdxf.entities.circle import Circle
from ezdxf.entities.dxfgfx import DXFGraphic
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.entities.point import Point
from ezdxf.filemanagement import new, read
from ezdxf.layouts.layout import Modelspace

from layout.cut.plan import Circles, Drawing, Entity, Lettering, Outlines, Points
from layout.documents import Cutter
from layout.mechanics.arrays import FloatArray

WORDS_OF = "DISCWRIGHT"  # the application under whose name lettering says what it says
STRING = 1000  # DXF reference: a string of extended data


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawn:
    """An entity of a file that was read: what it is, and its numbers.

    Attributes:
        make: Kind, layer, and of a line how many corners it has, whether it is closed and what it says.
        numbers: Millimetres, and bulges.
    """

    make: tuple[str, ...]
    numbers: tuple[float, ...]


def plain_drawing(drawing: Drawing, cutter: Cutter) -> bytes:
    """The whole file."""
    document = new("R2010", setup=False)
    document.header["$INSUNITS"] = 4
    for name in dict.fromkeys(entity.layer for entity in drawing.entities):
        layer = cutter.layer(name)
        document.layers.add(layer.name, color=layer.colour)
    document.appids.add(WORDS_OF)
    space = document.modelspace()
    for entity in drawing.entities:
        _draw(space, entity, {"layer": cutter.layer(entity.layer).name})
    out = io.StringIO()
    document.write(out)
    return out.getvalue().encode()


def _draw(space: Modelspace, entity: Entity, on_layer: dict[str, str]) -> None:
    match entity:
        case Outlines():
            bulges = entity.bulges.tolist()
            for points in entity.points_mm.tolist():
                corners = [(x, y, bulge) for (x, y), bulge in zip(points, bulges, strict=True)]
                space.add_lwpolyline(corners, format="xyb", close=entity.closed, dxfattribs=on_layer)
        case Circles():
            for centre, radius in zip(entity.centres_mm.tolist(), entity.radius_mm.tolist(), strict=True):
                space.add_circle(centre, radius, dxfattribs=on_layer)
        case Points():
            for point in entity.points_mm.tolist():
                space.add_point(point, dxfattribs=on_layer)
        case Lettering():
            _letter(space, entity.strokes_mm, entity.text, on_layer)


def _letter(space: Modelspace, strokes_mm: Sequence[FloatArray], text: str, on_layer: dict[str, str]) -> None:
    lines = [space.add_lwpolyline(stroke.tolist(), format="xy", dxfattribs=on_layer) for stroke in strokes_mm]
    if lines:
        lines[0].set_xdata(WORDS_OF, [(STRING, text)])


def what_is_drawn(dxf: bytes) -> list[Drawn]:
    """Every entity of the model space, in the order of the file, as ezdxf reads it.

    Raises:
        TypeError: One is of a kind that no drawing of ours has.
    """
    document: Document = read(io.StringIO(dxf.decode()))
    return [_read(entity) for entity in document.modelspace()]


def _read(entity: DXFGraphic) -> Drawn:
    kind, layer = entity.dxftype(), entity.dxf.layer
    match entity:
        case LWPolyline():
            words = entity.get_xdata(WORDS_OF)[0].value if entity.has_xdata(WORDS_OF) else ""
            make = (kind, layer, f"{len(entity)} corners", "closed" if entity.closed else "open", words)
            return Drawn(make=make, numbers=tuple(np.ravel(entity.get_points("xyb")).tolist()))
        case Circle():
            return Drawn(make=(kind, layer), numbers=(*entity.dxf.center, entity.dxf.radius))
        case Point():
            return Drawn(make=(kind, layer), numbers=tuple(entity.dxf.location))
        case _:
            raise TypeError(f"{kind} on {layer}: no drawing of ours has one")


def apart_mm(one: Sequence[Drawn], other: Sequence[Drawn]) -> float:
    """The most that a number of one drawing differs from the same number of the other; 0.0 for two empty ones.

    Raises:
        ValueError: They differ in more than numbers.
    """
    if [each.make for each in one] != [each.make for each in other]:
        raise ValueError(f"{len(one)} entities and {len(other)} are not of the same makes, one by one")
    pairs = zip(one, other, strict=True)
    return max((float(np.abs(np.subtract(a.numbers, b.numbers)).max()) for a, b in pairs), default=0.0)
