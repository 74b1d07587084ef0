"""Nudging: the moments at which chosen plucks sound, as near to those asked for as their tracks allow.

The choice is made; nothing is dropped here. Where a track's repeat is kept at the moments asked for,
nothing moves. Where it is not, its plucks and the other notes of their chords are moved by a linear
program: what a nudge costs grows with the ladder below and with the pluck's worth; chords stay
together and notes keep their order as far as they can.
"""

from bisect import bisect_left, bisect_right
from collections import defaultdict
from collections.abc import Iterable, Iterator, Mapping, Sequence
from itertools import pairwise

import numpy as np

from layout.arrange.integer_program import Row
from layout.arrange.linear_program import least_cost
from layout.arrange.moments_kept import Moments, Push, Pushes, moments_kept, pushes_of
from layout.arrange.problem import NS_PER_MS, Problem

# What each millisecond of a nudge costs, from here on. Up to 6 ms nobody hears it (the just noticeable
# difference for notes up to 240 ms apart: Friberg and Sundberg, JASA 98, 1995, from memory); up to
# 10 ms hardly anybody; beyond, many do. The steps of cost are our own.
LADDER_MS = ((0.0, 1.0), (6.0, 3.0), (10.0, 10.0))

APART_COST = 5.0  # of each millisecond a note leaves its chord, beside its own nudge: a chord should stay one
# Of each millisecond by which notes lose their order, or come nearer than the drive carries, times the worth of all
# that moves with them: more than moving all of it costs, so only where nothing else is left.
LOST_COST = 20.0

# Order is heard from about 20 ms on (Hirsh, JASA 31, 1959, from memory): notes asked further apart keep it.
ORDER_HEARD_NS = 20 * NS_PER_MS
IN_ORDER_NS = NS_PER_MS  # how far apart they must stay

_SETTLING_NS = 2  # what the linear program and rounding its moments may leave; they are put right from so much before


def nudged(problem: Problem, spots: Sequence[int], heavy: Sequence[Sequence[int]] = ()) -> dict[int, int]:
    """When each chosen spot sounds, in nanoseconds.

    Args:
        problem: The rules.
        spots: A choice that keeps every rule.
        heavy: Spots that came too near to each other for the drive when they were nudged: they are
            kept as far apart as they are asked, if that can be.

    Raises:
        ValueError: The choice has no moments that keep every rule: a fault of the program.
    """
    at_ns = dict(zip(spots, problem.asked_ns[list(spots)].tolist(), strict=True))
    pushes = pushes_of(problem, spots)
    if not heavy and not (pushes.spare_ns(problem.asked_ns) < 0).any():
        return at_ns
    company = _Company(problem, spots, heavy)
    blocks = _moving(problem, pushes, company)
    pushes_on = _pushes_on([spot for block in blocks for spot in block], problem, pushes)
    for block in blocks:
        at_ns.update(_wished(problem, block, at_ns, company, pushes_on))
    return _put_right(problem, spots, at_ns)


def nudged_later(problem: Problem, spots: Sequence[int]) -> dict[int, int]:
    """When each chosen spot sounds, found in no time: as soon as may be from the moment asked for on.

    Where that cannot be, as soon as may be in its window. Chords and order are not looked at.

    Args:
        problem: The rules.
        spots: A choice that keeps every rule.

    Raises:
        ValueError: As for `nudged`.
    """
    return _put_right(problem, spots, dict(zip(spots, problem.asked_ns[list(spots)].tolist(), strict=True)))


class _Company:
    """What stands near a spot: its chord, the spots near in time, and what it is to be kept from for the drive."""

    def __init__(self, problem: Problem, spots: Sequence[int], heavy: Sequence[Sequence[int]]) -> None:
        chosen = np.sort(np.array(spots, dtype=np.int64))
        in_time = chosen[np.argsort(problem.asked_ns[chosen], kind="stable")]
        self._in_time: list[int] = in_time.tolist()
        self._asked_ns: list[int] = problem.asked_ns[in_time].tolist()
        self._far_ns = 2 * int(problem.reach_ns[chosen].max(initial=0)) + IN_ORDER_NS
        self._spots: list[int] = chosen.tolist()
        self._chords: list[int] = problem.chord[problem.pluck[chosen]].tolist()  # rising, as spots by pluck do
        self.heavy: dict[int, list[tuple[int, int]]] = defaultdict(list)
        for group in heavy:
            for pair in pairwise(sorted(group, key=lambda spot: (int(problem.asked_ns[spot]), spot))):
                self.heavy[pair[0]].append(pair)
                self.heavy[pair[1]].append(pair)

    def moved_with(self, spot: int, asked_ns: int) -> set[int]:
        """The spots that may have to move where this one does, unpushed: its chord, and what it overtakes."""
        beside = {one for pair in self.order_heard(spot, asked_ns) for one in pair}
        beside |= {one for pair in self.heavy.get(spot, ()) for one in pair}
        return (beside | set(self._of_chord(self._chord_of(spot)))) - {spot}

    def spread_pairs(self, problem: Problem, block: Sequence[int]) -> Iterator[tuple[int, int]]:
        """Neighbours of a chord that is spread, the one asked first before the other."""
        for chord in dict.fromkeys(map(self._chord_of, block)):
            in_time = sorted(self._of_chord(chord), key=lambda spot: (int(problem.asked_ns[spot]), spot))
            for one, two in pairwise(in_time):
                if problem.asked_ns[one] < problem.asked_ns[two]:
                    yield one, two

    def order_heard(self, spot: int, asked_ns: int) -> Iterator[tuple[int, int]]:
        """Pairs of this spot and another whose order is heard and could be lost by nudging, the earlier first."""
        first = bisect_left(self._asked_ns, asked_ns - self._far_ns + 1)
        last = bisect_left(self._asked_ns, asked_ns + self._far_ns)
        for place in range(first, last):
            other_ns, other = self._asked_ns[place], self._in_time[place]
            if abs(other_ns - asked_ns) > ORDER_HEARD_NS:
                yield (spot, other) if asked_ns < other_ns else (other, spot)

    def _chord_of(self, spot: int) -> int:
        return self._chords[bisect_left(self._spots, spot)]

    def _of_chord(self, chord: int) -> list[int]:
        return self._spots[bisect_left(self._chords, chord) : bisect_right(self._chords, chord)]


def _moving(problem: Problem, pushes: Pushes, company: _Company) -> list[list[int]]:
    """The spots that may have to move, in blocks that do not touch.

    Runs of a track with a repeat too soon, and what moves with their spots; and what came too near
    for the drive.
    """
    near: dict[int, list[int]] = defaultdict(list)
    found: list[int] = list(company.heavy)
    spare_ns, reach_ns = pushes.spare_ns(problem.asked_ns), problem.reach_ns
    may_meet = (spare_ns < reach_ns[pushes.earlier] + reach_ns[pushes.later]) & pushes.is_of_two
    for earlier, later in zip(pushes.earlier[may_meet].tolist(), pushes.later[may_meet].tolist(), strict=True):
        near[earlier].append(later)
        near[later].append(earlier)
    too_soon = (spare_ns < 0) & pushes.is_of_two
    found += [*pushes.earlier[too_soon].tolist(), *pushes.later[too_soon].tolist()]
    pushed = _reached(found, near)
    joined: dict[int, set[int]] = {spot: set(near[spot]) for spot in pushed}
    for spot in sorted(pushed):
        for other in company.moved_with(spot, int(problem.asked_ns[spot])):
            joined[spot].add(other)
            joined.setdefault(other, set()).add(spot)
    blocks, seen = [], set[int]()
    for spot in sorted(joined):
        if spot not in seen:
            block = sorted(_reached([spot], joined))
            seen.update(block)
            blocks.append(block)
    return blocks


def _pushes_on(spots: Sequence[int], problem: Problem, pushes: Pushes) -> dict[int, list[Push]]:
    """The pushes that each of these spots has part in."""
    is_theirs = np.zeros(problem.spot_count, dtype=np.bool_)
    is_theirs[list(spots)] = True
    found: dict[int, list[Push]] = {spot: [] for spot in spots}
    for push in pushes.of((is_theirs[pushes.earlier] | is_theirs[pushes.later]) & pushes.is_of_two).listed():
        for spot in (push.earlier, push.later):
            if spot in found:
                found[spot].append(push)
    return found


def _reached(begin: Iterable[int], near: Mapping[int, Iterable[int]]) -> set[int]:
    reached, waiting = set(begin), list(begin)
    while waiting:
        for other in near.get(waiting.pop(), ()):
            if other not in reached:
                reached.add(other)
                waiting.append(other)
    return reached


def _wished(
    problem: Problem,
    block: Sequence[int],
    at_ns: Mapping[int, int],
    company: _Company,
    pushes_on: Mapping[int, Sequence[Push]],
) -> dict[int, int]:
    """The moments of a block's spots at the least cost, all others standing where they are."""
    program = _Program(problem, block)
    for push in dict.fromkeys(push for spot in block for push in pushes_on[spot]):
        program.keep_apart(push.earlier, push.later, push.least_ns, at_ns)
    heard = dict.fromkeys(pair for spot in block for pair in company.order_heard(spot, int(problem.asked_ns[spot])))
    for earlier, later in heard:
        program.keep_if_possible(earlier, later, IN_ORDER_NS, at_ns)
    for earlier, later in company.spread_pairs(problem, block):
        program.keep_if_possible(earlier, later, 0, at_ns)
    heavy = dict.fromkeys(pair for spot in block for pair in company.heavy.get(spot, ()))
    for earlier, later in heavy:
        asked_ns = int(problem.asked_ns[later] - problem.asked_ns[earlier])
        program.keep_if_possible(earlier, later, asked_ns, at_ns)
    return program.moments_ns()


class _Program:
    """The linear program of one block: nudges in milliseconds, each as steps of the ladder either way."""

    def __init__(self, problem: Problem, block: Sequence[int]) -> None:
        self._problem = problem
        self._block = list(block)
        self._columns: dict[int, tuple[list[int], list[int]]] = {}
        self._cost: list[float] = []
        self._lower: list[float] = []
        self._upper: list[float] = []
        self._rows: list[Row] = []
        self._lost_cost = LOST_COST * float(problem.worth[self._block].sum())
        for spot in self._block:
            asked_ns = int(problem.asked_ns[spot])
            later = self._steps(spot, (int(problem.latest_ns[spot]) - asked_ns) / NS_PER_MS)
            earlier = self._steps(spot, (asked_ns - int(problem.earliest_ns[spot])) / NS_PER_MS)
            self._columns[spot] = later, earlier
        self._keep_chords()

    def keep_apart(self, earlier: int, later: int, least_ns: int, at_ns: Mapping[int, int]) -> None:
        """One spot sounds at least so long after another."""
        self._rows.append(self._later_by(earlier, later, least_ns, at_ns, ()))

    def keep_if_possible(self, earlier: int, later: int, least_ns: int, at_ns: Mapping[int, int]) -> None:
        """One spot sounds at least so long after another, if that can be."""
        lost = self._column(self._lost_cost, float("inf"))
        self._rows.append(self._later_by(earlier, later, least_ns, at_ns, (lost,)))

    def moments_ns(self) -> dict[int, int]:
        """The moments at the least cost; those asked for where there is no solution."""
        values = least_cost(np.array(self._cost), np.array(self._lower), np.array(self._upper), self._rows)
        moments = {}
        for spot, (later, earlier) in self._columns.items():
            nudge_ms = 0.0 if values is None else float(values[later].sum() - values[earlier].sum())
            moments[spot] = int(self._problem.asked_ns[spot]) + round(nudge_ms * NS_PER_MS)
        return moments

    def _column(self, cost: float, most: float, least: float = 0.0) -> int:
        self._cost.append(cost)
        self._lower.append(least)
        self._upper.append(most)
        return len(self._cost) - 1

    def _steps(self, spot: int, most_ms: float) -> list[int]:
        """One column for every step of the ladder, each as long as the step, as far as the window goes."""
        starts = [start for start, _ in LADDER_MS] + [float("inf")]
        worth = float(self._problem.worth[spot])
        return [
            self._column(cost * worth, max(min(end, most_ms) - start, 0.0))
            for (start, cost), end in zip(LADDER_MS, starts[1:], strict=True)
        ]

    def _keep_chords(self) -> None:
        """What each note of a chord is nudged beside a common nudge costs as well."""
        chords: dict[int, list[int]] = defaultdict(list)
        for spot in self._block:
            chords[int(self._problem.chord[self._problem.pluck[spot]])].append(spot)
        for spots in chords.values():
            if len(spots) > 1:
                common = self._column(0.0, float("inf"), -float("inf"))
                for spot in spots:
                    self._rows += self._beside(spot, common)

    def _beside(self, spot: int, common: int) -> Iterator[Row]:
        later, earlier = self._columns[spot]
        apart = self._column(APART_COST * float(self._problem.worth[spot]), float("inf"))
        columns = [*later, *earlier, common, apart]
        for way in (1.0, -1.0):
            signs = [way] * len(later) + [-way] * len(earlier) + [-way, -1.0]
            yield Row(columns=columns, coefficients=signs, most=0.0)

    def _later_by(self, earlier: int, later: int, least_ns: int, at_ns: Mapping[int, int], slack: Sequence[int]) -> Row:
        columns, signs, apart_ns = list(slack), [1.0] * len(slack), -least_ns
        for spot, sign in ((later, 1.0), (earlier, -1.0)):
            if spot in self._columns:
                ahead, back = self._columns[spot]
                columns += [*ahead, *back]
                signs += [sign] * len(ahead) + [-sign] * len(back)
                apart_ns += int(sign) * int(self._problem.asked_ns[spot])
            else:
                apart_ns += int(sign) * at_ns[spot]
        return Row(columns=columns, coefficients=signs, least=-apart_ns / NS_PER_MS)


def _put_right(problem: Problem, spots: Sequence[int], wished_ns: Mapping[int, int]) -> dict[int, int]:
    """The wished moments, less what rounding broke; those asked for wherever that keeps every rule.

    The earliest moments that are nowhere before the wished ones less a settling keep every rule if
    any do, since the wished ones are never further off than that.
    """
    not_before = {}
    for spot, asked_ns in zip(spots, problem.asked_ns[list(spots)].tolist(), strict=True):
        not_before[spot] = wished_ns[spot] - (_SETTLING_NS if wished_ns[spot] != asked_ns else 0)
    kept = moments_kept(problem, spots, not_before)
    if not isinstance(kept, Moments):
        kept = moments_kept(problem, spots)
    if not isinstance(kept, Moments):
        raise ValueError("the choice has no moments that keep every rule")
    return kept.earliest_ns
