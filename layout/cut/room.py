"""Where on the disc there is room for marks. Seen from the label side, like the disc itself."""

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
import shapely
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layout.cut.blank import turned_mm
from layout.documents.feature import Feature
from layout.documents.movement import Movement
from layout.mechanics.openings import Openings
from layout.mechanics.projection import Pattern
from layout.mechanics.turning import Turning
from layout.place.disc import Disc

# mm; common practice: an engraved line is 0.1 to 0.2 mm wide and lies within 0.1 mm of its place
CLEAR_MM = 0.5
_QUARTER_PIECES = 64  # of a circle's quarter: inside the true circle by under 0.02 mm at 200 mm


@dataclass(frozen=True, kw_only=True, eq=False)
class FreeMetal:
    """The metal of a disc that is free before anything is marked, at least CLEAR_MM from what no mark must touch.

    Each part is worked out when it is first asked for, and kept: all that marks one disc asks for the same.

    Attributes:
        movement: The disc's movement.
        pattern: The flat pattern of its projections.
        turning: The movement's turning in numbers.
        openings: Of all projections.
    """

    movement: Movement
    pattern: Pattern
    turning: Turning
    openings: Openings

    @staticmethod
    def of(disc: Disc) -> "FreeMetal":
        """The free metal of a disc; it does not hold on to that, which holds on to it."""
        return FreeMetal(movement=disc.movement, pattern=disc.pattern, turning=disc.turning, openings=disc.openings)

    @property
    def rim_mm(self) -> float:
        """The disc's radius."""
        return self.movement.disc.outer_diameter_mm / 2

    @property
    def tracks_mm(self) -> tuple[float, float]:
        """The band of the tracks: from the innermost opening's nearest point to the outermost's farthest."""
        core_mm, round_mm = self.pattern.core_points_mm, self.pattern.core_round_mm
        radius_mm = self.turning.radius_mm
        from_mm = float(radius_mm[0] + core_mm[:, 1].min()) - round_mm
        to_mm = float(np.hypot(radius_mm[-1] + core_mm[:, 1], core_mm[:, 0]).max()) + round_mm
        return max(from_mm, 0.0), to_mm

    @cached_property
    def seen(self) -> BaseGeometry:
        """Clear of the tracks' band and the keep-out rings."""
        rings = [_ring(ring.from_radius_mm, ring.to_radius_mm) for ring in self.movement.keep_out]
        return self._left(_ring(*self.tracks_mm), *rings)

    @cached_property
    def hidden(self) -> BaseGeometry:
        """Clear of the tracks' band; a clamp may hide it in the movement."""
        return self._left(_ring(*self.tracks_mm)) if self.movement.keep_out else self.seen

    @cached_property
    def between(self) -> BaseGeometry:
        """Clear of openings only."""
        # A buffer's polygon lies inside the round end it stands for; its corners at 1/cos outside cover it.
        round_mm = self.openings.round_mm / math.cos(math.pi / (4 * _QUARTER_PIECES))
        grown = shapely.buffer(self.openings.cores, round_mm, quad_segs=_QUARTER_PIECES)
        return self._left(shapely.union_all(grown))

    @cached_property
    def _metal(self) -> BaseGeometry:
        disc = self.movement.disc
        taken = [place for feature in disc.features for place in _taken(feature)]
        whole = _ring(disc.centre_hole_mm / 2, self.rim_mm)
        return whole.difference(shapely.union_all(taken))

    def _left(self, *without: BaseGeometry) -> BaseGeometry:
        return self._metal.difference(shapely.union_all(without)).buffer(-CLEAR_MM)


@dataclass(frozen=True, kw_only=True, eq=False)
class Rooms:
    """Free metal less what is marked already, as drawn; kept once worked out.

    Attributes:
        metal: The free metal.
        taken: What is marked already, seen from the label side.
        mirror: −1 where the rooms are seen from the star side, else +1.
    """

    metal: FreeMetal
    taken: tuple[BaseGeometry, ...]
    mirror: int

    @cached_property
    def seen(self) -> BaseGeometry:
        """What is left of `FreeMetal.seen`."""
        return self._left(self.metal.seen)

    @cached_property
    def hidden(self) -> BaseGeometry:
        """What is left of `FreeMetal.hidden`."""
        return self._left(self.metal.hidden)

    @cached_property
    def between(self) -> BaseGeometry:
        """What is left of `FreeMetal.between`."""
        return self._left(self.metal.between)

    def _left(self, free: BaseGeometry) -> BaseGeometry:
        for mark in self.taken:
            free = free.difference(mark.buffer(CLEAR_MM))
        return affinity.scale(free, yfact=self.mirror, origin=(0, 0))


def _circle(radius_mm: float) -> BaseGeometry:
    return shapely.Point(0, 0).buffer(radius_mm, quad_segs=_QUARTER_PIECES)


def _ring(from_mm: float, to_mm: float) -> BaseGeometry:
    return _circle(to_mm).difference(_circle(from_mm))


def _taken(feature: Feature) -> list[BaseGeometry]:
    """The boxes of a feature's holes, slots or notches: a little more than the round-ended ones cut away."""
    half = np.array([feature.width_mm, feature.length_mm]) / 2
    corners = np.array([(1, 1), (-1, 1), (-1, -1), (1, -1)]) * half + np.array([feature.radius_mm, 0.0])
    return [shapely.Polygon(box) for box in turned_mm(corners, np.radians(feature.angles_deg))]
