"""Chords too heavy for the drive may be spread: every note of one at its own moment, the lowest first."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from layout.arrange.broken import broken_by
from layout.arrange.loads import heavy_moments
from layout.arrange.problem import NO_PLUCK, NS_PER_MS, Problem
from layout.mechanics.arrays import BoolArray, IntArray, frozen_ints

# How far either way of its moment a chord may be spread, as far as the nudge goes. Teeth load the disc for 20 to
# 100 ms, so less than 10 ms relieves nothing; 50 ms is the most a nudge may be. The steps are our own.
SPREAD_STEPS_MS = (10, 20, 30, 50)


def with_spread_chords(problem: Problem) -> Problem:
    """The same problem with spots more for the chords that could load the disc too much.

    Such a chord has, for every step the nudge allows, one more spot for each of its spots, whose
    moment is that of its note in the chord spread by so much either way.

    Args:
        problem: Without a drive, or with something spread already, it is given back as it is.
    """
    largest_nudge_ns = int(problem.reach_ns.max(initial=0))
    steps_ns = [step * NS_PER_MS for step in SPREAD_STEPS_MS if step * NS_PER_MS <= largest_nudge_ns]
    if problem.drive is None or problem.spread.any() or not steps_ns:
        return problem
    heavy = {
        int(problem.chord[problem.pluck[spot]]) for spots, _ in heavy_moments(problem, _all(problem)) for spot in spots
    }
    sizes = np.bincount(problem.chord, minlength=1)
    chords = [chord for chord in sorted(heavy) if sizes[chord] > 1]
    if not chords:
        return problem
    added = np.flatnonzero(np.isin(problem.chord[problem.pluck], chords))
    return _with_spots(problem, added, steps_ns)


def narrowed(problem: Problem, spots: Sequence[int]) -> tuple[int, ...]:
    """The same choice with every spread chord spread no wider than it must be.

    Args:
        problem: The rules.
        spots: A choice that keeps every rule, by pluck.
    """
    chosen = np.array(spots, dtype=np.int64)
    chord = problem.chord[problem.pluck[chosen]]  # stays, whatever spots the plucks have
    for one in np.unique(chord[problem.spread[chosen] > 0]).tolist():
        mine = chord == one
        for spread in range(int(problem.spread[chosen[mine][0]])):
            tried = _spread_by(problem, chosen, mine, spread)
            if tried is not None and not broken_by(problem, _near(problem, tried, mine)):
                chosen = tried
                break
    return tuple(chosen.tolist())


def _spread_by(problem: Problem, chosen: IntArray, mine: BoolArray, spread: int) -> IntArray | None:
    """A choice with some of its plucks on the same tracks, spread by this; None where one of them has no such spot."""
    same = [_same_spot(problem, spot, spread) for spot in chosen[mine].tolist()]
    found = [spot for spot in same if spot is not None]
    if len(found) < len(same):
        return None
    tried = chosen.copy()
    tried[mine] = found
    return tried


def _same_spot(problem: Problem, spot: int, spread: int) -> int | None:
    """The spot of the same pluck on the same track at the same worth with another spread."""
    pluck = int(problem.pluck[spot])
    for one in range(int(problem.first_spot[pluck]), int(problem.first_spot[pluck + 1])):
        if problem.spread[one] == spread and problem.track[one] == problem.track[spot]:
            return one
    return None


def _near(problem: Problem, chosen: IntArray, mine: BoolArray) -> list[int]:
    """The chosen spots that a chord may disturb: on its tracks and those beside them, and those lifted with it."""
    is_its = np.zeros(len(problem.company), dtype=np.bool_)
    for track in problem.track[chosen[mine]].tolist():
        is_its[list(problem.company[track])] = True
    widest_ns = problem.drive.widest_ns if problem.drive is not None else 0
    reach_ns = 2 * widest_ns + problem.widest_ns
    asked_ns = problem.asked_ns[chosen]
    apart_ns = np.abs(asked_ns - asked_ns[mine][0])
    is_near = is_its[problem.track[chosen]] | (np.minimum(apart_ns, problem.turn_ns - apart_ns) <= reach_ns)
    near: list[int] = chosen[is_near].tolist()
    return near


def spread_ns(rank: IntArray, count: IntArray, step_ns: int) -> IntArray:
    """From a chord's moment to that of its notes, evenly spread from step before to step after, lowest first."""
    return np.asarray(-step_ns + 2 * step_ns * rank // np.maximum(count - 1, 1), dtype=np.int64)


def ranks_in_chords(chord: IntArray) -> tuple[IntArray, IntArray]:
    """Of plucks in the order (moment, pitch): the place of each in its chord from the lowest, and the chord's size."""
    starts = np.searchsorted(chord, chord)
    ends = np.searchsorted(chord, chord, side="right")
    return np.arange(len(chord)) - starts, ends - starts


def _all(problem: Problem) -> IntArray:
    return np.arange(problem.spot_count)


def _with_spots(problem: Problem, added: IntArray, steps_ns: list[int]) -> Problem:
    own = np.flatnonzero(problem.parent == NO_PLUCK)  # an extra pluck stands where the pluck it belongs to does
    rank, count = np.zeros_like(problem.chord), np.zeros_like(problem.chord)
    rank[own], count[own] = ranks_in_chords(problem.chord[own])
    extra = np.flatnonzero(problem.parent != NO_PLUCK)
    with_own = extra[problem.chord[extra] == problem.chord[problem.parent[extra]]]
    rank[with_own], count[with_own] = rank[problem.parent[with_own]], count[problem.parent[with_own]]
    moments = [problem.asked_ns]
    for step_ns in steps_ns:
        pluck = problem.pluck[added]
        wished_ns = problem.asked_ns[added] + spread_ns(rank[pluck], count[pluck], step_ns)
        moments.append(np.clip(wished_ns, problem.earliest_ns[added], problem.latest_ns[added]))
    from_spot = np.concatenate([_all(problem), *[added] * len(steps_ns)])
    spread = np.repeat(np.arange(len(steps_ns) + 1), [problem.spot_count, *[len(added)] * len(steps_ns)])
    asked_ns = np.concatenate(moments)
    order = np.lexsort((from_spot, spread, problem.pluck[from_spot]))
    from_spot, spread, asked_ns = from_spot[order], spread[order], asked_ns[order]
    pluck = problem.pluck[from_spot]
    stays = spread == 0
    return replace(
        problem,
        first_spot=frozen_ints(np.searchsorted(pluck, np.arange(problem.pluck_count + 1))),
        pluck=frozen_ints(pluck),
        track=frozen_ints(problem.track[from_spot]),
        worth=frozen_ints(problem.worth[from_spot]),
        asked_ns=frozen_ints(asked_ns),
        earliest_ns=frozen_ints(np.where(stays, problem.earliest_ns[from_spot], asked_ns)),
        latest_ns=frozen_ints(np.where(stays, problem.latest_ns[from_spot], asked_ns)),
        least_ns=frozen_ints(problem.least_ns[from_spot]),
        spread=frozen_ints(spread),
        ringing_cost=frozen_ints(problem.ringing_cost[from_spot]),
    )
