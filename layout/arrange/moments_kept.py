"""Whether chosen spots have moments that keep every rule of time, and where they do not.

Every rule is "x of one spot at least so long after x of another": on a track, round the end of the
turn, and between two tracks on either side of a forbidden stretch. The earliest moments are the
longest paths from the windows' beginnings; a path that ends past a window's end is what is wrong.
"""

from collections import defaultdict, deque
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from layout.arrange.problem import Problem
from layout.mechanics.arrays import BoolArray, IntArray, begins_run, counted_out

_MOST_ROUNDS = 30  # of all pushes at once; what goes on for longer is pushed one by one


@dataclass(frozen=True, slots=True, kw_only=True)
class Moments:
    """The earliest moments at which the spots may sound, in their order."""

    earliest_ns: dict[int, int]


@dataclass(frozen=True, slots=True, kw_only=True)
class Overrun:
    """Spots that push each other past a window's end: they cannot all be chosen.

    Attributes:
        spots: In the order in which they push.
        on_one_track: Whether all pushing is on one track, the end of the turn included or not.
        wraps: Whether the end of the turn has part in it.
    """

    spots: tuple[int, ...]
    on_one_track: bool
    wraps: bool


class Push(NamedTuple):
    """x of `later` is at least `least_ns` after x of `earlier`; negative for "at most so long before"."""

    earlier: int
    later: int
    least_ns: int
    wraps: bool = False


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pushes:
    """Every rule of time between some spots, as `Push` has it, in columns: on their tracks first.

    Attributes:
        earlier: Shape (n,).
        later: Shape (n,).
        least_ns: Shape (n,).
        wraps: Shape (n,).
    """

    earlier: IntArray
    later: IntArray
    least_ns: IntArray
    wraps: BoolArray

    @property
    def is_of_two(self) -> BoolArray:
        """Which are between two spots: one alone on its track pushes itself, once a turn; no nudging changes that."""
        return np.asarray(self.earlier != self.later)

    def of(self, chosen: BoolArray) -> "Pushes":
        """Those chosen, in their order."""
        return Pushes(
            earlier=self.earlier[chosen],
            later=self.later[chosen],
            least_ns=self.least_ns[chosen],
            wraps=self.wraps[chosen],
        )

    def spare_ns(self, at_ns: IntArray) -> IntArray:
        """By how much each is kept at these moments, given by spot; below 0 where it is not."""
        return np.asarray(at_ns[self.later] - at_ns[self.earlier] - self.least_ns)

    def listed(self) -> list[Push]:
        """The same one by one."""
        columns = (self.earlier.tolist(), self.later.tolist(), self.least_ns.tolist(), self.wraps.tolist())
        return list(map(Push, *columns))


def pushes_of(problem: Problem, spots: Sequence[int]) -> Pushes:
    """Every rule of time between chosen spots, no two of one pluck."""
    chosen = np.sort(np.array(spots, dtype=np.int64))  # spots stand by pluck
    chosen = chosen[np.argsort(problem.track[chosen], kind="stable")]
    track = problem.track[chosen]
    begins = begins_run(track)
    ends = np.append(begins[1:], begins[:1])  # the last ends as the first begins, where there are any
    first, last, before, after = chosen[begins], chosen[ends], chosen[~ends], chosen[~begins]
    inner, outer, beside_ns = _beside(problem, chosen)
    return Pushes(
        earlier=np.concatenate([before, last, inner]),
        later=np.concatenate([after, first, outer]),
        least_ns=np.concatenate([problem.least_ns[before], problem.least_ns[last] - problem.turn_ns, beside_ns]),
        wraps=np.repeat([False, True, False], [len(before), len(last), len(inner)]),
    )


def kept_as_asked(problem: Problem, spots: Sequence[int]) -> bool:
    """Whether every rule of time is kept at the moments asked for, so that chosen spots need not be nudged."""
    return bool((pushes_of(problem, spots).spare_ns(problem.asked_ns) >= 0).all())


def moments_kept(
    problem: Problem, spots: Sequence[int], not_before_ns: Mapping[int, int] | None = None
) -> Moments | Overrun:
    """The earliest moments of chosen spots, or what forbids them together.

    Args:
        problem: The rules.
        spots: No two of one pluck, no two asked within a forbidden stretch.
        not_before_ns: Before this a spot is not to sound, whatever its window; none where not given.
    """
    chosen, at_ns = list(spots), problem.earliest_ns.copy()
    if not_before_ns is not None:
        at_ns[chosen] = np.maximum(at_ns[chosen], [not_before_ns[spot] for spot in chosen])
    pushes = pushes_of(problem, chosen)
    pushed_ns = _pushed_at_once(problem, pushes, at_ns)
    if pushed_ns is None:
        return _pushed_one_by_one(problem, pushes, dict(zip(chosen, at_ns[chosen].tolist(), strict=True)))
    return Moments(earliest_ns=dict(zip(chosen, pushed_ns[chosen].tolist(), strict=True)))


def _pushed_at_once(problem: Problem, pushes: Pushes, at_ns: IntArray) -> IntArray | None:
    """The earliest moments by spot, every push looked at in every round; None where that is not the quick way.

    That is where something is pushed past its window, and where pushes go on from spot to spot for long.
    """
    at_ns = at_ns.copy()
    for _ in range(_MOST_ROUNDS):
        late = pushes.spare_ns(at_ns) < 0
        if not late.any():
            return at_ns
        later = pushes.later[late]
        np.maximum.at(at_ns, later, at_ns[pushes.earlier[late]] + pushes.least_ns[late])
        if (at_ns[later] > problem.latest_ns[later]).any():
            return None
    return None


def _pushed_one_by_one(problem: Problem, pushes: Pushes, at_ns: dict[int, int]) -> Moments | Overrun:
    """The same from the moments before anything is pushed, and what is pushed past its window if anything is."""
    after: dict[int, list[Push]] = defaultdict(list)
    for push in pushes.listed():
        after[push.earlier].append(push)
    pushed_by: dict[int, Push] = {}
    waiting = deque(at_ns)
    queued = set(at_ns)
    while waiting:
        spot = waiting.popleft()
        queued.discard(spot)
        for push in after[spot]:
            least_ns = at_ns[spot] + push.least_ns
            if least_ns <= at_ns[push.later]:
                continue
            at_ns[push.later] = least_ns
            pushed_by[push.later] = push
            if least_ns > problem.latest_ns[push.later]:
                return _overrun(problem, push.later, pushed_by)
            if push.later not in queued:
                waiting.append(push.later)
                queued.add(push.later)
    return Moments(earliest_ns=at_ns)


def overruns(problem: Problem, spots: Sequence[int]) -> list[Overrun]:
    """What forbids chosen spots together, on every track that has something wrong, and more than once where it has.

    Found one after the other, each time without the last spot of what was found before. Empty where
    all rules of time are kept.
    """
    found = []
    for together in _companies(problem, spots):
        left = list(together)
        while isinstance(kept := moments_kept(problem, left), Overrun):
            found.append(kept)
            left.remove(kept.spots[-1])
    return found


def _companies(problem: Problem, spots: Sequence[int]) -> list[list[int]]:
    """Spots by track; those of tracks beside each other, directly or through others, together."""
    members: dict[tuple[int, ...], list[int]] = defaultdict(list)
    for spot in spots:
        members[problem.company[int(problem.track[spot])]].append(spot)
    return list(members.values())


def _overrun(problem: Problem, last: int, pushed_by: dict[int, Push]) -> Overrun:
    """The path that ends at a spot too late, or the ring of pushes it runs into."""
    path, pushes = [last], []
    while path[-1] in pushed_by:
        push = pushed_by[path[-1]]
        pushes.append(push)
        if push.earlier in path:
            round_from = path.index(push.earlier)
            path, pushes = path[round_from:], pushes[round_from:]
            break
        path.append(push.earlier)
    return Overrun(
        spots=tuple(reversed(path)),
        on_one_track=len({int(problem.track[spot]) for spot in path}) == 1,
        wraps=any(push.wraps for push in pushes),
    )


def _beside(problem: Problem, chosen: IntArray) -> tuple[IntArray, IntArray, IntArray]:
    """Spots of two tracks near enough to a forbidden stretch to be nudged into it stay on their side of it.

    Given as which pushes, which is pushed, and by how much; `chosen` stands by track and pluck.
    """
    nothing = np.zeros(0, dtype=np.int64)
    earlier, later, least_ns = [nothing], [nothing], [nothing]
    for pair in problem.besides:
        inners, outers = (
            chosen[slice(*np.searchsorted(problem.track[chosen], (index, index + 1)))]
            for index in (pair.inner_index, pair.outer_index)
        )
        if not len(inners) or not len(outers):
            continue
        outers = outers[np.argsort(problem.asked_ns[outers], kind="stable")]
        outer_ns = problem.asked_ns[outers]
        reach_ns = problem.reach_ns[inners].max() + problem.reach_ns[outers].max()
        for turn_ns in (-problem.turn_ns, 0, problem.turn_ns):
            inner_ns = problem.asked_ns[inners] - turn_ns
            low = np.searchsorted(outer_ns, inner_ns + pair.from_ns - reach_ns)
            high = np.searchsorted(outer_ns, inner_ns + pair.to_ns + reach_ns, side="right")
            run, place = counted_out(low, high - low)
            # x_outer + turn - x_inner <= from, or at least to
            is_before = outer_ns[place] - inner_ns[run] <= pair.from_ns
            earlier.append(np.where(is_before, outers[place], inners[run]))
            later.append(np.where(is_before, inners[run], outers[place]))
            least_ns.append(np.where(is_before, turn_ns - pair.from_ns, pair.to_ns - turn_ns))
    return np.concatenate(earlier), np.concatenate(later), np.concatenate(least_ns)
