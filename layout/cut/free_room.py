"""Which of many places has room for a few boxes: what lies plainly too far in or out is told by numbers alone."""

from dataclasses import dataclass

import numpy as np
import shapely
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.mechanics.arrays import BoolArray, FloatArray

FIRST_PLACES = 64  # places looked at together at first; the first that fits is often an early one
MORE_PLACES = 4  # times as many each time after that: a call for every place would cost more
_SPARE_MM = 1e-6  # mm; rings are taken so much wider, so that the last bit of a distance loses no place


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FreeRoom:
    """Metal that is free for marks.

    Attributes:
        shape: All of it; it may be several pieces.
        rings_mm: Shape (k, 2). For each piece the least and the greatest distance of its points from the disc centre.
    """

    shape: BaseGeometry
    rings_mm: FloatArray

    def turned(self, turn_rad: float) -> "FreeRoom":
        """The room turned about the disc centre, anticlockwise."""
        shape = affinity.rotate(self.shape, turn_rad, origin=(0, 0), use_radians=True)
        return FreeRoom(shape=shape, rings_mm=self.rings_mm)

    def centres_within_mm(self, centres_mm: FloatArray) -> FloatArray:
        """The centres, shape (n, 2), that keep to the ring of a piece: no other can lie in the room."""
        return centres_mm[self._within_rings(centres_mm, centres_mm)]

    def first_fit_mm(self, centres_mm: FloatArray, low_mm: FloatArray, high_mm: FloatArray) -> FloatArray | None:
        """The first centre that lies in the room with every box round it; None where there is none.

        Args:
            centres_mm: Shape (n, 2). The best first.
            low_mm: Shape (m, 2). The lower left corner of every box, from the centre.
            high_mm: Shape (m, 2). The upper right one.
        """
        widest_first = np.argsort(low_mm[:, 0] - high_mm[:, 0])
        low_mm, high_mm = low_mm[widest_first], high_mm[widest_first]
        begin, count = 0, FIRST_PLACES
        while begin < len(centres_mm):
            fits_mm = self._fits_mm(centres_mm[begin : begin + count], low_mm, high_mm)
            if len(fits_mm):
                return np.asarray(fits_mm[0])
            begin, count = begin + count, count * MORE_PLACES
        return None

    def _fits_mm(self, left_mm: FloatArray, low_mm: FloatArray, high_mm: FloatArray) -> FloatArray:
        """The centres that fit; the cheap questions first, since most places fail at one of them."""
        for low, high in zip(low_mm, high_mm, strict=True):
            left_mm = left_mm[self._within_rings(left_mm + low, left_mm + high)]
            if not len(left_mm):
                return left_mm
        shapely.prepare(self.shape)
        left_mm = left_mm[shapely.contains_xy(self.shape, left_mm)]
        for corner_mm in _corners_mm(low_mm, high_mm):
            if not len(left_mm):
                return left_mm
            left_mm = left_mm[shapely.intersects_xy(self.shape, left_mm + corner_mm)]
        for low, high in zip(low_mm, high_mm, strict=True):
            boxes = shapely.box(*(left_mm + low).T, *(left_mm + high).T)
            left_mm = left_mm[shapely.covers(self.shape, boxes)]
        return left_mm

    def _within_rings(self, low_mm: FloatArray, high_mm: FloatArray) -> BoolArray:
        """Shape (…). Which boxes, by their corners, (…, 2), keep to the ring of one piece: no other can lie in it."""
        nearest_mm = np.maximum(np.maximum(low_mm, -high_mm), 0.0)
        farthest_mm = np.maximum(-low_mm, high_mm)
        nearest_mm2 = nearest_mm[..., 0] ** 2 + nearest_mm[..., 1] ** 2
        farthest_mm2 = farthest_mm[..., 0] ** 2 + farthest_mm[..., 1] ** 2
        within = np.zeros(nearest_mm2.shape, dtype=np.bool_)
        for from_mm, to_mm in self.rings_mm.tolist():
            inner_mm, outer_mm = max(from_mm - _SPARE_MM, 0.0), to_mm + _SPARE_MM
            within |= (nearest_mm2 >= inner_mm**2) & (farthest_mm2 <= outer_mm**2)
        return within


def free_room(shape: BaseGeometry) -> FreeRoom:
    """The room of a shape, which may be empty."""
    pieces, centre = shapely.get_parts(shape), shapely.Point(0.0, 0.0)
    pieces = pieces[~shapely.is_empty(pieces)]
    farthest_mm = [float(np.hypot(*shapely.get_coordinates(piece).T).max()) for piece in pieces]
    rings_mm = np.array([shapely.distance(pieces, centre), farthest_mm])
    return FreeRoom(shape=shape, rings_mm=rings_mm.reshape(2, -1).T)


def _corners_mm(low_mm: FloatArray, high_mm: FloatArray) -> FloatArray:
    """Shape (4·m, 2). The corners of all boxes, box by box."""
    left, low, right, high = low_mm[:, 0], low_mm[:, 1], high_mm[:, 0], high_mm[:, 1]
    corners_mm = np.array([(left, low), (left, high), (right, low), (right, high)])
    return corners_mm.transpose(2, 0, 1).reshape(-1, 2)
