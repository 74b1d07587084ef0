"""How far off its place a projection may be cut, and what that is in time.

General tolerances go by a nominal size; here that is the radius of a track, the size from which a
projection's place is measured. Tables: ISO 9013:2017 thermal cutting, limit deviations for nominal
dimensions, tolerance classes 1 and 2; ISO 2768-1:1989 linear dimensions, classes f, m, c and v. Both as
shop and handbook copies print them; the standards themselves were not read.

A point at radius r passes 2πr in a turn of T, so an error e along the track is e·T/(2πr) in time;
an angle error is the same share of a turn on every track, (angle/360)·T. Derived here. 0.1 mm at
a 60 s turn is 24 ms at 40 mm and 5 ms at 190 mm; 0.05° is 8 ms.

Depth and flatness move no release: axle and tooth stand still, so the tooth is let go at one angle β_r
of the star wheel, and a face of any depth holds the tip at sin β = x/R (layout.mechanics.star_wheel). The
release lies at x = R·sin β_r, whatever the depth. What depth does move is where the tip is met and
where it is let go, so it takes from the margin by which the release lies between the two. A sheet out of
flat also leans a face over; how much depends on the length of its waves, which nobody states, so it
is not counted.
"""

import math
from bisect import bisect_left, bisect_right
from dataclasses import dataclass
from typing import Literal

from layout.documents.cutter import Cutter
from layout.documents.making import ToleranceClass
from layout.documents.movement import Movement, StarWheel
from layout.mechanics.star_wheel import contact_mm, depth_band_mm

PlacedBy = ToleranceClass | Literal["position_tolerance_mm"]

# ms; which of two sounds came first is heard from about 20 ms on (Hirsh, JASA 31, 1959, p. 759).
ORDER_HEARD_MS = 20.0

# ISO 9013: mm. Nominal sizes from one bound up to, but not including, the next; the sheet's thickness up to and
# including its own. Laser cutting is in its scope from 0.5 to 32 mm of thickness; the rows above 3.15 mm are left out,
# since no disc is that thick.
_ISO_9013_SIZES_MM = (3.0, 10.0, 35.0, 125.0, 315.0, 1000.0)
_ISO_9013_FROM_MM = 0.5
_ISO_9013_THICK_MM = (1.0, 3.15)
_ISO_9013_MM: dict[str, tuple[tuple[float, ...], ...]] = {
    "iso-9013-1": ((0.075, 0.1, 0.1, 0.2, 0.2, 0.3), (0.1, 0.15, 0.2, 0.25, 0.25, 0.35)),
    "iso-9013-2": ((0.5, 0.6, 0.6, 0.7, 0.7, 0.8), (0.6, 0.6, 0.7, 0.7, 0.8, 0.9)),
}

# ISO 2768-1: mm. Nominal sizes above one bound, up to and including the next; the first from 0.5 mm on. Class v
# has no value for the first.
_ISO_2768_SIZES_MM = (3.0, 6.0, 30.0, 120.0, 400.0, 1000.0)
_ISO_2768_FROM_MM = 0.5
_ISO_2768_MM: dict[str, tuple[float | None, ...]] = {
    "iso-2768-f": (0.05, 0.05, 0.1, 0.15, 0.2, 0.3),
    "iso-2768-m": (0.1, 0.1, 0.2, 0.3, 0.5, 0.8),
    "iso-2768-c": (0.2, 0.3, 0.5, 0.8, 1.2, 2.0),
    "iso-2768-v": (None, 0.5, 1.0, 1.5, 2.5, 4.0),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitDeviation:
    """What a tolerance class allows a size to be off.

    Attributes:
        deviation_mm: Either way; None outside the scope of the class.
        outside: Why there is none, in words; None where there is one.
    """

    deviation_mm: float | None
    outside: str | None = None


def limit_deviation_mm(tolerance_class: ToleranceClass, nominal_mm: float, thickness_mm: float) -> LimitDeviation:
    """The limit deviation of a nominal size.

    Args:
        tolerance_class: The class.
        nominal_mm: The size.
        thickness_mm: Of the sheet; ISO 2768 does not ask for it.
    """
    if tolerance_class in _ISO_9013_MM:
        return _of_thermal_cut(_ISO_9013_MM[tolerance_class], nominal_mm, thickness_mm)
    bounds = _ISO_2768_SIZES_MM
    if not _ISO_2768_FROM_MM <= nominal_mm <= bounds[-1]:
        return _outside(f"ISO 2768-1 is held here for sizes from 0.5 to 1000 mm, not for {nominal_mm:g} mm")
    value_mm = _ISO_2768_MM[tolerance_class][bisect_left(bounds, nominal_mm)]
    if value_mm is None:
        return _outside(f"ISO 2768-1 gives class v no value for {nominal_mm:g} mm")
    return LimitDeviation(deviation_mm=value_mm)


def _of_thermal_cut(table: tuple[tuple[float, ...], ...], nominal_mm: float, thickness_mm: float) -> LimitDeviation:
    if thickness_mm < _ISO_9013_FROM_MM:
        return _outside(f"ISO 9013 covers laser cuts in sheet from 0.5 mm, not of {thickness_mm:g} mm")
    if thickness_mm > _ISO_9013_THICK_MM[-1]:
        return _outside(f"ISO 9013 is held here for sheet up to 3.15 mm, not of {thickness_mm:g} mm")
    if not 0 < nominal_mm < _ISO_9013_SIZES_MM[-1]:
        return _outside(f"ISO 9013 is held here for sizes below 1000 mm, not for {nominal_mm:g} mm")
    row = table[bisect_left(_ISO_9013_THICK_MM, thickness_mm)]
    return LimitDeviation(deviation_mm=row[bisect_right(_ISO_9013_SIZES_MM, nominal_mm)])


def _outside(why: str) -> LimitDeviation:
    return LimitDeviation(deviation_mm=None, outside=why)


@dataclass(frozen=True, slots=True, kw_only=True)
class PlaceError:
    """How far off a track's projections may be cut, and what each part of it is in time, either way.

    Attributes:
        position_mm: Along the track.
        placed_by: What states it: the cutter's tolerance class, or its position_tolerance_mm.
        class_outside: Why the cutter's class gives no value here; None where it does, or where none is stated.
        position_ms: e·T/(2πr) of it.
        angle_ms: T/360 of every degree of the cutter's angle tolerance; the same on every track.
        play_ms: The same as position_ms of half the play of the centre hole, by which the disc may lie
            off its centre: it comes and goes once a turn. None where the movement states no play.
        depth_ms: Of depth and flatness: 0.0 for a star wheel known by its sizes, None for measured
            arcs, which do not say.
        engagement_mm: How far the release stays from where the tip is met and let go, at the worst depth
            of the band: below zero where a tooth may be left hanging. None for measured arcs, and where
            the depth is impossible.
    """

    position_mm: float
    placed_by: PlacedBy
    class_outside: str | None
    position_ms: float
    angle_ms: float
    play_ms: float | None
    depth_ms: float | None
    engagement_mm: float | None

    @property
    def cut_ms(self) -> float:
        """Position and angle together: what may differ from one projection to the next."""
        return self.position_ms + self.angle_ms

    @property
    def together_ms(self) -> float:
        """All that is stated, added up: the worst case."""
        return self.cut_ms + (self.play_ms or 0.0)

    @property
    def root_square_ms(self) -> float:
        """The root of the sum of their squares: what is likely, where they do not depend on each other."""
        return math.hypot(self.position_ms, self.angle_ms, self.play_ms or 0.0)


def place_error(movement: Movement, cutter: Cutter, track_index: int) -> PlaceError:
    """How far off a track's projections may be, by what cutter and movement state.

    Args:
        movement: Its turn, its track's radius, its sheet and its centre hole's play.
        cutter: Its tolerance class, by the track's radius, where it states one that covers it; else its
            position_tolerance_mm; and its angle tolerance.
        track_index: Place in movement.tracks, from 0.
    """
    radius_mm, turn_ms = movement.tracks[track_index].radius_mm, movement.revolution_s * 1000
    ms_per_mm = turn_ms / (2 * math.pi * radius_mm)
    stated = cutter.tolerance_class
    placed_by: PlacedBy = "position_tolerance_mm"
    position_mm, outside = cutter.position_tolerance_mm, None
    if stated is not None:
        by_class = limit_deviation_mm(stated, radius_mm, movement.disc.thickness_mm)
        outside = by_class.outside
        if by_class.deviation_mm is not None:
            position_mm, placed_by = by_class.deviation_mm, stated
    play_mm = movement.disc.centre_hole_play_mm
    return PlaceError(
        position_mm=position_mm,
        placed_by=placed_by,
        class_outside=outside,
        position_ms=position_mm * ms_per_mm,
        angle_ms=cutter.angle_tolerance_deg / 360 * turn_ms,
        play_ms=None if play_mm is None else play_mm / 2 * ms_per_mm,
        depth_ms=None if _is_measured(movement, track_index) else 0.0,
        engagement_mm=_engagement_mm(movement, track_index),
    )


def _is_measured(movement: Movement, track_index: int) -> bool:
    measured_here = movement.tracks[track_index].release_arc_mm is not None
    return measured_here or not isinstance(movement.star_wheel, StarWheel)


def _engagement_mm(movement: Movement, track_index: int) -> float | None:
    wheel = movement.star_wheel
    if _is_measured(movement, track_index) or not isinstance(wheel, StarWheel):
        return None
    _, release_mm = movement.arcs_mm(track_index)
    try:
        # The deeper the face, the later it meets the next tip and the later it lets it go.
        (_, let_go_mm), (met_mm, _) = (contact_mm(wheel, depth_mm) for depth_mm in depth_band_mm(movement))
    except ValueError:
        return None
    return min(let_go_mm - release_mm, release_mm - met_mm)
