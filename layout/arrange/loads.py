"""What spots load the disc with, moment by moment.

Between asked moments the load only grows towards the next release, so no other moment can be worse.
"""

from collections.abc import Iterator

import numpy as np

from layout.arrange.problem import Drive, Problem
from layout.mechanics.arrays import IntArray


def heavy_moments(problem: Problem, spots: IntArray) -> Iterator[tuple[list[int], list[int]]]:
    """The spots that load the disc at an asked moment, and their loads, where all of them could be too much.

    Of each pluck only the heaviest spot counts for "could".

    Args:
        problem: With a drive.
        spots: Any spots.

    Raises:
        ValueError: The problem has no drive.
    """
    if problem.drive is None:
        raise ValueError("no load limit is kept")
    in_time = spots[np.argsort(problem.asked_ns[spots], kind="stable")]
    for at_ns in _crowded_ns(problem, problem.drive, in_time):
        there, loads = _lifted_at(problem, problem.drive, in_time, at_ns)
        heaviest: dict[int, int] = {}
        for spot, load in zip(there, loads, strict=True):
            pluck = int(problem.pluck[spot])
            heaviest[pluck] = max(heaviest.get(pluck, 0), load)
        if sum(heaviest.values()) > problem.drive.limit:
            yield there, loads


def hard_moments(problem: Problem, spots: IntArray) -> Iterator[tuple[list[int], list[int]]]:
    """The same, less the moments at which every spot loads the disc no more than at another of them."""
    rows = [dict(zip(*moment, strict=True)) for moment in heavy_moments(problem, spots)]
    kept: list[dict[int, int]] = []
    for row in sorted(rows, key=lambda row: -sum(row.values())):
        if not any(all(other.get(spot, 0) >= load for spot, load in row.items()) for other in kept):
            kept.append(row)
            yield list(row), list(row.values())


def overloads(problem: Problem, chosen: IntArray) -> list[tuple[int, ...]]:
    """The spots that together load the disc beyond the limit, for every asked moment at which they do."""
    if problem.drive is None:
        return []
    found = []
    in_time = chosen[np.argsort(problem.asked_ns[chosen], kind="stable")]
    for at_ns in _crowded_ns(problem, problem.drive, in_time):
        spots, loads = _lifted_at(problem, problem.drive, in_time, at_ns)
        if sum(loads) > problem.drive.limit:
            found.append(tuple(spots))
    return found


def piled_up(problem: Problem, chosen: IntArray) -> list[tuple[int, ...]]:
    """The chosen spots of every `piled` set of the problem of which every pluck is chosen."""
    found, spots = [], set(chosen.tolist()) if problem.piled else set()
    for pile in problem.piled:
        there = tuple(spot for spot in pile if spot in spots)
        if {int(problem.pluck[spot]) for spot in there} == {int(problem.pluck[spot]) for spot in pile}:
            found.append(there)
    return found


def loads_at(problem: Problem, drive: Drive, spots: IntArray, at_ns: int) -> tuple[list[int], list[int]]:
    """The spots whose teeth are lifted at a moment, and how much they load the disc then."""
    return _lifted_at(problem, drive, spots[np.argsort(problem.asked_ns[spots], kind="stable")], at_ns)


def _lifted_at(problem: Problem, drive: Drive, in_time: IntArray, at_ns: int) -> tuple[list[int], list[int]]:
    """The same for spots in the order of their asked moments."""
    asked_ns = problem.asked_ns[in_time]
    found = []
    # This turn's, and where the window reaches past the end of the turn the next one's first.
    for from_ns in (at_ns, at_ns - problem.turn_ns):
        first, last = np.searchsorted(asked_ns, (from_ns, from_ns + drive.widest_ns))
        for spot, released_ns in zip(in_time[first:last].tolist(), asked_ns[first:last].tolist(), strict=True):
            load = drive.load(int(problem.track[spot]), released_ns - from_ns)
            if load:
                found.append((spot, load))
    return [spot for spot, _ in found], [load for _, load in found]


def _crowded_ns(problem: Problem, drive: Drive, spots: IntArray) -> list[int]:
    """The asked moments at which the full loads of all teeth lifted then would be too much."""
    tracks = problem.track[spots].tolist()
    rows = [(place, lift.load, lift.window_ns) for place, track in enumerate(tracks) for lift in drive.lifts[track]]
    if not rows:
        return []
    place, load, window_ns = (np.array(column, dtype=np.int64) for column in zip(*rows, strict=True))
    moments_ns = np.unique(problem.asked_ns[spots])
    changes = np.zeros(len(moments_ns) + 1, dtype=np.int64)
    # Once more for the turn after: its first plucks may be lifted while the last of this one are.
    for released_ns in (problem.asked_ns[spots][place], problem.asked_ns[spots][place] + problem.turn_ns):
        np.add.at(changes, np.searchsorted(moments_ns, released_ns - window_ns, side="right"), load)
        np.add.at(changes, np.searchsorted(moments_ns, released_ns, side="right"), -load)
    crowded: list[int] = moments_ns[np.cumsum(changes)[:-1] > drive.limit].tolist()
    return crowded
