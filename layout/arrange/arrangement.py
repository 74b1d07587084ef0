"""What arranging gives: which notes are plucked on which tracks, when, and why the others are not."""

from dataclasses import dataclass
from typing import Literal

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray

NO_NOTE = -1  # stands in an array of note indices where there is none

Stopped = Literal["nodes", "time", "nudges"]

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

    Attributes:
        kept: Of the notes kept, each by how it is placed.
        bound: Nothing that was searched (transpositions, speeds, octaves, tracks, nudges) keeps more.
        proved: Whether the two meet.
        stopped: What ended the search before it could prove more: the nodes it may try, its time limit, or nudges
            that pile up more than the drive carries, so that the choice was made anew; None where it ran to its end.
    """

    kept: int
    bound: int
    proved: bool
    stopped: Stopped | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Tried:
    """One transposition, at one speed, that was looked at.

    Attributes:
        semitones: Added to every pitch.
        speed_factor: The speed.
        kept: The weight its best arrangement found keeps; None where only the bound was computed.
        bound: No arrangement at this transposition and speed keeps more.
    """

    semitones: int
    speed_factor: float
    kept: int | None
    bound: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Transposed:
    """A transposition, whatever the speed: what is known of its worth.

    Attributes:
        semitones: Added to every pitch.
        kept: The most weight an arrangement found keeps; None where none was made, since its bound says enough.
        bound: No arrangement at this transposition keeps more, at any speed searched; kept where that is proved.
    """

    semitones: int
    kept: int | None
    bound: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Load:
    """The moment at which the teeth load the disc most.

    Attributes:
        peak_nmm: The torque of the teeth lifted at that moment.
        at_s: The moment, from the start of the music on the disc.
        plucks: Those counted, in the order of the arrangement.
        limit_nmm: The drive's limit; None where the movement states none.
    """

    peak_nmm: float
    at_s: float
    plucks: tuple[int, ...]
    limit_nmm: float | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Arrangement:
    """Plucks in the order (planned_s, track_index), and the notes left out in index order.

    Every note of the score is in exactly one pluck or in `left_out`. Extra plucks of a note already
    placed (plucked again, on a second tooth) carry no notes.

    Attributes:
        track_index: Shape (n,). Place of each pluck's track in movement.tracks, from 0.
        key: Shape (n,). MIDI key number that sounds, after transposition.
        asked_s: Shape (n,). The moment asked for, from the start of the music on the disc.
        planned_s: Shape (n,). The moment to sound, nudges included; asked_s where none.
        notes: Length n. The score's note indices each pluck plays, in rising order; () for an extra pluck.
        again_of: Shape (n,). The note an extra pluck belongs to, NO_NOTE for the others.
        octave_semitones: Shape (n,). By how much the pluck was moved by octaves, beside the transposition.
        left_out: The notes not played.
        transposed_semitones: Added to every pitch.
        speed_factor: The tune's time divided by this is the disc's time; above 1 is faster.
        from_s: Moment of the tune at which the music on the disc starts.
        length_s: From the start of the music to the last asked onset of the passage, on the disc,
            notes past the turn included; 0.0 for a tune with no notes in the passage.
        worth: What was kept, against the bound.
        note_weight: Shape (notes of the score,). Worth of each note asked for; 0 for the others.
        highest: Shape (notes of the score,). Which notes asked for are the highest heard at their onset.
        lowest: Shape (notes of the score,). Which are the lowest.
        melody: Shape (notes of the score,). Which are the melody's.
        tried: The best transpositions and speeds, best first, at most five.
        transpositions: Every transposition searched, the lowest first, but those at which rulings are known to be
            impossible.
        load: The greatest load; None where the movement states no stiffness and lift, or nothing is plucked.
    """

    track_index: IntArray
    key: IntArray
    asked_s: FloatArray
    planned_s: FloatArray
    notes: tuple[tuple[int, ...], ...]
    again_of: IntArray
    octave_semitones: IntArray
    left_out: tuple[LeftOut, ...]
    transposed_semitones: int
    speed_factor: float
    from_s: float
    length_s: float
    worth: Worth
    note_weight: IntArray
    highest: BoolArray
    lowest: BoolArray
    melody: BoolArray
    tried: tuple[Tried, ...]
    transpositions: tuple[Transposed, ...]
    load: Load | None
