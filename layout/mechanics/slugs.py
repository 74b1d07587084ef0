"""Where bridges stand that hold the slug of a hole or a slot, and which slugs are held.

A bridge leaves a stub on the edge of the finished opening, so none stands where something works on that edge:

* a slot of a projection: anywhere but on the arc of its trailing end, which pushes the star wheel's point;
* a drive or stop hole, and one that is longer along the travel: on the sides that face the disc's centre and rim,
  since what drives or stops the disc pushes along the travel;
* a location slot, and a drive or stop slot that is longer across the travel: on its round ends, since a pin fits
  between the straight sides;
* the centre hole and location holes: a spindle or pin fits all round, so bridges stand evenly, and a check says so.

(What works on which side: derived here from what each is for.)
"""

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from layout.documents.cutter import Cutter
from layout.documents.feature import Feature
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.bridging import MOST_SHARE, gap_mm, gaps_in
from layout.mechanics.obround import obround_mm
from layout.mechanics.offset import moved_outlines
from layout.mechanics.projection import Pattern
from layout.mechanics.turning import FULL_TURN_RAD

_FACING_RAD = math.pi / 4  # a side faces the centre or the rim as long as it does so more than it faces the travel
_WHOLE: tuple[tuple[float, float], ...] = ((0.0, FULL_TURN_RAD),)
_OUT_AND_IN = ((-_FACING_RAD, _FACING_RAD), (math.pi - _FACING_RAD, math.pi + _FACING_RAD))

Where = Literal["slot", "across", "along", "ends", "anywhere"]


@dataclass(frozen=True, slots=True, kw_only=True)
class OutlineGap:
    """A stretch of an outline that is not cut: which piece, and from which part of it to which, 0 to 1."""

    piece: int
    from_ratio: float
    to_ratio: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class HeldOpening:
    """An opening, or a row or all slots of them, whose slug is to be held.

    Attributes:
        what: What it is, in words.
        where: Where its bridges may stand.
        size_mm: Length and width as finished.
        slug_mm: The longest side of its slug.
        points_mm: Shape (k, 2). Its outline as it is drawn, in its own frame.
        bulge_ratio: Shape (k,). DXF bulges.
        gaps: Where its bridges stand; None where there is no room for them.
    """

    what: str
    where: Where
    size_mm: tuple[float, float]
    slug_mm: float
    points_mm: FloatArray
    bulge_ratio: FloatArray
    gaps: tuple[OutlineGap, ...] | None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Side:
    """A part of a piece of an outline where a bridge may stand."""

    piece: int
    from_ratio: float = 0.0
    to_ratio: float = 1.0


def slug_is_held(cutter: Cutter, length_mm: float, width_mm: float) -> bool:
    """Whether the slug of a closed opening of this finished size is to be held: the opening less a kerf all round."""
    slugs = None if cutter.bridges is None else cutter.bridges.slugs
    if slugs is None:
        return False
    shorter_mm, longer_mm = sorted((length_mm - 2 * cutter.kerf_mm, width_mm - 2 * cutter.kerf_mm))
    return shorter_mm > 0 and longer_mm >= slugs.least_slug_mm


def where_on_feature(feature: Feature) -> Where:
    """Where bridges may stand on a hole or slot of the blank."""
    if feature.length_mm == feature.width_mm:
        return "anywhere" if feature.purpose == "location" else "across"
    return "ends" if feature.purpose == "location" or feature.length_mm < feature.width_mm else "along"


def gaps_on_outline(
    points_mm: FloatArray, bulges: FloatArray, where: Where, cutter: Cutter
) -> tuple[OutlineGap, ...] | None:
    """Gaps for the slug's bridges on a slot of a projection, or on an obround of the blank.

    They are shared out over the sides by their lengths, even on each, and each lies within one piece, with at
    least half its length of cut line on either side of it.

    Args:
        points_mm: Shape (k, 2). The outline as it is drawn, of obround_mm's or of a slot pattern's vertices.
        bulges: Shape (k,).
        where: "slot" for one of a projection; else "along" or "ends".
        cutter: Its bridges.slugs must be stated.

    Returns:
        In the order of the outline; None where there is no room.
    """
    slugs = None if cutter.bridges is None else cutter.bridges.slugs
    if slugs is None:
        return None
    piece_mm, radius_mm = _lengths_mm(points_mm, bulges)
    long_mm = gap_mm(cutter, slugs)
    stretches = _stretches(where, len(points_mm))
    lengths_mm = [sum(piece_mm[s.piece] * (s.to_ratio - s.from_ratio) for s in sides) for sides in stretches]
    shared = gaps_in([(0.0, length) for length in lengths_mm], count=slugs.count, width_rad=long_mm)
    if shared is None:
        return None
    gaps = []
    for sides, on_stretch in zip(stretches, shared, strict=True):
        for gap in on_stretch:
            placed = _within_a_piece((gap.from_rad + gap.to_rad) / 2, sides, piece_mm, radius_mm, long_mm)
            if placed is None:
                return None
            gaps.append(placed)
    gaps.sort(key=lambda gap: (gap.piece, gap.from_ratio))
    return None if _overlap(gaps) else tuple(gaps)


def circle_with_gaps(
    radius_mm: float, where: Where, cutter: Cutter
) -> tuple[FloatArray, FloatArray, tuple[OutlineGap, ...]] | None:
    """A circle round (0, 0) as an outline of arcs, x outwards along the disc's radius, and the gaps in it.

    Args:
        radius_mm: As it is drawn.
        where: "anywhere" or "across".
        cutter: Its bridges.slugs must be stated.

    Returns:
        Points, shape (k, 2), bulges, shape (k,), and gaps in their order; None where there is no room.
    """
    slugs = None if cutter.bridges is None else cutter.bridges.slugs
    if slugs is None or gap_mm(cutter, slugs) >= 2 * radius_mm:
        return None
    width_rad = 2 * math.asin(gap_mm(cutter, slugs) / (2 * radius_mm))
    sectors = list(_WHOLE if where == "anywhere" else _OUT_AND_IN)
    shared = gaps_in(sectors, count=slugs.count, width_rad=width_rad)
    if shared is None:
        return None
    middles = sorted((gap.from_rad + gap.to_rad) / 2 for on_sector in shared for gap in on_sector)
    # A vertex between every two gaps; round a single one half a circle lies before it and half behind.
    after = [*middles[1:], middles[0] + FULL_TURN_RAD]
    ends = [(one + other) / 2 for one, other in zip(middles, after, strict=True)]
    if len(middles) == 1:
        ends = [middles[0] - math.pi / 2, middles[0] + math.pi / 2]
    turns = [(later - end) % FULL_TURN_RAD for end, later in zip(ends, [*ends[1:], ends[0]], strict=True)]
    gaps = []
    for piece, (end, turn) in enumerate(zip(ends, turns, strict=True)):
        for middle in middles:
            at = (middle - end) % FULL_TURN_RAD
            if at < turn:
                half = width_rad / 2
                gaps.append(OutlineGap(piece=piece, from_ratio=(at - half) / turn, to_ratio=(at + half) / turn))
    points_mm = radius_mm * np.column_stack([np.cos(ends), np.sin(ends)])
    return frozen_floats(points_mm), frozen_floats([math.tan(turn / 4) for turn in turns]), tuple(gaps)


def held_openings(pattern: Pattern, movement: Movement, cutter: Cutter) -> tuple[HeldOpening, ...]:
    """What of a disc is to be held, each kind once: the slots, the rows of features, the centre hole.

    Empty where the cutter holds no slugs, or none of these is large enough.
    """
    blank, projection = movement.disc, movement.projection
    found: list[tuple[str, Where, float, float]] = []
    if pattern.cut is not None and pattern.making == "slot":
        found.append(("slots", "slot", projection.length_mm or 0.0, projection.width_mm))
    for feature in blank.features:
        if feature.shape != "notch":
            what = f"{feature.purpose} {feature.shape}{'s' if feature.count > 1 else ''}"
            found.append((what, where_on_feature(feature), feature.length_mm, feature.width_mm))
    found.append(("centre hole", "anywhere", blank.centre_hole_mm, blank.centre_hole_mm))
    openings = []
    for what, where, length_mm, width_mm in dict.fromkeys(found):
        if slug_is_held(cutter, length_mm, width_mm):
            points_mm, bulges, gaps = _as_drawn(where, (length_mm, width_mm), pattern, cutter)
            openings.append(
                HeldOpening(
                    what=what,
                    where=where,
                    size_mm=(length_mm, width_mm),
                    slug_mm=max(length_mm, width_mm) - 2 * cutter.kerf_mm,
                    points_mm=points_mm,
                    bulge_ratio=bulges,
                    gaps=gaps,
                )
            )
    return tuple(openings)


def _as_drawn(
    where: Where, size_mm: tuple[float, float], pattern: Pattern, cutter: Cutter
) -> tuple[FloatArray, FloatArray, tuple[OutlineGap, ...] | None]:
    """The outline of one opening as it is drawn, and its gaps; no outline of a circle whose bridges have no room."""
    smaller_mm = cutter.kerf_mm if cutter.kerf_compensated else 0.0  # both ways: half a kerf all round
    if where in ("anywhere", "across"):
        circle = circle_with_gaps((size_mm[1] - smaller_mm) / 2, where, cutter)
        return circle or (np.zeros((0, 2)), np.zeros(0), None)
    if where == "slot" and pattern.cut is not None:
        points_mm, bulges = pattern.cut.points_mm, pattern.cut.bulges
        moved = moved_outlines(points_mm[None], bulges, -smaller_mm / 2) if smaller_mm else None
        points_mm, bulges = (points_mm, bulges) if moved is None else (moved[0][0], moved[1])
    else:
        points_mm, bulges = obround_mm(size_mm[0] - smaller_mm, size_mm[1] - smaller_mm)
    return points_mm, bulges, gaps_on_outline(points_mm, bulges, where, cutter)


def place_on(points_mm: FloatArray, bulges: FloatArray, piece: int, share: float) -> complex:
    """A place on a piece of an outline, x + iy, by its share of the piece's length.

    DXF reference: bulge b = tan(θ/4). The centre lies (1 − b²)/(4b) chords left of the chord's middle.
    """
    start, end = complex(*points_mm[piece]), complex(*points_mm[(piece + 1) % len(points_mm)])
    bulge = float(bulges[piece])
    if bulge == 0:
        return start + (end - start) * share
    centre = (start + end) / 2 + 1j * (end - start) * (1 - bulge**2) / (4 * bulge)
    turn_rad = 4 * math.atan(bulge) * share
    return centre + (start - centre) * complex(math.cos(turn_rad), math.sin(turn_rad))


def begun_after(gap: OutlineGap, points_mm: FloatArray, bulges: FloatArray) -> tuple[FloatArray, FloatArray]:
    """The same closed outline with a new first vertex, where a gap ends and the beam begins.

    Returns:
        Points, shape (k + 1, 2), and bulges, shape (k + 1,).
    """
    first = place_on(points_mm, bulges, gap.piece, gap.to_ratio)
    others_mm, around = np.roll(points_mm, -gap.piece - 1, axis=0), np.roll(bulges, -gap.piece - 1)
    half_rad = math.atan(float(bulges[gap.piece]))
    begun = [math.tan(half_rad * (1 - gap.to_ratio)), *around[:-1], math.tan(half_rad * gap.to_ratio)]
    return frozen_floats(np.array([(first.real, first.imag), *others_mm.tolist()])), frozen_floats(begun)


def _stretches(where: Where, corner_count: int) -> list[list[_Side]]:
    """Where bridges may stand: stretches of an outline, each of sides that follow one another."""
    if where == "slot":  # begins with the leading end; its trailing end lies opposite
        if corner_count == 2:  # noqa: PLR2004 - as long as wide: two half circles
            return [[_Side(piece=0)]]
        return [[_Side(piece=3), _Side(piece=0), _Side(piece=1)]]
    if where == "along":  # obround_mm: from the end anticlockwise; longer along the travel, 3 is the outer side
        return [[_Side(piece=3)], [_Side(piece=1)]]
    return [[_Side(piece=end, from_ratio=0.25, to_ratio=0.75)] for end in (0, 2)]


def _lengths_mm(points_mm: FloatArray, bulges: FloatArray) -> tuple[list[float], list[float]]:
    """Of each piece its length, and its radius, 0 where it is straight (DXF reference: bulge = tan(θ/4))."""
    chord_mm = np.hypot(*(np.roll(points_mm, -1, axis=0) - points_mm).T)
    bulge = np.abs(bulges)
    radius_mm = np.divide(chord_mm * (1 + bulge**2), 4 * bulge, out=np.zeros(len(bulge)), where=bulge > 0)
    return np.where(bulge > 0, 4 * np.arctan(bulge) * radius_mm, chord_mm).tolist(), radius_mm.tolist()


def _within_a_piece(
    at_mm: float, sides: list[_Side], piece_mm: list[float], radius_mm: list[float], long_mm: float
) -> OutlineGap | None:
    """The gap round a place of a stretch, moved so that it lies within one piece; None where that is too short."""
    side, along_mm = sides[-1], at_mm
    for side in sides:
        side_mm = piece_mm[side.piece] * (side.to_ratio - side.from_ratio)
        if along_mm <= side_mm or side is sides[-1]:
            break
        along_mm -= side_mm
    radius = radius_mm[side.piece]
    if radius and long_mm >= 2 * radius:
        return None
    on_line_mm = 2 * radius * math.asin(long_mm / (2 * radius)) if radius else long_mm
    if on_line_mm > MOST_SHARE * side_mm:
        return None
    along_mm = min(max(along_mm, on_line_mm), side_mm - on_line_mm) + piece_mm[side.piece] * side.from_ratio
    return OutlineGap(
        piece=side.piece,
        from_ratio=(along_mm - on_line_mm / 2) / piece_mm[side.piece],
        to_ratio=(along_mm + on_line_mm / 2) / piece_mm[side.piece],
    )


def _overlap(gaps: list[OutlineGap]) -> bool:
    """Whether less than half a gap of cut line is left between two of them."""
    return any(
        one.piece == other.piece and other.from_ratio - one.to_ratio < (one.to_ratio - one.from_ratio) / 2
        for one, other in pairwise(gaps)
    )
