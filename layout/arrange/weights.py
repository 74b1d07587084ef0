"""What a note is worth: an integer, in thousandths of a plain note.

    weight = 1000 × voice × stress × duration × lead,  each factor in thousandths

rounded down once. A plain note is an inner voice of velocity 64 that lasts half a second, with no
lead channel stated: 1000. The factors are our own choice; the reason stands beside each.
"""

import heapq
import math
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

# Stress. A comb has no loud and soft, but what the player stressed carries the rhythm. Velocity 64
# is plain: MIDI 1.0 has it for keys without velocity. 127 gives 1246, 1 gives 754.
STRESS_LEAST = 750
STRESS_SPAN = 500  # over 128 steps of velocity

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


def weights(score: Score, notes: IntArray, lead_channel: int | None) -> IntArray:
    """The worth of the notes asked for, as the module's text says.

    Args:
        score: The tune.
        notes: Shape (n,). Indices of the notes asked for, in rising order. Only they make voices.
        lead_channel: The channel of the melody, 1 to 16, or None.

    Returns:
        Shape (n,). Above 0; empty for no notes.
    """
    velocity, duration_s = score.velocity[notes], np.minimum(score.duration_s[notes], DURATION_FULL_S)
    highest, lowest = _outer_voices(score.onset_s[notes], score.duration_s[notes], score.pitch[notes])
    voice = np.where(highest, HIGHEST_VOICE, np.where(lowest, LOWEST_VOICE, INNER_VOICE))
    stress = STRESS_LEAST + STRESS_SPAN * velocity // 128
    duration = DURATION_LEAST + np.rint(DURATION_SPAN * duration_s / DURATION_FULL_S).astype(np.int64)
    lead = np.where(score.channel[notes] == lead_channel, LEAD_CHANNEL, PLAIN)
    # At most 1000 · 2000 · 1246 · 1100 · 2500 = 6.9e15, within 64 bits.
    return frozen_ints(PLAIN * voice * stress * duration * lead // PLAIN**4)


def _outer_voices(onset_s: FloatArray, duration_s: FloatArray, pitch: IntArray) -> tuple[BoolArray, BoolArray]:
    """Which notes are the highest, and which the lowest, of all that are heard at their onset."""
    ends_s = onset_s + np.minimum(duration_s, FADED_S) - LEGATO_S
    highest = _tops(onset_s, ends_s, pitch)
    lowest = _tops(onset_s, ends_s, -pitch)
    return highest, lowest


def _tops(onset_s: FloatArray, ends_s: FloatArray, height: IntArray) -> BoolArray:
    """Which notes have the greatest height of those that start with them or are still heard."""
    tops = np.zeros(len(onset_s), dtype=np.bool_)
    heard: list[tuple[int, float]] = []  # (−height, end), the greatest height first
    _, starts = np.unique(onset_s, return_index=True)
    for start, stop in pairwise([*starts.tolist(), len(onset_s)]):
        while heard and heard[0][1] <= onset_s[start]:
            heapq.heappop(heard)
        top = max(height[start:stop].max(), -heard[0][0] if heard else -math.inf)
        tops[start:stop] = height[start:stop] >= top
        for place in range(start, stop):
            heapq.heappush(heard, (-int(height[place]), float(ends_s[place])))
    return tops
