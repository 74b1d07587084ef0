"""What it costs to cut a tune before an onset, so that the next disc begins there: whole numbers, less is better.

    points = HELD_NOTE × notes held past the cut
           + ON_BEAT or BETWEEN_BEATS, nothing on a bar line
           + NO_REST × (1 − seconds of silence before the cut), nothing from FULL_REST_S on

A million points are as bad as one disc a whole even share too long or too short
(layout.arrange.splitting). The numbers are our own choice; the reason stands beside each.
"""

import numpy as np

from layout.arrange.weights import FADED_S, LEGATO_S, ON_BEAT_S
from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_ints
from layout.read.score import Score

# A note that is heard past the cut is torn off where the disc ends; each is heard.
HELD_NOTE = 1_000_000

# Phrases end at bar lines more often than at beats, and seldom between (common practice). Together with the
# rest below the worst place without a held note is 2.3 notes bad.
ON_BEAT = 600_000
BETWEEN_BEATS = 1_500_000

# A rest is where the music breathes anyhow; after a second of it nobody waits for the next note.
NO_REST = 800_000
FULL_REST_S = 1.0


def cut_costs(score: Score, notes: IntArray, starts: IntArray) -> IntArray:
    """Points of a cut before each distinct onset; shape (onsets,), 0 for the first, where nothing is cut.

    A note is held past a cut where it is heard LEGATO_S or more past it; after FADED_S no note is heard.

    Args:
        score: The tune.
        notes: Shape (n,). Indices of the notes asked for, in rising order; at least one.
        starts: Shape (onsets,). Place in `notes` of the first note of each distinct onset.
    """
    onset_s = score.onset_s[notes]
    ends_s = onset_s + np.minimum(score.duration_s[notes], FADED_S)
    at_s = onset_s[starts]
    held = _held(np.searchsorted(at_s, onset_s), ends_s - LEGATO_S, at_s)
    on_bar, on_beat = _is_near(score.bar_s, at_s), _is_near(score.beat_s, at_s)
    place = np.where(on_bar, 0, np.where(on_beat, ON_BEAT, BETWEEN_BEATS))
    cost = HELD_NOTE * held + place + _no_rest(ends_s, starts, at_s)
    cost[0] = 0
    return frozen_ints(cost)


def _held(started: IntArray, heard_to_s: FloatArray, at_s: FloatArray) -> IntArray:
    """How many notes are heard past each onset that started before it."""
    first = started + 1
    after = np.maximum(np.searchsorted(at_s, heard_to_s), first)
    changes = np.bincount(first, minlength=len(at_s) + 1) - np.bincount(after, minlength=len(at_s) + 1)
    held: IntArray = np.cumsum(changes)[: len(at_s)]
    return held


def _no_rest(ends_s: FloatArray, starts: IntArray, at_s: FloatArray) -> IntArray:
    silent_from_s = np.maximum.accumulate(ends_s)[np.maximum(starts - 1, 0)]
    rest_s = np.clip(at_s - silent_from_s, 0.0, FULL_REST_S)
    points: IntArray = NO_REST - np.rint(NO_REST * rest_s / FULL_REST_S).astype(np.int64)
    return points


def _is_near(marks_s: FloatArray, at_s: FloatArray) -> BoolArray:
    after = np.searchsorted(marks_s, at_s)
    before_s = np.abs(at_s - marks_s[np.maximum(after - 1, 0)])
    after_s = np.abs(at_s - marks_s[np.minimum(after, len(marks_s) - 1)])
    near: BoolArray = np.minimum(before_s, after_s) <= ON_BEAT_S
    return near
