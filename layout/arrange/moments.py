"""Passage and speed: which notes are asked for, and at which moment of the disc.

asked_s = (onset − from_s)/speed_factor. A passage is [from_s, to_s) in the tune's own time.
"""

from dataclasses import dataclass

import numpy as np

from layout.arrange.arrangement import LeftOutReason
from layout.documents.settings import Settings, Speed
from layout.mechanics.arrays import BoolArray, FloatArray, frozen_floats
from layout.read.score import Score

# An onset this much past the free part of the turn still counts as in it: rounding, not music.
ON_TIME_S = 1e-9


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


def moments_of(score: Score, settings: Settings, ruled_out: frozenset[int], free_turn_s: float) -> Moments:
    """The moments a tune is asked for.

    Without from_s the music starts at the first onset of all notes read, those of channels left
    out included, so that leaving a channel out moves nothing. Notes ruled out do not count
    for the length and so not for the fitted speed. No notes: everything starts and ends at from_s or 0.

    Args:
        score: The tune.
        settings: Passage, speed and channels are used.
        ruled_out: Notes that rulings leave out.
        free_turn_s: What of a turn music may fill.
    """
    onset_s = score.onset_s
    from_s, inside = _passage(onset_s, settings)
    left_out = np.isin(score.channel, settings.channels.leave_out)
    left_out[list(ruled_out)] = True
    wanted = inside & ~left_out
    tune_s = float(onset_s[wanted].max()) - from_s if wanted.any() else 0.0
    factor = _speed_factor(settings.speed, tune_s, free_turn_s)
    asked_s = (onset_s - from_s) / factor
    late = asked_s > free_turn_s + ON_TIME_S
    out: dict[int, LeftOutReason] = {}
    # The first reason that holds stays: written last to first.
    out.update(dict.fromkeys(np.flatnonzero(late).tolist(), "past-the-turn"))
    out.update(dict.fromkeys(np.flatnonzero(left_out).tolist(), "ruled-out"))
    out.update(dict.fromkeys(np.flatnonzero(~inside).tolist(), "outside-passage"))
    return Moments(
        asked_s=frozen_floats(asked_s), from_s=from_s, speed_factor=factor, length_s=tune_s / factor, out=out
    )


def _passage(onset_s: FloatArray, settings: Settings) -> tuple[float, BoolArray]:
    passage = settings.passage
    from_s = passage.from_s
    if from_s is None:
        from_s = float(onset_s.min()) if len(onset_s) else 0.0
    inside = onset_s >= from_s
    if passage.to_s is not None:
        inside &= onset_s < passage.to_s
    return from_s, inside


def _speed_factor(speed: Speed, tune_s: float, free_turn_s: float) -> float:
    if speed.factor is not None:
        return speed.factor
    if speed.mode == "as-written":
        return 1.0
    # One onset, or none, fits at any speed: the one as written is then nearest to what is asked.
    wanted = tune_s / free_turn_s if tune_s > 0 else 1.0
    return min(max(wanted, speed.least), speed.most)
