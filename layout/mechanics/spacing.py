"""How near two projections may come: on one track, and on two neighbouring ones.

On one track three things keep working edges apart: the star wheel must finish its step, the
damper must have left the tooth quiet, and metal must remain between the openings. On two tracks
only the metal counts. All are angles on the disc, so they hold at any speed.
"""

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
import shapely
from numpy.typing import NDArray

from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.halving import HALVINGS, least_enough
from layout.mechanics.projection import Pattern
from layout.mechanics.turning import FULL_TURN_RAD, Turning

MOST_TRACKS_APART = 6  # tracks; openings that reach past six neighbours are a movement no web can be kept on
_BESIDE = 1.05  # times the angle guessed at first is the second guess: any other near it finds the same end
_RING_GRAIN_MM = 1e-6  # so much farther apart than a web two rings must be before rounding does not matter
_SCAN_STEPS = 400  # places tried over the stretch where two openings can pass each other

Reason = Literal["wheel-still-stepping", "damper-not-recovered", "web"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Spacing:
    """Least angles between working edges.

    Attributes:
        wheel_rad: Shape (tracks,). The star wheel's step: arc/(r·cos δ).
        damper_rad: Shape (tracks,). The damper's recovery at the fastest turn; 0 where undamped.
        web_rad: Shape (tracks,). Where the openings' web reaches the cutter's least.
        between: Stretches of angle in which the openings of two tracks come too near; a pair may have
            several. Tracks more than MOST_TRACKS_APART from each other are not looked at.
    """

    wheel_rad: FloatArray
    damper_rad: FloatArray
    web_rad: FloatArray
    between: tuple["TooNear", ...]

    @property
    def least_rad(self) -> FloatArray:
        """Shape (tracks,). The least angle between two working edges of one track."""
        return np.maximum(np.maximum(self.wheel_rad, self.damper_rad), self.web_rad)

    def reason(self, track_index: int, apart_rad: float) -> Reason:
        """What forbids two working edges of a track this far apart; the wheel first, then the damper."""
        if apart_rad < self.wheel_rad[track_index]:
            return "wheel-still-stepping"
        return "damper-not-recovered" if apart_rad < self.damper_rad[track_index] else "web"


@dataclass(frozen=True, slots=True, kw_only=True)
class TooNear:
    """Two tracks, and a stretch of angles from the inner's working edge to the outer's where the web is too thin."""

    inner_index: int
    outer_index: int
    from_rad: float
    to_rad: float


def spacing_of(movement: Movement, turning: Turning, pattern: Pattern, min_web_mm: float) -> Spacing:
    """The spacing rules of a movement whose projections have this pattern.

    Args:
        movement: Its damper recovery is judged at its fastest turn.
        turning: The movement's turning.
        pattern: The projections' pattern.
        min_web_mm: Least metal between two openings.
    """
    recovery_rad = FULL_TURN_RAD * movement.damper_recovery_s / movement.fastest_revolution_s
    damped = movement.damped_tracks
    return Spacing(
        wheel_rad=frozen_floats(turning.engagement_arc_mm / (turning.radius_mm * np.cos(turning.row_rad))),
        damper_rad=frozen_floats(recovery_rad if track.track in damped else 0.0 for track in movement.tracks),
        web_rad=frozen_floats(_web_angles_rad(turning, pattern, min_web_mm)),
        between=_too_near_pairs(turning, pattern, min_web_mm),
    )


def core_geometries(points_mm: FloatArray) -> NDArray[np.object_]:
    """Shapely polygons (three points or more) or lines (two points) from shape (n, k, 2)."""
    if points_mm.shape[1] > 2:  # noqa: PLR2004 - two points make a line
        # All rings from one run of numbers, each closed by its first corner: half the time of shapely.polygons.
        closed_mm = np.concatenate([points_mm, points_mm[:, :1]], axis=1)
        places = np.arange(len(closed_mm) + 1)
        rings = closed_mm.reshape(-1, 2), (places * closed_mm.shape[1], places)
        return np.asarray(shapely.from_ragged_array(shapely.GeometryType.POLYGON, *rings), dtype=np.object_)
    return np.asarray(shapely.linestrings(points_mm), dtype=np.object_)


def webs_mm(turning: Turning, pattern: Pattern, first: FloatArray, second: FloatArray) -> FloatArray:
    """Metal between pairs of openings; negative or zero where they overlap.

    Args:
        turning: For the direction of travel.
        pattern: The openings' pattern.
        first: Shape (n, 2). Radius and working-edge angle of one opening of each pair; (1, 2) where all have the same.
        second: Shape (n, 2). The same of the other.
    """
    one, two = (_cores(turning, pattern, each[:, 0], each[:, 1]) for each in (first, second))
    return _between_mm(pattern, one, two)


def _cores(turning: Turning, pattern: Pattern, radius_mm: FloatArray, angle_rad: FloatArray) -> NDArray[np.object_]:
    """Shape (n,). The lines round the openings' cores at radii and working-edge angles.

    All cores have one shape, so none lies within another: their lines are as far apart as they are, and sooner told.
    """
    placed = radius_mm, angle_rad, turning.direction
    points_mm = on_disc_mm(pattern.core_points_mm, *placed, pattern.strike_u_mm)
    if points_mm.shape[1] > 2:  # noqa: PLR2004 - two points make a line
        points_mm = np.concatenate([points_mm, points_mm[:, :1]], axis=1)
    return np.asarray(shapely.linestrings(points_mm), dtype=np.object_)


def _between_mm(pattern: Pattern, one: NDArray[np.object_], two: NDArray[np.object_]) -> FloatArray:
    return np.asarray(shapely.distance(one, two)) - 2 * pattern.core_round_mm


def _web_angles_rad(turning: Turning, pattern: Pattern, min_web_mm: float) -> FloatArray:
    radius_mm = turning.radius_mm
    here = _cores(turning, pattern, radius_mm, np.zeros(len(radius_mm)))

    def spare_mm(tracks: IntArray, angle_rad: FloatArray) -> FloatArray:
        there = _cores(turning, pattern, radius_mm[tracks], angle_rad)
        return _between_mm(pattern, here[tracks], there) - min_web_mm

    chord_mm = np.minimum(_reach_mm(pattern, 0) + min_web_mm, 2 * radius_mm)
    chord_rad = 2 * np.arcsin(chord_mm / (2 * radius_mm))
    return least_enough(
        spare_mm, np.full(len(radius_mm), math.pi), (chord_rad, np.minimum(_BESIDE * chord_rad, math.pi))
    )


def _too_near_pairs(turning: Turning, pattern: Pattern, min_web_mm: float) -> tuple[TooNear, ...]:
    pairs = _near_pairs(turning, pattern, min_web_mm)
    along_mm = _reach_mm(pattern, 0) + min_web_mm
    ends: list[tuple[int, int, float, float]] = []
    for inner, outer in pairs:
        reach_rad = min(2 * along_mm / float(turning.radius_mm[inner]), math.pi)
        scan = np.linspace(-reach_rad, reach_rad, _SCAN_STEPS)
        here = np.array([[turning.radius_mm[inner], 0.0]])
        webs = webs_mm(turning, pattern, here, np.insert(scan[:, None], 0, turning.radius_mm[outer], axis=1))
        bad = np.flatnonzero(webs < min_web_mm)
        # Corners may pass too near while the flat sides between them do not: each stretch counts for itself.
        for run in np.split(bad, np.flatnonzero(np.diff(bad) > 1) + 1) if len(bad) else []:
            ends.append((inner, outer, scan[max(run[0] - 1, 0)], scan[run[0]]))
            ends.append((inner, outer, scan[min(run[-1] + 1, len(scan) - 1)], scan[run[-1]]))
    edges_rad = _edges_rad(turning, pattern, min_web_mm, ends)
    return tuple(
        TooNear(inner_index=ends[place][0], outer_index=ends[place][1], from_rad=low, to_rad=high)
        for place, (low, high) in zip(
            range(0, len(ends), 2), zip(edges_rad[::2], edges_rad[1::2], strict=True), strict=True
        )
    )


def _near_pairs(turning: Turning, pattern: Pattern, min_web_mm: float) -> list[tuple[int, int]]:
    """Tracks between whose openings the web may become too thin at some angle: the rings that hold them are so near."""
    inner_rim_mm, outer_rim_mm = _rims_mm(turning, pattern)
    pairs = []
    for inner, rim_mm in enumerate(outer_rim_mm):
        for outer in range(inner + 1, min(inner + MOST_TRACKS_APART + 1, len(outer_rim_mm))):
            if inner_rim_mm[outer] - rim_mm >= min_web_mm + _RING_GRAIN_MM:
                break
            pairs.append((inner, outer))
    return pairs


def _rims_mm(turning: Turning, pattern: Pattern) -> tuple[FloatArray, FloatArray]:
    """Shape (tracks,) each. From the centre to the nearest and to the farthest point of a track's openings."""
    nowhere = np.zeros(len(turning.radius_mm))
    cores = _cores(turning, pattern, turning.radius_mm, nowhere)
    corners_mm = shapely.get_coordinates(cores).reshape(len(cores), -1, 2)
    nearest_mm = shapely.distance(cores, shapely.Point(0.0, 0.0)) - pattern.core_round_mm
    farthest_mm = np.hypot(corners_mm[..., 0], corners_mm[..., 1]).max(axis=1, initial=0.0) + pattern.core_round_mm
    return np.asarray(nearest_mm), farthest_mm


def _reach_mm(pattern: Pattern, axis: int) -> float:
    """Size of an opening along the travel (axis 0) or across it (axis 1)."""
    return float(np.ptp(pattern.core_points_mm[:, axis])) + 2 * pattern.core_round_mm


def _edges_rad(
    turning: Turning, pattern: Pattern, min_web_mm: float, ends: list[tuple[int, int, float, float]]
) -> list[float]:
    """Where the web reaches its least, between a good and a bad angle of each end; the good side of it."""
    if not ends:
        return []
    inner_mm, outer_mm = turning.radius_mm[np.array([end[:2] for end in ends]).T]
    here = _cores(turning, pattern, inner_mm, np.zeros(len(ends)))
    good_rad, bad_rad = np.array([end[2] for end in ends]), np.array([end[3] for end in ends])
    for _ in range(HALVINGS):
        middle = (good_rad + bad_rad) / 2
        enough = _between_mm(pattern, here, _cores(turning, pattern, outer_mm, middle)) >= min_web_mm
        good_rad, bad_rad = np.where(enough, middle, good_rad), np.where(enough, bad_rad, middle)
    return [float(angle) for angle in good_rad]
