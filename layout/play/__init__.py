"""Play: what a disc sounds, and when, from its working edges alone."""

import math

import numpy as np

from layout.mechanics.arrays import frozen_floats
from layout.place.disc import Disc
from layout.play.plucks import Plucks

__all__ = ["Plucks", "play"]


def play(disc: Disc) -> Plucks:
    """The plucks of one turn at the movement's stated speed; none for a disc without projections.

    The damper is touched over damper_arc_mm of travel before the release, which on radius r takes
    arc·T/(2πr).
    """
    movement = disc.movement
    damped = movement.damped_tracks
    arc_mm = np.array([movement.damper_arc_mm if track.track in damped else 0.0 for track in movement.tracks])
    touched_s = arc_mm * movement.revolution_s / (2 * math.pi * disc.turning.radius_mm)
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad, disc.track_index)
    return Plucks(
        track_index=disc.track_index,
        sounds_s=frozen_floats(sounds_s),
        silent_from_s=frozen_floats(sounds_s - touched_s[disc.track_index]),
    )
