"""What placing gives: the disc, as working edges on tracks."""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TypeVar, cast

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

Told = TypeVar("Told")


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
    _worked_out: dict[Callable[["Disc"], object], object] = field(default_factory=dict, init=False, repr=False)

    def once(self, work_out: Callable[["Disc"], Told]) -> Told:
        """What a function tells of the disc: worked out when it is first asked for, and kept for all that ask."""
        if work_out not in self._worked_out:
            self._worked_out[work_out] = work_out(self)
        return cast(Told, self._worked_out[work_out])

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
        """The least metal the openings leave, as `net_section` finds it."""
        return self.once(_metal_left)

    @property
    def openings(self) -> Openings:
        """The openings of all projections."""
        return self.once(_openings)

    @property
    def reach_mm(self) -> tuple[tuple[float, float], ...]:
        """For every track the least and greatest distance of its openings from the centre."""
        return self.once(_reach_mm)

    @property
    def touch_zones_mm(self) -> FloatArray:
        """Shape (tracks, 2). For every track what `touch_zone_mm` tells."""
        return self.once(_touch_zones_mm)

    @property
    def torque(self) -> TurnTorque | None:
        """The teeth's torque over the turn, as `torque_over_turn` finds it."""
        return self.once(_torque)

    @property
    def used_tracks(self) -> list[int]:
        """Places of the tracks that carry a projection, from 0, in rising order."""
        used: list[int] = np.unique(self.track_index).tolist()
        return used


def _metal_left(disc: Disc) -> MetalLeft | None:
    features = disc.movement.disc.features
    return metal_left(disc.pattern, disc.turning, disc.track_index, disc.edge_angle_rad, features)


def _openings(disc: Disc) -> Openings:
    return openings_at(disc.placed_mm(disc.pattern.core_points_mm), disc.pattern.core_round_mm)


def _reach_mm(disc: Disc) -> tuple[tuple[float, float], ...]:
    return tuple(radial_reach_mm(disc.turning, disc.pattern))


def _touch_zones_mm(disc: Disc) -> FloatArray:
    """Found once for all tracks that state alike."""
    arcs = [(track.engagement_arc_mm, track.release_arc_mm) for track in disc.movement.tracks]
    zones = {each: touch_zone_mm(disc.movement, arcs.index(each)) for each in set(arcs)}
    return frozen_floats(np.array([zones[each] for each in arcs]))


def _torque(disc: Disc) -> TurnTorque | None:
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad, disc.track_index)
    return torque_over_turn(disc.movement, disc.turning, disc.track_index, sounds_s)
