"""Outlines seen from the centre of the disc: split so that each piece rises or falls in angle and in radius.

A straight piece is r·cos(θ − φ) = d, with d the distance of its line from the centre and φ the
direction of its foot. A piece of a circle of radius a, whose centre lies at (c, ψ), is
r² − 2rc·cos(θ − ψ) + c² = a². Elementary geometry; lengths mm, angles radians.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray

_SHORT = 1e-9  # mm or rad; stretches below it (a nanometre at a metre) are rounding, not shape


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Curves:
    """Pieces of outlines, each rising or falling throughout in angle as in radius.

    Attributes:
        distance_mm: Shape (n,). d of a straight piece, c of a round one.
        direction_rad: Shape (n,). φ of a straight piece, ψ of a round one.
        round_mm: Shape (n,). a; NaN for a straight piece.
        far: Shape (n,). Whether it is on the side of its circle away from the centre; no matter where straight.
        above: Shape (n,). Whether θ is above the direction.
    """

    distance_mm: FloatArray
    direction_rad: FloatArray
    round_mm: FloatArray
    far: BoolArray
    above: BoolArray

    def of(self, index: IntArray, *, turned_rad: FloatArray) -> "Curves":
        """These pieces of it, each turned about the centre by an angle of its own."""
        return Curves(
            distance_mm=self.distance_mm[index],
            direction_rad=self.direction_rad[index] + turned_rad,
            round_mm=self.round_mm[index],
            far=self.far[index],
            above=self.above[index],
        )

    @staticmethod
    def joined(parts: Sequence["Curves"]) -> "Curves":
        """The pieces of all parts, one after the other."""
        return Curves(
            distance_mm=np.concatenate([part.distance_mm for part in parts]),
            direction_rad=np.concatenate([part.direction_rad for part in parts]),
            round_mm=np.concatenate([part.round_mm for part in parts]),
            far=np.concatenate([part.far for part in parts]),
            above=np.concatenate([part.above for part in parts]),
        )

    def radius_mm(self, angle_rad: FloatArray) -> FloatArray:
        """Where each piece crosses the ray at an angle, one angle for each piece or one row for several."""
        apart = angle_rad - self.direction_rad
        along_mm, across_mm = self.distance_mm * np.cos(apart), self.distance_mm * np.sin(apart)
        # fmax: at a tangent the root is of a zero that may be rounded below it; NaN where straight is not used.
        half_chord_mm = np.sqrt(np.fmax(self.round_mm**2 - across_mm**2, 0.0))
        straight_mm = self.distance_mm / np.cos(apart)
        return np.asarray(
            np.where(np.isnan(self.round_mm), straight_mm, along_mm + np.where(self.far, half_chord_mm, -half_chord_mm))
        )

    def angle_rad(self, radius_mm: FloatArray) -> FloatArray:
        """Where each piece crosses the circle of a radius about the centre, as radius_mm."""
        squares_mm2 = radius_mm**2 + self.distance_mm**2 - self.round_mm**2
        round_cosine = squares_mm2 / (2 * radius_mm * self.distance_mm)
        cosine = np.where(np.isnan(self.round_mm), self.distance_mm / radius_mm, round_cosine)
        apart = np.arccos(np.clip(cosine, -1.0, 1.0))
        return np.asarray(self.direction_rad + np.where(self.above, apart, -apart))

    def crossing(self, at: FloatArray, unit: Literal["rad", "mm"]) -> FloatArray:
        """radius_mm at angles ("rad") or angle_rad at radii ("mm")."""
        return self.radius_mm(at) if unit == "rad" else self.angle_rad(at)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Strips:
    """An outline's inside, cut into strips between two pieces of it.

    Attributes:
        from_to: Shape (m, 2). The stretch of angle or of radius over which each strip lies.
        unit: Of from_to: "rad" for strips along rays, "mm" for strips along circles.
        low: Shape (m,). The piece it begins at, on every ray (or circle) of the stretch.
        high: Shape (m,). The piece it ends at.
    """

    from_to: FloatArray
    unit: Literal["rad", "mm"]
    low: IntArray
    high: IntArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Outline:
    """A closed outline that does not go round the centre.

    Attributes:
        curves: Its pieces; straight ones that lie on a ray through the centre are left out.
        by_angle: Its inside, on rays at rising angles.
        by_radius: Its inside, on circles of rising radii.
        reach_mm: Its least and greatest distance from the centre.
    """

    curves: Curves
    by_angle: Strips
    by_radius: Strips
    reach_mm: tuple[float, float]


_Piece = tuple[float, float, float, bool, bool]  # the five fields of Curves, in their order
_Ends = tuple[float, float, float, float]  # radius and angle where a piece begins, and where it ends


def outline_of(points_mm: FloatArray, bulges: FloatArray) -> Outline | None:
    """The outline of a shape that lies near the +X axis; None where it goes round the centre or behind it.

    Args:
        points_mm: Shape (n, 2). Vertices of a simple closed outline on the disc.
        bulges: Shape (n,). DXF bulge of the piece that starts at each vertex.

    Corners in one place count as one; a shape of no size has no outline.
    """
    pieces: list[_Piece] = []
    ends: list[_Ends] = []
    corners = [complex(x_mm, y_mm) for x_mm, y_mm in points_mm.tolist()]
    for start, end, bulge in zip(corners, corners[1:] + corners[:1], bulges.tolist(), strict=True):
        if abs(end - start) <= _SHORT:  # two corners in one place, as where a relief has no length
            continue
        stops = _round_stops(start, end, bulge) if bulge else _straight_stops(start, end)
        if min(stop.real for stop in stops) <= _SHORT:
            return None
        piece_of = _round_piece(start, end, bulge) if bulge else _straight_piece(start, end)
        for first, last in pairwise(stops):
            pieces.append(piece_of(first, last))
            ends.append((abs(first), cmath.phase(first), abs(last), cmath.phase(last)))
    if not pieces:
        return None
    curves = _curves(pieces)
    spans = np.array(ends)
    return Outline(
        curves=curves,
        by_angle=_strips(np.sort(spans[:, 1::2], axis=1), curves, "rad"),
        by_radius=_strips(np.sort(spans[:, 0::2], axis=1), curves, "mm"),
        reach_mm=(float(spans[:, 0::2].min()), float(spans[:, 0::2].max())),
    )


def _straight_stops(start: complex, end: complex) -> list[complex]:
    """Its ends, and the foot of the perpendicular from the centre where that lies between them."""
    along = (end - start) / abs(end - start)
    before_mm = -(start * along.conjugate()).real
    inside = _SHORT < before_mm < abs(end - start) - _SHORT
    return [start, start + before_mm * along, end] if inside else [start, end]


def _straight_piece(start: complex, end: complex) -> Callable[[complex, complex], _Piece]:
    normal = -1j * (end - start) / abs(end - start)
    distance_mm = (start * normal.conjugate()).real
    if distance_mm < 0:
        normal, distance_mm = -normal, -distance_mm

    def piece(first: complex, last: complex) -> _Piece:
        above = ((first + last) * normal.conjugate()).imag > 0
        return distance_mm, cmath.phase(normal), math.nan, True, above

    return piece


def _circle(start: complex, end: complex, bulge: float) -> tuple[complex, float]:
    """Centre and radius of a bulged piece (DXF reference: bulge = tan(included angle / 4))."""
    centre = (start + end) / 2 + 1j * (end - start) * (1 - bulge**2) / (4 * bulge)
    return centre, abs(start - centre)


def _round_stops(start: complex, end: complex, bulge: float) -> list[complex]:
    """Its ends, and between them its nearest and farthest points and those where a ray touches it."""
    centre, round_mm = _circle(start, end, bulge)
    first, sweep = cmath.phase(start - centre), 4 * math.atan(bulge)
    out, touch = cmath.phase(centre), math.acos(-min(round_mm / abs(centre), 1.0))
    turned = (
        math.copysign((math.copysign(1.0, sweep) * (at - first)) % (2 * math.pi), sweep) for at in _places(out, touch)
    )
    inside = sorted((by for by in turned if _SHORT < abs(by) < abs(sweep) - _SHORT), key=abs)
    return [start, *(centre + cmath.rect(round_mm, first + by) for by in inside), end]


def _places(out_rad: float, touch_rad: float) -> tuple[float, float, float, float]:
    return out_rad, out_rad + math.pi, out_rad + touch_rad, out_rad - touch_rad


def _round_piece(start: complex, end: complex, bulge: float) -> Callable[[complex, complex], _Piece]:
    centre, round_mm = _circle(start, end, bulge)
    distance_mm, out = abs(centre), centre / abs(centre)

    def piece(first: complex, last: complex) -> _Piece:
        # The middle of a stretch without a turning point, seen from the circle's own centre.
        middle = (first - centre) + (last - centre)
        point = centre + round_mm * middle / abs(middle)
        along = point * out.conjugate()
        far = abs(point) > distance_mm * along.real / abs(point)
        return distance_mm, cmath.phase(out), round_mm, far, along.imag > 0

    return piece


def _curves(pieces: list[_Piece]) -> Curves:
    distance_mm, direction_rad, round_mm, far, above = (np.array(column) for column in zip(*pieces, strict=True))
    return Curves(distance_mm=distance_mm, direction_rad=direction_rad, round_mm=round_mm, far=far, above=above)


def _strips(spans: FloatArray, curves: Curves, unit: Literal["rad", "mm"]) -> Strips:
    """Between each two places where a piece ends, the pieces there are paired off in their order."""
    stops = np.unique(spans)
    stops = stops[np.concatenate([[True], np.diff(stops) > _SHORT])]
    middle = (stops[:-1] + stops[1:])[:, None] / 2
    here = (spans[:, 0] < middle) & (middle < spans[:, 1])
    at = np.where(here, curves.crossing(middle, unit), np.inf)
    order = np.argsort(at, axis=1, kind="stable")
    pair_count = here.sum(axis=1) // 2
    strip, pair = np.nonzero(np.arange(order.shape[1] // 2) < pair_count[:, None])
    return Strips(
        from_to=np.stack([stops[strip], stops[strip + 1]], axis=1),
        unit=unit,
        low=order[strip, 2 * pair],
        high=order[strip, 2 * pair + 1],
    )
