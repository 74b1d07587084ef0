"""What a choice of spots breaks of the rules that join parts: webs, loads, the end of the turn, chains."""

from collections.abc import Sequence

import numpy as np

from layout.arrange.loads import loads_at
from layout.arrange.moments_kept import Overrun, moments_kept
from layout.arrange.nearness import near_pairs
from layout.arrange.problem import Problem
from layout.mechanics.arrays import IntArray


def broken_by(problem: Problem, spots: Sequence[int]) -> list[tuple[int, ...]]:
    """Sets of chosen spots that cannot all be chosen, one for every breach found; none where all rules are kept.

    Breaches of nearness and load are all told; of moments the first, and only where nothing else
    is broken.
    """
    chosen = np.array(spots, dtype=np.int64)
    found = breaches(problem, spots) + overloads(problem, chosen)
    if not found:
        kept = moments_kept(problem, spots)
        if isinstance(kept, Overrun):
            found.append(kept.spots)
    return found


def breaches(problem: Problem, spots: Sequence[int]) -> list[tuple[int, ...]]:
    """Pairs of spots whose openings would leave too little web."""
    return list(near_pairs(problem, np.array(spots, dtype=np.int64)))


def overloads(problem: Problem, chosen: IntArray) -> list[tuple[int, ...]]:
    """The spots that together load the disc beyond the limit, for every asked moment at which they do."""
    if problem.drive is None:
        return []
    found = []
    for at_ns in np.unique(problem.asked_ns[chosen]).tolist():
        spots, loads = loads_at(problem, problem.drive, chosen, at_ns)
        if sum(loads) > problem.drive.limit:
            found.append(tuple(spots))
    return found
