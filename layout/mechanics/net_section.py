"""The net section: how much metal the openings leave along a ray from the centre, and along a ring about it.

A disc is weakest where most of it is cut away along one line.
"""

import math
from dataclasses import dataclass

import numpy as np
import shapely

from layout.documents.feature import Feature
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.blank import feature_core_mm
from layout.mechanics.cut_away import CutAway, rays_of, rings_of
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.most_covered import most_covered
from layout.mechanics.polar import Outlines, outlines_of
from layout.mechanics.projection import HALF_CIRCLE_BULGE, Pattern
from layout.mechanics.turning import FULL_TURN_RAD, Turning

LINE_GRAIN_MM = 1e-3  # mm; a micrometre, a fiftieth of what a fine cutter holds
RING_GRAIN_RAD = 1e-5  # rad; the same at a radius of 100 mm


@dataclass(frozen=True, slots=True, kw_only=True)
class MetalLeft:
    """The least metal left in the band of the tracks.

    Attributes:
        from_mm: Where the band begins: the innermost edge that an opening on the innermost track has.
        to_mm: Where it ends: the outermost edge of one on the outermost track. Neither depends on the tracks used.
        line_mm: The least metal left on a ray, over the band.
        line_angle_rad: Where on the disc, in [0, 2π).
        ring_mm: What is left, along it, of the ring that keeps the least share of itself.
        ring_radius_mm: Its radius.
    """

    from_mm: float
    to_mm: float
    line_mm: float
    line_angle_rad: float
    ring_mm: float
    ring_radius_mm: float

    @property
    def line_share(self) -> float:
        """The least metal left on a ray as a share of the band."""
        return self.line_mm / (self.to_mm - self.from_mm)

    @property
    def ring_share(self) -> float:
        """The least share of a ring that is left."""
        return self.ring_mm / (FULL_TURN_RAD * self.ring_radius_mm)


def metal_left(
    pattern: Pattern,
    turning: Turning,
    track_index: IntArray,
    edge_angle_rad: FloatArray,
    features: tuple[Feature, ...] = (),
) -> MetalLeft | None:
    """The least metal the openings leave in the band of the tracks, within LINE_GRAIN_MM and RING_GRAIN_RAD.

    None where there are no openings, or where one reaches over the centre of the disc.

    Args:
        pattern: The openings' pattern; its `opening` is what is counted, round ends included.
        turning: The movement's turning.
        track_index: Shape (n,). Place of each opening's track, from 0.
        edge_angle_rad: Shape (n,). Working-edge angle of each opening.
        features: The blank's holes, slots and notches: what of them lies in the band is missing too.
    """
    if not len(track_index):
        return None
    cut_away = cut_away_of(pattern, turning, track_index, edge_angle_rad, features)
    if cut_away is None:
        return None
    from_mm, to_mm = cut_away.band_mm
    line_mm, line_angle_rad = most_covered(rays_of(cut_away), LINE_GRAIN_MM)
    ring_rad, ring_radius_mm = most_covered(rings_of(cut_away), RING_GRAIN_RAD)
    return MetalLeft(
        from_mm=from_mm,
        to_mm=to_mm,
        line_mm=max(to_mm - from_mm - line_mm, 0.0),
        line_angle_rad=math.fmod(line_angle_rad, FULL_TURN_RAD),
        ring_mm=max(FULL_TURN_RAD - ring_rad, 0.0) * ring_radius_mm,
        ring_radius_mm=ring_radius_mm,
    )


def cut_away_of(
    pattern: Pattern,
    turning: Turning,
    track_index: IntArray,
    edge_angle_rad: FloatArray,
    features: tuple[Feature, ...],
) -> CutAway | None:
    """The openings, track by track, and what of the blank's features lies in the band of all tracks.

    None where one reaches over the centre of the disc. At least one opening is asked for; else as for `metal_left`.
    """
    last = len(turning.radius_mm) - 1
    tracks = np.union1d(track_index, [0, last])
    outlines = _on_tracks(pattern, turning, tracks)
    if outlines is None:
        return None
    by_track = np.argsort(track_index, kind="stable")
    band_mm = float(outlines.reach_mm[0, 0]), float(outlines.reach_mm[-1, 1])
    parts = [outlines]
    which, angles_rad = [np.searchsorted(tracks, track_index[by_track])], [edge_angle_rad[by_track]]
    for feature in features:
        outline = _of_feature(feature, band_mm)
        if outline is not None:
            which.append(np.full(feature.count, sum(len(part.reach_mm) for part in parts)))
            angles_rad.append(np.radians(feature.angles_deg))
            parts.append(outline)
    return CutAway(
        outlines=Outlines.joined(parts),
        outline=np.concatenate(which),
        angle_rad=np.concatenate(angles_rad),
        band_mm=band_mm,
    )


def _on_tracks(pattern: Pattern, turning: Turning, tracks: IntArray) -> Outlines | None:
    """The opening's outline on each track."""
    points_mm = on_disc_mm(
        pattern.opening.points_mm,
        turning.radius_mm[tracks],
        np.zeros(len(tracks)),
        turning.direction,
        pattern.strike_u_mm,
    )
    # An anticlockwise disc turns the frame over, and with it the way every bulge bends.
    return outlines_of(points_mm, pattern.opening.bulges * turning.direction)


def _of_feature(feature: Feature, band_mm: tuple[float, float]) -> Outlines | None:
    """The outline of a feature where it lies at 0 degrees; None where nothing of it lies in the band."""
    half_mm = math.hypot(feature.width_mm, feature.length_mm) / 2
    if feature.radius_mm + half_mm < band_mm[0] or feature.radius_mm - half_mm > band_mm[1]:
        return None
    outline = _alone(feature)
    if outline is None:
        return None
    nearest_mm, farthest_mm = outline.reach_mm[0].tolist()
    return outline if nearest_mm < band_mm[1] and farthest_mm > band_mm[0] else None


def _alone(feature: Feature) -> Outlines | None:
    """A rectangle, or a line grown by a radius."""
    core, round_mm = feature_core_mm(feature, 0.0)
    points_mm = shapely.get_coordinates(core)
    if not round_mm:
        return outlines_of(points_mm[None, :-1], np.zeros(len(points_mm) - 1))
    first, last = points_mm[0], points_mm[-1]
    length_mm = float(np.hypot(*(last - first)))
    along = (last - first) / length_mm if length_mm else np.array([1.0, 0.0])
    across = round_mm * np.array([-along[1], along[0]])
    corners = np.array([first - across, last - across, last + across, first + across])
    return outlines_of(corners[None], np.array([0.0, HALF_CIRCLE_BULGE, 0.0, HALF_CIRCLE_BULGE]))
