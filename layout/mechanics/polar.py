"""Outlines seen from the centre of the disc: split so that each piece rises or falls in angle and in radius.

A straight piece is r·cos(θ − φ) = d, with d the distance of its line from the centre and φ the
direction of its foot. A piece of a circle of radius a, whose centre lies at (c, ψ), is
r² − 2rc·cos(θ − ψ) + c² = a². Elementary geometry; lengths mm, angles radians.

One shape lies on every track, each time at another distance from the centre. All its outlines are split at once,
into pieces that know their outline.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, counted_out

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

    def of(self, index: IntArray) -> "Curves":
        """These pieces of it."""
        return Curves(
            distance_mm=self.distance_mm[index],
            direction_rad=self.direction_rad[index],
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

    def radius_mm(self, angle_rad: FloatArray, *, turned_rad: FloatArray | float = 0.0) -> FloatArray:
        """Shape (n,). Where each piece, turned about the centre, crosses the ray at an angle of its own."""
        apart = angle_rad - (self.direction_rad + turned_rad)
        crossing_mm = self.distance_mm / np.cos(apart)
        is_round = ~np.isnan(self.round_mm)
        if is_round.any():
            apart, centre_mm, far = apart[is_round], self.distance_mm[is_round], self.far[is_round]
            along_mm, across_mm = centre_mm * np.cos(apart), centre_mm * np.sin(apart)
            # At a tangent the root is of a zero that may be rounded below it.
            half_chord_mm = np.sqrt(np.maximum(self.round_mm[is_round] ** 2 - across_mm**2, 0.0))
            crossing_mm[is_round] = along_mm + np.where(far, half_chord_mm, -half_chord_mm)
        return crossing_mm

    def apart_rad(self, radius_mm: FloatArray) -> FloatArray:
        """Shape (n,). Where each piece crosses the circle of a radius of its own about the centre, past its direction.

        However a piece is turned about the centre, this stays as it is.
        """
        cosine = self.distance_mm / radius_mm
        is_round = ~np.isnan(self.round_mm)
        if is_round.any():
            to_mm, centre_mm = radius_mm[is_round], self.distance_mm[is_round]
            squares_mm2 = to_mm**2 + centre_mm**2 - self.round_mm[is_round] ** 2
            cosine[is_round] = squares_mm2 / (2 * to_mm * centre_mm)
        apart = np.arccos(np.clip(cosine, -1.0, 1.0))
        return np.asarray(np.where(self.above, apart, -apart))

    def crossing(self, at: FloatArray, unit: Literal["rad", "mm"]) -> FloatArray:
        """Shape (n,). The radii at angles ("rad"), or the angles at radii ("mm"), one for each piece."""
        return self.radius_mm(at) if unit == "rad" else self.direction_rad + self.apart_rad(at)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Strips:
    """The insides of outlines, cut into strips between two pieces of each.

    Attributes:
        outline: Shape (m,). The outline each strip is of, rising.
        from_to: Shape (m, 2). The stretch of angle or of radius over which each strip lies.
        unit: Of from_to: "rad" for strips along rays, "mm" for strips along circles.
        low: Shape (m,). The piece it begins at, on every ray (or circle) of the stretch.
        high: Shape (m,). The piece it ends at.
    """

    outline: IntArray
    from_to: FloatArray
    unit: Literal["rad", "mm"]
    low: IntArray
    high: IntArray

    @staticmethod
    def joined(parts: Sequence["Strips"], *, first_outline: Sequence[int], first_piece: Sequence[int]) -> "Strips":
        """The strips of all parts, in one unit: each part's outlines and pieces counted on from its first ones."""
        return Strips(
            outline=np.concatenate([part.outline + first for part, first in zip(parts, first_outline, strict=True)]),
            from_to=np.concatenate([part.from_to for part in parts]),
            unit=parts[0].unit,
            low=np.concatenate([part.low + first for part, first in zip(parts, first_piece, strict=True)]),
            high=np.concatenate([part.high + first for part, first in zip(parts, first_piece, strict=True)]),
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Outlines:
    """Closed outlines that do not go round the centre.

    Attributes:
        curves: The pieces of all of them; straight ones that lie on a ray through the centre are left out.
        by_angle: Their insides, on rays at rising angles.
        by_radius: Their insides, on circles of rising radii.
        reach_mm: Shape (t, 2). The least and greatest distance of each from the centre.
    """

    curves: Curves
    by_angle: Strips
    by_radius: Strips
    reach_mm: FloatArray

    @staticmethod
    def joined(parts: Sequence["Outlines"]) -> "Outlines":
        """The outlines of all parts, one after the other."""
        outlines = [0, *np.cumsum([len(part.reach_mm) for part in parts]).tolist()][:-1]
        pieces = [0, *np.cumsum([len(part.curves.far) for part in parts]).tolist()][:-1]
        return Outlines(
            curves=Curves.joined([part.curves for part in parts]),
            by_angle=Strips.joined([part.by_angle for part in parts], first_outline=outlines, first_piece=pieces),
            by_radius=Strips.joined([part.by_radius for part in parts], first_outline=outlines, first_piece=pieces),
            reach_mm=np.concatenate([part.reach_mm for part in parts]),
        )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Pieces:
    """Pieces of the sides of outlines.

    Attributes:
        side: Shape (m,). The side each is a piece of, counted over all outlines; rising.
        curves: The curve each lies on, in as many entries.
        ends_mm: Shape (m, 2, 2). Where each begins and where it ends; x, y.
    """

    side: IntArray
    curves: Curves
    ends_mm: FloatArray


_Curve = tuple[float, float, float, bool, bool]  # the five fields of Curves, in their order


def outlines_of(points_mm: FloatArray, bulges: FloatArray) -> Outlines | None:
    """The outlines of one shape that lies near the +X axis in several places.

    None where one of them goes round the centre or behind it, or has no size.

    Args:
        points_mm: Shape (t, n, 2). Vertices of simple closed outlines on the disc.
        bulges: Shape (n,). DXF bulge of the side that starts at each vertex.

    Corners in one place count as one.
    """
    pieces = _pieces(points_mm, bulges)
    outline = pieces.side // len(bulges)
    first = np.searchsorted(outline, np.arange(len(points_mm)))
    x_mm, y_mm = pieces.ends_mm[..., 0], pieces.ends_mm[..., 1]
    if len(np.unique(outline)) < len(points_mm) or x_mm.min() <= _SHORT:
        return None
    angle_rad, radius_mm = np.sort(_phase_rad(x_mm, y_mm), axis=1), np.sort(np.hypot(x_mm, y_mm), axis=1)
    nearest_mm, farthest_mm = np.minimum.reduceat(radius_mm[:, 0], first), np.maximum.reduceat(radius_mm[:, 1], first)
    return Outlines(
        curves=pieces.curves,
        by_angle=_strips(angle_rad, outline, pieces.curves, "rad"),
        by_radius=_strips(radius_mm, outline, pieces.curves, "mm"),
        reach_mm=np.stack([nearest_mm, farthest_mm], axis=1),
    )


def _pieces(points_mm: FloatArray, bulges: FloatArray) -> _Pieces:
    """The pieces of all outlines, side by side in the order of each outline's corners."""
    start_mm = points_mm.reshape(-1, 2)
    end_mm = np.roll(points_mm, -1, axis=1).reshape(-1, 2)
    long = np.hypot(*(end_mm - start_mm).T) > _SHORT  # else two corners in one place, as where a relief has no length
    is_round = np.tile(bulges != 0, len(points_mm))
    straight = _straight_pieces(np.flatnonzero(long & ~is_round), start_mm, end_mm)
    bent = np.flatnonzero(long & is_round)
    if not len(bent):
        return straight
    arcs = _round_pieces(bent, start_mm, end_mm, np.tile(bulges, len(points_mm)))
    side = np.concatenate([straight.side, arcs.side])
    order = np.argsort(side, kind="stable")
    return _Pieces(
        side=side[order],
        curves=Curves.joined([straight.curves, arcs.curves]).of(order),
        ends_mm=np.concatenate([straight.ends_mm, arcs.ends_mm])[order],
    )


def _phase_rad(x_mm: FloatArray, y_mm: FloatArray) -> FloatArray:
    """The directions of points. By Python's own arctangent: numpy's rounds differently from processor to processor."""
    return np.array(list(map(math.atan2, y_mm.ravel().tolist(), x_mm.ravel().tolist()))).reshape(x_mm.shape)


def _straight_pieces(side: IntArray, start_mm: FloatArray, end_mm: FloatArray) -> _Pieces:
    """Straight sides, each split at the foot of the perpendicular from the centre where that lies between its ends."""
    (x_mm, y_mm), (end_x_mm, end_y_mm) = start_mm[side].T, end_mm[side].T
    length_mm = np.hypot(end_x_mm - x_mm, end_y_mm - y_mm)
    along_x, along_y = (end_x_mm - x_mm) / length_mm, (end_y_mm - y_mm) / length_mm
    before_mm = -(x_mm * along_x + y_mm * along_y)
    split = (before_mm > _SHORT) & (before_mm < length_mm - _SHORT)
    foot_x_mm = np.where(split, x_mm + before_mm * along_x, end_x_mm)
    foot_y_mm = np.where(split, y_mm + before_mm * along_y, end_y_mm)
    stops_mm = np.stack([x_mm, y_mm, foot_x_mm, foot_y_mm, end_x_mm, end_y_mm], axis=1).reshape(-1, 3, 2)
    one, half = np.nonzero(np.stack([np.ones_like(split), split], axis=1))
    first_mm, last_mm = stops_mm[one, half], stops_mm[one, half + 1]
    # The normal points away from the centre.
    distance_mm = x_mm * along_y - y_mm * along_x
    out = np.where(distance_mm < 0, -1.0, 1.0)
    out_x, out_y = out * along_y, -out * along_x
    between_x_mm, between_y_mm = (first_mm + last_mm).T
    return _Pieces(
        side=side[one],
        curves=Curves(
            distance_mm=np.abs(distance_mm)[one],
            direction_rad=_phase_rad(out_x, out_y)[one],
            round_mm=np.full(len(one), np.nan),
            far=np.ones(len(one), dtype=np.bool_),
            above=between_y_mm * out_x[one] - between_x_mm * out_y[one] > 0,
        ),
        ends_mm=np.stack([first_mm, last_mm], axis=1),
    )


def _round_pieces(side: IntArray, start_mm: FloatArray, end_mm: FloatArray, bulge: FloatArray) -> _Pieces:
    """Round sides, which are few: one after the other."""
    sides: list[int] = []
    curves: list[_Curve] = []
    ends: list[tuple[complex, complex]] = []
    for one in side.tolist():
        start, end, bend = complex(*start_mm[one].tolist()), complex(*end_mm[one].tolist()), float(bulge[one])
        curve_of = _round_curve(start, end, bend)
        for first, last in pairwise(_round_stops(start, end, bend)):
            sides.append(one)
            curves.append(curve_of(first, last))
            ends.append((first, last))
    distance_mm, direction_rad, round_mm, far, above = zip(*curves, strict=True)
    ends_mm = np.array(ends)
    return _Pieces(
        side=np.array(sides, dtype=np.int64),
        curves=Curves(
            distance_mm=np.array(distance_mm),
            direction_rad=np.array(direction_rad),
            round_mm=np.array(round_mm),
            far=np.array(far),
            above=np.array(above),
        ),
        ends_mm=np.stack([ends_mm.real, ends_mm.imag], axis=-1),
    )


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


def _round_curve(start: complex, end: complex, bulge: float) -> Callable[[complex, complex], _Curve]:
    centre, round_mm = _circle(start, end, bulge)
    distance_mm, out = abs(centre), centre / abs(centre)

    def curve(first: complex, last: complex) -> _Curve:
        # The middle of a stretch without a turning point, seen from the circle's own centre.
        middle = (first - centre) + (last - centre)
        point = centre + round_mm * middle / abs(middle)
        along = point * out.conjugate()
        far = abs(point) > distance_mm * along.real / abs(point)
        return distance_mm, cmath.phase(out), round_mm, far, along.imag > 0

    return curve


def _strips(spans: FloatArray, outline: IntArray, curves: Curves, unit: Literal["rad", "mm"]) -> Strips:
    """Between each two places where a piece of an outline ends, its pieces there are paired off in their order.

    Args:
        spans: Shape (n, 2). From where to where each piece lies.
        outline: Shape (n,). The outline of each piece, rising.
        curves: The pieces.
        unit: Of the spans.
    """
    from_to, of_outline = _between_stops(spans, outline)
    middle = (from_to[:, 0] + from_to[:, 1]) / 2
    first = np.searchsorted(outline, of_outline)
    between, piece = counted_out(first, np.searchsorted(outline, of_outline, side="right") - first)
    here = (spans[piece, 0] < middle[between]) & (middle[between] < spans[piece, 1])
    between, piece = between[here], piece[here]
    piece = piece[np.lexsort((curves.of(piece).crossing(middle[between], unit), between))]
    # Now every piece with an even place between the same two stops begins a strip, and the next one ends it.
    first = np.searchsorted(between, np.arange(len(from_to)))
    count = np.searchsorted(between, np.arange(len(from_to)), side="right") - first
    strip, pair = counted_out(np.zeros_like(count), count // 2)
    low = first[strip] + 2 * pair
    return Strips(outline=of_outline[strip], from_to=from_to[strip], unit=unit, low=piece[low], high=piece[low + 1])


def _between_stops(spans: FloatArray, outline: IntArray) -> tuple[FloatArray, IntArray]:
    """Every stretch between two places next to each other where a piece of one outline ends, and that outline."""
    stops, of_outline = spans.ravel(), np.repeat(outline, 2)
    order = np.lexsort((stops, of_outline))
    stops, of_outline = stops[order], of_outline[order]
    apart = (np.diff(stops) > _SHORT) | (np.diff(of_outline) > 0)
    kept = np.concatenate([[True], apart])
    stops, of_outline = stops[kept], of_outline[kept]
    in_one = of_outline[1:] == of_outline[:-1]
    return np.stack([stops[:-1], stops[1:]], axis=1)[in_one], of_outline[1:][in_one]
