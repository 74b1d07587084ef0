"""Random small problems, and their best worth by trying every choice, straight from the text of problem.py.

Nothing here uses the solver: the order on a track, the loads, the cost of ringing teeth and the moments are
written down a second time. Numbers are picked in milliseconds, so that chords may be spread; a turn has
88 to 1000 of them.
"""

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import permutations
from random import Random

import numpy as np
from hypothesis import strategies as st

from layout.arrange.problem import NO_PLUCK, Beside, Drive, Lift, Problem
from layout.mechanics.arrays import frozen_ints

MOST_PLUCKS = 7
MOST_TRACKS = 3
MS = 1_000_000  # ns
LAST_STEP = 20  # the last moment asked for, in steps of 4 ms: so that there are chords
FREE_MS = 84  # the end of the music
NEVER_NS = 10**18

Pick = Callable[[int, int], int]  # a whole number from one to another, both included
_Row = tuple[int, int, int, int, int, int, int, int]  # as the columns of `_problem` say; times in ms


@st.composite
def problems(draw: st.DrawFn) -> Problem:
    """Problems that hypothesis can make smaller."""
    return problem_by(lambda least, most: draw(st.integers(least, most)))


def problem_of(seed: int) -> Problem:
    """The problem of a seed: more crowded than hypothesis likes them."""
    return problem_by(Random(seed).randint)


def problem_by(pick: Pick) -> Problem:
    """A problem, every number of it picked."""
    count, tracks = pick(0, MOST_PLUCKS), pick(1, MOST_TRACKS)
    asked_ms = sorted(4 * pick(0, LAST_STEP) for _ in range(count))
    chord = np.cumsum(np.diff(asked_ms, prepend=-1) > 0) - 1
    rings = pick(0, 2) == 0
    most_nudge_ms = (0, 3, 6, 10, 12)[pick(0, 4)]
    repeat_ms = [pick(5, 30) for _ in range(tracks)]
    parent = _parents(pick, count)
    spots: list[_Row] = []
    for pluck in range(count):
        nudge_ms = most_nudge_ms if pick(0, 9) < 7 else most_nudge_ms // 2
        spots += _spots_of(pick, (pluck, asked_ms[pluck], nudge_ms), repeat_ms, rings=rings)
    ringing_ms = [pick(20, 60) if rings and pick(0, 2) else 0 for _ in range(tracks)]
    return _problem(
        sorted(spots, key=lambda spot: (spot[0], -spot[2], spot[1])),
        must_sound=[one == NO_PLUCK and pick(0, 9) == 0 for one in parent],
        parent=parent,
        chord=chord.tolist(),
        ringing_ms=ringing_ms,
        rest=(
            (FREE_MS + 4, FREE_MS + 12, 1000)[pick(0, 2)],
            _besides(pick, tracks),
            _drive(pick, tracks) if pick(0, 1) else None,
        ),
    )


def _parents(pick: Pick, count: int) -> list[int]:
    parent: list[int] = []
    for pluck in range(count):
        one = pick(0, pluck - 1) if pluck and pick(0, 4) == 0 else NO_PLUCK
        parent.append(one if one == NO_PLUCK or parent[one] == NO_PLUCK else NO_PLUCK)
    return parent


def _spots_of(pick: Pick, asked: tuple[int, int, int], repeat_ms: Sequence[int], *, rings: bool) -> Iterator[_Row]:
    pluck, asked_ms, nudge_ms = asked
    worth = pick(10, 40)
    rest_ms = 35 if pick(0, 3) == 0 else 0
    window_ms = max(asked_ms - nudge_ms, 0), min(asked_ms + nudge_ms, FREE_MS)
    for track, own_ms in enumerate(repeat_ms):
        if pick(0, 3):
            own = worth if pick(0, 9) < 7 else worth * 6 // 10
            cost = min(pick(0, own // 2), own - 1) if rings else 0
            yield pluck, track, own, asked_ms, *window_ms, max(own_ms, rest_ms), cost


def _besides(pick: Pick, tracks: int) -> tuple[Beside, ...]:
    found = []
    for inner in range(tracks):
        for outer in range(inner + 1, tracks):
            for _ in range(pick(0, 2)):  # a pair may have several stretches
                from_ms = pick(-12, 12)
                to_ms = from_ms + pick(1, 8)
                found.append(Beside(inner_index=inner, outer_index=outer, from_ns=from_ms * MS, to_ns=to_ms * MS))
    return tuple(found)


def _drive(pick: Pick, tracks: int) -> Drive:
    lifts = tuple(
        tuple(Lift(load=pick(5, 20), window_ns=pick(1, 25) * MS) for _ in range(pick(0, 2))) for _ in range(tracks)
    )
    return Drive(lifts=lifts, limit=pick(15, 60))


def _problem(
    spots: Sequence[_Row],
    *,
    must_sound: Sequence[bool],
    parent: Sequence[int],
    chord: Sequence[int],
    ringing_ms: Sequence[int],
    rest: tuple[int, tuple[Beside, ...], Drive | None],
) -> Problem:
    columns = np.array(spots, dtype=np.int64).reshape(len(spots), 8).T
    pluck, track, worth, asked_ms, earliest_ms, latest_ms, least_ms, cost = columns
    turn_ms, besides, drive = rest
    return Problem(
        must_sound=np.array(must_sound, dtype=np.bool_),
        parent=frozen_ints(parent),
        first_spot=frozen_ints(np.searchsorted(pluck, np.arange(len(parent) + 1))),
        pluck=frozen_ints(pluck),
        track=frozen_ints(track),
        worth=frozen_ints(worth),
        asked_ns=frozen_ints(asked_ms * MS),
        earliest_ns=frozen_ints(earliest_ms * MS),
        latest_ns=frozen_ints(latest_ms * MS),
        least_ns=frozen_ints(least_ms * MS),
        chord=frozen_ints(chord),
        spread=frozen_ints(np.zeros_like(pluck)),
        ringing_cost=frozen_ints(cost),
        ringing_ns=frozen_ints(one * MS for one in ringing_ms),
        turn_ns=turn_ms * MS,
        besides=besides,
        drive=drive,
    )


# The second opinion.


@dataclass(frozen=True, slots=True, kw_only=True)
class Spot:
    """A spot in plain numbers; its place in the problem is `index`."""

    index: int
    pluck: int
    track: int
    worth: int
    asked_ns: int
    unspread_ns: int
    earliest_ns: int
    latest_ns: int
    least_ns: int
    chord: int
    spread: int
    ringing_cost: int

    @property
    def place(self) -> int:
        """What the order on a track goes by."""
        return self.pluck


def spots_of(problem: Problem, pluck: int) -> list[Spot]:
    """The spots of a pluck, the first of them unspread."""
    first, last = int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])
    return [
        Spot(
            index=index,
            pluck=pluck,
            track=int(problem.track[index]),
            worth=int(problem.worth[index]),
            asked_ns=int(problem.asked_ns[index]),
            unspread_ns=int(problem.asked_ns[first]),
            earliest_ns=int(problem.earliest_ns[index]),
            latest_ns=int(problem.latest_ns[index]),
            least_ns=int(problem.least_ns[index]),
            chord=int(problem.chord[pluck]),
            spread=int(problem.spread[index]),
            ringing_cost=int(problem.ringing_cost[index]),
        )
        for index in range(first, last)
    ]


def chosen(problem: Problem, indices: Sequence[int]) -> list[Spot]:
    """Spots by their places in the problem."""
    every = [spot for pluck in range(problem.pluck_count) for spot in spots_of(problem, pluck)]
    return [every[index] for index in indices]


def best_worth(problem: Problem) -> int | None:
    """The worth of the best choice by trying them all; None where no choice plays what must sound.

    A choice that breaks a rule breaks it with more spots too (but for plucks that must sound, or lack the
    one they belong to, which are judged at the end), and one more spot never adds more than its worth. So
    the trial of all choices may leave out those that go on from a broken one, or cannot reach the best.
    """
    return _Trial(problem).best


class _Trial:
    def __init__(self, problem: Problem) -> None:
        self._problem = problem
        self._spots = [spots_of(problem, pluck) for pluck in range(problem.pluck_count)]
        self._most_after = [0] * (problem.pluck_count + 1)
        for pluck in reversed(range(problem.pluck_count)):
            most = max((spot.worth for spot in self._spots[pluck]), default=0)
            self._most_after[pluck] = self._most_after[pluck + 1] + most
        self._pairs: dict[tuple[int, int], bool] = {}
        self.best: int | None = None
        self._go_on(0, [])

    def _go_on(self, pluck: int, spots: list[Spot]) -> None:
        worth = worth_of_choice(self._problem, spots)
        if self.best is not None and worth + self._most_after[pluck] <= self.best:
            return
        if pluck == self._problem.pluck_count:
            if is_complete(self._problem, spots):
                self.best = worth
            return
        for spot in self._spots[pluck]:
            with_it = [*spots, spot]
            if all(self._pair(one, spot) for one in spots) and keeps_the_rules(self._problem, with_it):
                self._go_on(pluck + 1, with_it)
        self._go_on(pluck + 1, spots)

    def _pair(self, one: Spot, two: Spot) -> bool:
        key = one.index, two.index
        if key not in self._pairs:
            self._pairs[key] = keeps_the_rules(self._problem, [one, two])
        return self._pairs[key]


def is_complete(problem: Problem, spots: Sequence[Spot]) -> bool:
    """Rule 1: what must sound sounds, and extra plucks only with their own; at most one spot of a pluck."""
    plucks = [spot.pluck for spot in spots]
    forced = set(np.flatnonzero(problem.must_sound).tolist())
    parents = {int(problem.parent[pluck]) for pluck in plucks} - {NO_PLUCK}
    return len(set(plucks)) == len(plucks) and forced | parents <= set(plucks)


def keeps_the_rules(problem: Problem, spots: Sequence[Spot]) -> bool:
    """Rules 2 to 5."""
    return (
        _chords_agree(spots)
        and _webs_are_kept(problem, spots)
        and _drive_carries(problem, spots)
        and _moments_exist(problem, spots)
    )


def worth_of_choice(problem: Problem, spots: Sequence[Spot]) -> int:
    """The worths, less the cost of every spot whose track still rings."""
    total = 0
    for spot in spots:
        rings = any(
            one.track == spot.track
            and (one.unspread_ns, one.pluck) < (spot.unspread_ns, spot.pluck)
            and spot.unspread_ns - one.unspread_ns < problem.ringing_ns[spot.track]
            for one in spots
        )
        total += spot.worth - (spot.ringing_cost if rings else 0)
    return total


def _chords_agree(spots: Sequence[Spot]) -> bool:
    pairs = {(spot.chord, spot.spread) for spot in spots}
    return len(pairs) == len({chord for chord, _ in pairs})


def _asked_apart(problem: Problem, spots: Sequence[Spot]) -> Iterator[tuple[int, int, Beside, int, int]]:
    """Place of the inner and of the outer spot, the rule, the turns between and how far apart they are asked."""
    if not problem.besides:
        return
    for (one, inner), (two, outer) in permutations(enumerate(spots), 2):
        for beside in problem.besides:
            if inner.track == beside.inner_index and outer.track == beside.outer_index:
                for turns_ns in (-problem.turn_ns, 0, problem.turn_ns):
                    yield one, two, beside, turns_ns, outer.asked_ns - inner.asked_ns + turns_ns


def _webs_are_kept(problem: Problem, spots: Sequence[Spot]) -> bool:
    apart = _asked_apart(problem, spots)
    return not any(beside.from_ns < apart_ns < beside.to_ns for _, _, beside, _, apart_ns in apart)


def _drive_carries(problem: Problem, spots: Sequence[Spot]) -> bool:
    if problem.drive is None:
        return True
    for at_ns in {spot.asked_ns for spot in spots}:
        releases = [(spot.track, spot.asked_ns + turn_ns - at_ns) for spot in spots for turn_ns in (0, problem.turn_ns)]
        before = [(track, before_ns) for track, before_ns in releases if before_ns >= 0]
        if sum(load_before(problem.drive, track, before_ns) for track, before_ns in before) > problem.drive.limit:
            return False
    return True


def load_before(drive: Drive, track: int, before_ns: int) -> int:
    """The load so long before the release, each tooth's rounded up: load · (window − before)/window."""
    lifted = [lift for lift in drive.lifts[track] if before_ns < lift.window_ns]
    return sum(math.ceil(Fraction(lift.load * (lift.window_ns - before_ns), lift.window_ns)) for lift in lifted)


def _moments_exist(problem: Problem, spots: Sequence[Spot]) -> bool:
    """Whether the rules of time can all be kept: no ring of them is shorter than nothing (Floyd and Warshall)."""
    most = _most_apart(problem, spots)
    nodes = range(len(most))
    for middle in nodes:
        onwards = most[middle]
        for one in nodes:
            so_far = most[one][middle]
            most[one] = [min(now, so_far + more) for now, more in zip(most[one], onwards, strict=True)]
    return all(most[node][node] >= 0 for node in nodes)


def _most_apart(problem: Problem, spots: Sequence[Spot]) -> list[list[int]]:
    """For every two nodes the most that the second may lie after the first; node 0 is the start of the music."""
    size = len(spots) + 1
    most = [[NEVER_NS if one != two else 0 for two in range(size)] for one in range(size)]

    def limit(one: int, two: int, apart_ns: int) -> None:
        most[one][two] = min(most[one][two], apart_ns)

    for node, spot in enumerate(spots, start=1):
        limit(0, node, spot.latest_ns)
        limit(node, 0, -spot.earliest_ns)
    for track in {spot.track for spot in spots}:
        row = [node for node, spot in enumerate(spots, start=1) if spot.track == track]
        row.sort(key=lambda node: spots[node - 1].place)
        for place, node in enumerate(row):
            # Before the next by least_ns; the last before the first of the turn after.
            is_last = place == len(row) - 1
            next_node, turn_ns = (row[0], problem.turn_ns) if is_last else (row[place + 1], 0)
            limit(next_node, node, turn_ns - spots[node - 1].least_ns)
    for inner, outer, beside, turns_ns, apart_ns in _asked_apart(problem, spots):
        if apart_ns <= beside.from_ns:
            limit(inner + 1, outer + 1, beside.from_ns - turns_ns)
        else:
            limit(outer + 1, inner + 1, turns_ns - beside.to_ns)
    return most
