"""From ticks to seconds, without drift.

Between two tempo changes a tick lasts tempo / division microseconds. Sums are kept in whole numbers
of 1 / denominator seconds and divided once, so every time is the double nearest to the exact one.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from layout.errors import MidiReadError
from layout.mechanics.arrays import FloatArray, IntArray
from layout.read.faults import WRITER

DEFAULT_TEMPO_US = 500_000  # Standard MIDI Files 1.0: without a tempo event, 120 quarter notes a minute

_US_PER_S = 1_000_000

# Division codes and their frame rates, frames / seconds (Standard MIDI Files 1.0; 29 means SMPTE
# drop frame, whose rate is 30000/1001: SMPTE ST 12-1).
_FRAME_RATES = {-24: (24, 1), -25: (25, 1), -29: (30_000, 1001), -30: (30, 1)}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TempoMap:
    """Exact time of every tick: m stretches of even speed.

    Attributes:
        begin_tick: Shape (m,), rising, the first 0.
        begin_time: Shape (m,). Exact whole numbers (of any size) of 1 / denominator seconds.
        tick_time: Shape (m,). How long a tick of the stretch lasts, in the same unit.
        denominator: Parts of a second.
        ticks_per_quarter: Of a quarter note; None with a division in frames, which states none.
    """

    begin_tick: IntArray
    begin_time: NDArray[np.object_]
    tick_time: NDArray[np.object_]
    denominator: int
    ticks_per_quarter: int | None

    def exact_times(self, tick: IntArray) -> NDArray[np.object_]:
        """Exact whole numbers of 1 / denominator seconds from tick 0; empty in, empty out."""
        stretch = np.searchsorted(self.begin_tick, tick, side="right") - 1
        within = (tick - self.begin_tick[stretch]).astype(object)
        times: NDArray[np.object_] = self.begin_time[stretch] + within * self.tick_time[stretch]
        return times

    def seconds_at(self, part: IntArray, *, parts_per_tick: int) -> FloatArray:
        """The doubles nearest to the times of places that may lie between ticks.

        Args:
            part: Places in parts of a tick from tick 0; empty in, empty out.
            parts_per_tick: How many parts a tick has.
        """
        begin = self.begin_tick * parts_per_tick
        stretch = np.searchsorted(begin, part, side="right") - 1
        within = (part - begin[stretch]).astype(object)
        parts: NDArray[np.object_] = self.begin_time[stretch] * parts_per_tick + within * self.tick_time[stretch]
        quotients: NDArray[np.object_] = parts / (self.denominator * parts_per_tick)
        return quotients.astype(np.float64)

    def seconds(self, exact_times: NDArray[np.object_]) -> FloatArray:
        """The doubles nearest to exact times (Python divides whole numbers of any size correctly rounded)."""
        quotients: NDArray[np.object_] = exact_times / self.denominator
        return quotients.astype(np.float64)


@dataclass(frozen=True, slots=True, kw_only=True)
class TickUnit:
    """What the header says of a tick's length.

    Attributes:
        denominator: Parts of a second that exact times are counted in.
        tick_time: How many of them a tick lasts where no tempo event has been met.
        ticks_per_quarter: Of a quarter note; None with a division in frames, whose ticks no tempo event changes.
    """

    denominator: int
    tick_time: int
    ticks_per_quarter: int | None


def tick_unit(division: int, *, at: int) -> TickUnit:
    """Read the header's division field.

    Args:
        division: 16 bits. High bit clear: ticks per quarter note. High bit set: a frame rate (high
            byte, two's complement) and ticks per frame (low byte).
        at: Its byte offset, for the error.

    Raises:
        MidiReadError: The division is 0, or no frame rate the specification knows.
    """
    if division & 0x8000:
        return _frame_unit((division >> 8) - 0x100, division & 0xFF, at)
    if division == 0:
        raise _bad_division(at, "a division of 0", "at least 1 tick per quarter note")
    return TickUnit(denominator=division * _US_PER_S, tick_time=DEFAULT_TEMPO_US, ticks_per_quarter=division)


def _frame_unit(code: int, ticks_per_frame: int, at: int) -> TickUnit:
    if code not in _FRAME_RATES:
        allowed = "a frame code of -24, -25, -29 or -30"
        raise _bad_division(at, f"a division with the frame code {code}", allowed)
    if ticks_per_frame == 0:
        raise _bad_division(at + 1, "a division of 0 ticks per frame", "at least 1 tick per frame")
    frames, seconds = _FRAME_RATES[code]
    return TickUnit(denominator=frames * ticks_per_frame, tick_time=seconds, ticks_per_quarter=None)


def tempo_map(unit: TickUnit, tempi: list[tuple[int, int, int]]) -> TempoMap:
    """The tempo map of one sequence.

    Args:
        unit: What the header says of a tick.
        tempi: (tick, byte offset, microseconds per quarter note) over all tracks, in any order. Of
            several at one tick the last by byte offset holds: by track, then by place in the track.
    """
    changes = {0: unit.tick_time}
    if unit.ticks_per_quarter is not None:
        changes.update((tick, tempo_us) for tick, _, tempo_us in sorted(tempi))
    return _joined(changes, unit)


def _joined(changes: dict[int, int], unit: TickUnit) -> TempoMap:
    """Join stretches, given as tick lengths by first tick in rising order, end to end."""
    begin_time: list[int] = []
    time = last_tick = tick_time = 0
    for tick, next_tick_time in changes.items():
        time += (tick - last_tick) * tick_time
        begin_time.append(time)
        last_tick, tick_time = tick, next_tick_time
    return TempoMap(
        begin_tick=np.array(list(changes), dtype=np.int64),
        begin_time=np.array(begin_time, dtype=object),
        tick_time=np.array(list(changes.values()), dtype=object),
        denominator=unit.denominator,
        ticks_per_quarter=unit.ticks_per_quarter,
    )


def _bad_division(byte_offset: int, found: str, expected: str) -> MidiReadError:
    return MidiReadError(byte_offset=byte_offset, found=found, expected=expected, remedy=WRITER)
