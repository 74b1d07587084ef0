"""What spots load the disc with, moment by moment.

Between asked moments the load only grows towards the next release, so no other moment can be worse.
"""

from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from layout.arrange.crowding import crowded_ns
from layout.arrange.problem import Drive, Problem
from layout.mechanics.arrays import IntArray, begins_run, counted_out

_ROWS_AT_A_TIME = 1 << 20  # spots at moments looked at together: some tens of megabytes


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
    in_time = _in_time(problem, spots)
    for lifted in _lifted_at(problem, problem.drive, in_time, crowded_ns(problem, problem.drive, in_time)):
        yield from lifted.moments_above(problem.drive.limit, problem.pluck)


def hard_moments(problem: Problem, spots: IntArray) -> Iterator[tuple[list[int], list[int]]]:
    """The same, less the moments at which every spot loads the disc no more than at another of them."""
    rows = [dict(zip(*moment, strict=True)) for moment in heavy_moments(problem, spots)]
    kept: dict[int, list[dict[int, int]]] = defaultdict(list)  # by each of their spots
    for row in sorted(rows, key=lambda row: -sum(row.values())):
        heaviest, most = max(
            row.items(), key=lambda item: item[1]
        )  # another row has it too, or is no reason to drop it
        others = (other for other in kept[heaviest] if other[heaviest] >= most)
        if not any(all(other.get(spot, 0) >= load for spot, load in row.items()) for other in others):
            for spot in row:
                kept[spot].append(row)
            yield list(row), list(row.values())


def lifted_count(problem: Problem, spots: IntArray) -> int:
    """How many spots `heavy_moments` looks at, each once for every moment: what it costs.

    Args:
        problem: The rules; without a drive there are none.
        spots: Any spots.
    """
    if problem.drive is None:
        return 0
    in_time = _in_time(problem, spots)
    windows = _windows(problem, problem.drive, in_time, crowded_ns(problem, problem.drive, in_time))
    return sum(int((last - first).sum()) for _, first, last in windows)


def overloads(problem: Problem, chosen: IntArray) -> list[tuple[int, ...]]:
    """The spots that together load the disc beyond the limit, for every asked moment at which they do."""
    if problem.drive is None:
        return []
    in_time = _in_time(problem, chosen)
    return [
        tuple(spots)
        for lifted in _lifted_at(problem, problem.drive, in_time, crowded_ns(problem, problem.drive, in_time))
        for spots, _ in lifted.moments_above(problem.drive.limit)
    ]


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
    [lifted] = _lifted_at(problem, drive, _in_time(problem, spots), np.array([at_ns], dtype=np.int64))
    return lifted.spots.tolist(), lifted.loads.tolist()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Lifted:
    """Spots whose teeth are lifted at some moments, a row for each of both.

    Attributes:
        moments: Shape (n,). Which moment, rising.
        spots: Shape (n,). Of one moment this turn's in their order, then the next one's first.
        loads: Shape (n,). How much the spot loads the disc then, above 0.
    """

    moments: IntArray
    spots: IntArray
    loads: IntArray

    def moments_above(self, limit: int, pluck: IntArray | None = None) -> Iterator[tuple[list[int], list[int]]]:
        """Spots and loads of every moment at which the loads sum to more than a limit.

        Args:
            limit: What they may sum to.
            pluck: By spot; where given, of each pluck only the greatest load counts.
        """
        if not len(self.moments):
            return
        moments, loads = self.moments, self.loads
        if pluck is not None:
            owner = pluck[self.spots]
            order = np.lexsort((-loads, owner, moments))
            moments, loads, owner = moments[order], loads[order], owner[order]
            first = begins_run(moments) | begins_run(owner)
            moments, loads = moments[first], loads[first]
        begins = np.flatnonzero(begins_run(moments))
        too_much = moments[begins][np.add.reduceat(loads, begins) > limit]
        firsts, lasts = np.searchsorted(self.moments, too_much), np.searchsorted(self.moments, too_much, side="right")
        for begin, end in zip(firsts.tolist(), lasts.tolist(), strict=True):
            yield self.spots[begin:end].tolist(), self.loads[begin:end].tolist()


def _in_time(problem: Problem, spots: IntArray) -> IntArray:
    return spots[np.argsort(problem.asked_ns[spots], kind="stable")]


def _lifted_at(problem: Problem, drive: Drive, in_time: IntArray, at_ns: IntArray) -> Iterator[_Lifted]:
    """What is lifted at these moments, rising, so many of them at a time as memory allows.

    Args:
        problem: The rules.
        drive: Of the problem.
        in_time: Spots in the order of their asked moments.
        at_ns: Rising.
    """
    windows = _windows(problem, drive, in_time, at_ns)
    rows = np.cumsum(sum(last - first for _, first, last in windows))
    begin = 0
    while begin < len(at_ns):
        before = int(rows[begin - 1]) if begin else 0
        end = max(int(np.searchsorted(rows, before + _ROWS_AT_A_TIME, side="right")), begin + 1)
        parts = []
        for from_ns, first, last in windows:
            counts = last[begin:end] - first[begin:end]
            run, place = counted_out(first[begin:end], counts)
            moments, spots = run + begin, in_time[place]
            loads = drive.loads(problem.track[spots], problem.asked_ns[spots] - from_ns[moments])
            parts.append((moments, spots, loads))
        moments, spots, loads = (np.concatenate(column) for column in zip(*parts, strict=True))
        order = np.argsort(moments, kind="stable")
        order = order[loads[order] > 0]
        found = _Lifted(moments=moments[order], spots=spots[order], loads=loads[order])
        yield _each_once(found) if drive.widest_ns > problem.turn_ns else found
        begin = end


def _each_once(lifted: _Lifted) -> _Lifted:
    """The same where a window longer than a turn has a spot lifted for this turn and the next: its loads summed."""
    order = np.lexsort((lifted.spots, lifted.moments))
    moments, spots = lifted.moments[order], lifted.spots[order]
    new = begins_run(moments) | begins_run(spots)
    loads = np.add.reduceat(lifted.loads[order], np.flatnonzero(new)) if len(order) else lifted.loads
    return _Lifted(moments=moments[new], spots=spots[new], loads=loads)


def _windows(
    problem: Problem, drive: Drive, in_time: IntArray, moments_ns: IntArray
) -> list[tuple[IntArray, IntArray, IntArray]]:
    """For this turn, and where the window reaches past its end for the next one's first: from when, and which spots.

    Spots of a moment are those from a first place in `in_time` to before a last.
    """
    asked_ns = problem.asked_ns[in_time]
    found = []
    for from_ns in (moments_ns, moments_ns - problem.turn_ns):
        ends = np.searchsorted(asked_ns, from_ns), np.searchsorted(asked_ns, from_ns + drive.widest_ns)
        found.append((from_ns, *ends))
    return found
