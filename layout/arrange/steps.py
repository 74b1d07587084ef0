"""The plucks of a part in time, as the dynamic program takes them: plain numbers, and what is still to come."""

from typing import NamedTuple

from layout.arrange.problem import NO_PLUCK, Problem
from layout.mechanics.arrays import IntArray, counted_out

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
    """The spots of plucks as plain numbers, taken out of their arrays once: many single looks are slow there."""

    def __init__(self, problem: Problem, plucks: IntArray) -> None:
        """Take the spots of these plucks out; of other plucks there are no steps. Spread spots are left aside."""
        _, spots = counted_out(problem.first_spot[plucks], problem.first_spot[plucks + 1] - problem.first_spot[plucks])
        spots = spots[problem.spread[spots] == 0]
        columns = (
            spots,
            problem.track[spots],
            problem.worth[spots],
            problem.asked_ns[spots],
            problem.earliest_ns[spots],
            problem.latest_ns[spots],
            problem.least_ns[spots],
            problem.ringing_cost[spots],
            problem.ringing_ns[problem.track[spots]],
        )
        self._ways_of: dict[int, list[Way]] = {pluck: [] for pluck in plucks.tolist()}
        ways = map(Way, *(column.tolist() for column in columns))
        for pluck, way in zip(problem.pluck[spots].tolist(), ways, strict=True):
            self._ways_of[pluck].append(way)
        self._parent: list[int] = problem.parent.tolist()
        self._must_sound: list[bool] = problem.must_sound.tolist()

    def of(self, plucks: IntArray) -> list[Step]:
        """The steps of a part's plucks, rising."""
        part = plucks.tolist()
        found = [self._ways_of[pluck] for pluck in part]
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
