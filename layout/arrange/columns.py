"""The columns and rows of the integer program over a group of plucks.

One column for every spot, one for every spread of a chord, one for every ring that costs. Rows:
at most one spot of a pluck; of spots so near on a track that each pushes the next past its window,
only as many as the stretch holds (one or two from the start, more when a solution breaks it);
webs; loads at every asked moment, and what nudges pile up; extra plucks with their own; one spread of a chord.
"""

from collections import defaultdict
from collections.abc import Iterator, Sequence

import numpy as np

from layout.arrange.integer_program import Row
from layout.arrange.loads import hard_moments, heavy_moments, lifted_count
from layout.arrange.moments_kept import Overrun
from layout.arrange.nearness import near_pairs
from layout.arrange.problem import NO_PLUCK, Problem
from layout.mechanics.arrays import IntArray, begins_run

_STEPS_TOGETHER = 6  # spots on one track that a row from the start lets through at most; longer ones come when broken


class Columns:
    """The columns of a group of plucks, and the rows between them.

    Attributes:
        worth: Shape (columns,). What each column is worth, below 0 where it costs.
        most: No choice is worth more.
        lifted: How many spots lifted at moments the rows of the drive look at.
    """

    def __init__(self, problem: Problem, plucks: IntArray) -> None:
        self._problem = problem
        self._plucks = plucks.tolist()
        ranges = [range(int(problem.first_spot[p]), int(problem.first_spot[p + 1])) for p in self._plucks]
        self._spots = np.array([spot for one in ranges for spot in one], dtype=np.int64)
        self._column = {spot: column for column, spot in enumerate(self._spots.tolist())}
        self._by_track = self._tracks_in_time()
        self._rings = [(spot, before) for spot, before in self._ringing() if before]
        self._spreads = self._spread_chords()
        first_ring = len(self._spots)
        first_spread = first_ring + len(self._rings)
        self._ring_column = {spot: first_ring + place for place, (spot, _) in enumerate(self._rings)}
        self._spread_column = {one: first_spread + place for place, one in enumerate(self._spreads)}
        self.worth = np.concatenate(
            [
                problem.worth[self._spots],
                [-int(problem.ringing_cost[spot]) for spot, _ in self._rings],
                np.zeros(len(self._spreads), dtype=np.int64),
            ]
        ).astype(np.int64)
        self.lifted = lifted_count(problem, self._spots)
        self.most = sum(max((int(problem.worth[spot]) for spot in one), default=0) for one in ranges)

    def spots_of(self, ones: IntArray) -> tuple[int, ...]:
        """The spots of a solution, by pluck."""
        return tuple(self._spots[ones[ones < len(self._spots)]].tolist())

    def rows(self) -> Iterator[Row]:
        """Every row known from the start."""
        problem, column = self._problem, self._column
        for pluck in self._plucks:
            mine = self._mine(pluck)
            must = bool(problem.must_sound[pluck])
            if len(mine) > 1 or must:
                yield Row(columns=mine, most=1, least=1 if must else 0)
            parent = int(problem.parent[pluck])
            if parent != NO_PLUCK and mine:
                theirs = self._mine(parent)
                yield Row(columns=mine + theirs, coefficients=[1] * len(mine) + [-1] * len(theirs), most=0)
        for spots in self._by_track.values():
            yield from self._held_rows(spots)
        for spot, before in self._rings:
            for one in before:
                yield Row(columns=[column[spot], column[one], self._ring_column[spot]], coefficients=[1, 1, -1], most=1)
        for one, two in near_pairs(problem, self._spots):
            yield Row(columns=[column[one], column[two]], most=1)
        if problem.drive is not None:
            for spots, loads in hard_moments(problem, self._spots):
                limit = problem.drive.limit
                # More than too much is as bad as a little too much, and rounds less well.
                most = [min(load, limit + 1) for load in loads]
                yield Row(columns=[column[spot] for spot in spots], coefficients=most, most=limit)
        yield from self._piled_rows()
        yield from self._spread_rows()

    def cut(self, overrun: Overrun) -> Row:
        """A row that forbids what an overrun shows, and as much like it as may be."""
        path = overrun.spots
        if overrun.on_one_track:
            held = self._held(path, wraps=overrun.wraps)
            if held is not None:
                return held
        return Row(columns=[self._column[spot] for spot in path], most=len(path) - 1)

    def load_cuts(self, spots: Sequence[int]) -> list[Row]:
        """A row for every moment at which chosen spots load the disc too much: the heaviest of them, as few as do."""
        problem, rows = self._problem, []
        if problem.drive is None:
            return []
        for there, loads in heavy_moments(problem, np.array(spots, dtype=np.int64)):
            heaviest = sorted(range(len(there)), key=lambda place: (-loads[place], there[place]))
            enough = np.searchsorted(np.cumsum([loads[place] for place in heaviest]), problem.drive.limit, side="right")
            cover = [self._column[there[place]] for place in heaviest[: int(enough) + 1]]
            rows.append(Row(columns=cover, most=len(cover) - 1))
        return rows

    def _held(self, path: tuple[int, ...], *, wraps: bool) -> Row | None:
        """All spots that lie wholly in the stretch of the path: it holds fewer than the path has."""
        problem = self._problem
        spots = np.array(self._by_track[int(problem.track[path[0]])], dtype=np.int64)
        begin_ns, end_ns = int(problem.earliest_ns[path[0]]), int(problem.latest_ns[path[-1]])
        inside = (problem.earliest_ns[spots] >= begin_ns, problem.latest_ns[spots] <= end_ns)
        if wraps and path[-1] < path[0]:
            spots, end_ns = spots[inside[0] | inside[1]], end_ns + problem.turn_ns
        elif wraps:
            return None
        else:
            spots = spots[inside[0] & inside[1]]
        if not set(path) <= set(spots.tolist()):
            return None  # windows within windows: the stretch does not hold all of the path
        room = (end_ns - begin_ns) // int(problem.least_ns[spots].min()) + 1
        return Row(columns=[self._column[s] for s in spots.tolist()], most=room) if room < len(path) else None

    def _mine(self, pluck: int) -> list[int]:
        first, last = int(self._problem.first_spot[pluck]), int(self._problem.first_spot[pluck + 1])
        return [self._column[spot] for spot in range(first, last) if spot in self._column]

    def _tracks_in_time(self) -> dict[int, list[int]]:
        problem, spots = self._problem, self._spots
        order = np.argsort(problem.track[spots], kind="stable")  # spots stand by pluck
        by_track: dict[int, list[int]] = defaultdict(list)
        for spot in spots[order].tolist():
            by_track[int(problem.track[spot])].append(spot)
        return by_track

    def _held_rows(self, spots: list[int]) -> Iterator[Row]:
        """Rows over the spots of one track that lie wholly in a stretch of time too short for all of them."""
        problem = self._problem
        there = np.array(spots, dtype=np.int64)
        earliest_ns, latest_ns = problem.earliest_ns[there], problem.latest_ns[there]
        least_ns = int(problem.least_ns[there].min())
        in_step = np.all(np.diff(earliest_ns) >= 0) and np.all(np.diff(latest_ns) >= 0)
        # A stretch holds too many only of more plucks than there is room for.
        plucks = len(set(problem.pluck[there].tolist()))
        for room in range(1, min(_STEPS_TOGETHER, plucks - 1) + 1):
            if in_step and not problem.spread[there].any():
                yield from self._runs(there, room, room * least_ns)
            else:
                yield from self._stretches(there, room, room * least_ns)
        yield from self._pairs(spots, least_ns)

    def _runs(self, there: IntArray, room: int, stretch_ns: int) -> Iterator[Row]:
        """Rows of one track over every run of spots in a stretch, where windows begin and end in their order."""
        problem = self._problem
        ends = np.searchsorted(problem.latest_ns[there], problem.earliest_ns[there] + stretch_ns)
        firsts = np.arange(len(there))
        for first in np.flatnonzero((ends - firsts > room) & (np.diff(ends, prepend=-1) > 0)).tolist():
            yield Row(columns=[self._column[spot] for spot in there[first : ends[first]].tolist()], most=room)

    def _stretches(self, there: IntArray, room: int, stretch_ns: int) -> Iterator[Row]:
        """The same, windows within windows and several spots of one pluck allowed for."""
        problem = self._problem
        earliest_ns, latest_ns, pluck = problem.earliest_ns[there], problem.latest_ns[there], problem.pluck[there]
        begins_ns = np.unique(earliest_ns)[:, None]
        inside = (earliest_ns >= begins_ns) & (latest_ns < begins_ns + stretch_ns)
        before = np.zeros(len(there), dtype=np.bool_)
        for row in inside[inside.sum(axis=1) > room]:
            if (row & ~before).any() and begins_run(pluck[row]).sum() > room:  # spots stand by pluck
                before = row
                yield Row(columns=[self._column[spot] for spot in there[row].tolist()], most=room)

    def _pairs(self, spots: list[int], least_ns: int) -> Iterator[Row]:
        """Pairs that the rows over a stretch miss: longer rests of one spot, windows within windows."""
        problem = self._problem
        for place, one in enumerate(spots):
            own_ns = int(problem.least_ns[one])
            for two in spots[place + 1 :]:
                if int(problem.asked_ns[two]) - int(problem.asked_ns[one]) > own_ns + 3 * problem.widest_ns:
                    break
                apart_ns = int(problem.latest_ns[two]) - int(problem.earliest_ns[one])
                inside = problem.earliest_ns[two] >= problem.earliest_ns[one]
                if (
                    apart_ns < own_ns
                    and not (inside and apart_ns < least_ns)
                    and problem.pluck[one] != problem.pluck[two]
                ):
                    yield Row(columns=[self._column[one], self._column[two]], most=1)

    def _ringing(self) -> Iterator[tuple[int, list[int]]]:
        """Every spot that may ring into a cost, and the earlier spots of its track that would make it."""
        problem = self._problem
        asked_ns = problem.unspread_ns
        for track, spots in self._by_track.items():
            for place, spot in enumerate(spots):
                if problem.ringing_cost[spot]:
                    since_ns = asked_ns[spot] - problem.ringing_ns[track]
                    before = [one for one in spots[:place] if problem.pluck[one] != problem.pluck[spot]]
                    yield spot, [one for one in before if asked_ns[one] > since_ns]

    def _spread_chords(self) -> list[tuple[int, int]]:
        """Every (chord, spread) that a chord of the group may take, where it has a choice."""
        problem = self._problem
        found = {(int(problem.chord[problem.pluck[s]]), int(problem.spread[s])) for s in self._spots.tolist()}
        several = {chord for chord, spread in found if spread}
        return sorted(one for one in found if one[0] in several)

    def _piled_rows(self) -> Iterator[Row]:
        for pile in self._problem.piled:
            columns = [self._column[spot] for spot in pile if spot in self._column]
            if len(columns) == len(pile):
                yield Row(columns=columns, most=len({int(self._problem.pluck[spot]) for spot in pile}) - 1)

    def _spread_rows(self) -> Iterator[Row]:
        problem = self._problem
        of_chord: dict[int, list[int]] = defaultdict(list)
        for (chord, _), column in self._spread_column.items():
            of_chord[chord].append(column)
        for columns in of_chord.values():
            yield Row(columns=columns, most=1)
        for pluck in self._plucks if of_chord else ():
            by_spread: dict[int, list[int]] = defaultdict(list)
            for spot in range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])):
                by_spread[int(problem.spread[spot])].append(self._column[spot])
            for spread, mine in by_spread.items():
                taken = self._spread_column.get((int(problem.chord[pluck]), spread))
                if taken is not None:
                    yield Row(columns=[*mine, taken], coefficients=[1] * len(mine) + [-1], most=0)
