"""What placing gives: the disc, as working edges on tracks."""

from dataclasses import dataclass, field

import numpy as np

from layout.documents.cutter import Cutter
from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray
from layout.mechanics.frame import on_disc_mm
from layout.mechanics.hits import Hits
from layout.mechanics.net_section import MetalLeft, metal_left
from layout.mechanics.openings import Openings, openings_at
from layout.mechanics.projection import Pattern
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
    def used_tracks(self) -> list[int]:
        """Places of the tracks that carry a projection, from 0, in rising order."""
        return [int(index) for index in np.unique(self.track_index)]
