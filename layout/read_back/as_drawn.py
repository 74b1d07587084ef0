"""A disc's drawing read entity by entity, in the order of the file, to be moved onto a sheet as it is.

Nothing is mended, tidied or turned about: a file that is not plainly one of our own for cutting is refused.
"""

import hashlib
import math
import re
from collections.abc import Iterator, Mapping

import numpy as np
from ezdxf.document import Drawing
from ezdxf.entities.arc import Arc
from ezdxf.entities.circle import Circle
from ezdxf.entities.dxfentity import DXFEntity
from ezdxf.entities.line import Line
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.entities.point import Point
from ezdxf.entities.polyline import Polyline
from ezdxf.lldxf.const import DXF12
from ezdxf.math import Vec3

from layout.documents.cutter import LAYER_COLOURS, Layer, layer_of
from layout.errors import DrawingReadError
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.drawn import (
    DrawnArc,
    DrawnCircle,
    DrawnDisc,
    DrawnEntity,
    DrawnLine,
    DrawnPoint,
    places_mm,
    reach_mm,
)
from layout.read_back.entities import RECORD_LAYERS, WIDEST_BULGE
from layout.read_back.file import open_drawing
from layout.read_back.limits import CENTRED_WITHIN_MM, FARTHEST_MM
from layout.read_back.whole_file import head_comments, marked_reason

PLACED_LAYERS = tuple(name for name in LAYER_COLOURS if name not in RECORD_LAYERS)
_AFTER_THE_RIM = ("RIM", "LEADS")
_WARNINGS = ("NOT GOOD TO CUT", "NOT FOR CUTTING")  # as they are lettered and stand in the head
_APP_ID, _STRING = "DISCWRIGHT", 1000  # under which lettering carries its words; DXF reference: group of a string
_NOT_PLAIN = 2 | 4 | 8 | 16 | 32 | 64  # DXF reference, group 70 of POLYLINE: fitted, splined, in space, a mesh
_WIDEST_DEG = 720.0  # degrees; two turns either way, more is no angle a program writes
_COMPENSATED = re.compile(r"compensated for a kerf of (\d+(?:\.\d+)?) mm already")  # in our heads' line on the kerf
_FINGERPRINT = re.compile(r"[0-9a-f]{16}")
_MOST_TITLE = 120  # characters; as long as a title of a document may be
_BLANK, _SIDE, _KERF, _HITS = "blank: ", "drawn from the ", "outlines are ", "hits: "  # how lines of our heads begin
_TAKE_OURS = "use disc.dxf as it was written"


def read_as_drawn(dxf: bytes, layers: Mapping[str, Layer] | None = None) -> DrawnDisc:
    """All that is cut or marked in a disc.dxf, as it stands there.

    Read are polylines with their bulges, circles, arcs, points and lines of the model space, on the layers of the
    cutter; the rest of the head tells whose disc it is. A head that another program has dropped leaves its words "".

    Args:
        dxf: An ASCII DXF file in millimetres, its origin at the disc's centre.
        layers: What the cutter calls our layers, where it has names of its own.

    Raises:
        DrawingReadError: No such file, a record, marked NOT GOOD TO CUT, damaged; a layer or an entity that is not
            ours; a rim that is missing, not last, or not centred on the origin; something outside the rim.
    """
    _refuse_marked(dxf)
    with open_drawing(dxf) as (document, mended):
        if mended:
            raise DrawingReadError(f"drawing: the file is damaged, cuts may be missing; {_TAKE_OURS}")
        entities = tuple(_entities(document, layers or {}))
        release = "R12" if document.dxfversion == DXF12 else "R2010"
    rim_mm = _rim_radius_mm(entities)
    _refuse_outside(entities, rim_mm)
    head = tuple(head_comments(dxf))
    compensated = _COMPENSATED.search(_line(head, _KERF))
    fingerprint = _line(head, "fingerprint: ").removeprefix("fingerprint: ")
    return DrawnDisc(
        title=_line(head, "title: ").removeprefix("title: ")[:_MOST_TITLE],
        fingerprint=fingerprint if _FINGERPRINT.fullmatch(fingerprint) else "",
        blank=_line(head, _BLANK),
        side=_line(head, _SIDE).partition(";")[0],
        kerf=_line(head, _KERF),
        hits=_line(head, _HITS),
        digest=hashlib.sha256(dxf).hexdigest(),
        release=release,
        kerf_taken_mm=float(compensated[1]) if compensated else 0.0,
        rim_diameter_mm=2 * rim_mm,
        lead_reach_mm=max(0.0, *(reach_mm(each) - rim_mm for each in entities)),
        entities=entities,
    )


def _line(head: tuple[str, ...], begins: str) -> str:
    return next((line for line in head if line.startswith(begins)), "")


def _refuse_marked(dxf: bytes) -> None:
    reason = marked_reason(dxf)
    if reason is not None:
        raise DrawingReadError(
            f"drawing: the file itself says {_WARNINGS[0]}: {reason or 'no reason stands there'}; lay the tune out "
            "anew without that fault"
        )
    if any(_WARNINGS[1] in line.upper() for line in head_comments(dxf)):
        raise _is_a_record("its head says so")


def _is_a_record(why: str) -> DrawingReadError:
    return DrawingReadError(f"drawing: this is a record, for reading, never for cutting ({why}); use disc.dxf")


def _entities(document: Drawing, layers: Mapping[str, Layer]) -> Iterator[DrawnEntity]:
    ours = {layer_of(layers, name).name.casefold(): name for name in LAYER_COLOURS}
    rim_begun = False
    for entity in document.modelspace():
        name = str(entity.dxf.layer)
        layer = ours.get(name.casefold())
        if layer is None:
            known = ", ".join(layer_of(layers, placed).name for placed in PLACED_LAYERS)
            raise DrawingReadError(
                f"drawing: layer {name[:64]!r} is none of {known}, which alone can be placed; where the cutter gives "
                "layers names of its own, state its layers in the job"
            )
        if layer in RECORD_LAYERS:
            raise _is_a_record(f"it has entities on {layer}")
        if rim_begun and layer not in _AFTER_THE_RIM:
            raise DrawingReadError(
                f"drawing: {layer} comes after the rim, which would set the disc free before; {_TAKE_OURS}"
            )
        rim_begun |= layer == "RIM"
        yield _drawn(layer, entity)


def _drawn(layer: str, entity: DXFEntity) -> DrawnEntity:
    if not Vec3(entity.dxf.get("extrusion", (0, 0, 1))).isclose((0, 0, 1)):
        raise _stranger(layer, entity, "drawn on the back of the sheet or tilted")
    match entity:
        case Circle():
            return _round(layer, entity)
        case Point():
            place = entity.dxf.location
            return DrawnPoint(layer=layer, at_mm=frozen_floats(_checked(layer, [(place.x, place.y, 0.0)])[0, :2]))
        case Line():
            ends = [(end.x, end.y, 0.0) for end in (entity.dxf.start, entity.dxf.end)]
            return _line_drawn(layer, entity, ends, closed=False)
        case LWPolyline():
            return _line_drawn(
                layer, entity, [(x, y, bulge) for x, y, bulge in entity.get_points("xyb")], closed=bool(entity.closed)
            )
        case Polyline():
            if entity.dxf.flags & _NOT_PLAIN:
                raise _stranger(layer, entity, "fitted to a curve, in space, or a mesh")
            places = [(vertex.dxf.location, vertex.dxf.get("bulge", 0.0)) for vertex in entity.vertices]
            vertices = [(place.x, place.y, bulge) for place, bulge in places]
            return _line_drawn(layer, entity, vertices, closed=bool(entity.is_closed))
    raise _stranger(layer, entity, "of another kind")


def _round(layer: str, entity: Circle) -> DrawnCircle | DrawnArc:
    """A circle, or what is to the library a kind of circle: an arc."""
    centre, radius_mm = entity.dxf.center, float(entity.dxf.radius)
    if not 0 < radius_mm <= FARTHEST_MM:
        raise DrawingReadError(
            f"drawing: layer {layer} has a circle of radius {radius_mm:g} mm, allowed are radii above 0 and up "
            f"to {FARTHEST_MM:g} mm; {_TAKE_OURS}"
        )
    [[x, y, _]] = _checked(layer, [(centre.x, centre.y, 0.0)]).tolist()
    centre_mm = frozen_floats([x, y])
    if not isinstance(entity, Arc):
        return DrawnCircle(layer=layer, centre_mm=centre_mm, radius_mm=radius_mm)
    from_deg, to_deg = float(entity.dxf.start_angle), float(entity.dxf.end_angle)
    if not max(abs(from_deg), abs(to_deg)) <= _WIDEST_DEG:
        raise DrawingReadError(
            f"drawing: layer {layer} has an arc from {from_deg:g} to {to_deg:g} degrees, allowed are angles within "
            f"{_WIDEST_DEG:g}; {_TAKE_OURS}"
        )
    return DrawnArc(layer=layer, centre_mm=centre_mm, radius_mm=radius_mm, from_deg=from_deg, to_deg=to_deg)


def _line_drawn(
    layer: str, entity: DXFEntity, vertices: list[tuple[float, float, float]], *, closed: bool
) -> DrawnLine:
    if not vertices:
        raise _stranger(layer, entity, "without vertices")
    checked = _checked(layer, vertices)
    return DrawnLine(
        layer=layer,
        points_mm=frozen_floats(checked[:, :2]),
        bulge_ratio=frozen_floats(checked[:, 2]),
        closed=closed,
        words=_words(entity),
    )


def _words(entity: DXFEntity) -> str:
    """What lettering says that begins with this line; a warning in it counts as one in the head."""
    if not entity.has_xdata(_APP_ID):
        return ""
    words = next((str(value) for code, value in entity.get_xdata(_APP_ID) if code == _STRING), "")
    if any(warning in words.upper() for warning in _WARNINGS):
        raise DrawingReadError(f"drawing: the disc is lettered {words[:64]!r}; such a disc is not cut, use another")
    return words


def _stranger(layer: str, entity: DXFEntity, why: str) -> DrawingReadError:
    return DrawingReadError(
        f"drawing: layer {layer} has an entity of type {entity.dxftype()} that is {why}; placed are LWPOLYLINE, "
        f"POLYLINE, CIRCLE, ARC, POINT and LINE, flat and seen from above; {_TAKE_OURS}"
    )


def _checked(layer: str, vertices: list[tuple[float, float, float]]) -> FloatArray:
    """Vertices (x, y, bulge), shape (k, 3)."""
    array = np.array(vertices, dtype=np.float64)
    # Not-a-number compares false with everything, so it ends here too.
    within = (np.abs(array[:, :2]) <= FARTHEST_MM).all(axis=1) & (np.abs(array[:, 2]) <= WIDEST_BULGE)
    if not within.all():
        x, y, bulge = array[int(np.argmin(within))].tolist()
        raise DrawingReadError(
            f"drawing: layer {layer} has a vertex at ({x:g}, {y:g}) with bulge {bulge:g}; coordinates must be within "
            f"{FARTHEST_MM:g} mm of the centre; check the drawing's units and origin"
        )
    return array


def _rim_radius_mm(entities: tuple[DrawnEntity, ...]) -> float:
    """The radius of the rim, which must go round the origin.

    A circle about the origin is the smallest that holds the rim, and so centred on it, where the rim touches it
    at places no half-turn of it is free of. Notches and bridges leave it such places.
    """
    rim = [each for each in entities if each.layer == "RIM"]
    if not rim:
        raise DrawingReadError(f"drawing: nothing stands on the layer RIM, so the disc has no rim; {_TAKE_OURS}")
    radius_mm = max(reach_mm(each) for each in rim)
    shown_mm = np.concatenate([places_mm(each) for each in rim])
    touching_mm = shown_mm[np.hypot(*shown_mm.T) >= radius_mm - CENTRED_WITHIN_MM]
    angle_rad = np.sort(np.arctan2(touching_mm[:, 1], touching_mm[:, 0]))
    free_rad = np.diff(angle_rad, append=angle_rad[:1] + 2 * math.pi).max(initial=0.0)
    if not len(angle_rad) or free_rad > math.pi + CENTRED_WITHIN_MM / radius_mm:
        x, y = ((shown_mm.min(axis=0) + shown_mm.max(axis=0)) / 2).tolist()
        raise DrawingReadError(
            f"drawing: the rim is not centred on the origin: its middle lies near ({x:.3f}, {y:.3f}), and at most "
            f"{CENTRED_WITHIN_MM:g} mm are allowed; move the drawing, or {_TAKE_OURS}"
        )
    return radius_mm


def _refuse_outside(entities: tuple[DrawnEntity, ...], rim_mm: float) -> None:
    for entity in entities:
        if entity.layer != "LEADS" and (far_mm := reach_mm(entity)) > rim_mm + CENTRED_WITHIN_MM:
            raise DrawingReadError(
                f"drawing: {entity.layer} reaches {far_mm:.3f} mm from the centre, outside the rim at {rim_mm:.3f} mm, "
                f"where only LEADS may go; {_TAKE_OURS}"
            )
