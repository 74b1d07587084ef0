"""Time and angle: where on the disc a working edge lies so that its tooth sounds at its moment.

Frame: the disc seen from the label side in playing position, +X towards the row of star wheels,
angles counter-clockwise. The row is the line y = d. At music time t the disc has turned
φ(t) = φ₀ + 2πt/T. A clockwise disc (s = +1) carries a point at disc angle α to the angle
α − φ; the tooth is released when the edge is a past the row line, at y = d − s·a, so

    α = s·φ(t) + asin((d − s·a)/r)

exact for both directions and any offset. Derived here; elementary geometry.
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats

FULL_TURN_RAD = 2 * math.pi
SNAP_RAD = 2.0**-44  # rad; 6e-14, a hundred times the rounding of an arcsine, a millionth of a nanometre on a disc


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Turning:
    """A movement's turning in numbers, one entry per track where an array.

    Attributes:
        direction: s, +1 for a disc that turns clockwise seen from the label side, else −1.
        revolution_s: T, seconds a turn.
        start_rad: φ₀, turned before the music starts.
        end_rad: The last φ at which a tooth may be released.
        radius_mm: Shape (tracks,). Track radii.
        engagement_arc_mm: Shape (tracks,). Least travel between two working edges.
        release_arc_mm: Shape (tracks,). a, travel past the row line at the release.
        release_rad: Shape (tracks,). asin((d − s·a)/r).
        row_rad: Shape (tracks,). δ = asin(d/r), the star wheel's own angle.
    """

    direction: int
    revolution_s: float
    start_rad: float
    end_rad: float
    radius_mm: FloatArray
    engagement_arc_mm: FloatArray
    release_arc_mm: FloatArray
    release_rad: FloatArray
    row_rad: FloatArray

    @property
    def free_turn_s(self) -> float:
        """Seconds of one turn that music may fill: T·(360 − before − after)/360."""
        return self.revolution_s * (self.end_rad - self.start_rad) / FULL_TURN_RAD

    def edge_angle_rad(self, sounds_s: FloatArray, track_index: IntArray) -> FloatArray:
        """α of working edges that sound at these times on these tracks, in [0, 2π).

        Args:
            sounds_s: Shape (n,). Seconds from the start of the music on the disc.
            track_index: Shape (n,). Places in the track arrays, from 0.
        """
        turned = self.start_rad + FULL_TURN_RAD * np.asarray(sounds_s) / self.revolution_s
        return np.mod(self.direction * turned + self.release_rad[track_index], FULL_TURN_RAD)

    def sounds_s(self, angle_rad: FloatArray, track_index: IntArray) -> FloatArray:
        """When working edges at these angles release their teeth: the inverse of edge_angle_rad.

        Returns:
            Shape (n,). Seconds from the start of the music, within one turn: from just before
            the music (half the rest sector) up to one turn later.
        """
        turned = self.direction * (np.asarray(angle_rad) - self.release_rad[track_index])
        rest = FULL_TURN_RAD - (self.end_rad - self.start_rad)
        since_start = np.mod(turned - self.start_rad + rest / 2, FULL_TURN_RAD) - rest / 2
        return since_start * self.revolution_s / FULL_TURN_RAD


def turning_of(movement: Movement) -> Turning:
    """The movement's turning. Measured arcs of a track win over the wheel's own."""
    direction = 1 if movement.turns == "clockwise" else -1
    offset_mm = movement.gantry_offset_mm
    radius_mm = frozen_floats(track.radius_mm for track in movement.tracks)
    arcs = [movement.arcs_mm(index) for index in range(len(movement.tracks))]
    release_arc_mm = frozen_floats(release for _, release in arcs)
    return Turning(
        direction=direction,
        revolution_s=movement.revolution_s,
        start_rad=math.radians(movement.before_music_deg),
        end_rad=math.radians(360 - movement.after_music_deg),
        radius_mm=radius_mm,
        engagement_arc_mm=frozen_floats(engagement for engagement, _ in arcs),
        release_arc_mm=release_arc_mm,
        release_rad=_snapped_asin((offset_mm - direction * release_arc_mm) / radius_mm),
        row_rad=_snapped_asin(offset_mm / radius_mm),
    )


def _snapped_asin(sines: FloatArray) -> FloatArray:
    # Processors and libraries round the last bit of an arcsine apart; layout.json must not follow them.
    return frozen_floats(np.rint(np.arcsin(sines) / SNAP_RAD) * SNAP_RAD)
