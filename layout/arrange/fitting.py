"""A choice by hand, as it were: spots put down one after the other where they still fit.

Good, quick and not the best: where a search for the best begins, and what it falls back on.
"""

from collections import defaultdict
from collections.abc import Sequence

import numpy as np

from layout.arrange.budget import ENTRIES_A_LOOK, LOOKS_TO_FIT, Budget
from layout.arrange.problem import NO_PLUCK, Problem
from layout.arrange.put_down import LoadsStanding, MomentsStanding
from layout.mechanics.arrays import IntArray

MOST_LOOKS_TO_FIT = 4_000_000  # looks for one choice: some seconds; a full disc of ordinary teeth takes a tenth of it


def fitted(
    problem: Problem, plucks: IntArray, preferred: Sequence[int], budget: Budget | None = None
) -> tuple[int, ...] | None:
    """Spots of these plucks that keep every rule, none of which could be added to; None where a forced one has no room.

    Plucks that must sound come first, then preferred spots, then the others, heavier before lighter.
    Where that takes MOST_LOOKS_TO_FIT, the plucks still to come are left out: the lightest.

    Args:
        problem: The rules.
        plucks: Rising.
        preferred: Spots to keep where they fit.
        budget: What this takes is taken off; what is left of it does not matter, since some choice there must be.
    """
    fitting = _Fitting(problem, plucks)
    spots = _put_down(fitting, problem, plucks, set(preferred))
    if budget is not None:
        budget.spend_looks(fitting.looks)
    return spots


def _put_down(fitting: "_Fitting", problem: Problem, plucks: IntArray, wanted: set[int]) -> tuple[int, ...] | None:
    must = problem.must_sound[plucks]
    for pluck in plucks[must].tolist():
        if not fitting.put_best(pluck, wanted):
            return None
    others = plucks[~must]
    heaviest = np.array([_heaviest(problem, pluck) for pluck in others.tolist()], dtype=np.int64)
    extra = problem.parent[others] != NO_PLUCK
    kept = np.isin(others, problem.pluck[list(wanted)])
    for pluck in others[np.lexsort((others, -heaviest, ~kept, extra))].tolist():
        if fitting.looks > MOST_LOOKS_TO_FIT:
            break
        fitting.put_best(pluck, wanted)
    return fitting.spots


def _heaviest(problem: Problem, pluck: int) -> int:
    first, last = int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])
    return int(problem.worth[first:last].max(initial=0))


class _Fitting:
    """The spots put down so far, and whether one more fits."""

    def __init__(self, problem: Problem, plucks: IntArray) -> None:
        self._problem = problem
        self._moments = MomentsStanding(problem)
        self._loads = None
        if problem.drive is not None:
            self._loads = LoadsStanding(problem, problem.drive, np.flatnonzero(np.isin(problem.pluck, plucks)))
        self._piled: dict[int, list[tuple[int, ...]]] = defaultdict(list)
        for pile in problem.piled:
            for spot in pile:
                self._piled[spot].append(pile)
        self._tried = 0
        self._spot_of: dict[int, int] = {}
        self._spread_of: dict[int, int] = {}  # by chord

    @property
    def spots(self) -> tuple[int, ...]:
        """The spots put down, by pluck."""
        return tuple(spot for _, spot in sorted(self._spot_of.items()))

    @property
    def looks(self) -> int:
        """Looks that all that was put down or tried so far takes."""
        entries = 0 if self._loads is None else self._loads.entries
        return LOOKS_TO_FIT * self._tried + entries // ENTRIES_A_LOOK

    def put_best(self, pluck: int, wanted: set[int]) -> bool:
        """Put a pluck on the first of its spots that fits, wanted ones first, then by worth; False where none does."""
        problem = self._problem
        self._tried += 1
        parent = int(problem.parent[pluck])
        if parent != NO_PLUCK and parent not in self._spot_of:
            return False
        spots = range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1]))
        for spot in sorted(
            spots, key=lambda one: (one not in wanted, int(problem.spread[one]), -int(problem.worth[one]))
        ):
            if self._put(pluck, spot):
                return True
        return False

    def _put(self, pluck: int, spot: int) -> bool:
        chord, spread = int(self._problem.chord[pluck]), int(self._problem.spread[spot])
        if self._spread_of.get(chord, spread) != spread or self._piles_up(pluck, spot):
            return False
        if self._moments.is_in_the_way(spot) or (self._loads is not None and not self._loads.fits(spot)):
            return False
        if not self._moments.put(spot):
            return False
        if self._loads is not None:
            self._loads.put(spot)
        self._spot_of[pluck] = spot
        self._spread_of[chord] = spread
        return True

    def _piles_up(self, pluck: int, spot: int) -> bool:
        """Whether with the spot every pluck of a pile would have its spot in it."""
        of = self._problem.pluck
        return any(
            all(self._spot_of.get(other) in pile for other in {int(of[one]) for one in pile} - {pluck})
            for pile in self._piled.get(spot, ())
        )
