"""The plucks of a part in time, as the dynamic program takes them: plain numbers, and what is still to come."""

from collections.abc import Sequence
from typing import NamedTuple

from layout.arrange.problem import NO_PLUCK, Problem
from layout.mechanics.arrays import IntArray

NEVER = 1 << 62  # later than any moment, in ns
LONG_AGO = -NEVER


class Way(NamedTuple):
    """One spot."""

    spot: int
    track: int
    worth: int
    asked_ns: int
    earliest_ns: int
    latest_ns: int
    least_ns: int
    ringing_cost: int
    ringing_ns: int


class Step(NamedTuple):
    """One pluck of a part."""

    pluck: int
    must_sound: bool
    ways: tuple[tuple[int, Way], ...]  # with the place of the way's track in a state
    most: int  # its worth on the best of them
    needs: int  # the bit of the pluck it belongs to; 0 for none
    gives: int  # its own bit; 0 where no extra pluck belongs to it
    later: int  # the bits that later plucks need
    floor_ns: tuple[int, ...]  # by track: nothing later sounds before this
    quiet_ns: tuple[int, ...]  # by track: what was asked before this rings into nothing later
    rest: int  # the most that all later plucks could be worth

    def as_asked(self) -> "Step":
        """The same pluck without a nudge. Floors hold as they are: they are only a little early then."""
        ways = tuple(
            (place, way._replace(earliest_ns=way.asked_ns, latest_ns=way.asked_ns)) for place, way in self.ways
        )
        return self._replace(ways=ways)


class Steps:
    """A problem's spots as plain numbers, taken out of its arrays once: many single looks are slow there."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self._columns: tuple[Sequence[int], ...] = (
            range(problem.spot_count),
            problem.track.tolist(),
            problem.worth.tolist(),
            problem.asked_ns.tolist(),
            problem.earliest_ns.tolist(),
            problem.latest_ns.tolist(),
            problem.least_ns.tolist(),
            problem.ringing_cost.tolist(),
            problem.ringing_ns[problem.track].tolist(),
        )
        self._first = problem.first_spot.tolist()
        self._parent = problem.parent.tolist()
        self._must_sound = problem.must_sound.tolist()
        self._spread = problem.spread.tolist() if problem.spread.any() else None

    def of(self, plucks: IntArray) -> list[Step]:
        """The steps of a part's plucks, rising; spread spots are left aside."""
        part = plucks.tolist()
        found = [self._ways_of(pluck) for pluck in part]
        tracks = sorted({way.track for ways in found for way in ways})
        place_of = {track: place for place, track in enumerate(tracks)}
        parents = [self._parent[pluck] for pluck in part]
        bit_of = {parent: 1 << place for place, parent in enumerate(sorted(set(parents) - {NO_PLUCK}))}
        steps: list[Step] = []
        floor_ns, quiet_ns, later, rest = [NEVER] * len(tracks), [NEVER] * len(tracks), 0, 0
        for pluck, ways, parent in zip(reversed(part), reversed(found), reversed(parents), strict=True):
            most = max((way.worth for way in ways), default=0)
            step = Step(
                pluck=pluck,
                must_sound=self._must_sound[pluck],
                ways=tuple((place_of[way.track], way) for way in ways),
                most=most,
                needs=bit_of.get(parent, 0),
                gives=bit_of.get(pluck, 0),
                later=later,
                floor_ns=tuple(floor_ns),
                quiet_ns=tuple(quiet_ns),
                rest=rest,
            )
            steps.append(step)
            later |= step.needs
            rest += most
            for place, way in step.ways:
                floor_ns[place] = min(floor_ns[place], way.earliest_ns)
                quiet_ns[place] = way.asked_ns - way.ringing_ns
        return steps[::-1]

    def _ways_of(self, pluck: int) -> list[Way]:
        first, last = self._first[pluck], self._first[pluck + 1]
        ways = list(map(Way, *(column[first:last] for column in self._columns)))
        if self._spread is None:
            return ways
        return [way for way in ways if not self._spread[way.spot]]
