"""A trial piece read back from its file by ezdxf, and measured with shapely."""

import io
import math
from dataclasses import dataclass
from functools import cache

import numpy as np
import shapely
from ezdxf.entities.lwpolyline import LWPolyline
from ezdxf.entities.point import Point
from ezdxf.filemanagement import read
from ezdxf.path import make_path
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.documents import Cutter, Movement, shipped_cutter, shipped_movement
from layout.mechanics.arrays import FloatArray
from layout.mechanics.projection import fitting_tool
from layout.trial import TrialPiece
from layout.trial_walk import plan_trial
from layout.write import write_dxf

CHORD_MM = 1e-5  # how far a chord may lie inside its arc
APP_ID = "DISCWRIGHT"


@dataclass(frozen=True, kw_only=True)
class Read:
    """What stands in the file, in its order."""

    layers: list[str]
    openings: list[BaseGeometry]
    vertices: list[FloatArray]  # of every opening that is an outline
    holes: list[shapely.Polygon]
    outline: shapely.Polygon
    marks: list[BaseGeometry]
    letters: dict[str, BaseGeometry]
    hits_mm: FloatArray


@cache
def shipped_piece(movement_id: str, cutter_id: str) -> tuple[TrialPiece, Read]:
    return read_piece(shipped_movement(movement_id), shipped_cutter(cutter_id))


def read_piece(movement: Movement, cutter: Cutter) -> tuple[TrialPiece, Read]:
    piece = plan_trial(movement, cutter)
    return piece, read_dxf(write_dxf(piece.drawing, cutter), movement, cutter)


def read_dxf(dxf: bytes, movement: Movement, cutter: Cutter) -> Read:
    entities = list(read(io.StringIO(dxf.decode("ascii"))).modelspace())
    lines: dict[str, list[FloatArray]] = {}
    vertices: list[FloatArray] = []
    letters: dict[str, list[FloatArray]] = {}
    hits: list[tuple[float, float]] = []
    text = ""
    for entity in entities:
        layer = entity.dxf.layer
        if isinstance(entity, Point):
            hits.append((entity.dxf.location.x, entity.dxf.location.y))
            continue
        line = np.array([tuple(point)[:2] for point in make_path(entity).flattening(CHORD_MM)])
        lines.setdefault(layer, []).append(line)
        if layer in {"SLITS", "SLOTS"} and isinstance(entity, LWPolyline):
            vertices.append(np.array(entity.get_points("xy")))
        if layer == "MARKS":
            if entity.has_xdata(APP_ID):
                text = entity.get_xdata(APP_ID)[0].value
            if text:
                letters.setdefault(text, []).append(line)
    cut = [shapely.Polygon(line) for line in [*lines.get("SLITS", []), *lines.get("SLOTS", [])]]
    hits_mm = np.array(hits).reshape(-1, 2)
    [outline] = lines["RIM"]
    return Read(
        layers=[entity.dxf.layer for entity in entities],
        # What falls out of a slit once its tab is folded is its convex hull: a slit's ends are square.
        openings=struck(hits_mm, movement, cutter) if len(hits_mm) else [one.convex_hull for one in cut],
        vertices=vertices,
        holes=[shapely.Polygon(line) for line in lines["HOLES"]],
        outline=shapely.Polygon(outline),
        marks=[shapely.LineString(line) for line in lines["MARKS"]],
        letters={said: shapely.MultiLineString(strokes) for said, strokes in letters.items()},
        hits_mm=hits_mm,
    )


def struck(hits_mm: FloatArray, movement: Movement, cutter: Cutter) -> list[BaseGeometry]:
    """What a press's tool takes out: its footprint round every strike, square to the radius there."""
    tool = fitting_tool(movement, cutter)
    assert tool is not None
    half_u, half_v = tool.footprint_length_mm / 2, tool.footprint_width_mm / 2
    found: list[BaseGeometry] = []
    for x, y in hits_mm.tolist():
        if tool.makes == "slot":
            core = shapely.LineString([(0, half_v - half_u), (0, half_u - half_v)]).buffer(half_v, quad_segs=256)
        else:
            core = shapely.box(-half_v, -half_u, half_v, half_u)
        turned = affinity.rotate(core, math.atan2(y, x), origin=(0, 0), use_radians=True)
        found.append(affinity.translate(turned, x, y))
    return found


def at_mark(read: Read, mark: str, count: int = 1) -> list[BaseGeometry]:
    """The openings that a mark stands over: those nearest to the middle of its base line."""
    points = shapely.get_coordinates(read.letters[mark])
    radius_mm = np.hypot(*points.T)
    middle = points.mean(axis=0)
    base = shapely.Point(middle / np.hypot(*middle) * radius_mm.min())
    return sorted(read.openings, key=base.distance)[:count]


def level(shape: BaseGeometry) -> BaseGeometry:
    """The shape turned so that its middle lies on the x axis: x across the travel, y along it."""
    middle = shape.convex_hull.minimum_rotated_rectangle.centroid
    return affinity.rotate(shape, -math.atan2(middle.y, middle.x), origin=(0, 0), use_radians=True)


def size_mm(shape: BaseGeometry) -> tuple[float, float]:
    """Across the travel and along it."""
    low_x, low_y, high_x, high_y = level(shape).bounds
    return high_x - low_x, high_y - low_y


def of_tracks(found: list[FloatArray], expected: FloatArray) -> list[FloatArray]:
    """Of everything found, for each outline or point expected the one as far from the centre in every vertex."""
    return [
        min(
            (one for one in found if one.shape == wanted.shape),
            key=lambda one: float(np.abs(np.hypot(*one.T) - np.hypot(*wanted.T)).max()),
        )
        for wanted in expected
    ]
