"""Teeth of one pitch take turns: each pluck on the one that has been quiet longest.

Which of several equal tracks a pluck stands on is worth nothing to the search, but a tooth sounds
better that does not ring any more, and its star wheel has longer to settle. Moments stay.
"""

from bisect import bisect_left, insort
from collections import defaultdict
from collections.abc import Mapping, Sequence

import numpy as np

from layout.arrange.problem import Problem
from layout.arrange.put_down import LoadsStanding


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
    board = _Board(problem, {spot: at_ns[spot] for spot in spots})
    for spot in sorted(spots, key=lambda one: (at_ns[one], one)):
        board.move_to_most_rested(spot)
    return tuple(sorted(board.at_ns))


class _Board:
    """Chosen spots on their tracks, sorted by moment."""

    def __init__(self, problem: Problem, at_ns: dict[int, int]) -> None:
        self._problem = problem
        self.at_ns = at_ns
        # A pluck moved beside another that is nudged could be pushed by it; such tracks are left as they are.
        self._beside = {track for pair in problem.besides for track in (pair.inner_index, pair.outer_index)}
        # Plain lists: single numbers are read from them a good deal sooner than from arrays.
        self._track: list[int] = problem.track.tolist()
        self._least_ns: list[int] = problem.least_ns.tolist()
        self._pluck: list[int] = problem.pluck.tolist()
        self._on_track: dict[int, list[tuple[int, ...]]] = defaultdict(list)
        for spot, moment_ns in at_ns.items():
            insort(self._on_track[self._track[spot]], (moment_ns, spot))
        self._equals = {spot: self._equals_of(spot) for spot in at_ns}
        self._loads: LoadsStanding | None = None
        if problem.drive is not None:
            chosen = np.array(list(at_ns), dtype=np.int64)
            self._loads = LoadsStanding(problem, problem.drive, chosen)
            others = [equal for equals in self._equals.values() for equal in equals]
            self._loads.work_out(np.concatenate([chosen, np.array(others, dtype=np.int64)]))
            for spot in at_ns:
                self._loads.put(spot)

    def move_to_most_rested(self, spot: int) -> None:
        """Put a spot's pluck on the equal spot whose track was plucked longest ago, if that is another."""
        at_ns = self.at_ns[spot]
        equals = self._equals[spot]
        if not equals:
            return
        row = self._on_track[self._track[spot]]
        row.remove((at_ns, spot))
        del self.at_ns[spot]
        best = min([spot, *equals], key=lambda one: self._rank(one, at_ns, spot))
        if self._loads is not None and best != spot:
            self._loads.take(spot)
            self._loads.put(best)
        insort(self._on_track[self._track[best]], (at_ns, best))
        self.at_ns[best] = at_ns

    def _equals_of(self, spot: int) -> list[int]:
        equals = self._problem.equals(spot)
        return [one for one in equals if one != spot and self._track[one] not in self._beside]

    def _rank(self, spot: int, at_ns: int, now: int) -> tuple[bool, float, int, int]:
        """Spots without room last, then by when the track last sounded; of unused tracks the fastest."""
        track = self._track[spot]
        row = self._on_track[track]
        place = bisect_left(row, (at_ns, spot))
        last_ns = row[place - 1][0] if place else -float("inf")
        return not (spot == now or self._has_room(spot, at_ns, now)), last_ns, self._least_ns[spot], -track

    def _has_room(self, spot: int, at_ns: int, now: int) -> bool:
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
        return self._is_carried(spot, now)

    def _is_carried(self, spot: int, now: int) -> bool:
        """Whether the drive carries the spot beside all that stand, its equal that stands now taken away."""
        problem, loads = self._problem, self._loads
        if loads is None or problem.drive is None:
            return True
        lifts = problem.drive.lifts
        if lifts[self._track[spot]] == lifts[self._track[now]]:
            return True
        loads.take(now)
        fits = loads.fits(spot)
        loads.put(now)
        return fits
