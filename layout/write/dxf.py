"""A drawing as a DXF file, through ezdxf, entity by entity in cutting order."""

from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.entities.polyline import Polyline
from ezdxf.layouts.layout import Modelspace
from ezdxf.lldxf.const import DXF12

from layout.cut.plan import Circles, Drawing, Entity, Lettering, Outlines, Points
from layout.documents.cutter import Cutter
from layout.write.dxf_document import bytes_of, new_document
from layout.write.extents import extents_mm
from layout.write.numbers import DECIMALS_BULGE, rounded
from layout.write.plain_text import MOST_DXF_STRING, dxf_text

APP_ID = "DISCWRIGHT"  # under which lettering carries its words as extended data
UNIT_SAID = {"R12": ("unit: mm; release R12 has no header variable for it",)}
STRING = 1000  # DXF reference: a string of extended data


def write_dxf(drawing: Drawing, cutter: Cutter) -> bytes:
    """The drawing as a DXF file in millimetres, ASCII, the same bytes every time.

    It is of the release the cutter wants (`drawing_release`): R2010, or R12 for old controls. R12 has no
    light polylines, so outlines are POLYLINE entities, with the same vertices and bulges; and it has no
    place for the unit of length, so a comment at the head says it. All else is the same.

    Layers have the names and colours the cutter wants, and only those that occur are there, beside
    the layer 0 every DXF file has. Lettering is drawn as open lines; the first line of each carries
    its words as extended data of the application DISCWRIGHT. Comments stand at the file's head.
    An empty drawing gives a valid file without entities.

    Args:
        drawing: What is drawn, in cutting order.
        cutter: Its layer names and colours.
    """
    document = new_document(rounded(extents_mm(drawing)), cutter.drawing_release)
    for ours in dict.fromkeys(entity.layer for entity in drawing.entities):
        wanted = cutter.layer(ours)
        if wanted.name in document.layers:  # layer 0, the only one that stands already
            document.layers.get(wanted.name).color = wanted.colour
        else:
            document.layers.add(wanted.name, color=wanted.colour)
    if any(isinstance(entity, Lettering) for entity in drawing.entities):
        document.appids.add(APP_ID)
    for entity in drawing.entities:
        _add(document.modelspace(), entity, {"layer": cutter.layer(entity.layer).name})
    return bytes_of(document, (*drawing.comments, *UNIT_SAID.get(cutter.drawing_release, ())))


def _add(space: Modelspace, entity: Entity, on_layer: dict[str, str]) -> None:
    match entity:
        case Outlines():
            bulges = rounded(entity.bulges, DECIMALS_BULGE).tolist()
            for points in rounded(entity.points_mm).tolist():
                vertices = [(x, y, bulge) for (x, y), bulge in zip(points, bulges, strict=True)]
                add_polyline(space, vertices, on_layer, closed=entity.closed)
        case Circles():
            centres = rounded(entity.centres_mm).tolist()
            for centre, radius_mm in zip(centres, rounded(entity.radius_mm).tolist(), strict=True):
                space.add_circle(centre, radius_mm, dxfattribs=on_layer)
        case Points():
            for point in rounded(entity.points_mm).tolist():
                space.add_point(point, dxfattribs=on_layer)
        case Lettering():
            straight = [[(x, y, 0.0) for x, y in rounded(stroke).tolist()] for stroke in entity.strokes_mm]
            lines = [add_polyline(space, stroke, on_layer, closed=False) for stroke in straight]
            for first in lines[:1]:
                first.set_xdata(APP_ID, [(STRING, dxf_text(entity.text, MOST_DXF_STRING))])


def add_polyline(
    space: Modelspace, vertices: list[tuple[float, float, float]], on_layer: dict[str, str], *, closed: bool
) -> Polyline | LWPolyline:
    """One polyline, as the document's release has them.

    Args:
        space: The model space of the document.
        vertices: (x, y, bulge) of each.
        on_layer: The attributes of the entity.
        closed: Whether the last vertex joins the first.
    """
    if space.dxfversion == DXF12:
        return space.add_polyline2d(vertices, format="xyb", close=closed, dxfattribs=on_layer)
    return space.add_lwpolyline(vertices, format="xyb", close=closed, dxfattribs=on_layer)
