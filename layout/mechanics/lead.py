"""Where a laser pierces before it comes to a closed outline: in the scrap inside, a stated length from the start."""

import math

import numpy as np
import shapely

from layout.documents.cutter import Cutter
from layout.mechanics.arrays import FloatArray, frozen_floats

_DIRECTIONS = 180  # ways tried round the start, every two degrees
_CHORD_RAD = math.radians(3)  # of an arc between two points it is traced by: within 0.0004 of its radius
_GRAIN_MM = 1e-6  # mm; a nanometre
_SQUARE = 1e-9  # cosine; of a lead square to its line, which does not reach back
_DIGITS = 6  # of clearances that are compared, in mm, so that the same way is best on every machine


def clear_of_lines_mm(cutter: Cutter) -> float:
    """How far from the drawn lines the beam's middle must stay: half a kerf, nothing where they are the beam's own."""
    return 0.0 if cutter.kerf_compensated else cutter.kerf_mm / 2


def pierced_inside_mm(
    points_mm: FloatArray, bulges: FloatArray, *, length_mm: float, clear_mm: float, forwards_only: bool = False
) -> FloatArray | None:
    """Where to pierce inside a closed outline so that a straight lead runs to its first vertex.

    The lead must not cross the outline, its start must keep clear of all lines, and all of it of every
    line but the two that meet where it ends. Of all such places the one that is clearest is taken.

    Args:
        points_mm: Shape (k, 2). Vertices of the outline as it is drawn.
        bulges: Shape (k,). DXF bulge of the piece that starts at each vertex.
        length_mm: Of the lead.
        clear_mm: How far the beam's middle must stay from the lines.
        forwards_only: Whether the lead must not reach back from its end, where a bridge stands.

    Returns:
        Shape (2,); None where there is no room.
    """
    pieces = [_traced_mm(*piece) for piece in zip(points_mm, np.roll(points_mm, -1, axis=0), bulges, strict=True)]
    scrap = shapely.Polygon(np.concatenate([piece[:-1] for piece in pieces]))
    others = shapely.MultiLineString(pieces[1:-1])
    turn_rad = np.arange(_DIRECTIONS) * (2 * math.pi / _DIRECTIONS)
    first_rad = math.atan2(*(points_mm[1] - points_mm[0])[::-1])  # so that turned outlines get turned leads
    ways = first_rad + turn_rad
    places_mm = points_mm[0] + length_mm * np.column_stack([np.cos(ways), np.sin(ways)])
    ends = np.stack([np.broadcast_to(points_mm[0], places_mm.shape), places_mm], axis=1)
    leads = np.asarray(shapely.linestrings(ends), dtype=np.object_)
    clearance_mm = np.asarray(shapely.distance(scrap.exterior, shapely.points(places_mm)))
    fits = shapely.contains_xy(scrap, places_mm) & (clearance_mm >= max(clear_mm, _GRAIN_MM))
    fits &= shapely.covers(scrap.buffer(_GRAIN_MM), leads)
    if forwards_only:
        # The tangent at an arc's start is turned from its chord by half its angle, 2·atan(b).
        fits &= np.cos(turn_rad + 2 * math.atan(bulges[0])) >= -_SQUARE
    if not others.is_empty:
        fits &= np.asarray(shapely.distance(others, leads)) >= clear_mm
    if not fits.any():
        return None
    return frozen_floats(places_mm[np.where(fits, clearance_mm.round(_DIGITS), -1.0).argmax()])


def fits_in_circle(radius_mm: float, *, length_mm: float, clear_mm: float) -> bool:
    """Whether a lead along a diameter fits into a circle: it must end nowhere near the other side."""
    return min(length_mm, 2 * radius_mm - length_mm) >= max(clear_mm, _GRAIN_MM)


def _traced_mm(start_mm: FloatArray, end_mm: FloatArray, bulge: float) -> FloatArray:
    """Points along one piece, both ends included. DXF reference: bulge = tan(included angle/4)."""
    if bulge == 0:
        return np.stack([start_mm, end_mm])
    start, end = complex(*start_mm), complex(*end_mm)
    angle_rad = 4 * math.atan(bulge)
    centre = (start + end) / 2 + 1j * (end - start) * (1 - bulge**2) / (4 * bulge)
    steps = max(math.ceil(abs(angle_rad) / _CHORD_RAD), 1)
    along = centre + (start - centre) * np.exp(1j * angle_rad * np.arange(steps + 1) / steps)
    return np.column_stack([along.real, along.imag])
