"""Whether chosen spots have moments that keep every rule of time, and where they do not.

Every rule is "x of one spot at least so long after x of another": on a track, round the end of the
turn, and between two tracks on either side of a forbidden stretch. The earliest moments are the
longest paths from the windows' beginnings; a path that ends past a window's end is what is wrong.
"""

from collections import defaultdict, deque
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from layout.arrange.problem import Problem


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


@dataclass(frozen=True, slots=True, kw_only=True)
class Push:
    """x of `later` is at least `least_ns` after x of `earlier`; negative for "at most so long before"."""

    earlier: int
    later: int
    least_ns: int
    wraps: bool = False


def pushes_of(problem: Problem, spots: Sequence[int]) -> list[Push]:
    """Every rule of time between chosen spots, no two of one pluck."""
    on_track: dict[int, list[int]] = defaultdict(list)
    for spot, track_index in zip(spots, problem.track[list(spots)].tolist(), strict=True):
        on_track[track_index].append(spot)
    least_ns = problem.least_ns.tolist()
    pushes = []
    for track in on_track.values():
        track.sort()  # spots stand by pluck
        pushes += [Push(earlier=one, later=two, least_ns=least_ns[one]) for one, two in pairwise(track)]
        round_ns = least_ns[track[-1]] - problem.turn_ns
        pushes.append(Push(earlier=track[-1], later=track[0], least_ns=round_ns, wraps=True))
    pushes += _beside(problem, on_track)
    return pushes


def moments_kept(
    problem: Problem, spots: Sequence[int], not_before_ns: Mapping[int, int] | None = None
) -> Moments | Overrun:
    """The earliest moments of chosen spots, or what forbids them together.

    Args:
        problem: The rules.
        spots: No two of one pluck, no two asked within a forbidden stretch.
        not_before_ns: Before this a spot is not to sound, whatever its window; none where not given.
    """
    after: dict[int, list[Push]] = defaultdict(list)
    for push in pushes_of(problem, spots):
        after[push.earlier].append(push)
    at_ns = dict(zip(spots, problem.earliest_ns[list(spots)].tolist(), strict=True))
    if not_before_ns is not None:
        at_ns = {spot: max(earliest_ns, not_before_ns[spot]) for spot, earliest_ns in at_ns.items()}
    pushed_by: dict[int, Push] = {}
    waiting = deque(spots)
    queued = set(spots)
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


def _beside(problem: Problem, on_track: dict[int, list[int]]) -> Iterator[Push]:
    """Spots of two tracks near enough to a forbidden stretch to be nudged into it stay on their side of it."""
    for pair in problem.besides:
        inners, outers = on_track.get(pair.inner_index), on_track.get(pair.outer_index)
        if not inners or not outers:
            continue
        outers = sorted(outers, key=lambda spot: int(problem.asked_ns[spot]))
        outer_ns = problem.asked_ns[outers]
        reach_ns = int(problem.reach_ns[inners].max() + problem.reach_ns[outers].max())
        for turn_ns in (-problem.turn_ns, 0, problem.turn_ns):
            inner_ns = problem.asked_ns[inners] - turn_ns
            low = np.searchsorted(outer_ns, inner_ns + pair.from_ns - reach_ns)
            high = np.searchsorted(outer_ns, inner_ns + pair.to_ns + reach_ns, side="right")
            for inner, at_ns, first, last in zip(inners, inner_ns.tolist(), low.tolist(), high.tolist(), strict=True):
                for place in range(first, last):
                    if int(outer_ns[place]) - at_ns <= pair.from_ns:
                        # x_outer + turn - x_inner <= from
                        yield Push(earlier=outers[place], later=inner, least_ns=turn_ns - pair.from_ns)
                    else:
                        yield Push(earlier=inner, later=outers[place], least_ns=pair.to_ns - turn_ns)
