"""The index mark, which shows a wrong side."""

from collections.abc import Iterator

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layout.cut.plan import Outlines
from layout.cut.room import FreeMetal
from layout.mechanics.arrays import FloatArray, frozen_floats

# Lengths of the index mark: as parts of the disc's diameter, from the first, so that it is seen in a picture of
# the whole disc; else in mm. Under 2 mm it is easily missed at arm's length, under 1 mm it is not seen.
MARK_SHARES = (0.025, 0.02, 0.015)
WELL_SEEN_MM = 2.0
MARK_LENGTHS_MM = (6.0, 4.0, 3.0, 2.0, 1.5, 1.0)
STEP_MM = 0.5  # mm; how finely places are tried along a radius


def index_mark(metal: FreeMetal) -> Outlines | None:
    """A stroke along the radius at disc angle 0 with one barb, which points the way the disc turns.

    A disc drawn from the wrong side shows the barb on the wrong side. The mark stands between the
    outermost track and the rim, else inside the innermost track, else wherever there is room; it
    is as large as a picture of the disc needs, and smaller only where that finds room nowhere.

    Args:
        metal: Where there is room, seen from the label side.

    Returns:
        The mark seen from the label side; None where there is no room at all.
    """
    rim_mm, direction = metal.rim_mm, metal.turning.direction
    large_mm = [max(share * 2 * rim_mm, WELL_SEEN_MM) for share in MARK_SHARES]
    small_mm = [length_mm for length_mm in MARK_LENGTHS_MM if length_mm < large_mm[-1]]
    for lengths_mm in (large_mm, small_mm):
        for room, places_mm in _rooms_and_places(metal):
            mark = _mark_in(room, places_mm, lengths_mm, direction)
            if mark is not None:
                return mark
    anywhere_mm = np.arange(rim_mm, 0.0, -STEP_MM)
    return _mark_in(metal.between, anywhere_mm, large_mm + small_mm, direction)


def _rooms_and_places(metal: FreeMetal) -> Iterator[tuple[BaseGeometry, FloatArray]]:
    """Where a mark may stand, the best first, and radii of its middle: outside the tracks, inside, under a clamp."""
    tracks_from_mm, tracks_to_mm = metal.tracks_mm
    inside_mm = np.arange(tracks_from_mm, 0.0, -STEP_MM)
    yield metal.seen, np.array([(tracks_to_mm + metal.rim_mm) / 2])
    yield metal.seen, inside_mm
    yield metal.hidden, inside_mm


def _mark_in(room: BaseGeometry, places_mm: FloatArray, lengths_mm: list[float], direction: int) -> Outlines | None:
    shapely.prepare(room)
    for length_mm in lengths_mm:
        half_mm = length_mm / 2
        shape = np.array([(-half_mm, 0.0), (half_mm, 0.0), (0.0, -direction * half_mm)])
        marks = shape[None] + np.column_stack([places_mm, np.zeros(len(places_mm))])[:, None, :]
        fits = np.flatnonzero(shapely.covers(room, shapely.linestrings(marks)))
        if len(fits):
            bulges = frozen_floats([0.0] * len(shape))
            return Outlines(layer="MARKS", points_mm=frozen_floats(marks[fits[:1]]), bulges=bulges, closed=False)
    return None
