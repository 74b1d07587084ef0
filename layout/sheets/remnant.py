"""What is left of a sheet when its discs are out, as pieces that can be stock again."""

import math

import numpy as np
import shapely
from shapely.geometry.polygon import orient

from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.sheets.plan import Piece

SMOOTHED_MM = 0.5  # mm; how far the outline of a remnant may run inside the true one, to have few corners
_CORNERS_OF_A_DISC = 24  # a hole is taken out as a polygon of so many corners round the rim


def remnants_of(
    sheet: shapely.Polygon, centres_mm: FloatArray, radius_mm: FloatArray, least_mm: float
) -> tuple[Piece, ...]:
    """The pieces of a sheet that are left and at least so wide everywhere, largest first.

    What is narrower than the least width is scrap and left out: the metal between discs, mostly. Every
    piece lies wholly inside what is truly left. Clamp zones are left too.

    Args:
        sheet: As it was.
        centres_mm: Shape (n, 2). Of the discs taken out.
        radius_mm: Shape (n,). Theirs.
        least_mm: The least width of a piece worth keeping.
    """
    turns = np.arange(_CORNERS_OF_A_DISC) * 2 * math.pi / _CORNERS_OF_A_DISC
    round_mm = np.column_stack([np.cos(turns), np.sin(turns)]) / math.cos(math.pi / _CORNERS_OF_A_DISC)
    holes = [shapely.Polygon(at + radius * round_mm) for at, radius in zip(centres_mm, radius_mm, strict=True)]
    left = sheet.difference(shapely.union_all(holes))
    half = least_mm / 2
    core = left.buffer(-half)
    wide = core.buffer(half).intersection(left)
    # GEOS leaves out a ring's first corner too, by how far it is from what the first pass left: twice the tolerance.
    smoothed = wide.buffer(-SMOOTHED_MM, join_style="mitre").simplify(SMOOTHED_MM / 2)
    parts = [part for part in getattr(smoothed, "geoms", [smoothed]) if part.area >= least_mm**2 / 2]
    pieces = [piece_of(orient(part)) for part in parts if isinstance(part, shapely.Polygon)]
    return tuple(sorted(pieces, key=lambda piece: -piece.area_mm2))


def piece_of(shape: shapely.Polygon) -> Piece:
    """A polygon as a piece."""
    return Piece(
        outline_mm=frozen_floats(shapely.get_coordinates(shape.exterior)[:-1]),
        openings_mm=tuple(frozen_floats(shapely.get_coordinates(ring)[:-1]) for ring in shape.interiors),
        area_mm2=float(shape.area),
    )
