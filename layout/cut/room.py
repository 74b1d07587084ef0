"""Where on the disc there is room for marks. Seen from the label side, like the disc itself."""

import math
from dataclasses import dataclass, replace

import numpy as np
import shapely
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.cut.blank import feature_angles_rad, turned_mm
from layout.documents.movement import Feature, Movement
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.spacing import core_geometries
from layout.place.disc import Disc

# mm; common practice: an engraved line is 0.1 to 0.2 mm wide and lies within 0.1 mm of its place
CLEAR_MM = 0.5
_QUARTER_PIECES = 64  # of a circle's quarter: inside the true circle by under 0.02 mm at 200 mm


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rooms:
    """Metal that is free for marks, at least CLEAR_MM from everything it must not touch.

    Attributes:
        seen: Clear of the tracks' band and the keep-out rings.
        hidden: Clear of the tracks' band; a clamp may hide it in the movement.
        between: Clear of openings only.
        tracks_from_mm: Where the tracks' band starts: the innermost opening's nearest point.
        tracks_to_mm: Where it ends: the outermost opening's farthest point.
    """

    seen: BaseGeometry
    hidden: BaseGeometry
    between: BaseGeometry
    tracks_from_mm: float
    tracks_to_mm: float

    def without(self, taken: BaseGeometry) -> "Rooms":
        """The same, clear of something drawn too."""
        around = taken.buffer(CLEAR_MM)
        return replace(
            self,
            seen=self.seen.difference(around),
            hidden=self.hidden.difference(around),
            between=self.between.difference(around),
        )

    def mirrored(self) -> "Rooms":
        """The same seen from the other side."""
        seen, hidden, between = (
            affinity.scale(room, yfact=-1, origin=(0, 0)) for room in (self.seen, self.hidden, self.between)
        )
        return replace(self, seen=seen, hidden=hidden, between=between)


def rooms_of(disc: Disc) -> Rooms:
    """The rooms of a disc; any of them may be empty."""
    core_mm, round_mm = disc.pattern.core_points_mm, disc.pattern.core_round_mm
    from_mm = float(disc.turning.radius_mm[0] + core_mm[:, 1].min()) - round_mm
    to_mm = float(np.hypot(disc.turning.radius_mm[-1] + core_mm[:, 1], core_mm[:, 0]).max()) + round_mm
    metal = _metal(disc.movement)
    hidden = metal.difference(_ring(from_mm, to_mm))
    kept_out = shapely.union_all([_ring(ring.from_radius_mm, ring.to_radius_mm) for ring in disc.movement.keep_out])
    return Rooms(
        seen=hidden.difference(kept_out).buffer(-CLEAR_MM),
        hidden=hidden.buffer(-CLEAR_MM),
        between=metal.difference(_openings(disc)).buffer(-CLEAR_MM),
        tracks_from_mm=from_mm,
        tracks_to_mm=to_mm,
    )


def _circle(radius_mm: float) -> BaseGeometry:
    return shapely.Point(0, 0).buffer(radius_mm, quad_segs=_QUARTER_PIECES)


def _ring(from_mm: float, to_mm: float) -> BaseGeometry:
    return _circle(to_mm).difference(_circle(max(from_mm, 0.0)))


def _metal(movement: Movement) -> BaseGeometry:
    taken = [place for feature in movement.disc.features for place in _taken(feature)]
    whole = _ring(movement.disc.centre_hole_mm / 2, movement.disc.outer_diameter_mm / 2)
    return whole.difference(shapely.union_all(taken))


def _taken(feature: Feature) -> list[BaseGeometry]:
    """The boxes of a feature's holes, slots or notches: a little more than the round-ended ones cut away."""
    half = np.array([feature.width_mm, feature.length_mm]) / 2
    corners = np.array([(1, 1), (-1, 1), (-1, -1), (1, -1)]) * half + np.array([feature.radius_mm, 0.0])
    return [shapely.Polygon(box) for box in turned_mm(corners, feature_angles_rad(feature))]


def _openings(disc: Disc) -> BaseGeometry:
    pattern = disc.pattern
    placed_mm = on_disc_mm(pattern.core_points_mm, disc.radius_mm, disc.edge_angle_rad, disc.turning.direction)
    # A buffer's polygon lies inside the round end it stands for; its corners at 1/cos outside cover it.
    round_mm = pattern.core_round_mm / math.cos(math.pi / (4 * _QUARTER_PIECES))
    return shapely.union_all(shapely.buffer(core_geometries(placed_mm), round_mm, quad_segs=_QUARTER_PIECES))
