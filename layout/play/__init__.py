"""Play: what a disc sounds, and when, from its working edges alone."""

from layout.mechanics.arrays import frozen_floats
from layout.mechanics.damping import damper_touch_s
from layout.place.disc import Disc
from layout.play.plucks import Plucks

__all__ = ["Plucks", "play"]


def play(disc: Disc) -> Plucks:
    """The plucks of one turn at the movement's stated speed; none for a disc without projections.

    The damper is touched over damper_arc_mm of travel before the release.
    """
    touched_s = damper_touch_s(disc.movement, disc.turning)
    sounds_s = disc.turning.sounds_s(disc.edge_angle_rad, disc.track_index)
    return Plucks(
        track_index=disc.track_index,
        sounds_s=frozen_floats(sounds_s),
        silent_from_s=frozen_floats(sounds_s - touched_s[disc.track_index]),
    )
