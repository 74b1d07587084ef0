"""What spots load the disc with, moment by moment."""

from collections.abc import Iterator

import numpy as np

from layout.arrange.problem import Drive, Problem
from layout.mechanics.arrays import IntArray


def heavy_moments(problem: Problem, spots: IntArray) -> Iterator[tuple[list[int], list[int]]]:
    """The spots that load the disc at an asked moment, and their loads, where all of them could be too much.

    Between asked moments the load only grows towards the next release, so no other moment can be
    worse. Of each pluck only the heaviest spot counts for "could".

    Args:
        problem: With a drive.
        spots: Any spots.

    Raises:
        ValueError: The problem has no drive.
    """
    if problem.drive is None:
        raise ValueError("no load limit is kept")
    for at_ns in np.unique(problem.asked_ns[spots]).tolist():
        there, loads = loads_at(problem, problem.drive, spots, at_ns)
        heaviest: dict[int, int] = {}
        for spot, load in zip(there, loads, strict=True):
            pluck = int(problem.pluck[spot])
            heaviest[pluck] = max(heaviest.get(pluck, 0), load)
        if sum(heaviest.values()) > problem.drive.limit:
            yield there, loads


def loads_at(problem: Problem, drive: Drive, spots: IntArray, at_ns: int) -> tuple[list[int], list[int]]:
    """The spots whose teeth are lifted at a moment, and how much they load the disc then."""
    before_ns = (problem.asked_ns[spots] - at_ns) % problem.turn_ns
    near = np.flatnonzero(before_ns < drive.widest_ns)
    found = [
        (int(spots[place]), load)
        for place in near.tolist()
        if (load := drive.load(int(problem.track[spots[place]]), int(before_ns[place])))
    ]
    return [spot for spot, _ in found], [load for _, load in found]
