"""Trills and grace notes, found in the notes asked for."""

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray
from layout.read.score import Score

# A trill is at least this many notes of one channel, in turn on two neighbouring pitches, as quick as this. Sixteenths
# at 120 to the minute are 125 ms apart and may be a tune; what trills is quicker (common practice; numbers our own).
TRILL_NOTES = 4
TRILL_STEP = 2  # semitones, at most
TRILL_APART_S = 0.12

# A grace note is this near before the next note of its channel and stepwise to it, and that note lasts twice as long.
GRACE_APART_S = 0.1
GRACE_STEP = 4  # semitones, at most
GRACE_SHORTER = 2.0


def ornaments(score: Score, notes: IntArray, speed_factor: float) -> BoolArray:
    """Which of the notes asked for belong to trills or are grace notes, as fast as the disc plays them.

    Of notes of one channel that begin together the highest is looked at; chords are no ornaments.

    Args:
        score: The tune.
        notes: Shape (n,). Indices of the notes asked for, rising.
        speed_factor: The speed.
    """
    found = np.zeros(len(notes), dtype=np.bool_)
    for channel in np.unique(score.channel[notes]).tolist():
        places = np.flatnonzero(score.channel[notes] == channel)
        places = places[np.diff(score.onset_s[notes[places]], append=np.inf) > 0]
        there = notes[places]
        onset_s, pitch = score.onset_s[there] / speed_factor, score.pitch[there]
        found[places] = _trilled(onset_s, pitch) | _graces(onset_s, pitch, score.duration_s[there] / speed_factor)
    return found


def _trilled(onset_s: FloatArray, pitch: IntArray) -> BoolArray:
    """Notes in runs that go to and fro between two neighbouring pitches."""
    trilled = np.zeros(len(pitch), dtype=np.bool_)
    begin = 0
    for place in range(1, len(pitch) + 1):
        goes_on = (
            place < len(pitch)
            and onset_s[place] - onset_s[place - 1] <= TRILL_APART_S
            and 0 < abs(int(pitch[place]) - int(pitch[place - 1])) <= TRILL_STEP
            and (place - begin < 2 or pitch[place] == pitch[place - 2])  # noqa: PLR2004 - to and fro is a period of two
        )
        if goes_on:
            continue
        if place - begin >= TRILL_NOTES:
            trilled[begin:place] = True
        # The last note of one run may be the first of the next.
        begin = place - 1 if place < len(pitch) and _is_near(onset_s, place) else place
    return trilled


def _is_near(onset_s: FloatArray, place: int) -> bool:
    return bool(0 < onset_s[place] - onset_s[place - 1] <= TRILL_APART_S)


def _graces(onset_s: FloatArray, pitch: IntArray, duration_s: FloatArray) -> BoolArray:
    """Short notes just before longer ones a step away."""
    graces = np.zeros(len(pitch), dtype=np.bool_)
    apart_s = np.diff(onset_s)
    step = np.abs(np.diff(pitch))
    graces[:-1] = (apart_s <= GRACE_APART_S) & (step > 0) & (step <= GRACE_STEP)
    graces[:-1] &= duration_s[1:] >= GRACE_SHORTER * apart_s
    return graces
