"""What a note is worth: an integer, in thousandths of a plain note.

    weight = 1000 × voice × velocity × beat × duration × lead,  each factor in thousandths

rounded down once. A plain note is an inner voice of velocity 64 on a beat that begins no bar, lasts half
a second, and no lead channel is stated: 1000. The factors are our own choice; the reason stands
beside each. Velocity and beat together are the note's stress.
"""

import heapq
import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from layout.mechanics.arrays import BoolArray, FloatArray, IntArray, frozen_ints
from layout.read.score import Score

PLAIN = 1000  # thousandths; also the unit of every factor below

# Voice. The ear follows the top line, and the bass carries the harmony; inner notes are missed
# last (common practice when a score is reduced). A voice that is both counts as the highest.
HIGHEST_VOICE = 2000
LOWEST_VOICE = 1400
INNER_VOICE = PLAIN

# Stress, by velocity. A comb has no loud and soft, but what the player stressed carries the rhythm. Velocity
# 64 is plain: MIDI 1.0 has it for keys without velocity. 127 gives 1246, 1 gives 753.
STRESS_LEAST = 750
STRESS_SPAN = 500  # over 128 steps of velocity

# Stress, by beat. A bar is heard by its first beat, then by the others (common practice of metre); what
# stands between them ornaments or fills. The steps are small: many files state no metre or a wrong one.
FIRST_BEAT = 1100
OTHER_BEAT = PLAIN
BETWEEN_BEATS = 900

# A played onset this near a beat is on it: below about 20 ms the ear cannot tell which of two sounds
# came first (Hirsh 1959, J. Acoust. Soc. Am. 31:759).
ON_BEAT_S = 0.02

# Duration. A long note leaves a gap that is heard; one of half a second is plain, from a second
# on nothing is added. 0 gives 900, 1 s and more 1100.
DURATION_LEAST = 900
DURATION_SPAN = 200
DURATION_FULL_S = 1.0

# Lead. The maker says which channel carries the melody; it wins over the highest voice.
LEAD_CHANNEL = 2500

# A note is still heard under or over a later one if it runs this much past the later onset: less
# is legato. After two seconds a tooth has faded (T60 = 2.2·Q/f: 2.2 s at Q 1000 and 1 kHz).
LEGATO_S = 0.05
FADED_S = 2.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Weighed:
    """The notes asked for, weighed; every array has their shape and order, empty for no notes.

    Attributes:
        weight: Worth of each, above 0.
        highest: Which are the highest of all that are heard at their onset. A note alone is both.
        lowest: Which are the lowest.
        melody: Which are the melody's: the lead channel's where one is stated, else the highest.
    """

    weight: IntArray
    highest: BoolArray
    lowest: BoolArray
    melody: BoolArray


def weigh(score: Score, notes: IntArray, lead_channel: int | None) -> Weighed:
    """The worth of the notes asked for, as the module's text says, and their voices.

    Args:
        score: The tune.
        notes: Shape (n,). Indices of the notes asked for, in rising order. Only they make voices.
        lead_channel: The channel of the melody, 1 to 16, or None.
    """
    onset_s, velocity = score.onset_s[notes], score.velocity[notes]
    highest, lowest = _outer_voices(onset_s, score.duration_s[notes], score.pitch[notes])
    of_lead = score.channel[notes] == lead_channel
    voice = np.where(highest, HIGHEST_VOICE, np.where(lowest, LOWEST_VOICE, INNER_VOICE))
    stress = STRESS_LEAST + STRESS_SPAN * velocity // 128
    duration_s = np.minimum(score.duration_s[notes], DURATION_FULL_S)
    duration = DURATION_LEAST + np.rint(DURATION_SPAN * duration_s / DURATION_FULL_S).astype(np.int64)
    lead = np.where(of_lead, LEAD_CHANNEL, PLAIN)
    # At most 2000 · 1246 · 1100 · 1100 · 2500 = 7.5e15, within 64 bits; PLAIN of a plain note cancels one of five.
    weight = voice * stress * _beat_factor(score, onset_s) * duration * lead // PLAIN**4
    return Weighed(
        weight=frozen_ints(weight),
        highest=_frozen(highest),
        lowest=_frozen(lowest),
        melody=_frozen(highest if lead_channel is None else of_lead),
    )


def _frozen(array: BoolArray) -> BoolArray:
    copy = array.copy()
    copy.setflags(write=False)
    return copy


def _beat_factor(score: Score, onset_s: FloatArray) -> IntArray:
    near_bar = _distance_s(onset_s, score.bar_s) <= ON_BEAT_S
    near_beat = _distance_s(onset_s, score.beat_s) <= ON_BEAT_S
    factor: IntArray = np.where(near_bar, FIRST_BEAT, np.where(near_beat, OTHER_BEAT, BETWEEN_BEATS))
    return factor


def _distance_s(onset_s: FloatArray, marks_s: FloatArray) -> FloatArray:
    """From each onset to the nearest of the rising marks, of which there is at least one."""
    after = np.searchsorted(marks_s, onset_s)
    before_s = np.abs(onset_s - marks_s[np.maximum(after - 1, 0)])
    distance_s: FloatArray = np.minimum(before_s, np.abs(marks_s[np.minimum(after, len(marks_s) - 1)] - onset_s))
    return distance_s


def _outer_voices(onset_s: FloatArray, duration_s: FloatArray, pitch: IntArray) -> tuple[BoolArray, BoolArray]:
    """Which notes are the highest, and which the lowest, of all that are heard at their onset."""
    ends_s = onset_s + np.minimum(duration_s, FADED_S) - LEGATO_S
    highest = _tops(onset_s, ends_s, pitch)
    lowest = _tops(onset_s, ends_s, -pitch)
    return highest, lowest


def _tops(onset_s: FloatArray, ends_s: FloatArray, height: IntArray) -> BoolArray:
    """Which notes have the greatest height of those that start with them or are still heard."""
    tops: list[bool] = []
    heard: list[tuple[int, float]] = []  # (−height, end), the greatest height first
    _, starts = np.unique(onset_s, return_index=True)
    # Plain lists: single numbers are read from them a good deal sooner than from arrays.
    onsets_s, heights, ends = onset_s.tolist(), height.tolist(), ends_s.tolist()
    for start, stop in pairwise([*starts.tolist(), len(onsets_s)]):
        while heard and heard[0][1] <= onsets_s[start]:
            heapq.heappop(heard)
        together = heights[start:stop]
        top = max(*together, -heard[0][0] if heard else -math.inf)
        tops += [one >= top for one in together]
        for one, end_s in zip(together, ends[start:stop], strict=True):
            heapq.heappush(heard, (-one, end_s))
    return np.array(tops, dtype=np.bool_)
