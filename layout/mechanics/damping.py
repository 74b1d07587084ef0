"""How long a star wheel's point is at the damper before it lets the tooth go."""

import math

import numpy as np

from layout.documents.movement import Movement
from layout.mechanics.arrays import FloatArray, frozen_floats
from layout.mechanics.turning import Turning


def damper_touch_s(movement: Movement, turning: Turning) -> FloatArray:
    """From the touch of the damper to the release, shape (tracks,); 0 where no usable tooth of a track is damped.

    damper_arc_mm of travel on radius r takes arc·T/(2πr).

    Args:
        movement: For its dampers.
        turning: The movement's turning.
    """
    damped = movement.damped_tracks
    arc_mm = np.array([movement.damper_arc_mm if track.track in damped else 0.0 for track in movement.tracks])
    return frozen_floats(arc_mm * movement.revolution_s / (2 * math.pi * turning.radius_mm))
