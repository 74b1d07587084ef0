"""Which forced plucks have no room together: as few as will do, so that a person can see why."""

from collections.abc import Callable, Sequence

import numpy as np

from layout.arrange.broken import broken_by
from layout.arrange.budget import LOOKS_TO_TRY, Budget
from layout.arrange.by_time import Best, Stuck, best_by_time
from layout.arrange.coupled import best_coupled
from layout.arrange.problem import Problem
from layout.arrange.steps import Steps
from layout.mechanics.arrays import IntArray

# For all trials together; once they are spent, plucks are taken for possible, and more are told than need be.
MOST_NODES = 2_000
MOST_STATES = 200_000
MOST_LOOKS = 5_000_000


def clashing(problem: Problem, plucks: IntArray) -> tuple[int, ...]:
    """Forced plucks that cannot all sound, as far as it is found out none that need not be among them; rising.

    Shortened from the end, then from the beginning, then one by one: what clashes is nearly always
    near in time.

    Args:
        problem: The rules.
        plucks: Plucks among which those that must sound have no room; rising.
    """
    budget = Budget(nodes=MOST_NODES, states=MOST_STATES, looks=MOST_LOOKS)
    steps = Steps(problem, plucks)
    forced = [pluck for pluck in plucks.tolist() if problem.must_sound[pluck]]
    last = _least(lambda count: not _have_room(problem, steps, forced[:count], budget), len(forced))
    forced = forced[:last]
    length = _least(lambda count: not _have_room(problem, steps, forced[-count:], budget), len(forced))
    forced = forced[-length:]
    place = 0
    while place < len(forced):
        without = forced[:place] + forced[place + 1 :]
        if without and not _have_room(problem, steps, without, budget):
            forced = without
        else:
            place += 1
    return tuple(forced)


def _least(holds: Callable[[int], bool], most: int) -> int:
    """The least count from 1 to `most` for which a condition holds that, once it holds, goes on holding."""
    low, high = 1, most
    while low < high:
        middle = (low + high) // 2
        if holds(middle):
            high = middle
        else:
            low = middle + 1
    return low


def _have_room(problem: Problem, steps: Steps, forced: Sequence[int], budget: Budget) -> bool:
    """Whether these plucks can all sound, nothing else on the disc; so they can where the budget is spent."""
    if budget.spent:
        return True
    plucks = np.array(forced, dtype=np.int64)
    budget.spend_looks(LOOKS_TO_TRY * len(forced))
    found = best_by_time(steps, plucks, budget)
    if isinstance(found, Stuck):
        return False
    if isinstance(found, Best) and not broken_by(problem, found.spots):
        return True
    return best_coupled(problem, plucks, budget).bound is not None
