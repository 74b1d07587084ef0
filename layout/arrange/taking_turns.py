"""Teeth of one pitch take turns: each pluck on the one that has been quiet longest.

Which of several equal tracks a pluck stands on is worth nothing to the search, but a tooth sounds
better that does not ring any more, and its star wheel has longer to settle. Moments stay.
"""

from bisect import bisect_left, insort
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence

import numpy as np

from layout.arrange.loads import heavy_moments, lifted_count
from layout.arrange.problem import Lift, Problem
from layout.arrange.put_down import LoadsStanding
from layout.mechanics.arrays import IntArray, counted_out

MOST_LOOKED_AT = 200_000  # spots lifted at crowded moments; a full disc of ordinary teeth has some ten thousand


def taking_turns(problem: Problem, spots: Sequence[int], at_ns: Mapping[int, int]) -> tuple[int, ...]:
    """The same plucks at the same moments, each on the most rested of its equal tracks with room.

    Spots that differ in worth, window or rest from the one chosen are no equals. Where ringing
    costs worth the search has chosen already, and nothing is changed.

    Args:
        problem: The rules.
        spots: A choice that keeps every rule, by pluck.
        at_ns: When each spot sounds.
    """
    if problem.ringing_cost.any():
        return tuple(spots)
    board = _Board(problem, {spot: at_ns[spot] for spot in spots}, _equals(problem, spots))
    for spot in sorted(spots, key=lambda one: (at_ns[one], one)):
        board.move_to_most_rested(spot)
    return tuple(sorted(board.at_ns))


def _equals(problem: Problem, spots: Sequence[int]) -> dict[int, list[int]]:
    """Of each spot that has any the spots of its pluck that differ from it by their track alone.

    A pluck moved beside another that is nudged could be pushed by it; tracks with others beside them are left out.
    """
    is_beside = np.zeros(len(problem.ringing_ns), dtype=np.bool_)
    is_beside[[track for pair in problem.besides for track in (pair.inner_index, pair.outer_index)]] = True
    chosen = np.array(spots, dtype=np.int64)
    first = problem.first_spot[problem.pluck[chosen]]
    run, other = counted_out(first, problem.first_spot[problem.pluck[chosen] + 1] - first)
    spot = chosen[run]
    is_equal = (other != spot) & ~is_beside[problem.track[other]]
    is_equal &= (problem.worth[other] == problem.worth[spot]) & (problem.spread[other] == problem.spread[spot])
    equals: dict[int, list[int]] = defaultdict(list)
    for one, equal in zip(spot[is_equal].tolist(), other[is_equal].tolist(), strict=True):
        equals[one].append(equal)
    return equals


class _Board:
    """Chosen spots on their tracks, sorted by moment."""

    def __init__(self, problem: Problem, at_ns: dict[int, int], equals: Mapping[int, Sequence[int]]) -> None:
        self._problem = problem
        self.at_ns = at_ns
        self._equals = equals
        # Plain lists: single numbers are read from them a good deal sooner than from arrays.
        self._track: list[int] = problem.track.tolist()
        self._least_ns: list[int] = problem.least_ns.tolist()
        self._pluck: list[int] = problem.pluck.tolist()
        self._on_track: dict[int, list[tuple[int, int]]] = defaultdict(list)
        for moment_ns, spot in sorted((moment_ns, spot) for spot, moment_ns in at_ns.items()):
            self._on_track[self._track[spot]].append((moment_ns, spot))
        self._load = _Load(problem, at_ns, [*at_ns, *(equal for others in equals.values() for equal in others)])

    def move_to_most_rested(self, spot: int) -> None:
        """Put a spot's pluck on the equal spot whose track was plucked longest ago, if that is another with room."""
        equals = self._equals.get(spot)
        if not equals:
            return
        at_ns = self.at_ns.pop(spot)
        row = self._on_track[self._track[spot]]
        del row[bisect_left(row, (at_ns, spot))]
        by_rest = sorted([spot, *equals], key=lambda one: self._rest(one, at_ns))
        best = next(one for one in by_rest if one == spot or self._has_room(one, at_ns, spot))
        if best != spot:
            self._load.move(spot, best)
        insort(self._on_track[self._track[best]], (at_ns, best))
        self.at_ns[best] = at_ns

    def _rest(self, spot: int, at_ns: int) -> tuple[float, int, int]:
        """When the track last sounded; of unused tracks the fastest comes first."""
        track = self._track[spot]
        row = self._on_track[track]
        place = bisect_left(row, (at_ns, spot))
        return row[place - 1][0] if place else -float("inf"), self._least_ns[spot], -track

    def _has_room(self, spot: int, at_ns: int, now: int) -> bool:
        """Whether the spot's track and the drive have room for it instead of its equal that stands now."""
        turn_ns, least_ns, pluck = self._problem.turn_ns, self._least_ns, self._pluck
        row = self._on_track[self._track[spot]]
        if least_ns[spot] > turn_ns:
            return False  # its own next turn comes too soon
        if row:
            place = bisect_left(row, (at_ns, spot))
            (before_ns, before), (after_ns, after) = row[place - 1], row[place % len(row)]
            before_ns -= turn_ns if place == 0 else 0
            after_ns += turn_ns if place == len(row) else 0
            if at_ns - before_ns < least_ns[before] or after_ns - at_ns < least_ns[spot]:
                return False
            if (place and pluck[before] > pluck[spot]) or (place < len(row) and pluck[spot] > pluck[after]):
                return False
        return self._load.is_carried(spot, now)


class _Load:
    """What stands loads the disc with, where that may become too much: elsewhere whatever takes turns is carried."""

    def __init__(self, problem: Problem, chosen: Iterable[int], candidates: Sequence[int]) -> None:
        self._lifts: tuple[tuple[Lift, ...], ...] = ()
        self._track = problem.track
        self._heavy: set[int] = set()
        if problem.drive is None:
            return
        self._lifts = problem.drive.lifts
        self._heavy = _may_overload(problem, np.array(candidates, dtype=np.int64))
        heavy = np.array(sorted(self._heavy), dtype=np.int64)
        self._standing = LoadsStanding(problem, problem.drive, heavy)
        self._standing.work_out(heavy)
        for spot in chosen:
            if spot in self._heavy:
                self._standing.put(spot)

    def move(self, spot: int, to: int) -> None:
        """Take a spot away and put its equal down."""
        if spot in self._heavy:
            self._standing.take(spot)
        if to in self._heavy:
            self._standing.put(to)

    def is_carried(self, spot: int, now: int) -> bool:
        """Whether the drive carries the spot beside all that stand, its equal that stands now taken away."""
        if spot not in self._heavy or self._lifts[self._track[spot]] == self._lifts[self._track[now]]:
            return True
        if now not in self._heavy:
            return self._standing.fits(spot)
        self._standing.take(now)
        fits = self._standing.fits(spot)
        self._standing.put(now)
        return fits


def _may_overload(problem: Problem, candidates: IntArray) -> set[int]:
    """The spots lifted where the heaviest of each pluck's would load the disc too much; all, where many are lifted."""
    if lifted_count(problem, candidates) > MOST_LOOKED_AT:
        return set(candidates.tolist())
    return {spot for spots, _ in heavy_moments(problem, candidates) for spot in spots}
