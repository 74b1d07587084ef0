"""The project's first chooser, kept as what it is: good, quick, and not proved best. For comparison only.

Adapted to a posed problem: no nudges, no loads, no spread chords, no extra plucks; every pluck sounds when
it is asked for. Per pitch, fastest track first, the heaviest set of plucks that one track can hold is found
exactly and the next track is given what is left; what is found goes on the board by weight; then plucks
are spread over the tracks of their pitch, most rested first, and what still finds room is filled in.
"""

from bisect import bisect_left, insort
from collections import defaultdict
from collections.abc import Iterable, Sequence

from layout.arrange.problem import Problem

LONG_AGO_NS = -(1 << 62)


class Board:
    """Spots on tracks, each sounding when it is asked for; also what a greedy pass stands its plucks on."""

    def __init__(self, problem: Problem) -> None:
        self.asked_ns: list[int] = problem.asked_ns.tolist()
        self.track: list[int] = problem.track.tolist()
        self.pluck: list[int] = problem.pluck.tolist()
        self._turn_ns = problem.turn_ns
        self._least_ns: list[int] = problem.least_ns.tolist()
        self._on_track: dict[int, list[tuple[int, int]]] = defaultdict(list)
        self._besides: dict[int, list[tuple[int, int, int]]] = defaultdict(list)
        for pair in problem.besides:
            self._besides[pair.inner_index].append((pair.outer_index, pair.from_ns, pair.to_ns))
            self._besides[pair.outer_index].append((pair.inner_index, -pair.to_ns, -pair.from_ns))
        self.spot_of: dict[int, int] = {}  # by pluck

    def put(self, spot: int) -> None:
        insort(self._on_track[self.track[spot]], (self.asked_ns[spot], spot))
        self.spot_of[self.pluck[spot]] = spot

    def take(self, spot: int) -> None:
        self._on_track[self.track[spot]].remove((self.asked_ns[spot], spot))
        del self.spot_of[self.pluck[spot]]

    def fits(self, spot: int) -> bool:
        """Whether a spot keeps every repeat and every web beside what stands, the next turn included."""
        at_ns, row = self.asked_ns[spot], self._on_track[self.track[spot]]
        if self._least_ns[spot] > self._turn_ns:
            return False
        if row:
            after = bisect_left(row, (at_ns, spot))
            (before_ns, before), (next_ns, _) = row[after - 1], row[after % len(row)]
            before_ns -= self._turn_ns if after == 0 else 0
            next_ns += self._turn_ns if after == len(row) else 0
            if at_ns - before_ns < self._least_ns[before] or next_ns - at_ns < self._least_ns[spot]:
                return False
        return all(
            self._clear(other, at_ns + turned_ns, from_ns, to_ns)
            for other, from_ns, to_ns in self._besides[self.track[spot]]
            for turned_ns in (-self._turn_ns, 0, self._turn_ns)
        )

    def _clear(self, track: int, at_ns: int, from_ns: int, to_ns: int) -> bool:
        row = self._on_track[track]
        first = bisect_left(row, (at_ns + from_ns + 1,))
        return first == len(row) or row[first][0] >= at_ns + to_ns

    def rested(self, spot: int) -> tuple[int, int, int]:
        """The lower the longer its track has rested; of unused ones the fastest, then the outer."""
        row = self._on_track[self.track[spot]]
        after = bisect_left(row, (self.asked_ns[spot], spot))
        return (row[after - 1][0] if after else LONG_AGO_NS), self._least_ns[spot], -self.track[spot]


def choose(problem: Problem) -> tuple[int, ...]:
    """The spots that the first chooser takes."""
    board = Board(problem)
    worth: list[int] = problem.worth.tolist()
    spots_of: dict[int, list[int]] = defaultdict(list)
    for spot, (pluck, spread) in enumerate(zip(board.pluck, problem.spread.tolist(), strict=True)):
        if spread == 0:
            spots_of[pluck].append(spot)
    planned = _layers(problem, board, spots_of)
    for spot in sorted(planned, key=lambda spot: (-worth[spot], board.pluck[spot])):
        if board.fits(spot):
            board.put(spot)
    for pluck, stands in sorted(board.spot_of.items()):
        alike = [spot for spot in spots_of[pluck] if worth[spot] == worth[stands]]
        board.take(stands)
        rested = _most_rested(board, alike)
        board.put(stands if rested is None else rested)
    missing = [pluck for pluck in spots_of if pluck not in board.spot_of]
    for pluck in sorted(missing, key=lambda pluck: (-max(worth[spot] for spot in spots_of[pluck]), pluck)):
        rested = _most_rested(board, spots_of[pluck])
        if rested is not None:
            board.put(rested)
    return tuple(sorted(board.spot_of.values()))


def _layers(problem: Problem, board: Board, spots_of: dict[int, list[int]]) -> list[int]:
    """Pitch by pitch and track by track, fastest first, the heaviest set that the track can hold of what is left."""
    by_tracks: dict[tuple[int, ...], list[int]] = defaultdict(list)  # the plucks of one pitch have the same tracks
    for pluck, spots in spots_of.items():
        by_tracks[tuple(sorted({board.track[spot] for spot in spots}))].append(pluck)
    planned = []
    for tracks, plucks in by_tracks.items():
        left = plucks
        repeats = {board.track[spot]: int(problem.least_ns[spot]) for pluck in plucks for spot in spots_of[pluck]}
        for track in sorted(tracks, key=lambda track: (repeats[track], -track)):
            here = [next(spot for spot in spots_of[pluck] if board.track[spot] == track) for pluck in left]
            worth = [int(problem.worth[spot]) for spot in here]
            kept = _heaviest_apart([board.asked_ns[spot] for spot in here], worth, repeats[track])
            planned += [here[place] for place in kept]
            left = [pluck for place, pluck in enumerate(left) if place not in set(kept)]
    return planned


def choose_greedily(problem: Problem) -> tuple[int, ...]:
    """Plucks in time, of one moment the lowest first; each on the first of its spots that is free."""
    board = Board(problem)
    for spot in range(problem.spot_count):
        if problem.spread[spot] == 0 and board.pluck[spot] not in board.spot_of and board.fits(spot):
            board.put(spot)
    return tuple(sorted(board.spot_of.values()))


def _most_rested(board: Board, spots: Iterable[int]) -> int | None:
    return min((spot for spot in spots if board.fits(spot)), key=board.rested, default=None)


def _heaviest_apart(asked_ns: Sequence[int], worth: Sequence[int], least_ns: int) -> list[int]:
    """The heaviest of all sets of moments that keep a distance: weighted interval scheduling, exactly."""
    best, reaches = [0], []
    for place, (at_ns, one) in enumerate(zip(asked_ns, worth, strict=True)):
        reach = place
        while reach and asked_ns[reach - 1] > at_ns - least_ns:
            reach -= 1
        reaches.append(reach)
        best.append(max(best[-1], best[reach] + one))
    kept, end = [], len(reaches)
    while end:
        if best[end] == best[end - 1]:
            end -= 1
        else:
            kept.append(end - 1)
            end = reaches[end - 1]
    return kept[::-1]
