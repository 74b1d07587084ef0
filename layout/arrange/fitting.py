"""A choice by hand, as it were: spots put down one after the other where they still fit.

Good, quick and not the best: where a search for the best begins, and what it falls back on.
"""

from bisect import bisect_left, insort
from collections import defaultdict
from collections.abc import Sequence

import numpy as np

from layout.arrange.broken import breaches
from layout.arrange.loads import overloads, piled_up
from layout.arrange.moments_kept import Overrun, moments_kept
from layout.arrange.problem import NO_PLUCK, Problem
from layout.mechanics.arrays import IntArray


def fitted(problem: Problem, plucks: IntArray, preferred: Sequence[int]) -> tuple[int, ...] | None:
    """Spots of these plucks that keep every rule, none of which could be added to; None where a forced one has no room.

    Plucks that must sound come first, then preferred spots, then the others, heavier before lighter.

    Args:
        problem: The rules.
        plucks: Rising.
        preferred: Spots to keep where they fit.
    """
    fitting = _Fitting(problem)
    must = problem.must_sound[plucks]
    wanted = set(preferred)
    for pluck in plucks[must].tolist():
        if not fitting.put_best(pluck, wanted):
            return None
    others = plucks[~must]
    heaviest = np.array([_heaviest(problem, pluck) for pluck in others.tolist()], dtype=np.int64)
    extra = problem.parent[others] != NO_PLUCK
    kept = np.isin(others, problem.pluck[list(wanted)]) if wanted else np.zeros(len(others), dtype=np.bool_)
    for pluck in others[np.lexsort((others, -heaviest, ~kept, extra))].tolist():
        fitting.put_best(pluck, wanted)
    return fitting.spots


def _heaviest(problem: Problem, pluck: int) -> int:
    first, last = int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])
    return int(problem.worth[first:last].max(initial=0))


class _Fitting:
    """The spots put down so far, and whether one more fits."""

    def __init__(self, problem: Problem) -> None:
        self._problem = problem
        self._on_track: dict[int, list[int]] = defaultdict(list)
        self._spot_of: dict[int, int] = {}
        self._spread_of: dict[int, int] = {}  # by chord

    @property
    def spots(self) -> tuple[int, ...]:
        """The spots put down, by pluck."""
        return tuple(spot for _, spot in sorted(self._spot_of.items()))

    def put_best(self, pluck: int, wanted: set[int]) -> bool:
        """Put a pluck on the first of its spots that fits, wanted ones first, then by worth; False where none does."""
        problem = self._problem
        parent = int(problem.parent[pluck])
        if parent != NO_PLUCK and parent not in self._spot_of:
            return False
        spots = range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1]))
        for spot in sorted(
            spots, key=lambda one: (one not in wanted, int(problem.spread[one]), -int(problem.worth[one]))
        ):
            if self._fits(spot):
                insort(self._on_track[int(problem.track[spot])], spot)
                self._spot_of[pluck] = spot
                self._spread_of[int(problem.chord[pluck])] = int(problem.spread[spot])
                return True
        return False

    def _fits(self, spot: int) -> bool:
        problem = self._problem
        spread = int(problem.spread[spot])
        if self._spread_of.get(int(problem.chord[problem.pluck[spot]]), spread) != spread:
            return False
        if self._is_too_near(spot):
            return False
        company = problem.company[int(problem.track[spot])]
        there = [one for track in company for one in self._on_track[track]]
        if isinstance(moments_kept(problem, [*there, spot]), Overrun):
            return False
        return not breaches(problem, [*there, spot]) and self._carries(spot)

    def _is_too_near(self, spot: int) -> bool:
        """Whether a neighbour on the track is nearer than any nudging makes up for: a quick answer, mostly enough."""
        problem = self._problem
        row = self._on_track[int(problem.track[spot])]
        place = bisect_left(row, spot)
        before = row[place - 1] if place else None
        after = row[place] if place < len(row) else None
        return any(
            earlier is not None
            and later is not None
            and problem.latest_ns[later] - problem.earliest_ns[earlier] < problem.least_ns[earlier]
            for earlier, later in ((before, spot), (spot, after))
        )

    def _carries(self, spot: int) -> bool:
        """Whether the drive carries one more pluck."""
        problem = self._problem
        if problem.drive is None:
            return True
        near_ns = 2 * problem.drive.widest_ns
        standing = np.array([*self._spot_of.values(), spot], dtype=np.int64)
        apart_ns = np.abs(problem.asked_ns[standing] - problem.asked_ns[spot])
        near = (apart_ns < near_ns) | (problem.turn_ns - apart_ns < near_ns)
        return not overloads(problem, standing[near]) and not piled_up(problem, standing)
