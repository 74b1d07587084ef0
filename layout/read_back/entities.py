"""What is cut in a drawing: contours, hits, and what cannot be read as either.

Read are polylines, circles, points, and lines and arcs that follow one another, in the model space,
on the cutter's own layers for what is cut. Everything else on those layers is a stranger.
"""

import math
from collections import Counter
from collections.abc import Iterable
from dataclasses import dataclass, field, replace

import numpy as np
from ezdxf.document import Drawing
from ezdxf.entities.arc import Arc
from ezdxf.entities.circle import Circle
from ezdxf.entities.dxfentity import DXFEntity
from ezdxf.entities.line import Line
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.entities.point import Point
from ezdxf.entities.polyline import Polyline
from ezdxf.math import Vec3

from layout.documents.cutter import LAYER_COLOURS, Cutter
from layout.errors import DrawingReadError
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.read_back.contour import Contour
from layout.read_back.limits import JOINED_WITHIN_MM, MOST_CUTS, MOST_VERTICES

CUT_LAYERS = ("SLITS", "SLOTS", "HITS", "HOLES", "RIM")
RECORD_LAYERS = ("AFTER_FORMING", "FOLDS", "TRACKS")  # a drawing that holds any of these is only for reading
_FULL_TURN_DEG = 360.0
_ONE_PIECE = 2  # vertices of a chain of one line or arc
WIDEST_BULGE = 1e6  # an arc that lacks 0.0002 degrees of a whole circle; more is no arc

Vertex = tuple[float, float, float]  # x, y in mm and the bulge of the piece that starts here


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CutDrawing:
    """What is cut in a drawing, seen from the label side.

    Attributes:
        contours: Polylines, circles and joined lines and arcs, in drawing order by layer.
        hits_mm: Shape (n, 2). Points of the layer for hits.
        strangers: (our layer name, entity type) of what cannot be read, with its count.
        record_layers: Our names of the layers of a record that hold entities, with their count.
        other_layers: Layers of the drawing that are none of the cutter's, with their count of entities.
        shows_star_side: Whether the file shows the cuts mirrored.
        mended: Whether the file was damaged and had to be mended while reading.
    """

    contours: tuple[Contour, ...]
    hits_mm: FloatArray
    strangers: dict[tuple[str, str], int]
    record_layers: dict[str, int]
    other_layers: dict[str, int]
    shows_star_side: bool
    mended: bool

    def mirrored(self) -> "CutDrawing":
        """The same cuts seen from the other side."""
        return replace(
            self,
            contours=tuple(contour.mirrored() for contour in self.contours),
            hits_mm=frozen_floats(self.hits_mm * (1.0, -1.0)),
            shows_star_side=not self.shows_star_side,
        )

    def told(self, x_mm: float, y_mm: float) -> str:
        """A place in the coordinates of the file, where a person will look for it."""
        y_drawn_mm = -y_mm if self.shows_star_side else y_mm
        return f"({round(x_mm, 3) + 0.0:.3f}, {round(y_drawn_mm, 3) + 0.0:.3f})"


def cut_drawing_of(document: Drawing, cutter: Cutter, *, farthest_mm: float, mended: bool) -> CutDrawing:
    """What is cut in a document's model space.

    Args:
        document: The DXF file, read.
        cutter: For its layer names and the side its drawings show.
        farthest_mm: How far from the centre a coordinate may lie.
        mended: Whether the file was damaged.

    Raises:
        DrawingReadError: A coordinate that is no number or lies absurdly far off, or too many cuts.
    """
    ours = {cutter.layer(name).name.casefold(): name for name in LAYER_COLOURS}
    collecting = _Collecting(farthest_mm=farthest_mm)
    for entity in document.modelspace():
        name = str(entity.dxf.layer)
        layer = ours.get(name.casefold())
        if layer is None:
            collecting.other_layers[name] += 1
        elif layer in CUT_LAYERS:
            collecting.add(layer, entity)
        elif layer in RECORD_LAYERS:
            collecting.record_layers[layer] += 1
    for layer in CUT_LAYERS:
        collecting.end_chain(layer)
    as_drawn = collecting.drawing(mended=mended)
    return as_drawn.mirrored() if cutter.drawn_from == "star-side" else as_drawn


@dataclass(slots=True)
class _Collecting:
    farthest_mm: float
    contours: list[Contour] = field(default_factory=list)
    hits_mm: list[tuple[float, float]] = field(default_factory=list)
    strangers: Counter[tuple[str, str]] = field(default_factory=Counter)
    record_layers: Counter[str] = field(default_factory=Counter)
    other_layers: Counter[str] = field(default_factory=Counter)
    chains: dict[str, list[Vertex]] = field(default_factory=dict)

    def add(self, layer: str, entity: DXFEntity) -> None:
        if len(self.contours) + len(self.hits_mm) >= MOST_CUTS:
            raise DrawingReadError(f"drawing: more than {MOST_CUTS} cuts; is this the drawing of one disc?")
        if isinstance(entity, Point) and layer == "HITS":
            place = entity.dxf.location
            self.hits_mm.append(_checked(layer, [(place.x, place.y, 0.0)], self.farthest_mm)[0][:2])
            return
        found = _pieces(entity)
        if found is None or layer == "HITS" or not 0 < len(found[0]) <= MOST_VERTICES:
            self.strangers[layer, entity.dxftype()] += 1
            return
        vertices, closed = _checked(layer, found[0], self.farthest_mm), found[1]
        if isinstance(entity, Line | Arc) and not closed:
            self._join(layer, vertices)
        else:
            self.contours.append(_contour(layer, vertices, closed=closed))

    def _join(self, layer: str, piece: list[Vertex]) -> None:
        chain = self.chains.get(layer, [])
        # The first piece of a chain runs either way; so does every piece that comes.
        for so_far in (chain, _reversed(chain)) if len(chain) == _ONE_PIECE else (chain,):
            for coming in (piece, _reversed(piece)):
                if so_far and math.dist(so_far[-1][:2], coming[0][:2]) <= JOINED_WITHIN_MM:
                    so_far.pop()
                    so_far.extend(coming)
                    self.chains[layer] = so_far
                    return
        self.end_chain(layer)
        self.chains[layer] = piece

    def end_chain(self, layer: str) -> None:
        chain = self.chains.pop(layer, [])
        if len(chain) > MOST_VERTICES:
            self.strangers[layer, "chain of lines"] += 1
        elif chain:
            meets = len(chain) > _ONE_PIECE and math.dist(chain[0][:2], chain[-1][:2]) <= JOINED_WITHIN_MM
            self.contours.append(_contour(layer, chain[:-1] if meets else chain, closed=meets))

    def drawing(self, *, mended: bool) -> CutDrawing:
        return CutDrawing(
            contours=tuple(contour.tidied() for contour in self.contours),
            hits_mm=frozen_floats(np.array(self.hits_mm).reshape(-1, 2)),
            strangers=dict(self.strangers),
            record_layers=dict(self.record_layers),
            other_layers=dict(self.other_layers),
            shows_star_side=False,
            mended=mended,
        )


def _contour(layer: str, vertices: list[Vertex], *, closed: bool) -> Contour:
    array = np.array(vertices)
    return Contour(
        layer=layer, points_mm=frozen_floats(array[:, :2]), bulge_ratio=frozen_floats(array[:, 2]), closed=closed
    )


def _reversed(chain: list[Vertex]) -> list[Vertex]:
    bulges = [*(-bulge for _, _, bulge in reversed(chain[:-1])), 0.0]
    return [(x, y, bulge) for (x, y, _), bulge in zip(reversed(chain), bulges, strict=True)]


def _pieces(entity: DXFEntity) -> tuple[list[Vertex], bool] | None:
    """Vertices and whether they close, in world coordinates; None for what cannot be read."""
    match entity:
        case Line():
            return [(entity.dxf.start.x, entity.dxf.start.y, 0.0), (entity.dxf.end.x, entity.dxf.end.y, 0.0)], False
        case Arc():
            found = _arc(entity)
        case Circle():
            found = _circle(entity)
        case LWPolyline():
            found = [(x, y, bulge) for x, y, bulge in entity.get_points("xyb")], bool(entity.closed)
        case Polyline() if entity.is_2d_polyline or entity.is_3d_polyline:
            places = [(vertex.dxf.location, vertex.dxf.get("bulge", 0.0)) for vertex in entity.vertices]
            found = [(place.x, place.y, bulge) for place, bulge in places], bool(entity.is_closed)
        case _:
            return None
    side = _seen_from(entity)
    return None if side is None else (_turned_over(found[0], side), found[1])


def _circle(entity: Circle) -> tuple[list[Vertex], bool]:
    centre, radius = entity.dxf.center, entity.dxf.radius
    return [(centre.x - radius, centre.y, 1.0), (centre.x + radius, centre.y, 1.0)], True


def _arc(entity: Arc) -> tuple[list[Vertex], bool]:
    sweep_deg = (entity.dxf.end_angle - entity.dxf.start_angle) % _FULL_TURN_DEG
    if sweep_deg == 0:
        return _circle(entity)
    start, end = entity.start_point, entity.end_point
    if _seen_from(entity) == -1:  # the library gives these in world coordinates, already turned over
        start, end = Vec3(-start.x, start.y), Vec3(-end.x, end.y)
    return [(start.x, start.y, math.tan(math.radians(sweep_deg / 4))), (end.x, end.y, 0.0)], False


def _seen_from(entity: DXFEntity) -> int | None:
    """+1 for an entity drawn facing us, −1 for one drawn on the sheet's back, None for a tilted one."""
    facing = Vec3(entity.dxf.get("extrusion", (0, 0, 1)))
    if facing.isclose((0, 0, 1)):
        return 1
    return -1 if facing.isclose((0, 0, -1)) else None


def _turned_over(vertices: list[Vertex], side: int) -> list[Vertex]:
    # DXF reference, arbitrary axis algorithm: facing (0, 0, −1) means x is measured the other way.
    return vertices if side > 0 else [(-x, y, -bulge) for x, y, bulge in vertices]


def _checked(layer: str, vertices: Iterable[Vertex], farthest_mm: float) -> list[Vertex]:
    checked = [(float(x), float(y), float(bulge)) for x, y, bulge in vertices]
    for x, y, bulge in checked:
        # Not-a-number compares false with everything, so it ends here too.
        if not (abs(x) <= farthest_mm and abs(y) <= farthest_mm and abs(bulge) <= WIDEST_BULGE):
            raise DrawingReadError(
                f"drawing: layer {layer} has a vertex at ({x:g}, {y:g}) with bulge {bulge:g}; coordinates must be "
                f"within {farthest_mm:g} mm of the centre; check the drawing's units and origin"
            )
    return checked
