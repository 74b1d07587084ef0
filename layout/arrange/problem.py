"""One transposition of a tune on one comb as a problem with a best answer, in whole numbers.

A *spot* is one way to play one pluck: on one track, around one moment. Chosen is at most one spot of
every pluck, so that the worth is greatest and

1. a pluck that must sound has a spot; an extra pluck only where the pluck it belongs to has one;
2. there are moments x, each within its spot's window [earliest, latest], at which
   a. on a track, in the order of the plucks, each x is at least the spot's `least_ns` before the next,
      and the last at least as much before the first one turn later;
   b. two spots of `Beside` tracks stay on the side of the forbidden stretch on which they are asked;
3. no two spots of `Beside` tracks are asked within a forbidden stretch of each other;
4. at no asked moment do the teeth of all spots load the disc beyond the limit, every pluck counted
   at its asked moment;
5. all spots of one `chord` have the same `spread`: it is played together, or spread by one step;
6. of no `piled` set of spots does every pluck have its spot in the set: nudges would bring them nearer
   to each other than the drive carries. Such sets are found in choices that keep all else, and added.

A spot loses its `ringing_cost` where one of an earlier pluck on its track is asked less than the track's
`ringing_ns` before, chords unspread. Times are nanoseconds, loads thousandths of a newton millimetre, worths those
of layout.arrange.weights: sums of whole numbers are exact, so the answer is the same everywhere.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from layout.mechanics.arrays import BoolArray, IntArray

NS_PER_S = 1_000_000_000
NS_PER_MS = 1_000_000
_MOST_IN_64_BITS = 2**63 - 1

NO_PLUCK = -1  # stands in an array of plucks where there is none
NO_SPOT = -1  # stands in an array of spots where there is none


@dataclass(frozen=True, slots=True, kw_only=True)
class Beside:
    """Two tracks too near to each other: where x(outer) − x(inner) must not lie, ends allowed, turn for turn."""

    inner_index: int
    outer_index: int
    from_ns: int
    to_ns: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Lift:
    """One tooth of a track: its load grows in proportion from 0 to `load` over the window before the release."""

    load: int
    window_ns: int


@dataclass(frozen=True, kw_only=True)
class Drive:
    """What the teeth load the disc with, by track, and what it may carry."""

    lifts: tuple[tuple[Lift, ...], ...]
    limit: int

    @cached_property
    def widest_ns(self) -> int:
        """The longest window of all teeth; 0 for none."""
        return max((lift.window_ns for lifts in self.lifts for lift in lifts), default=0)

    @cached_property
    def widest_of_track_ns(self) -> IntArray:
        """Shape (tracks,). The longest window of each track's teeth; 0 for a track that lifts none."""
        return np.array([max((lift.window_ns for lift in lifts), default=0) for lifts in self.lifts], dtype=np.int64)

    @cached_property
    def teeth_of_track(self) -> IntArray:
        """Shape (tracks,). How many teeth each track lifts."""
        return np.array([len(lifts) for lifts in self.lifts], dtype=np.int64)

    def load(self, track: int, before_ns: int) -> int:
        """The load of a pluck on a track this long before its release, rounded up; 0 outside the window."""
        return int(self.loads(np.array([track]), np.array([before_ns]))[0])

    def loads(self, track: IntArray, before_ns: IntArray) -> IntArray:
        """The same for many plucks: shape (n,) each."""
        loads, windows_ns, before = self.load_table[track], self.window_table[track], before_ns[:, None]
        left_ns = np.where((before >= 0) & (before < windows_ns), windows_ns - before, 0)
        if self._is_vast:
            loads, windows_ns, left_ns = loads.astype(object), windows_ns.astype(object), left_ns.astype(object)
        found = (-(-loads * left_ns // windows_ns)).astype(np.int64)
        return np.asarray(found.sum(axis=1))

    def loads_of(self, track: int, before_ns: IntArray) -> IntArray:
        """The same for plucks of one track, a good deal sooner: shape (n,)."""
        found = np.zeros(len(before_ns), dtype=np.int64)
        for lift in self.lifts[track]:
            left_ns = np.where((before_ns >= 0) & (before_ns < lift.window_ns), lift.window_ns - before_ns, 0)
            if self._is_vast:
                left_ns = left_ns.astype(object)
            found += (-(-lift.load * left_ns // lift.window_ns)).astype(np.int64)
        return found

    @cached_property
    def load_table(self) -> IntArray:
        """Shape (tracks, most lifts of one). `load` of every lift, by track; 0 where a track has no more."""
        return self._table([[lift.load for lift in lifts] for lifts in self.lifts], 0)

    @cached_property
    def window_table(self) -> IntArray:
        """Shape (tracks, most lifts of one). `window_ns` of every lift, by track; 1 where a track has no more."""
        return self._table([[lift.window_ns for lift in lifts] for lifts in self.lifts], 1)

    @cached_property
    def _is_vast(self) -> bool:
        """Whether a load times a window is more than 64 bits hold."""
        return any(lift.load * lift.window_ns > _MOST_IN_64_BITS for lifts in self.lifts for lift in lifts)

    def _table(self, rows: Sequence[Sequence[int]], missing: int) -> IntArray:
        width = max(map(len, rows), default=0)
        return np.array([[*row, *[missing] * (width - len(row))] for row in rows], dtype=np.int64).reshape(
            len(rows), width
        )


@dataclass(frozen=True, kw_only=True, eq=False)  # no slots: what is worked out from the arrays is kept
class Problem:
    """Spots of n plucks and what forbids them, as the module's text says.

    Attributes:
        must_sound: Shape (n,). Whether a ruling forbids to leave the pluck out.
        parent: Shape (n,). The pluck an extra one belongs to, before it in order; NO_PLUCK for the others.
        first_spot: Shape (n + 1,). Spots of pluck p are first_spot[p] to first_spot[p + 1] − 1,
            an unspread one first.
        pluck: Shape (m,). The pluck of each spot, rising.
        track: Shape (m,). Its track, from 0.
        worth: Shape (m,). Its weight times its fit, above 0.
        asked_ns: Shape (m,). The moment asked for; where the chord is spread, that of the pluck in the spread chord.
        earliest_ns: Shape (m,). The first moment it may be nudged to.
        latest_ns: Shape (m,). The last.
        least_ns: Shape (m,). From this spot's moment to the next on its track.
        chord: Shape (n,). The plucks asked for at one moment have one number.
        spread: Shape (m,). 0 where the chord is played as asked, else the step by which it is spread;
            a spread spot's window is its one moment.
        ringing_cost: Shape (m,). What is lost where the track still rings; below worth.
        ringing_ns: Shape (tracks,). How long a tooth rings; 0 where that costs nothing.
        turn_ns: One turn.
        besides: The tracks that may come too near to each other.
        drive: The load limit, or None where none is kept.
        piled: Sets of spots, by pluck, in none of which every pluck must sound; empty when a problem is posed.
    """

    must_sound: BoolArray
    parent: IntArray
    first_spot: IntArray
    pluck: IntArray
    track: IntArray
    worth: IntArray
    asked_ns: IntArray
    earliest_ns: IntArray
    latest_ns: IntArray
    least_ns: IntArray
    chord: IntArray
    spread: IntArray
    ringing_cost: IntArray
    ringing_ns: IntArray
    turn_ns: int
    besides: tuple[Beside, ...]
    drive: Drive | None
    piled: tuple[tuple[int, ...], ...] = ()

    @cached_property
    def unspread_ns(self) -> IntArray:
        """Shape (m,). The moment each spot's pluck is asked for while its chord is not spread."""
        return np.asarray(self.asked_ns[self.first_spot[self.pluck]])

    @cached_property
    def reach_ns(self) -> IntArray:
        """Shape (m,). How far each spot may be nudged, the farther way."""
        return np.asarray(np.maximum(self.latest_ns - self.asked_ns, self.asked_ns - self.earliest_ns))

    @cached_property
    def widest_ns(self) -> int:
        """The longest window of all spots; 0 for none."""
        return int((self.latest_ns - self.earliest_ns).max(initial=0))

    @cached_property
    def company(self) -> tuple[tuple[int, ...], ...]:
        """For every track the tracks it may push or come too near to, directly or through others, itself included."""
        root = list(range(len(self.ringing_ns)))
        for pair in self.besides:
            low, high = sorted((root[pair.inner_index], root[pair.outer_index]))
            root = [low if one == high else one for one in root]
        members = {one: tuple(track for track, other in enumerate(root) if other == one) for one in set(root)}
        return tuple(members[one] for one in root)

    def equals(self, spot: int) -> list[int]:
        """The spots of the same pluck that differ from this one by their track alone, as far as worth and spread go."""
        pluck = int(self.pluck[spot])
        first, last = self.first_spot[pluck : pluck + 2].tolist()
        worth, spread = self.worth[first:last].tolist(), self.spread[first:last].tolist()
        like = worth[spot - first], spread[spot - first]
        return [first + place for place, one in enumerate(zip(worth, spread, strict=True)) if one == like]

    @property
    def pluck_count(self) -> int:
        """How many plucks are asked for."""
        return len(self.must_sound)

    @property
    def spot_count(self) -> int:
        """How many spots they have."""
        return len(self.pluck)
