"""Spots put down one after the other: whether one more keeps every rule, told from what stands near it.

The earliest moments of what stands, and its load at every moment there may be, are kept up from spot to
spot. One more only ever makes moments later and loads greater, so what it does not reach stays as it was.
"""

from bisect import bisect_left, bisect_right, insort
from collections import defaultdict, deque
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.arrange.problem import Beside, Drive, Problem
from layout.mechanics.arrays import IntArray, counted_out

_MOST_KEPT = 1_000_000  # loads; 8 MB: those of many long windows are worked out anew each time


class MomentsStanding:
    """The tracks with what stands on them, and the earliest moment of each spot."""

    def __init__(self, problem: Problem) -> None:
        self._problem = problem
        self._at_ns: dict[int, int] = {}
        self._on_track: dict[int, list[int]] = defaultdict(list)
        self._asked_on: dict[int, list[tuple[int, int]]] = defaultdict(list)  # on tracks beside others: asked, spot
        self._pairs: dict[int, list[Beside]] = defaultdict(list)
        for pair in problem.besides:
            self._pairs[pair.inner_index].append(pair)
            self._pairs[pair.outer_index].append(pair)
        self._reach_ns = int(problem.reach_ns.max(initial=0)) if problem.besides else 0

    def is_in_the_way(self, spot: int) -> bool:
        """Whether the spot is too near to one that stands, whatever the moments: a quick answer, mostly enough.

        Args:
            spot: Of a pluck none of whose spots stands.
        """
        track = int(self._problem.track[spot])
        return self._is_too_near(spot, self._on_track[track]) or self._leaves_too_little_web(spot, track)

    def put(self, spot: int) -> bool:
        """Put one more spot down if there are moments for it and all that stand; False where there are none.

        Args:
            spot: In nobody's way.
        """
        track, entry = int(self._problem.track[spot]), (int(self._problem.asked_ns[spot]), spot)
        insort(self._on_track[track], spot)
        if track in self._pairs:
            insort(self._asked_on[track], entry)
        later_ns = self._pushed(spot)
        if later_ns is None:
            self._on_track[track].remove(spot)
            if track in self._pairs:
                self._asked_on[track].remove(entry)
            return False
        self._at_ns.update(later_ns)
        return True

    def _is_too_near(self, spot: int, row: list[int]) -> bool:
        """Whether a neighbour on the track is nearer than any nudging makes up for."""
        problem, place = self._problem, bisect_left(row, spot)
        before = row[place - 1] if place else None
        after = row[place] if place < len(row) else None
        return any(
            earlier is not None
            and later is not None
            and problem.latest_ns[later] - problem.earliest_ns[earlier] < problem.least_ns[earlier]
            for earlier, later in ((before, spot), (spot, after))
        )

    def _leaves_too_little_web(self, spot: int, track: int) -> bool:
        asked_ns = int(self._problem.asked_ns[spot])
        for pair in self._pairs.get(track, ()):
            inner = track == pair.inner_index
            row = self._asked_on.get(pair.outer_index if inner else pair.inner_index, [])
            low_ns, high_ns = (pair.from_ns, pair.to_ns) if inner else (-pair.to_ns, -pair.from_ns)
            for turn_ns in (-self._problem.turn_ns, 0, self._problem.turn_ns):
                first = bisect_right(row, (asked_ns + turn_ns + low_ns, self._problem.spot_count))
                if first < len(row) and row[first][0] < asked_ns + turn_ns + high_ns:
                    return True
        return False

    def _pushed(self, spot: int) -> dict[int, int] | None:
        """The moments that become later with a spot that is on its track already, its own among them; None for none."""
        problem, at_ns = self._problem, self._at_ns
        own_ns = int(problem.earliest_ns[spot])
        for earlier, least_ns in self._pushers(spot):
            own_ns = max(own_ns, at_ns[earlier] + least_ns)
        later_ns = {spot: own_ns}
        if own_ns > problem.latest_ns[spot]:
            return None
        waiting = deque([spot])
        queued = {spot}
        while waiting:
            one = waiting.popleft()
            queued.discard(one)
            for later, least_ns in self._pushes(one):
                moment_ns = later_ns[one] + least_ns
                if moment_ns <= later_ns.get(later, at_ns.get(later, moment_ns - 1)):
                    continue
                if moment_ns > problem.latest_ns[later]:
                    return None
                later_ns[later] = moment_ns
                if later not in queued:
                    waiting.append(later)
                    queued.add(later)
        return later_ns

    def _pushes(self, spot: int) -> Iterator[tuple[int, int]]:
        """What a spot pushes, and how long after itself."""
        problem = self._problem
        row = self._on_track[int(problem.track[spot])]
        place = bisect_left(row, spot) + 1
        least_ns = int(problem.least_ns[spot])
        yield (row[place], least_ns) if place < len(row) else (row[0], least_ns - problem.turn_ns)
        yield from self._beside(spot, pushes=True)

    def _pushers(self, spot: int) -> Iterator[tuple[int, int]]:
        """What pushes a spot, itself left aside, and how long before it."""
        problem = self._problem
        row = self._on_track[int(problem.track[spot])]
        place = bisect_left(row, spot)
        before = row[place - 1]
        if before != spot:
            yield before, int(problem.least_ns[before]) - (0 if place else problem.turn_ns)
        yield from self._beside(spot, pushes=False)

    def _beside(self, spot: int, *, pushes: bool) -> Iterator[tuple[int, int]]:
        """As layout.arrange.moments_kept has it: the spots of tracks beside this one's that it pushes, or is pushed by.

        Those asked further off than both may be nudged are left aside: their windows keep them apart.
        """
        problem, track, asked_ns = self._problem, int(self._problem.track[spot]), int(self._problem.asked_ns[spot])
        reach_ns = 2 * self._reach_ns
        for pair in self._pairs.get(track, ()):
            inner = track == pair.inner_index
            row = self._asked_on.get(pair.outer_index if inner else pair.inner_index, [])
            # An outer spot asked after the stretch is pushed by the inner one; one asked before it pushes that.
            after = pushes == inner
            edge_ns = pair.to_ns if after else pair.from_ns
            for turn_ns in (-problem.turn_ns, 0, problem.turn_ns):
                sign = 1 if inner else -1
                # x_outer − x_inner + turn is on its side of the edge; sought is the other spot of the two.
                middle_ns = asked_ns + sign * (edge_ns - turn_ns)
                far_ns = middle_ns + reach_ns if pushes else middle_ns - reach_ns
                first = bisect_left(row, (min(middle_ns, far_ns),))
                last = bisect_right(row, (max(middle_ns, far_ns), problem.spot_count))
                for _, other in row[first:last]:
                    yield other, edge_ns - turn_ns if after else turn_ns - edge_ns


class LoadsStanding:
    """What stands loads the disc with, at every moment at which one of some spots may be asked.

    Attributes:
        entries: Moments looked at so far, each once for every spot: what it took.
    """

    def __init__(self, problem: Problem, drive: Drive, spots: IntArray) -> None:
        self._problem = problem
        self._drive = drive
        self._moments_ns = np.unique(problem.asked_ns[spots])
        self._loads = np.zeros(len(self._moments_ns), dtype=np.int64)
        self._standing: list[int] = []  # the moments of what stands, as places, rising; some twice
        self._at_release: dict[int, int] = {}  # by track
        self._place_of: dict[int, int] = {}
        self._runs_of: dict[int, list[_Run]] = {}
        self._kept = 0
        self.entries = 0

    def fits(self, spot: int) -> bool:
        """Whether with the spot the disc is loaded too much at no moment.

        Between the releases of what stands the load only grows towards the next of them, so the spot's own
        moment and those of what stands are all that need be looked at. Mostly the spot's own decides.
        """
        limit = self._drive.limit
        if self._loads[self._place(spot)] + self._load_at_release(spot) > limit:
            return False
        for run in self._runs(spot):
            standing = self._standing[bisect_left(self._standing, run.first) : bisect_left(self._standing, run.last)]
            self.entries += len(standing)
            if standing and (self._loads[standing] + run.load[np.array(standing) - run.first] > limit).any():
                return False
        return True

    def put(self, spot: int) -> None:
        """Load the disc with one more spot."""
        for run in self._runs(spot):
            self.entries += run.last - run.first
            self._loads[run.first : run.last] += run.load
        insort(self._standing, self._place(spot))

    def take(self, spot: int) -> None:
        """Take a spot that was put off again."""
        for run in self._runs(spot):
            self.entries += run.last - run.first
            self._loads[run.first : run.last] -= run.load
        del self._standing[bisect_left(self._standing, self._place(spot))]

    def work_out(self, spots: IntArray) -> None:
        """Work out what many spots load the disc with: a good deal sooner than each when it is first asked for."""
        self._keep(self._worked_out(spots))

    def _keep(self, runs_of: dict[int, list["_Run"]]) -> None:
        self._kept += sum(run.last - run.first for runs in runs_of.values() for run in runs)
        if self._kept <= _MOST_KEPT:
            self._runs_of |= runs_of

    def _worked_out(self, spots: IntArray) -> dict[int, list["_Run"]]:
        """The runs of each of these spots but those whose teeth are lifted for more than a turn."""
        drive, moments_ns, turn_ns = self._drive, self._moments_ns, self._problem.turn_ns
        widest_ns = drive.widest_of_track_ns[self._problem.track[spots]]
        spots, widest_ns = spots[widest_ns <= turn_ns], widest_ns[widest_ns <= turn_ns]
        released_ns = self._problem.asked_ns[spots][:, None] + np.array([0, turn_ns])
        first = moments_ns.searchsorted(released_ns - widest_ns[:, None], side="right").ravel()
        length = moments_ns.searchsorted(released_ns, side="right").ravel() - first
        run, moment = counted_out(first, length)
        loads = drive.loads(self._problem.track[spots][run // 2], released_ns.ravel()[run] - moments_ns[moment])
        runs_of: dict[int, list[_Run]] = {spot: [] for spot in spots.tolist()}
        end = 0
        for spot, place, count in zip(np.repeat(spots, 2).tolist(), first.tolist(), length.tolist(), strict=True):
            begin, end = end, end + count
            if count:
                runs_of[spot].append(_Run(first=place, last=place + count, load=loads[begin:end]))
        return runs_of

    def _place(self, spot: int) -> int:
        if spot not in self._place_of:
            self._place_of[spot] = int(self._moments_ns.searchsorted(self._problem.asked_ns[spot]))
        return self._place_of[spot]

    def _load_at_release(self, spot: int) -> int:
        """What a spot loads the disc with at its own moment, for the next turn too where its window reaches so far."""
        track = int(self._problem.track[spot])
        if track not in self._at_release:
            before_ns = (0, self._problem.turn_ns)
            self._at_release[track] = sum(self._drive.load(track, one_ns) for one_ns in before_ns)
        return self._at_release[track]

    def _runs(self, spot: int) -> list["_Run"]:
        if spot in self._runs_of:
            return self._runs_of[spot]
        runs_of = self._worked_out(np.array([spot]))
        self._keep(runs_of)
        return runs_of[spot] if runs_of else [self._whole_turn(spot)]

    def _whole_turn(self, spot: int) -> "_Run":
        asked_ns, track = int(self._problem.asked_ns[spot]), int(self._problem.track[spot])
        this_ns, next_ns = (one_ns - self._moments_ns for one_ns in (asked_ns, asked_ns + self._problem.turn_ns))
        load = self._drive.loads_of(track, this_ns) + self._drive.loads_of(track, next_ns)
        return _Run(first=0, last=len(load), load=load)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Run:
    """The loads of a spot, shape (last − first,), at the moments from one place to before another; no moment in two."""

    first: int
    last: int
    load: IntArray
