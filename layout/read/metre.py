"""Bars and beats: where the time signatures of a file put them, in exact time.

Source: Standard MIDI Files 1.0 (RP-001), meta event 58: numerator, and the power of two that is the
denominator; 4/4 where a file states none. Bar 1 begins at tick 0. A time signature is written at a
bar line, so every one begins a bar, also where it cuts the bar before it short or only repeats what
holds. A beat is the note of the denominator; in compound metres (a numerator of 6, 9, 12 and so on)
three of them (common practice). The event's clocks per metronome click are not used: most
programs write 24 whatever the metre.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from operator import itemgetter

import numpy as np

from layout.mechanics.arrays import FloatArray, IntArray, frozen_floats, frozen_ints
from layout.read.faults import counted
from layout.read.limits import LIMITS
from layout.read.oddities import Oddities
from layout.read.tempo import TempoMap

# A beat may be a fraction of a tick (division 1 and eighths): times are counted in these parts of one.
_PARTS_PER_TICK = 32
_PARTS_PER_WHOLE_NOTE = 4 * _PARTS_PER_TICK  # per tick of a quarter note

# Without beats of the file's own, they are counted as 4/4 at 120: what the specification has where a
# file states neither metre nor tempo.
_PLAIN_BEAT_S = 0.5
_PLAIN_BEATS_OF_BAR = 4


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeSignature:
    """A metre: `numerator` notes of one part in 2 to the power `denominator_power` of a whole note a bar."""

    numerator: int
    denominator_power: int

    @property
    def notes_of_beat(self) -> int:
        """How many notes of the denominator make a beat: three in compound metres, else one."""
        compound = self.numerator > 3 and self.numerator % 3 == 0  # noqa: PLR2004  three is the word's meaning
        return 3 if compound else 1


COMMON_TIME = TimeSignature(numerator=4, denominator_power=2)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Bars:
    """Where bars and beats start, as `Score` has them."""

    bar_s: FloatArray
    beat_s: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Stretches:
    """Bars of one metre each, one stretch after the other, all whole but perhaps the last of each.

    All have shape (s,), s at least 1; lengths are in parts of a tick.
    """

    begin: IntArray
    end: IntArray
    beat: IntArray
    beats_of_bar: IntArray

    @property
    def beat_count(self) -> int:
        return int((-((self.begin - self.end) // self.beat)).sum())

    def __iter__(self) -> Iterator[tuple[int, ...]]:
        """Begin, end, beat and beats of a bar of each."""
        columns = (self.begin, self.end, self.beat, self.beats_of_bar)
        return zip(*(column.tolist() for column in columns), strict=True)


def time_signature(payload: bytes) -> TimeSignature | None:
    """The metre a time-signature event states; None where it is cut short or none that can be written."""
    return _metre_of(payload[:2])


@lru_cache(maxsize=256)
def _metre_of(stated: bytes) -> TimeSignature | None:
    if len(stated) < 2 or stated[0] == 0 or stated[1] > LIMITS.denominator_power:  # noqa: PLR2004  its two bytes
        return None
    return TimeSignature(numerator=stated[0], denominator_power=stated[1])


def bars_and_beats(
    signatures: list[tuple[int, int, TimeSignature]], times: TempoMap, last_onset_tick: int | None, oddities: Oddities
) -> Bars:
    """The bars and beats from tick 0 up to and including the first bar past the last onset.

    A division in frames states no quarter notes and so no beats, and a file may state beats beyond
    any music; both are counted as 4/4 at 120.

    Args:
        signatures: (tick, byte offset, metre) over all tracks, in any order. Of several at one tick
            the last by byte offset holds.
        times: The tempo map.
        last_onset_tick: None for no notes: then there is one bar start, 0.0, and one beat.
        oddities: Told where the file's own beats are too many to be music.
    """
    if last_onset_tick is None:
        return Bars(bar_s=frozen_floats([0.0]), beat_s=frozen_floats([0.0]))
    last_onset_s = float(times.seconds(times.exact_times(np.array([last_onset_tick], dtype=np.int64)))[0])
    if times.ticks_per_quarter is None:
        return _plain(last_onset_s)
    stretches = _stretches(signatures, times.ticks_per_quarter, last_onset_tick)
    beat_count = stretches.beat_count
    if beat_count > LIMITS.beats:
        told = f"The file counts {counted(beat_count, 'beat', 'beats')} to its last note, more than music has"
        oddities.say(f"{told}: its bars are counted as 4/4 at 120 beats a minute.", at=0)
        return _plain(last_onset_s)
    beats = [np.arange(begin, end, beat, dtype=np.int64) for begin, end, beat, _ in stretches]
    bars = [beat[::beats_of_bar] for beat, (*_, beats_of_bar) in zip(beats, stretches, strict=True)]
    bar_s, beat_s = (
        times.seconds_at(np.concatenate([*parts, stretches.end[-1:]]), parts_per_tick=_PARTS_PER_TICK)
        for parts in (bars, beats)
    )
    return Bars(bar_s=frozen_floats(bar_s), beat_s=frozen_floats(beat_s))


def _stretches(
    signatures: list[tuple[int, int, TimeSignature]], ticks_per_quarter: int, last_onset_tick: int
) -> _Stretches:
    """The metres that hold up to the last onset; the last ends with a bar past it."""
    changes = {0: COMMON_TIME}
    changes.update((tick, metre) for tick, _, metre in sorted(signatures, key=itemgetter(0, 1)))
    last, metres = last_onset_tick * _PARTS_PER_TICK, changes.values()
    begin = np.array(list(changes), dtype=np.int64) * _PARTS_PER_TICK
    power = np.array([metre.denominator_power for metre in metres], dtype=np.int64)
    note = ticks_per_quarter * _PARTS_PER_WHOLE_NOTE >> power
    bar = note * np.array([metre.numerator for metre in metres], dtype=np.int64)
    end = begin + ((last - begin) // bar + 1) * bar
    np.minimum(end[:-1], begin[1:], out=end[:-1])
    count = int((end > last).argmax()) + 1
    beat = note * np.array([metre.notes_of_beat for metre in metres], dtype=np.int64)
    parts = (begin, end, beat, bar // beat)
    of_begin, of_end, of_beat, of_bar = (frozen_ints(part[:count]) for part in parts)
    return _Stretches(begin=of_begin, end=of_end, beat=of_beat, beats_of_bar=of_bar)


def _plain(last_onset_s: float) -> Bars:
    """Even bars of 4/4 at 120, up to and including the first past the last onset."""
    bar_count = int(last_onset_s // (_PLAIN_BEAT_S * _PLAIN_BEATS_OF_BAR)) + 1
    beats = np.arange(bar_count * _PLAIN_BEATS_OF_BAR + 1) * _PLAIN_BEAT_S
    return Bars(bar_s=frozen_floats(beats[::_PLAIN_BEATS_OF_BAR]), beat_s=frozen_floats(beats))
