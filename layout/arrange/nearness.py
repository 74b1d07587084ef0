"""Spots of two tracks whose openings would leave too little web between them, at asked moments."""

from collections.abc import Iterator

import numpy as np

from layout.arrange.problem import Problem
from layout.mechanics.arrays import IntArray


def near_pairs(problem: Problem, spots: IntArray) -> Iterator[tuple[int, int]]:
    """Pairs of spots of two plucks that no disc can have both, the inner track's first."""
    track = problem.track[spots]
    there = set(track.tolist())
    for pair in problem.besides:
        if pair.inner_index not in there or pair.outer_index not in there:
            continue
        inner, outer = spots[track == pair.inner_index], spots[track == pair.outer_index]
        outer = outer[np.argsort(problem.asked_ns[outer], kind="stable")]
        outer_ns = problem.asked_ns[outer]
        for turn_ns in (-problem.turn_ns, 0, problem.turn_ns):
            at_ns = problem.asked_ns[inner] - turn_ns
            low = np.searchsorted(outer_ns, at_ns + pair.from_ns, side="right")
            high = np.searchsorted(outer_ns, at_ns + pair.to_ns)
            for one, first, last in zip(inner.tolist(), low.tolist(), high.tolist(), strict=True):
                for two in outer[first:last].tolist():
                    if problem.pluck[one] != problem.pluck[two]:
                        yield one, two
