"""Holes and rim of a drawing against those of the movement."""

import math
from dataclasses import dataclass, replace

import numpy as np
import shapely
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.movement import Movement
from layout.errors import DrawingReadError
from layout.read_back.contour import Contour, steps_of_arcs
from layout.read_back.entities import CutDrawing
from layout.read_back.limits import BLANK_WITHIN_MM, MOST_TRACED, SAME_CUT_MM

_FEWEST_CORNERS = 3


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Edge:
    """An edge of the blank the movement has: what it is called, its line, and where it is."""

    name: str
    line: BaseGeometry
    at: Place


def compare_blank(drawing: CutDrawing, movement: Movement, *, half_kerf_mm: float = 0.0) -> list[Finding]:
    """What of the centre hole, the features and the rim is missing, different, extra or drawn twice.

    Args:
        drawing: Seen from the label side.
        movement: For its blank.
        half_kerf_mm: By how much holes are drawn smaller and the rim larger than they are to be; 0 in a
            drawing of finished edges.
    """
    holes = [_as_drawn(edge, -half_kerf_mm) for edge in _holes(movement)]
    return _compare(drawing, "HOLES", holes) + _compare(drawing, "RIM", [_as_drawn(_rim(movement), half_kerf_mm)])


def _as_drawn(edge: _Edge, outwards_mm: float) -> _Edge:
    """The edge as a compensated drawing has it, corners sharp; as it is where it would vanish."""
    if outwards_mm == 0:
        return edge
    moved = shapely.Polygon(shapely.get_coordinates(edge.line)).buffer(outwards_mm, join_style="mitre")
    return edge if moved.is_empty else replace(edge, line=moved.exterior)


def _circle(radius_mm: float) -> BaseGeometry:
    return shapely.Point(0, 0).buffer(radius_mm, quad_segs=_quarter_steps(radius_mm))


def _quarter_steps(radius_mm: float) -> int:
    return int(steps_of_arcs(np.array([radius_mm]), np.array([math.pi / 2]))[0])


def _holes(movement: Movement) -> list[_Edge]:
    edges = [
        _Edge(name="centre hole", line=_circle(movement.disc.centre_hole_mm / 2).boundary, at=Place(radius_mm=0.0))
    ]
    for feature in movement.disc.features:
        if feature.shape == "notch":
            continue
        end_mm = min(feature.width_mm, feature.length_mm) / 2
        across_mm, along_mm = feature.width_mm / 2 - end_mm, feature.length_mm / 2 - end_mm
        x = feature.radius_mm
        middle = shapely.LineString([(x - across_mm, -along_mm), (x + across_mm, along_mm)])
        shape = middle.buffer(end_mm, quad_segs=_quarter_steps(end_mm)).boundary
        for angle_deg in feature.angles_deg:
            turned = affinity.rotate(shape, angle_deg, origin=(0, 0))
            name = f"{feature.purpose} {feature.shape} at {x:g} mm, {angle_deg % 360:g} degrees"
            if not any(shapely.equals_exact(turned, edge.line, SAME_CUT_MM) for edge in edges):
                edges.append(_Edge(name=name, line=turned, at=Place(radius_mm=x, angle_deg=angle_deg % 360)))
    return edges


def _rim(movement: Movement) -> _Edge:
    rim_mm = movement.disc.outer_diameter_mm / 2
    disc: BaseGeometry = _circle(rim_mm)
    for feature in movement.disc.features:
        if feature.shape == "notch":
            half_mm = feature.width_mm / 2, feature.length_mm / 2
            box = shapely.box(feature.radius_mm - half_mm[0], -half_mm[1], feature.radius_mm + half_mm[0], half_mm[1])
            for angle_deg in feature.angles_deg:
                disc = disc.difference(affinity.rotate(box, angle_deg, origin=(0, 0)))
    return _Edge(name="rim", line=disc.boundary, at=Place(radius_mm=rim_mm))


def _compare(drawing: CutDrawing, layer: str, wanted: list[_Edge]) -> list[Finding]:
    contours = [contour for contour in drawing.contours if contour.layer == layer]
    _refuse_too_fine(contours, layer)
    findings, lines = [], []
    for contour in contours:
        traced = contour.traced_mm() if len(contour.points_mm) else contour.points_mm
        if contour.closed and len(traced) >= _FEWEST_CORNERS:
            lines.append(shapely.LinearRing(traced))
        else:
            findings.append(_open_line(drawing, contour))
    # Boxes as shape (n, 4): quick to tell which line is which, however many there are.
    wanted_boxes = shapely.bounds(np.array([edge.line for edge in wanted], dtype=np.object_))
    boxes = shapely.bounds(np.array(lines, dtype=np.object_)).reshape(-1, 4)
    partner = np.array([np.abs(wanted_boxes - box).max(axis=1).argmin() for box in boxes], dtype=np.intp)
    for place, edge in enumerate(wanted):
        mine = np.flatnonzero(partner == place)
        off = np.abs(boxes[mine] - wanted_boxes[place]).max(axis=1)
        findings += _compare_edge(drawing, edge, [lines[index] for index in mine[off.argsort(kind="stable")]])
    return findings


def _refuse_too_fine(contours: list[Contour], layer: str) -> None:
    points = sum(int(contour.trace_steps().sum()) for contour in contours if len(contour.points_mm))
    if points > MOST_TRACED:
        raise DrawingReadError(
            f"drawing: layer {layer} takes {points} points to compare, allowed are {MOST_TRACED}; "
            "is this the drawing of one disc?"
        )


def _compare_edge(drawing: CutDrawing, edge: _Edge, found: list[shapely.LinearRing]) -> list[Finding]:
    """What is wrong with the lines found for an edge, the most like it first."""
    if not found:
        return [_differs(edge, f"the drawing has no {edge.name}", None)]
    findings = []
    off_mm = float(shapely.hausdorff_distance(edge.line, found[0]))
    if off_mm > BLANK_WITHIN_MM:
        message = (
            f"the {edge.name} lies up to {off_mm:.3f} mm from where the movement has it; "
            f"the limit is {BLANK_WITHIN_MM:g} mm"
        )
        findings.append(_differs(edge, message, off_mm))
    for line in found[1:]:
        again = max(abs(a - b) for a, b in zip(found[0].bounds, line.bounds, strict=True)) <= SAME_CUT_MM
        findings.append(_twice(edge) if again else _extra(drawing, line, edge))
    return findings


def _differs(edge: _Edge, message: str, measured_mm: float | None) -> Finding:
    return Finding(
        code=Code.BLANK_DIFFERS,
        level=Level.ERROR,
        message=message,
        measured=measured_mm,
        limit=BLANK_WITHIN_MM,
        unit="mm",
        at=edge.at,
        remedy="choose the movement this was drawn for, or correct the drawing",
    )


def _twice(edge: _Edge) -> Finding:
    return Finding(
        code=Code.CUT_TWICE,
        level=Level.ERROR,
        message=f"the {edge.name} is drawn twice",
        measured=None,
        limit=SAME_CUT_MM,
        unit="mm",
        at=edge.at,
        remedy="delete the second from the drawing",
    )


def _extra(drawing: CutDrawing, line: shapely.LinearRing, edge: _Edge) -> Finding:
    x, y = ((low + high) / 2 for low, high in (line.bounds[::2], line.bounds[1::2]))
    what = "a second rim" if edge.name == "rim" else "a hole the movement does not have"
    return _unknown(f"the drawing has {what}, around {drawing.told(x, y)}", math.hypot(x, y), math.atan2(y, x))


def _open_line(drawing: CutDrawing, contour: Contour) -> Finding:
    x, y = contour.points_mm.mean(axis=0).tolist() if len(contour.points_mm) else (0.0, 0.0)
    message = f"layer {contour.layer} has a line that does not close, around {drawing.told(x, y)}"
    return _unknown(message, math.hypot(x, y), math.atan2(y, x))


def _unknown(message: str, radius_mm: float, angle_rad: float) -> Finding:
    return Finding(
        code=Code.UNKNOWN_CUT,
        level=Level.ERROR,
        message=message,
        measured=None,
        limit=None,
        unit="",
        at=Place(radius_mm=radius_mm, angle_deg=math.degrees(angle_rad) % 360),
        remedy="delete it from the drawing, or add it to the movement",
    )
