"""The moments at which spots crowd the drive: those worth looking at spot by spot.

Of every track the spots lifted at a moment stand side by side in time, so their loads are told from how many
they are and from the sum of their releases.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.arrange.problem import Drive, Problem
from layout.mechanics.arrays import FloatArray, IntArray, begins_run, counted_out

_CELLS_AT_A_TIME = 1 << 19  # rows at moments looked at together: some tens of megabytes

_ROUNDED_UP = 1 + 1e-6  # far more than sums of some ten thousand floating-point numbers may be short
_ROUNDING_NS = 4.0  # what sums of times may be short, where windows are so long that they are not exact


def crowded_ns(problem: Problem, drive: Drive, in_time: IntArray) -> IntArray:
    """The asked moments, rising, at which the teeth of all these spots together may load the disc too much.

    Reckoned in floating point and rounded up well, so that no such moment is missed. A moment's loads are
    added by track, tooth and turn, so the sum is the same wherever it is reckoned.

    Args:
        problem: The rules.
        drive: Of the problem.
        in_time: Spots in the order of their asked moments; none give no moments.
    """
    asked_ns = problem.asked_ns[in_time]
    moments_ns = asked_ns[begins_run(asked_ns)]
    most = np.zeros(len(moments_ns))
    for lifts in _in_rows(problem, drive, in_time, moments_ns).some_at_a_time():
        moment, load = _loads(lifts, moments_ns)
        np.add.at(most, moment, load)
    return np.asarray(moments_ns[most * _ROUNDED_UP > drive.limit])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Lifts:
    """Teeth lifted at one moment or more, in rows by track, tooth and turn, each row in time.

    Attributes:
        row: Shape (n,). Rising.
        released_ns: Shape (n,). When the pluck is asked for; a turn later where it is the next turn's.
        load: Shape (n,). At the release.
        window_ns: Shape (n,). How long before it the tooth is lifted; one for all of a row.
        first: Shape (n,). The first moment at which it is lifted, as a place; rising in a row.
        last: Shape (n,). One after the last such moment; rising in a row.
    """

    row: IntArray
    released_ns: IntArray
    load: IntArray
    window_ns: IntArray
    first: IntArray
    last: IntArray

    def of(self, chosen: IntArray | slice) -> "_Lifts":
        """Some of them, or all in another order."""
        return _Lifts(**{name: getattr(self, name)[chosen] for name in self.__slots__})

    def new_moments(self) -> tuple[IntArray, IntArray]:
        """From which of its moments on, and for how many, the lift before it in its row is lifted no more."""
        begin = self.first.copy()
        same = self.row[1:] == self.row[:-1]
        begin[1:][same] = np.maximum(self.first[1:], self.last[:-1])[same]
        return begin, self.last - begin

    def some_at_a_time(self) -> Iterator["_Lifts"]:
        """Whole rows, so many at a time as memory allows."""
        if not len(self.row):
            return
        cells = np.cumsum(self.new_moments()[1])
        ends = np.append(np.flatnonzero(np.diff(self.row)) + 1, len(self.row))
        begin = 0
        while begin < len(self.row):
            before = cells[begin - 1] if begin else 0
            fits = ends[(ends > begin) & (cells[ends - 1] <= before + _CELLS_AT_A_TIME)]
            end = int(fits[-1]) if len(fits) else int(ends[ends > begin][0])
            yield self.of(slice(begin, end))
            begin = end


def _in_rows(problem: Problem, drive: Drive, in_time: IntArray, moments_ns: IntArray) -> _Lifts:
    """Every tooth the spots lift at some of the moments, for this turn and for the next.

    Once more for the turn after: its first plucks may be lifted while the last of this one are.
    """
    track = problem.track[in_time]
    place, tooth = counted_out(np.zeros_like(track), drive.teeth_of_track[track])
    track = track[place]
    released_ns, window_ns = problem.asked_ns[in_time][place], drive.window_table[track, tooth]
    early = np.flatnonzero(released_ns + problem.turn_ns - window_ns < moments_ns[-1:])
    both = np.concatenate([np.arange(len(place)), early])
    is_next = np.arange(len(both)) >= len(place)
    row = 2 * (drive.load_table.shape[1] * track[both] + tooth[both]) + is_next
    order = np.argsort(row, kind="stable")
    both, is_next = both[order], is_next[order]
    released_ns, window_ns = released_ns[both] + problem.turn_ns * is_next, window_ns[both]
    return _Lifts(
        row=row[order],
        released_ns=released_ns,
        load=drive.load_table[track[both], tooth[both]],
        window_ns=window_ns,
        first=np.searchsorted(moments_ns, released_ns - window_ns, side="right"),
        last=np.searchsorted(moments_ns, released_ns, side="right"),
    )


def _loads(lifts: _Lifts, moments_ns: IntArray) -> tuple[IntArray, FloatArray]:
    """The moments at which a row has something lifted, row by row, and what all of the row load the disc with then."""
    place, moment = counted_out(*lifts.new_moments())
    grain = len(moments_ns) + 1
    at = lifts.row[place] * grain + moment
    first = np.searchsorted(lifts.row * grain + lifts.last, at, side="right")
    last = np.searchsorted(lifts.row * grain + lifts.first, at, side="right")
    count, window_ns = last - first, lifts.window_ns[place]
    sums_ns = np.concatenate([[0], np.cumsum(lifts.released_ns)])
    before_ns = (sums_ns[last] - sums_ns[first] - count * moments_ns[moment]).astype(np.float64)
    left_ns = count * window_ns.astype(np.float64) - before_ns + _ROUNDING_NS
    return moment, lifts.load[place] * (left_ns / window_ns) + count  # every load is rounded up to a whole one
