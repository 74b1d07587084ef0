"""What a choice of spots breaks of the rules that join parts: webs, loads, the end of the turn, chains."""

from collections.abc import Sequence

import numpy as np

from layout.arrange.loads import overloads, piled_up
from layout.arrange.moments_kept import Overrun, kept_as_asked, moments_kept
from layout.arrange.nearness import near_pairs
from layout.arrange.problem import Problem


def broken_by(problem: Problem, spots: Sequence[int]) -> list[tuple[int, ...]]:
    """Sets of chosen spots that cannot all be chosen, one for every breach found; none where all rules are kept.

    Breaches of nearness and load are all told; of moments the first, and only where nothing else
    is broken.
    """
    chosen = np.array(spots, dtype=np.int64)
    found = breaches(problem, spots) + overloads(problem, chosen) + piled_up(problem, chosen)
    if not found and not kept_as_asked(problem, spots):
        kept = moments_kept(problem, spots)
        if isinstance(kept, Overrun):
            found.append(kept.spots)
    return found


def breaches(problem: Problem, spots: Sequence[int]) -> list[tuple[int, ...]]:
    """Pairs of spots whose openings would leave too little web."""
    return list(near_pairs(problem, np.array(spots, dtype=np.int64)))
