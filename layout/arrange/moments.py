"""Passage and speed: which notes are asked for, and at which moment of the disc.

asked_s = (onset − from_s)/speed_factor. A passage is [from_s, to_s) in the tune's own time; where it is
given by bar and beat, layout.arrange.passage finds the moments.
"""

import math
from dataclasses import dataclass

import numpy as np

from layout.arrange.arrangement import LeftOutReason
from layout.arrange.passage import passage_of
from layout.documents.settings import Settings
from layout.documents.settings_passage import Speed
from layout.mechanics.arrays import BoolArray, FloatArray, frozen_floats
from layout.read.score import Score

# An onset this much past the free part of the turn still counts as in it: rounding, not music.
ON_TIME_S = 1e-9

# Factors; the most that speed "best" tries. Each is a whole search, and 200 between the widest bounds
# (0.01 to 100) are half a unit apart; the bounds by default hold 46 in hundredths.
MOST_FACTORS = 200
_GRID = 100  # the factors of the grid are whole numbers of hundredths
_FACTORS_BESIDE_THE_GRID = 4  # least, most, as written, and the one that fits


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Moments:
    """The notes' moments on the disc, and the notes that are out before any pitch is looked at.

    Attributes:
        asked_s: Shape (notes,). From the start of the music on the disc; below 0 before the passage.
        from_s: Moment of the tune at which the music on the disc starts.
        speed_factor: The tune's time divided by this is the disc's time.
        length_s: To the last onset asked for, past the turn or not; 0.0 where none is.
        out: Why notes are out, by index: outside-passage, ruled-out or past-the-turn. The first
            of these that holds.
    """

    asked_s: FloatArray
    from_s: float
    speed_factor: float
    length_s: float
    out: dict[int, LeftOutReason]


def moments_of(
    score: Score, settings: Settings, ruled_out: frozenset[int], free_turn_s: float, factor: float | None = None
) -> Moments:
    """The moments a tune is asked for.

    Without from_s or from_bar the music starts at the first onset of all notes read, those of channels left
    out included, so that leaving a channel out moves nothing. Notes ruled out, and those of channels
    left out or not kept, do not count for the length and so not for the fitted speed. No notes:
    everything starts and ends at from_s or 0.

    Args:
        score: The tune.
        settings: Passage, speed and channels are used.
        ruled_out: Notes that rulings leave out.
        free_turn_s: What of a turn music may fill.
        factor: The speed, whatever the settings say. Without it, speed "best" is taken as near to as
            written as its bounds let.

    Raises:
        DocumentError: Of the settings, at /passage: it ends before it begins once bars are seconds, or names
            a beat its bar does not have.
    """
    onset_s = score.onset_s
    passage = passage_of(score, settings.passage)
    inside = (onset_s >= passage.from_s) & (onset_s < passage.to_s)
    left_out = _left_out(score, settings, ruled_out)
    tune_s = _tune_s(onset_s[inside & ~left_out], passage.from_s)
    if factor is None:
        factor = _speed_factor(settings.speed, tune_s, free_turn_s)
    asked_s = (onset_s - passage.from_s) / factor
    late = asked_s > free_turn_s + ON_TIME_S
    out: dict[int, LeftOutReason] = {}
    # The first reason that holds stays: written last to first.
    out.update(dict.fromkeys(np.flatnonzero(late).tolist(), "past-the-turn"))
    out.update(dict.fromkeys(np.flatnonzero(left_out).tolist(), "ruled-out"))
    out.update(dict.fromkeys(np.flatnonzero(~inside).tolist(), "outside-passage"))
    return Moments(
        asked_s=frozen_floats(asked_s),
        from_s=passage.from_s,
        speed_factor=factor,
        length_s=tune_s / factor,
        out=out,
    )


def speed_factors(score: Score, settings: Settings, ruled_out: frozenset[int], free_turn_s: float) -> tuple[float, ...]:
    """The speeds to search, rising, none twice: one but for mode "best".

    For "best" they are the hundredths from least to most (a coarser grid where these are more than
    MOST_FACTORS), both ends, 1 and the factor that fits the tune to the free part of the turn, the last
    two only where they lie within.

    Args:
        score: The tune.
        settings: Passage, speed and channels are used.
        ruled_out: Notes that rulings leave out.
        free_turn_s: What of a turn music may fill.

    Raises:
        DocumentError: As `moments_of`.
    """
    speed = settings.speed
    passage = passage_of(score, settings.passage)
    inside = (score.onset_s >= passage.from_s) & (score.onset_s < passage.to_s)
    tune_s = _tune_s(score.onset_s[inside & ~_left_out(score, settings, ruled_out)], passage.from_s)
    if speed.mode != "best":
        return (_speed_factor(speed, tune_s, free_turn_s),)
    first, last = math.ceil(speed.least * _GRID), math.floor(speed.most * _GRID)
    step = max(math.ceil((last - first + 1) / (MOST_FACTORS - _FACTORS_BESIDE_THE_GRID)), 1)
    beside = (1.0, _fitting(tune_s, free_turn_s))
    within = {one for one in beside if speed.least <= one <= speed.most}
    grid = {hundredths / _GRID for hundredths in range(first, last + 1, step)}
    return tuple(sorted({speed.least, speed.most} | within | grid))


def _left_out(score: Score, settings: Settings, ruled_out: frozenset[int]) -> BoolArray:
    """The notes that rulings or channels leave out."""
    channels = settings.channels
    left_out: BoolArray = np.isin(score.channel, channels.leave_out)
    if channels.keep_only:
        # What is not kept holds what is left out: the two lists share no channel.
        left_out = np.isin(score.channel, channels.keep_only, invert=True)
    left_out[list(ruled_out)] = True
    return left_out


def _tune_s(onset_s: FloatArray, from_s: float) -> float:
    return float(onset_s.max()) - from_s if len(onset_s) else 0.0


def _fitting(tune_s: float, free_turn_s: float) -> float:
    # One onset, or none, fits at any speed: the one as written is then nearest to what is asked.
    return tune_s / free_turn_s if tune_s > 0 else 1.0


def _speed_factor(speed: Speed, tune_s: float, free_turn_s: float) -> float:
    if speed.factor is not None:
        return speed.factor
    if speed.mode == "as-written":
        return 1.0
    wanted = _fitting(tune_s, free_turn_s) if speed.mode == "fit" else 1.0
    return min(max(wanted, speed.least), speed.most)
