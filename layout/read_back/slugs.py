"""Holes and slots drawn with bridges, joined to the closed outlines they stand for."""

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

import numpy as np
import shapely
from numpy.typing import NDArray

from layout.check.finding import Code, Finding, Level, Place
from layout.documents.cutter import Cutter
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.bridging import gap_mm
from layout.place.disc import Disc
from layout.read_back.contour import Contour
from layout.read_back.entities import CutDrawing
from layout.read_back.limits import BLANK_WITHIN_MM, SHAPE_WITHIN_MM

_LAYERS = ("HOLES", "SLOTS")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SlugsJoined:
    """A drawing whose holes and slots are closed.

    Attributes:
        drawing: With the joined outlines in place of the lines they were drawn as.
        slot_gaps_mm: Shape (n, 2). The middles of the gaps there were in slots.
        slot_middles_mm: Shape (n, 2). The middle of the slot each of them is in.
    """

    drawing: CutDrawing
    slot_gaps_mm: FloatArray
    slot_middles_mm: FloatArray


def with_slugs_joined(drawing: CutDrawing, cutter: Cutter) -> SlugsJoined:
    """The drawing with the open lines of holes and slots joined across the bridges of a cutter that holds slugs.

    Joined are as many lines as a slug has bridges, where each runs on into the next over a gap as long as one takes.
    Anything else is left as it is, so that it is told as lines that do not close. Where on a hole its
    bridges stand is not looked at; on slots see findings_on_bridges.
    """
    slugs = None if cutter.bridges is None else cutter.bridges.slugs
    if slugs is None:
        none = frozen_floats(np.zeros((0, 2)))
        return SlugsJoined(drawing=drawing, slot_gaps_mm=none, slot_middles_mm=none)
    contours = [contour for contour in drawing.contours if contour.closed or contour.layer not in _LAYERS]
    gaps: list[FloatArray] = []
    middles: list[FloatArray] = []
    for layer in _LAYERS:
        lines = [contour for contour in drawing.contours if contour.layer == layer and not contour.closed]
        partners = _partners(lines, gap_mm(cutter, slugs))
        for ring in _rings(lines, partners):
            joined = _joined(ring) if len(ring) == slugs.count else None
            if joined is None:
                contours += ring
                continue
            contours.append(joined)
            if layer == "SLOTS":
                ends = zip(ring, [*ring[1:], ring[0]], strict=True)
                gaps += [(one.points_mm[-1] + other.points_mm[0]) / 2 for one, other in ends]
                middles += [joined.points_mm.mean(axis=0)] * len(ring)
    return SlugsJoined(
        drawing=replace(drawing, contours=tuple(contours)),
        slot_gaps_mm=frozen_floats(np.array(gaps).reshape(-1, 2)),
        slot_middles_mm=frozen_floats(np.array(middles).reshape(-1, 2)),
    )


def findings_on_bridges(slugs: SlugsJoined, disc: Disc) -> list[Finding]:
    """An error, at most one, where a bridge stands on the end of a slot that pushes the star wheel's point.

    Args:
        slugs: From the drawing.
        disc: As it was read.
    """
    projection = disc.movement.projection
    if not len(slugs.slot_gaps_mm) or not disc.projection_count or projection.length_mm is None:
        return []
    # The trailing end is a half circle: its centre lies half a width ahead of the working edge, in the travel.
    ahead_mm = np.array([(0.0, 0.0), (projection.width_mm / 2, 0.0), (projection.length_mm / 2, 0.0)])
    edge_mm, centre_mm, middle_mm = np.moveaxis(disc.placed_mm(ahead_mm), 1, 0)
    tree = shapely.STRtree(np.asarray(shapely.points(middle_mm), dtype=np.object_))
    at = shapely.points(slugs.slot_middles_mm)
    gap, slot = tree.query(at, predicate="dwithin", distance=2 * SHAPE_WITHIN_MM)
    behind = edge_mm[slot] - centre_mm[slot]
    behind_mm = ((slugs.slot_gaps_mm[gap] - centre_mm[slot]) * behind).sum(axis=1) / (projection.width_mm / 2)
    found = np.unique(slot[behind_mm > SHAPE_WITHIN_MM])
    if not len(found):
        return []
    first = int(found[0])
    track, angle_deg = int(disc.track_index[first]) + 1, math.degrees(disc.edge_angle_rad[first])
    return [
        Finding(
            code=Code.OUT_OF_SHAPE,
            level=Level.ERROR,
            message=(
                f"{len(found)} of {disc.projection_count} slots have a bridge on their working edge, the end that "
                f"pushes the star wheel's point; the first is on track {track} at {angle_deg:.3f} degrees"
            ),
            measured=float(len(found)),
            limit=0.0,
            unit="",
            at=Place(
                tracks=(track,), projections=(first,), radius_mm=float(disc.radius_mm[first]), angle_deg=angle_deg
            ),
            remedy="draw the bridges as this cutter's pattern, or choose the side this was drawn for",
        )
    ]


def _ends(lines: list[Contour], long_mm: float) -> tuple[FloatArray, FloatArray]:
    """Shape (2n, 2) each: where every line starts, and where it ends; and where it would go on to over a gap."""
    at = np.array([[complex(*line.points_mm[0]), complex(*line.points_mm[-1])] for line in lines])
    beyond = np.array(
        [
            [
                _beyond(complex(*line.points_mm[1]), complex(*line.points_mm[0]), -float(line.bulge_ratio[0]), long_mm),
                _beyond(complex(*line.points_mm[-2]), complex(*line.points_mm[-1]), _last_bulge(line), long_mm),
            ]
            for line in lines
        ]
    )
    return _plane(at.ravel()), _plane(beyond.ravel())


def _plane(places: NDArray[np.complex128]) -> FloatArray:
    return np.column_stack([places.real, places.imag])


def _last_bulge(line: Contour) -> float:
    return float(line.bulge_ratio[-2])


def _beyond(before: complex, end: complex, bulge: float, long_mm: float) -> complex:
    """Where a piece would come to if it ran on, straight or on its circle, over a chord of a length."""
    chord = (end - before) / abs(end - before)
    half_rad = _half_angle_rad(abs(end - before), bulge, long_mm)
    # DXF reference: bulge = tan(θ/4). The tangent at the end is turned by θ/2 from the chord.
    turn_rad = 2 * math.atan(bulge) + half_rad
    return end + long_mm * chord * complex(math.cos(turn_rad), math.sin(turn_rad))


def _half_angle_rad(chord_mm: float, bulge: float, long_mm: float) -> float:
    """Half the angle of an arc over a chord of long_mm, on the circle of another arc; 0 for a straight piece."""
    if bulge == 0:
        return 0.0
    radius_mm = chord_mm * (1 + bulge**2) / (4 * abs(bulge))
    return math.copysign(math.asin(min(long_mm / (2 * radius_mm), 1.0)), bulge)


def _partners(lines: list[Contour], long_mm: float) -> IntArray:
    """Shape (2n,). For each end of a line the end it goes on at over a gap, −1 for none: those that fit best first."""
    partners = np.full(2 * len(lines), -1, dtype=np.int64)
    usable = [line for line in lines if len(line.points_mm) > 1]
    if len(usable) != len(lines) or not lines:
        return partners
    at_mm, beyond_mm = _ends(lines, long_mm)
    tree = shapely.STRtree(np.asarray(shapely.points(at_mm), dtype=np.object_))
    one, other = tree.query(shapely.points(beyond_mm), predicate="dwithin", distance=BLANK_WITHIN_MM)
    off_mm = np.hypot(*(beyond_mm[one] - at_mm[other]).T)
    back_mm = np.hypot(*(beyond_mm[other] - at_mm[one]).T)
    fits = np.flatnonzero((one < other) & (back_mm <= BLANK_WITHIN_MM))
    for pair in fits[np.argsort(np.maximum(off_mm, back_mm)[fits], kind="stable")].tolist():
        if partners[one[pair]] < 0 and partners[other[pair]] < 0:
            partners[one[pair]], partners[other[pair]] = other[pair], one[pair]
    return partners


def _rings(lines: list[Contour], partners: IntArray) -> Iterator[list[Contour]]:
    """Lines that go on into one another till they come round, all running one way; those that do not, one by one."""
    seen = [False] * len(lines)
    for first in range(len(lines)):
        if seen[first]:
            continue
        ends, start = [2 * first + 1], int(partners[2 * first + 1])
        while start >= 0 and start != 2 * first:
            ends.append(start ^ 1)
            start = int(partners[start ^ 1])
        ring = ends if start == 2 * first else ends[:1]
        for end in ring:
            seen[end // 2] = True
        yield [lines[end // 2] if end % 2 else _reversed(lines[end // 2]) for end in ring]


def _reversed(line: Contour) -> Contour:
    return replace(
        line,
        points_mm=frozen_floats(line.points_mm[::-1]),
        bulge_ratio=frozen_floats([*(-line.bulge_ratio[:-1][::-1]), 0.0]),
    )


def _joined(ring: list[Contour]) -> Contour | None:
    """One closed outline, the gaps filled by pieces that run on; None where a line does not lie on what it joins.

    In a slot the ends of lines are taken out again, so that a piece with a gap in it is one piece, as it was before the
    gap: that is how a slot's shape is known. Holes are held by their lines, and keep them.
    """
    places: list[complex] = []
    half_rad: list[float] = []  # atan(bulge) of the piece that starts at each: a quarter of its angle
    is_end: list[bool] = []
    for line, following in zip(ring, [*ring[1:], ring[0]], strict=True):
        along = [complex(*point) for point in line.points_mm]
        gap = complex(*following.points_mm[0]) - along[-1]
        angle_rad = _half_angle_rad(abs(along[-1] - along[-2]), _last_bulge(line), abs(gap))
        places += along
        half_rad += [*np.arctan(line.bulge_ratio[:-1]).tolist(), angle_rad / 2]
        is_end += [True, *[False] * (len(along) - 2), True]
    if ring[0].layer == "SLOTS":
        merged = _without_ends(places, half_rad, is_end)
        if merged is None:
            return None
        places, half_rad = merged
    return Contour(
        layer=ring[0].layer,
        points_mm=frozen_floats(np.array([(place.real, place.imag) for place in places])),
        bulge_ratio=frozen_floats(np.tan(half_rad)),
        closed=True,
    )


def _without_ends(
    places: list[complex], half_rad: list[float], is_end: list[bool]
) -> tuple[list[complex], list[float]] | None:
    """An outline without some of its vertices; None where one lies off the piece that takes its place."""
    corners = [place for place in range(len(places)) if not is_end[place]]
    if not corners:
        return None
    whole_rad = []
    for corner, after in zip(corners, [*corners[1:], corners[0] + len(places)], strict=True):
        around = [step % len(places) for step in range(corner, after)]
        total_rad = sum(half_rad[step] for step in around)
        start, end = places[corner], places[after % len(places)]
        if any(_off_piece_mm(places[step], start, end, total_rad) > SHAPE_WITHIN_MM for step in around[1:]):
            return None
        whole_rad.append(total_rad)
    return [places[corner] for corner in corners], whole_rad


def _off_piece_mm(place: complex, start: complex, end: complex, half_rad: float) -> float:
    """How far a place lies from the line or circle of a piece."""
    chord = end - start
    if half_rad == 0 or chord == 0:
        return abs(((place - start) * chord.conjugate()).imag) / abs(chord) if chord else abs(place - start)
    bulge = math.tan(half_rad)
    centre = (start + end) / 2 + 1j * chord * (1 - bulge**2) / (4 * bulge)
    return abs(abs(place - centre) - abs(start - centre))
