"""What arranging gives: which notes are plucked on which tracks, when, and why the others are not."""

from dataclasses import dataclass
from typing import Literal

from layout.mechanics.arrays import FloatArray, IntArray

LeftOutReason = Literal[
    "no-such-pitch",
    "wheel-still-stepping",
    "damper-not-recovered",
    "web",
    "drive-torque",
    "ruled-out",
    "outside-passage",
    "past-the-turn",
    "unusable-tooth",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class LeftOut:
    """A note the disc does not play, by its index in the score, and why."""

    note: int
    reason: LeftOutReason


@dataclass(frozen=True, slots=True, kw_only=True)
class Worth:
    """The weight of the notes kept, the most that could be kept, and whether that is proved.

    Weights are integers, thousandths of a plain note (layout.arrange.weights).
    """

    kept: int
    bound: int
    proved: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Arrangement:
    """Plucks in the order (planned_s, track_index), and the notes left out in index order.

    Every note of the score is in exactly one pluck or in `left_out`.

    Attributes:
        track_index: Shape (n,). Place of each pluck's track in movement.tracks, from 0.
        key: Shape (n,). MIDI key number that sounds, after transposition.
        asked_s: Shape (n,). The moment asked for, from the start of the music on the disc.
        planned_s: Shape (n,). The moment to sound, nudges included; asked_s where none.
        notes: Length n. The score's note indices each pluck plays, in rising order.
        left_out: The notes not played.
        transposed_semitones: Added to every pitch.
        speed_factor: The tune's time divided by this is the disc's time; above 1 is faster.
        from_s: Moment of the tune at which the music on the disc starts.
        length_s: From the start of the music to the last asked onset of the passage, on the disc,
            notes past the turn included; 0.0 for a tune with no notes in the passage.
        worth: What was kept, against the bound.
    """

    track_index: IntArray
    key: IntArray
    asked_s: FloatArray
    planned_s: FloatArray
    notes: tuple[tuple[int, ...], ...]
    left_out: tuple[LeftOut, ...]
    transposed_semitones: int
    speed_factor: float
    from_s: float
    length_s: float
    worth: Worth
