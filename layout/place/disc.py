"""What placing gives: the disc, as working edges on tracks."""

from dataclasses import dataclass, field

import numpy as np

from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.hits import Hits
from layout.mechanics.net_section import MetalLeft, metal_left
from layout.mechanics.openings import Openings, openings_at, radial_reach_mm
from layout.mechanics.projection import Pattern
from layout.mechanics.star_wheel import touch_zone_mm
from layout.mechanics.torque import TurnTorque, torque_over_turn
from layout.mechanics.turning import Turning


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Disc:
    """Projections on a movement's disc, as one cutter makes them.

    Attributes:
        movement: The movement the disc is for.
        cutter: The cutter that makes it.
        turning: The movement's turning in numbers.
        pattern: The flat pattern every projection has.
        track_index: Shape (n,). Place of each projection's track in movement.tracks, from 0.
        edge_angle_rad: Shape (n,). α, the working edge's angle on the disc seen from the label side,
            in [0, 2π).
    """

    movement: Movement
    cutter: Cutter
    turning: Turning
    pattern: Pattern
    track_index: IntArray
    edge_angle_rad: FloatArray
    _metal_left: list[MetalLeft | None] = field(default_factory=list, init=False, repr=False)
    _openings: list[Openings] = field(default_factory=list, init=False, repr=False)
    _reach_mm: list[tuple[tuple[float, float], ...]] = field(default_factory=list, init=False, repr=False)
    _touch_zones_mm: list[FloatArray] = field(default_factory=list, init=False, repr=False)
    _torque: list[TurnTorque | None] = field(default_factory=list, init=False, repr=False)

    @property
    def projection_count(self) -> int:
        """How many projections the disc has."""
        return len(self.track_index)

    @property
    def radius_mm(self) -> FloatArray:
        """Shape (n,). Track radius of each projection."""
        return self.turning.radius_mm[self.track_index]

    def placed_mm(self, points_mm: FloatArray) -> FloatArray:
        """Shape (n, k, 2). Points (k, 2) of the flat frame of every projection, seen from the label side."""
        placed = self.radius_mm, self.edge_angle_rad, self.turning.direction
        return on_disc_mm(points_mm, *placed, self.pattern.strike_u_mm)

    @property
    def hits(self) -> Hits:
        """The disc as a press strikes it."""
        return Hits(
            movement=self.movement,
            cutter=self.cutter,
            turning=self.turning,
            pattern=self.pattern,
            edge_radius_mm=self.radius_mm,
            edge_angle_rad=self.edge_angle_rad,
        )

    @property
    def metal_left(self) -> MetalLeft | None:
        """The least metal the openings leave, as `net_section` finds it: once, for check and report alike."""
        if not self._metal_left:
            features = self.movement.disc.features
            self._metal_left.append(
                metal_left(self.pattern, self.turning, self.track_index, self.edge_angle_rad, features)
            )
        return self._metal_left[0]

    @property
    def openings(self) -> Openings:
        """The openings of all projections, made once for all that look at them."""
        if not self._openings:
            points_mm = self.placed_mm(self.pattern.core_points_mm)
            self._openings.append(openings_at(points_mm, self.pattern.core_round_mm))
        return self._openings[0]

    @property
    def reach_mm(self) -> tuple[tuple[float, float], ...]:
        """For every track the least and greatest distance of its openings from the centre, found once."""
        if not self._reach_mm:
            self._reach_mm.append(tuple(radial_reach_mm(self.turning, self.pattern)))
        return self._reach_mm[0]

    @property
    def touch_zones_mm(self) -> FloatArray:
        """Shape (tracks, 2). For every track what `touch_zone_mm` tells, found once for tracks that state alike."""
        if not self._touch_zones_mm:
            arcs = [(track.engagement_arc_mm, track.release_arc_mm) for track in self.movement.tracks]
            zones = {each: touch_zone_mm(self.movement, arcs.index(each)) for each in set(arcs)}
            self._touch_zones_mm.append(frozen_floats(np.array([zones[each] for each in arcs])))
        return self._touch_zones_mm[0]

    @property
    def torque(self) -> TurnTorque | None:
        """The teeth's torque over the turn, as `torque_over_turn` finds it: once, for check and report alike."""
        if not self._torque:
            sounds_s = self.turning.sounds_s(self.edge_angle_rad, self.track_index)
            self._torque.append(torque_over_turn(self.movement, self.turning, self.track_index, sounds_s))
        return self._torque[0]

    @property
    def used_tracks(self) -> list[int]:
        """Places of the tracks that carry a projection, from 0, in rising order."""
        used: list[int] = np.unique(self.track_index).tolist()
        return used
