"""The best choice of one part, pluck by pluck in time: a dynamic program.

After each pluck a state holds the moment from which every track is free again; of two states, one
that keeps no more and is free nowhere earlier is dropped. A pluck sounds as early as its window and
its track allow, which leaves the most room for what follows, so the moments need no state of their
own. Extra plucks add to the state whether the pluck they belong to sounds, a cost of ringing teeth
when each track last sounded. Webs, loads and the end of the turn are not looked at.

Exact where `MOST_AT_ONCE` states suffice. How many states there are is what the part's crowding makes them:
one where nothing is in the way, tens on doubled teeth in a run.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from operator import le
from typing import NamedTuple

import numpy as np

from layout.arrange.budget import Budget
from layout.arrange.steps import LONG_AGO, Step, Steps, Way
from layout.mechanics.arrays import IntArray

MOST_AT_ONCE = 40  # states after one pluck; beyond, the integer program is the quicker way
NARROW = 30  # states after one pluck, where a part is too crowded to be followed in all of them
FREE = 0  # free before anything to come; no moment is earlier
_FEW = 12  # states; so many are compared one by one, more as an array


@dataclass(frozen=True, slots=True, kw_only=True)
class Best:
    """The best choice of a part.

    Attributes:
        spots: The spots chosen, in the order of their plucks.
        worth: What they are worth, costs of ringing teeth taken off.
    """

    spots: tuple[int, ...]
    worth: int


class Stuck(NamedTuple):
    """No choice plays all plucks that must sound; seen at this pluck."""

    pluck: int


class TooCrowded(NamedTuple):
    """The part has more than MOST_AT_ONCE states, or more than the budget had left, at this pluck."""

    pluck: int


class Narrow(NamedTuple):
    """What can be said of a part without following all its states.

    Attributes:
        best: A choice, good and not proved; None where none was found that plays what must sound.
        bound: No choice is worth more.
    """

    best: Best | None
    bound: int


_Key = tuple[tuple[int, ...], int, tuple[int, ...]]  # free from, which plucks sound, last sounded
_Chain = tuple["_Chain", int] | None  # the spots chosen, last first
_Kept = tuple[int, _Chain]
_States = dict[_Key, _Kept]


def best_by_time(steps: Steps, plucks: IntArray, budget: Budget) -> Best | Stuck | TooCrowded:
    """The best choice of a part's plucks.

    Args:
        steps: Of the problem.
        plucks: One part, rising; none give a choice of none.
        budget: The states looked at are taken off.
    """
    part = steps.of(plucks)
    best = _best(part, budget)
    if isinstance(best, Best) and _nudges(_ways_of(part, best.spots)):
        asked = _best([step.as_asked() for step in part], budget)
        # As good without a nudge is better.
        return asked if isinstance(asked, Best) and asked.worth == best.worth else best
    return best


def narrow_by_time(steps: Steps, plucks: IntArray) -> Narrow:
    """A good choice of a part's plucks and a bound, in little time whatever the part.

    Args:
        steps: Of the problem.
        plucks: One part, rising.
    """
    part = steps.of(plucks)
    return Narrow(best=_narrowed(part), bound=_relaxed(part))


def _ways_of(part: Sequence[Step], spots: Sequence[int]) -> list[Way]:
    way_of = {way.spot: way for step in part for _, way in step.ways}
    return [way_of[spot] for spot in spots]


def _nudges(ways: Sequence[Way]) -> bool:
    """Whether some of the spots cannot sound at the moments they are asked for, on their own track alone."""
    ended_ns: dict[int, int] = {}
    for way in ways:
        if way.asked_ns < ended_ns.get(way.track, LONG_AGO):
            return True
        ended_ns[way.track] = way.asked_ns + way.least_ns
    return False


def _best(steps: Sequence[Step], budget: Budget) -> Best | Stuck | TooCrowded:
    in_turn = _in_turn(steps)
    if in_turn is not None and in_turn.worth == sum(step.most for step in steps):
        return in_turn
    least = in_turn.worth if in_turn is not None else LONG_AGO
    states = _beginning(steps)
    for step in steps:
        budget.spend_states(len(states) * (len(step.ways) + 1))
        states = _after(states, step)
        states = _unbeaten(_hopeful(states, step, least))
        if not states:
            return Stuck(step.pluck)
        if len(states) > MOST_AT_ONCE or budget.spent:
            return TooCrowded(step.pluck)
    return _heaviest(states)


def _beginning(steps: Sequence[Step]) -> _States:
    tracks = len(steps[0].floor_ns) if steps else 0
    rings = any(way.ringing_cost for step in steps for _, way in step.ways)
    return {((FREE,) * tracks, 0, (LONG_AGO,) * tracks if rings else ()): (0, None)}


def _hopeful(states: _States, step: Step, least: int) -> _States:
    """The states that may still keep as much as a choice that is known."""
    return {key: kept for key, kept in states.items() if kept[0] + step.rest >= least}


def _heaviest(states: _States) -> Best:
    worth, chain = max(states.values(), key=lambda kept: kept[0])
    return Best(spots=_listed(chain), worth=worth)


def _narrowed(steps: Sequence[Step]) -> Best | None:
    """A choice found with the NARROW best states of every pluck only; None where that plays not all that must sound."""
    states = _beginning(steps)
    for step in steps:
        states = _after(states, step)
        if len(states) > NARROW:
            states = dict(sorted(_unbeaten(states).items(), key=lambda item: (-item[1][0], item[0]))[:NARROW])
        if not states:
            return None
    return _heaviest(states)


def _relaxed(steps: Sequence[Step]) -> int:
    """What no choice is worth more than: all but the NARROW best states become one that has the best of each.

    Such a state is as free on every track as the freest, and keeps as much as the heaviest of those
    it stands for (D. Bergman, A. Cire, W.-J. van Hoeve and J. Hooker, Decision Diagrams for
    Optimization, 2016, from memory: a relaxed diagram).
    """
    states = _beginning(steps)
    for step in steps:
        states = _after(states, step)
        if len(states) > NARROW:
            ranked = sorted(_unbeaten(states).items(), key=lambda item: (-item[1][0], item[0]))
            states = dict(ranked[:NARROW])
            if ranked[NARROW:]:
                key, worth = _best_of_each([key for key, _ in ranked[NARROW:]]), ranked[NARROW][1][0]
                states[key] = max(states.get(key, (worth, None)), (worth, None), key=lambda kept: kept[0])
    return max((worth for worth, _ in states.values()), default=0)


def _best_of_each(keys: Sequence[_Key]) -> _Key:
    sounding = 0
    for key in keys:
        sounding |= key[1]
    free_ns = tuple(map(min, *(key[0] for key in keys))) if len(keys) > 1 else keys[0][0]
    sounded_ns = tuple(map(min, *(key[2] for key in keys))) if len(keys) > 1 else keys[0][2]
    return free_ns, sounding, sounded_ns


def _in_turn(steps: Sequence[Step]) -> Best | None:
    """A choice made at once: every pluck on the best of its tracks with room, of equal ones the most rested.

    None where it leaves out a pluck that must sound.
    """
    tracks = len(steps[0].floor_ns) if steps else 0
    free_ns, sounded_ns, sounding, spots, worth = [FREE] * tracks, [LONG_AGO] * tracks, 0, [], 0
    for step in steps:
        best: tuple[int, int] | None = None
        chosen: tuple[int, Way] | None = None
        for place, way in step.ways:
            if step.needs & ~sounding or free_ns[place] > way.latest_ns:
                continue
            rings = way.asked_ns - sounded_ns[place] < way.ringing_ns
            rank = (way.worth - way.ringing_cost * rings, -free_ns[place])
            if best is None or rank > best:
                best, chosen = rank, (place, way)
        if chosen is None or best is None:
            if step.must_sound:
                return None
            continue
        place, way = chosen
        free_ns[place] = max(way.earliest_ns, free_ns[place]) + way.least_ns
        sounded_ns[place] = way.asked_ns
        sounding |= step.gives
        spots.append(way.spot)
        worth += best[0]
    return Best(spots=tuple(spots), worth=worth)


def _after(states: _States, step: Step) -> _States:
    """The states after one more pluck, from all before it."""
    found: _States = {}
    for (free_ns, sounding, sounded_ns), (worth, chain) in states.items():
        options: list[tuple[_Key, _Kept]] = []
        if not step.must_sound:
            options.append((_seen_from(step, free_ns, sounding, sounded_ns), (worth, chain)))
        for place, way in step.ways:
            at_ns = max(way.earliest_ns, free_ns[place])
            if at_ns > way.latest_ns or step.needs & ~sounding:
                continue
            free = _with(free_ns, place, at_ns + way.least_ns)
            cost = 0
            sounded = sounded_ns
            if sounded_ns:
                cost = way.ringing_cost if way.asked_ns - sounded_ns[place] < way.ringing_ns else 0
                sounded = _with(sounded_ns, place, way.asked_ns)
            options.append(
                (_seen_from(step, free, sounding | step.gives, sounded), (worth + way.worth - cost, (chain, way.spot)))
            )
        for key, kept in options:
            if key not in found or found[key][0] < kept[0]:
                found[key] = kept
    return found


def _with(values: tuple[int, ...], place: int, value: int) -> tuple[int, ...]:
    return (*values[:place], value, *values[place + 1 :])


def _seen_from(step: Step, free_ns: tuple[int, ...], sounding: int, sounded_ns: tuple[int, ...]) -> _Key:
    """The state as far as it still matters: what is free or quiet in time is all the same."""
    free = tuple([FREE if at <= floor else at for at, floor in zip(free_ns, step.floor_ns, strict=True)])
    sounded = tuple([LONG_AGO if at <= quiet else at for at, quiet in zip(sounded_ns, step.quiet_ns, strict=False)])
    return free, sounding & step.later, sounded


def _unbeaten(states: _States) -> _States:
    """The states of which no other keeps as much and is as free, as quiet and as well provided."""
    if len(states) <= 1:
        return states
    ranked = sorted(states.items(), key=lambda item: (-item[1][0], item[0]))
    if len(ranked) > _FEW:
        return _unbeaten_of_many(ranked)
    kept: _States = {}
    for key, value in ranked:
        free_ns, sounding, sounded_ns = key
        beaten = any(
            not sounding & ~other[1] and all(map(le, other[0], free_ns)) and all(map(le, other[2], sounded_ns))
            for other in kept
        )
        if not beaten:
            kept[key] = value
    return kept


def _unbeaten_of_many(ranked: Sequence[tuple[_Key, _Kept]]) -> _States:
    """The same for many states, heaviest first, all held against all before them at once.

    One that is beaten by a beaten one is beaten by what beats that as well.
    """
    rows = np.array([(*key[0], *key[2]) for key, _ in ranked], dtype=np.int64)
    beats = np.tri(len(ranked), k=-1, dtype=np.bool_)  # by row: those before it
    for column in rows.T:
        beats &= column[None, :] <= column[:, None]
    if any(key[1] for key, _ in ranked):
        bits = [key[1] for key, _ in ranked]
        beats &= np.array([[not one & ~other for other in bits] for one in bits], dtype=np.bool_)
    unbeaten = np.flatnonzero(~beats.any(axis=1)).tolist()
    return dict(ranked[place] for place in unbeaten)


def _listed(chain: _Chain) -> tuple[int, ...]:
    spots = []
    while chain is not None:
        chain, spot = chain
        spots.append(spot)
    return tuple(reversed(spots))
