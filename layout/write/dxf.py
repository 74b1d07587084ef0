"""A drawing as a DXF file, through ezdxf, entity by entity in cutting order."""

from ezdxf.layouts.layout import Modelspace

from layout.cut.plan import Circles, Drawing, Entity, Lettering, Outlines, Points
from layout.documents.cutter import Cutter
from layout.write.dxf_document import bytes_of, new_document
from layout.write.extents import extents_mm
from layout.write.numbers import DECIMALS_BULGE, rounded
from layout.write.plain_text import MOST_DXF_STRING, dxf_text

APP_ID = "DISCWRIGHT"  # under which lettering carries its words as extended data
_STRING = 1000  # DXF reference: a string of extended data


def write_dxf(drawing: Drawing, cutter: Cutter) -> bytes:
    """The drawing as an R2010 DXF file in millimetres, ASCII, the same bytes every time.

    Layers have the names and colours the cutter wants, and only those that occur are there, beside
    the layer 0 every DXF file has. Lettering is drawn as open lines; the first line of each carries
    its words as extended data of the application DISCWRIGHT. Comments stand at the file's head.
    An empty drawing gives a valid file without entities.

    Args:
        drawing: What is drawn, in cutting order.
        cutter: Its layer names and colours.
    """
    document = new_document(rounded(extents_mm(drawing)))
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
    return bytes_of(document, drawing.comments)


def _add(space: Modelspace, entity: Entity, on_layer: dict[str, str]) -> None:
    match entity:
        case Outlines():
            bulges = rounded(entity.bulges, DECIMALS_BULGE).tolist()
            for points in rounded(entity.points_mm).tolist():
                vertices = [(x, y, bulge) for (x, y), bulge in zip(points, bulges, strict=True)]
                space.add_lwpolyline(vertices, format="xyb", close=entity.closed, dxfattribs=on_layer)
        case Circles():
            centres = rounded(entity.centres_mm).tolist()
            for centre, radius_mm in zip(centres, rounded(entity.radius_mm).tolist(), strict=True):
                space.add_circle(centre, radius_mm, dxfattribs=on_layer)
        case Points():
            for point in rounded(entity.points_mm).tolist():
                space.add_point(point, dxfattribs=on_layer)
        case Lettering():
            lines = [space.add_lwpolyline(rounded(stroke), dxfattribs=on_layer) for stroke in entity.strokes_mm]
            for first in lines[:1]:
                first.set_xdata(APP_ID, [(_STRING, dxf_text(entity.text, MOST_DXF_STRING))])
