"""From notes to the plucks that are asked for: equal pitches at one onset are one pluck."""

from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from layout.arrange.arrangement import NO_NOTE
from layout.arrange.problem import NO_PLUCK, NS_PER_MS
from layout.arrange.rulings import Rulings
from layout.arrange.weights import Weighed
from layout.documents.settings import Settings
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_floats, frozen_ints
from layout.read.score import Score

NO_TRACK = -1  # stands in an array of tracks where there is none


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Wanted:
    """The plucks a tune asks for, before transposition, in the order (asked_s, pitch).

    Attributes:
        asked_s: Shape (n,). The moment asked for, from the start of the music on the disc.
        pitch: Shape (n,). As written.
        weight: Shape (n,). The sum of its notes' weights: one pluck keeps them all, and `Worth`
            counts notes kept. The more parts meet in a pluck, the more is lost with it.
        notes: Length n. The indices of the notes it plays, in rising order; () for an extra pluck.
        must_sound: Shape (n,). Whether a ruling forces it, on a track or anywhere.
        on_track: Shape (n,). The track a ruling puts it on, from 0, or NO_TRACK.
        outer: Shape (n,). Whether one of its notes is the highest or the lowest heard at its onset.
        fixed: Shape (n,). Whether it stays in its octave: extra plucks, and those they belong to.
        nudge_ns: Shape (n,). How far it may be nudged either way: the least that any of its notes allows.
        shift_ns: Shape (n,). From the moment asked for to where it stands in a chord that is spread.
        rest_ns: Shape (n,). How long its tooth is not to be plucked again, whatever its wheel can do; mostly 0.
        alternates_ns: Shape (n,). The same, where its pitch has several tracks.
        foreign: Shape (n,). Whether the harmony becomes foreign to it while it may still ring.
        parent: Shape (n,). For an extra pluck the pluck it belongs to, before it in order; else NO_PLUCK.
        again_of: Shape (n,). For an extra pluck the note it belongs to; else NO_NOTE.
    """

    asked_s: FloatArray
    pitch: IntArray
    weight: IntArray
    notes: tuple[tuple[int, ...], ...]
    must_sound: BoolArray
    on_track: IntArray
    outer: BoolArray
    fixed: BoolArray
    nudge_ns: IntArray
    shift_ns: IntArray
    rest_ns: IntArray
    alternates_ns: IntArray
    foreign: BoolArray
    parent: IntArray
    again_of: IntArray


def wanted_plucks(
    score: Score, notes: IntArray, asked_s: FloatArray, weighed: Weighed, rulings: Rulings, settings: Settings
) -> Wanted:
    """Merge the notes asked for into plucks.

    Args:
        score: The tune; sorted by (onset, pitch, channel), so equal notes stand together.
        notes: Shape (n,). Indices of the notes asked for, in rising order.
        asked_s: Shape (notes of the score,). Their moments on the disc.
        weighed: Worth and voice of each of `notes`.
        rulings: What forces notes.
        settings: For the largest nudges.

    Raises:
        RulingError: Notes that become one pluck are ruled onto two tracks.
    """
    onset_s, pitch = score.onset_s[notes], score.pitch[notes]
    new = np.ones(len(notes), dtype=np.bool_)
    new[1:] = (onset_s[1:] != onset_s[:-1]) | (pitch[1:] != pitch[:-1])
    starts = np.flatnonzero(new)
    count = len(starts)
    every, ends = notes.tolist(), [*starts.tolist(), len(notes)]
    merged = tuple(tuple(every[first:last]) for first, last in pairwise(ends))
    forced = [rulings.of_pluck(part) if rulings.forced else None for part in merged]
    melody = _any_of(weighed.melody, starts)
    largest_ms = settings.largest_nudge_ms
    melody_ms = min(settings.largest_melody_nudge_ms, largest_ms)
    nothing = np.zeros(count, dtype=np.int64)
    return Wanted(
        asked_s=frozen_floats(asked_s[notes][starts]),
        pitch=frozen_ints(pitch[starts]),
        weight=frozen_ints(np.add.reduceat(weighed.weight, starts) if count else []),
        notes=merged,
        must_sound=np.array([one is not None for one in forced], dtype=np.bool_),
        on_track=frozen_ints(NO_TRACK if one is None or one.track is None else one.track for one in forced),
        outer=_any_of(weighed.highest | weighed.lowest, starts),
        fixed=np.zeros(count, dtype=np.bool_),
        nudge_ns=frozen_ints(np.rint(np.where(melody, melody_ms, largest_ms) * NS_PER_MS).astype(np.int64)),
        shift_ns=frozen_ints(nothing),
        rest_ns=frozen_ints(nothing),
        alternates_ns=frozen_ints(nothing),
        foreign=np.zeros(count, dtype=np.bool_),
        parent=frozen_ints(nothing + NO_PLUCK),
        again_of=frozen_ints(nothing + NO_NOTE),
    )


def _any_of(marks: BoolArray, starts: Iterable[int]) -> BoolArray:
    """Whether any note of each pluck is marked."""
    places = np.asarray(starts, dtype=np.int64)
    return np.asarray(np.logical_or.reduceat(marks, places) if len(places) else np.zeros(0), dtype=np.bool_)
