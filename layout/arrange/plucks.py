"""From notes to the plucks that are asked for: equal pitches at one onset are one pluck."""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from layout.arrange.asked import NO_TRACK, Asked
from layout.arrange.rulings import Rulings
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats, frozen_ints
from layout.read.score import Score


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Wanted:
    """The plucks a tune asks for, before transposition, in the order (asked_s, pitch).

    Attributes:
        asked_s: Shape (n,). The moment asked for, from the start of the music on the disc.
        pitch: Shape (n,). As written.
        weight: Shape (n,). The sum of its notes' weights: one pluck keeps them all, and `Worth`
            counts notes kept. The more parts meet in a pluck, the more is lost with it.
        notes: Length n. The indices of the notes it plays, in rising order.
        must_sound: Shape (n,). Whether a ruling forces it, on a track or anywhere.
        on_track: Shape (n,). The track a ruling puts it on, from 0, or NO_TRACK.
    """

    asked_s: FloatArray
    pitch: IntArray
    weight: IntArray
    notes: tuple[tuple[int, ...], ...]
    must_sound: BoolArray
    on_track: IntArray

    def transposed(self, semitones: int, tracks_of_key: Mapping[int, tuple[int, ...]]) -> Asked:
        """The same plucks, semitones higher, on a comb."""
        return Asked(
            asked_s=self.asked_s,
            key=self.pitch + semitones,
            weight=self.weight,
            must_sound=self.must_sound,
            on_track=self.on_track,
            tracks_of_key=tracks_of_key,
        )


def wanted_plucks(score: Score, notes: IntArray, asked_s: FloatArray, weight: IntArray, rulings: Rulings) -> Wanted:
    """Merge the notes asked for into plucks.

    Args:
        score: The tune; sorted by (onset, pitch, channel), so equal notes stand together.
        notes: Shape (n,). Indices of the notes asked for, in rising order.
        asked_s: Shape (notes of the score,). Their moments on the disc.
        weight: Shape (n,). Worth of each of `notes`.
        rulings: What forces notes.

    Raises:
        RulingError: Notes that become one pluck are ruled onto two tracks.
    """
    onset_s, pitch = score.onset_s[notes], score.pitch[notes]
    new = np.ones(len(notes), dtype=np.bool_)
    new[1:] = (onset_s[1:] != onset_s[:-1]) | (pitch[1:] != pitch[:-1])
    starts = np.flatnonzero(new)
    merged = tuple(tuple(part.tolist()) for part in np.split(notes, starts[1:])) if len(notes) else ()
    forced = [rulings.of_pluck(part) for part in merged]
    return Wanted(
        asked_s=frozen_floats(asked_s[notes][starts]),
        pitch=frozen_ints(pitch[starts]),
        weight=frozen_ints(np.add.reduceat(weight, starts) if len(notes) else []),
        notes=merged,
        must_sound=np.array([one is not None for one in forced], dtype=np.bool_),
        on_track=frozen_ints(NO_TRACK if one is None or one.track is None else one.track for one in forced),
    )
