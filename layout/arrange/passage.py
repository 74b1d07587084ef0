"""Where a passage begins and ends: seconds, bars and beats made moments of the tune."""

import math
from dataclasses import dataclass

import numpy as np

from layout.documents.settings_passage import Passage
from layout.errors import DocumentError, Problem
from layout.mechanics.arrays import FloatArray
from layout.read.score import Score

# Beats; people write 1.667 for two thirds. An onset this near a stated fraction of a beat is meant.
WRITTEN_TO_BEATS = 0.0005

# The bar of a tune that has none to measure by, for lack of notes: 4/4 at 120.
_PLAIN_BAR_S = 2.0
_PLAIN_BAR_BEATS = 4


@dataclass(frozen=True, slots=True, kw_only=True)
class PassageTimes:
    """[from_s, to_s) in the tune's own time; to_s is infinite where the passage ends with the tune."""

    from_s: float
    to_s: float


def passage_of(score: Score, passage: Passage) -> PassageTimes:
    """The moments between which a passage lies.

    A beat is counted in its bar from 1, and a fraction of one taken from the time between it and the
    next. Past the last bar of the tune, bars go on as long as the last one is. Without a beginning
    it begins at the first onset, or at 0 for no notes.

    Args:
        score: The tune, whose bars and beats count.
        passage: What the settings ask for.

    Raises:
        DocumentError: It ends before it begins, or names a beat its bar does not have.
    """
    from_s, to_s = passage.from_s, passage.to_s
    if passage.from_bar is not None:
        from_s = _moment(score, "from_beat", passage.from_bar, passage.from_beat)
    if passage.to_bar is not None:
        to_s = _moment(score, "to_beat", passage.to_bar, passage.to_beat)
    if to_s is not None and to_s <= (from_s or 0.0):
        raise _backwards(passage, from_s or 0.0, to_s)
    if from_s is None:
        from_s = float(score.onset_s.min()) if len(score.onset_s) else 0.0
    return PassageTimes(from_s=from_s, to_s=math.inf if to_s is None else to_s)


def _moment(score: Score, field: str, bar: int, beat: float) -> float:
    """The moment of a bar and beat, both from 1."""
    marks_s = _beats_of_bar(score, bar)
    most = len(marks_s)
    if beat > most:
        raise _no_such_beat(field, bar, beat, most)
    if beat == int(beat):
        return float(marks_s[int(beat) - 1])
    moment_s = float(np.interp(beat, np.arange(1, most + 1), marks_s))
    beat_s = float(marks_s[int(beat)] - marks_s[int(beat) - 1])
    return _onset_meant(score.onset_s, moment_s, WRITTEN_TO_BEATS * beat_s)


def _beats_of_bar(score: Score, bar: int) -> FloatArray:
    """The beats of a bar, and the start of the next; past the last bar, those of the last moved on."""
    bar_count = len(score.bar_s) - 1
    if not bar_count:
        return (bar - 1 + np.arange(_PLAIN_BAR_BEATS + 1) / _PLAIN_BAR_BEATS) * _PLAIN_BAR_S
    begin_s, end_s = score.bar_s[min(bar, bar_count) - 1 :][:2]
    first, after = np.searchsorted(score.beat_s, [begin_s, end_s])
    marks_s: FloatArray = score.beat_s[first : after + 1]
    past = bar - bar_count
    return marks_s + past * (end_s - begin_s) if past > 0 else marks_s


def _onset_meant(onset_s: FloatArray, moment_s: float, within_s: float) -> float:
    """The onset nearest to a moment, where one is near enough; else the moment."""
    if not len(onset_s):
        return moment_s
    nearest_s = float(onset_s[np.abs(onset_s - moment_s).argmin()])
    return nearest_s if abs(nearest_s - moment_s) <= within_s else moment_s


def _no_such_beat(field: str, bar: int, beat: float, most: int) -> DocumentError:
    count = most - 1
    message = (
        f"bar {bar} has {count} beat{'' if count == 1 else 's'}, so its beat may be 1 to {most} (its end), got {beat:g}"
    )
    return DocumentError(document="settings", problems=(Problem(pointer=f"/passage/{field}", message=message),))


def _backwards(passage: Passage, from_s: float, to_s: float) -> DocumentError:
    begin = f"at {from_s:g} s"
    if passage.from_bar is not None:
        begin = f"at bar {passage.from_bar}, beat {passage.from_beat:g} ({from_s:g} s)"
    end = f"{to_s:g} s" if passage.to_bar is None else f"bar {passage.to_bar}, beat {passage.to_beat:g} ({to_s:g} s)"
    message = f"the passage begins {begin} and ends at {end}; move its end past its beginning"
    return DocumentError(document="settings", problems=(Problem(pointer="/passage", message=message),))
