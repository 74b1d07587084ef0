"""Where on a sheet a disc may lie: the sheet's edges, openings and clamp zones as walls."""

from dataclasses import dataclass

import numpy as np
import shapely
from shapely.geometry.polygon import orient

from layout.documents.sheets import LEAST_CORNERS, Stock
from layout.mechanics.arrays import FloatArray, IntArray

GRAIN_MM = 1e-6  # mm; a nanometre: distances that keep their rule to this keep it
MOST_AT_ONCE = 1_000_000  # numbers; points times walls worked out in one go, bounds memory


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Room:
    """The free part of a sheet and its walls, each with the free side to its left.

    Attributes:
        inside: The sheet without openings and clamp zones.
        start_mm: Shape (m, 2). Where each wall begins.
        end_mm: Shape (m, 2). Where it ends.
        keep_mm: Shape (m,). What a rim keeps from it: the margin at edges, what leads reach out at clamp zones.
        before: Shape (m,). Index of the wall that ends where it begins.
        lines_mm: The same walls by what a rim keeps from them, made ready to ask for distances.
    """

    inside: shapely.MultiPolygon
    start_mm: FloatArray
    end_mm: FloatArray
    keep_mm: FloatArray
    before: IntArray
    lines_mm: tuple[tuple[float, shapely.MultiLineString], ...]


def room_of(stock: Stock, margin_mm: float, clamps_mm: float = 0.0) -> Room:
    """The room of a sheet.

    Args:
        stock: The sheet.
        margin_mm: What rims keep from its edges and openings.
        clamps_mm: What rims keep from its clamp zones.
    """
    sheet = orient(stock.shape())
    clamps = shapely.union_all(
        [shapely.box(c.x_mm, c.y_mm, c.x_mm + c.width_mm, c.y_mm + c.height_mm) for c in stock.clamps]
    )
    rings = [(ring, margin_mm) for ring in (sheet.exterior, *sheet.interiors)]
    for zone in getattr(clamps, "geoms", [clamps] if stock.clamps else []):
        around = orient(zone, sign=-1.0)  # clockwise, so that the free side is to the left
        rings += [(ring, clamps_mm) for ring in (around.exterior, *around.interiors)]
    cleaned = [(_corners_apart(shapely.get_coordinates(ring)[:-1]), keep) for ring, keep in rings]
    rings_mm = [(at, keep) for at, keep in cleaned if len(at) >= LEAST_CORNERS]  # fewer: a chink between two zones
    corners = [at for at, _ in rings_mm]
    counts = np.array([len(at) for at in corners])
    firsts = np.cumsum(counts) - counts
    free = sheet.difference(clamps)
    inside = shapely.MultiPolygon(
        [part for part in getattr(free, "geoms", [free]) if isinstance(part, shapely.Polygon)]
    )
    lines = [
        (keep, shapely.MultiLineString([np.vstack([at, at[:1]]) for at, kept in rings_mm if kept == keep]))
        for keep in dict.fromkeys(keep for _, keep in rings_mm)
    ]
    shapely.prepare([inside, *(each for _, each in lines)])
    return Room(
        inside=inside,
        start_mm=np.concatenate(corners),
        end_mm=np.concatenate([np.roll(at, -1, axis=0) for at in corners]),
        keep_mm=np.concatenate([np.full(len(at), keep) for at, keep in rings_mm]),
        lines_mm=tuple(lines),
        before=np.concatenate(
            [first + np.roll(np.arange(count), 1) for first, count in zip(firsts, counts, strict=True)]
        ),
    )


def _corners_apart(corners_mm: FloatArray) -> FloatArray:
    """The corners of a ring without those that stand where the one before does: a wall has a length."""
    kept = [corners_mm[0]]
    for at in corners_mm[1:]:
        if max(abs(at - kept[-1])) > GRAIN_MM and max(abs(at - kept[0])) > GRAIN_MM:
            kept.append(at)
    return np.array(kept)


def nearest_on_walls(room: Room, points_mm: FloatArray) -> FloatArray:
    """The point of each wall that is nearest to each point; shape (n, m, 2) for points of shape (n, 2)."""
    along = room.end_mm - room.start_mm
    share = ((points_mm[:, None] - room.start_mm) * along).sum(-1) / (along**2).sum(-1)
    return np.asarray(room.start_mm + np.clip(share, 0, 1)[..., None] * along)


def clearance_mm(room: Room, points_mm: FloatArray) -> FloatArray:
    """The largest radius a disc at each point may have; shape (n,), −inf for points outside the room."""
    step = max(1, MOST_AT_ONCE // len(room.start_mm))
    parts = [np.zeros(0)]
    for first in range(0, len(points_mm), step):
        some = points_mm[first : first + step]
        away = some[:, None] - nearest_on_walls(room, some)
        free = (np.hypot(away[..., 0], away[..., 1]) - room.keep_mm).min(axis=1)
        parts.append(np.where(shapely.contains_xy(room.inside, some), free, -np.inf))
    return np.concatenate(parts)


def fitting(room: Room, points_mm: FloatArray, radius_mm: float) -> FloatArray:
    """Those of the points where a disc of this radius keeps clear of the walls."""
    fits = shapely.contains_xy(room.inside, points_mm)
    for keep_mm, lines in room.lines_mm:
        fits &= ~shapely.dwithin(lines, shapely.points(points_mm), keep_mm + radius_mm - GRAIN_MM)
    return points_mm[fits]
