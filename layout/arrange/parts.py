"""The parts of a problem: plucks that do not touch those of another part on any track.

Two plucks touch where they have spots on one track so near that one may push the other, directly or
by a chain between them. Rules across tracks (webs, load) and the end of the turn are left aside: what
they join is joined when a choice breaks them.
"""

from dataclasses import dataclass

import numpy as np

from layout.arrange.problem import NO_PLUCK, Problem
from layout.mechanics.arrays import IntArray, begins_run


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Parts:
    """The plucks of a problem that have spots.

    Attributes:
        alone: Plucks that touch no other, rising.
        together: The plucks of every other part, rising; parts by their first pluck.
    """

    alone: IntArray
    together: tuple[IntArray, ...]


def parts_of(problem: Problem) -> Parts:
    """The parts of a problem; plucks without spots are in none."""
    played = np.flatnonzero(np.diff(problem.first_spot) > 0)
    links = _links(problem)
    touching = np.zeros(problem.pluck_count, dtype=np.bool_)
    touching[links] = True
    plucks = np.flatnonzero(touching)
    root = _joined(plucks, links)
    order = np.argsort(root, kind="stable")
    starts = np.flatnonzero(begins_run(root[order]))
    together = np.split(plucks[order], starts[1:]) if len(starts) else []
    return Parts(alone=played[~touching[played]], together=tuple(together))


def _links(problem: Problem) -> IntArray:
    """Shape (k, 2). Pairs of plucks that touch: neighbours on a track, and extra plucks with their own."""
    spots = np.flatnonzero(problem.spread == 0)
    # Spots stand by pluck, so a stable sort keeps the order (asked, pluck) of a track.
    spots = spots[np.lexsort((problem.pluck[spots], problem.asked_ns[spots], problem.track[spots]))]
    track, pluck = problem.track[spots], problem.pluck[spots]
    reach_ns = np.maximum(
        problem.latest_ns[spots] + problem.least_ns[spots], problem.asked_ns[spots] + problem.ringing_ns[track]
    )
    far_ns = int(reach_ns.max(initial=0)) + 1  # lifts every track above the reach of those before it
    reached_ns = np.maximum.accumulate(reach_ns + track * far_ns)
    touches = problem.earliest_ns[spots][1:] + track[1:] * far_ns < reached_ns[:-1]
    touches &= track[1:] == track[:-1]
    neighbours = np.column_stack([pluck[:-1][touches], pluck[1:][touches]])
    extra = np.flatnonzero(problem.parent != NO_PLUCK)
    return np.concatenate([neighbours, np.column_stack([problem.parent[extra], extra])])


def _joined(plucks: IntArray, links: IntArray) -> IntArray:
    """Shape (plucks,). The least of all plucks each is linked to, directly or through others."""
    root = {pluck: pluck for pluck in plucks.tolist()}
    for one, two in links.tolist():
        low, high = _root(root, one), _root(root, two)
        if low > high:
            low, high = high, low
        root[high] = low
    return np.array([_root(root, pluck) for pluck in root], dtype=np.int64)


def _root(root: dict[int, int], pluck: int) -> int:
    while root[pluck] != pluck:
        root[pluck] = root[root[pluck]]
        pluck = root[pluck]
    return pluck
