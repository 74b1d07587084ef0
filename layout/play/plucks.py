"""What playing gives: when every projection of a disc plucks its track."""

from dataclasses import dataclass

from layout.mechanics.arrays import FloatArray, IntArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Plucks:
    """The plucks of one turn, in the order of the disc's projections.

    Attributes:
        track_index: Shape (n,). Place of the track in movement.tracks, from 0.
        sounds_s: Shape (n,). When the tooth is released, from the start of the music.
        silent_from_s: Shape (n,). When the point touches the damper, if the tooth is damped: a tooth
            that still rings is silent from here to sounds_s. Equal to sounds_s where undamped.
    """

    track_index: IntArray
    sounds_s: FloatArray
    silent_from_s: FloatArray
