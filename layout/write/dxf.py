"""A drawing as a DXF file, entity by entity in cutting order."""

from layout.cut.plan import Circles, Drawing, Entity, Lettering, Outlines, Points
from layout.documents.cutter import Cutter
from layout.write.dxf_document import bytes_of, new_document
from layout.write.dxf_entities import APP_ID, Entities, entities_of
from layout.write.extents import extents_mm
from layout.write.numbers import DECIMALS_BULGE, rounded

UNIT_SAID = {"R12": ("unit: mm; release R12 has no header variable for it",)}


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
    entities = entities_of(document)
    for entity in drawing.entities:
        _add(entities, entity, cutter.layer(entity.layer).name)
    return bytes_of(document, (*drawing.comments, *UNIT_SAID.get(cutter.drawing_release, ())))


def _add(entities: Entities, entity: Entity, layer: str) -> None:
    match entity:
        case Outlines():
            bulges = rounded(entity.bulges, DECIMALS_BULGE)
            entities.add_polylines(layer, rounded(entity.points_mm), bulges, closed=entity.closed)
        case Circles():
            entities.add_circles(layer, rounded(entity.centres_mm), rounded(entity.radius_mm).tolist())
        case Points():
            entities.add_points(layer, rounded(entity.points_mm))
        case Lettering():
            entities.add_strokes(layer, [rounded(stroke) for stroke in entity.strokes_mm], entity.text)
