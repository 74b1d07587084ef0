"""A contour as drawn: straight pieces and arcs, cleaned of what other programs add to it."""

import math
from dataclasses import dataclass

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats
from layout.read_back.limits import REPEATED_WITHIN_MM, STRAIGHT_WITHIN_MM, TRACED_WITHIN_MM


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Contour:
    """A polyline of the drawing, seen from the label side.

    Attributes:
        layer: Our layer name.
        points_mm: Shape (k, 2).
        bulge_ratio: Shape (k,). DXF bulge of the piece that starts at each vertex.
        closed: Whether the last vertex joins the first.
    """

    layer: str
    points_mm: FloatArray
    bulge_ratio: FloatArray
    closed: bool

    def mirrored(self) -> "Contour":
        """The same seen from the other side, (x, −y); arcs turn the other way."""
        return Contour(
            layer=self.layer,
            points_mm=frozen_floats(self.points_mm * (1.0, -1.0)),
            bulge_ratio=frozen_floats(-self.bulge_ratio),
            closed=self.closed,
        )

    def tidied(self) -> "Contour":
        """The same without repeated vertices and vertices within a straight piece; closed if its ends meet."""
        points, bulges, closed = self.points_mm, self.bulge_ratio, self.closed
        if not closed and len(points) > 2 and math.dist(points[0], points[-1]) <= REPEATED_WITHIN_MM:  # noqa: PLR2004 - an outline has three corners
            points, bulges, closed = points[:-1], bulges[:-1], True
        following = np.roll(points, -1, axis=0)
        long_enough = np.hypot(*(following - points).T) > REPEATED_WITHIN_MM
        if not closed:
            long_enough[-1:] = True  # no piece starts at the last vertex
        points, bulges = points[long_enough], bulges[long_enough]
        within = _within_straight(points, bulges, closed=closed)
        return Contour(
            layer=self.layer,
            points_mm=frozen_floats(points[~within]),
            bulge_ratio=frozen_floats(bulges[~within]),
            closed=closed,
        )

    def trace_steps(self) -> IntArray:
        """Shape (k,). How many chords trace each piece within the tolerance."""
        ends = np.roll(self.points_mm, -1, axis=0)
        bulge = np.abs(self.bulge_ratio)
        arcs = bulge > 0
        # DXF reference: bulge = tan(included angle/4); so the radius is chord·(1 + b²)/(4b).
        chord_mm = np.hypot(*(ends - self.points_mm).T)
        radius_mm = np.divide(chord_mm * (1 + bulge**2), 4 * bulge, out=np.zeros(len(bulge)), where=arcs)
        return np.where(arcs, steps_of_arcs(radius_mm, 4 * np.arctan(bulge)), 1)

    def traced_mm(self) -> FloatArray:
        """Points along the contour, arcs included, near enough to measure by; the first is not repeated."""
        ends = np.roll(self.points_mm, -1, axis=0)
        steps = self.trace_steps().tolist()
        pieces = zip(self.points_mm, ends, self.bulge_ratio.tolist(), steps, strict=True)
        traced = [_traced_piece_mm(start, end, bulge, count) for start, end, bulge, count in pieces]
        return np.concatenate(traced) if self.closed else np.concatenate([*traced[:-1], self.points_mm[-1:]])


def steps_of_arcs(radius_mm: FloatArray, angle_rad: FloatArray) -> IntArray:
    """How many chords trace arcs within the tolerance; a chord of angle θ lies r·(1 − cos(θ/2)) inside."""
    within = np.minimum(TRACED_WITHIN_MM / np.maximum(radius_mm, TRACED_WITHIN_MM), 1.0)
    steps: FloatArray = np.maximum(np.ceil(angle_rad / (2 * np.arccos(1 - within))), 1)
    return steps.astype(np.int64)


def _traced_piece_mm(start: FloatArray, end: FloatArray, bulge: float, steps: int) -> FloatArray:
    chord = complex(*(end - start))
    if bulge == 0 or chord == 0:
        return np.asarray(start[None])
    # The centre lies (1 − b²)/(4b) chords left of the chord's middle.
    to_centre = chord * (0.5 + 1j * (1 - bulge**2) / (4 * bulge))
    turned = np.exp(4j * math.atan(bulge) * np.arange(steps) / steps)
    along = complex(*start) + to_centre - to_centre * turned
    return np.stack([along.real, along.imag], axis=-1)


def _within_straight(points: FloatArray, bulges: FloatArray, *, closed: bool) -> BoolArray:
    if len(points) < 3:  # noqa: PLR2004 - two points have nothing between them
        return np.zeros(len(points), dtype=np.bool_)
    before, after = np.roll(points, 1, axis=0), np.roll(points, -1, axis=0)
    to, on, over = points - before, after - points, after - before
    off = np.abs(over[:, 0] * to[:, 1] - over[:, 1] * to[:, 0])
    forward = (to * on).sum(axis=1) > 0
    within: BoolArray = (
        forward & (off <= STRAIGHT_WITHIN_MM * np.hypot(*over.T)) & (bulges == 0) & (np.roll(bulges, 1) == 0)
    )
    if not closed:
        within[[0, -1]] = False
    return within
